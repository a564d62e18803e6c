import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { type Browser, chromium, type Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { renderReport } from '../../src/report/render.js';
import { hostile, sampleAppraisal, sampleAudit, sampleFollowup, sampleRun } from './sample.js';

const chromiumPath = '/usr/bin/chromium';
const there = existsSync(chromiumPath);
if (!there) console.log(`skipped: report page in a browser (no ${chromiumPath})`);

const runHtml = renderReport(sampleRun());
const appraisalHtml = renderReport(sampleAppraisal());

interface AxeResult {
  readonly violations: readonly {
    readonly id: string;
    readonly impact: string;
    readonly nodes: readonly { readonly html: string }[];
  }[];
}

describe.skipIf(!there)('report page in a browser', () => {
  let browser: Browser;
  const folder = mkdtempSync(join(tmpdir(), 'report-'));
  const faults: string[] = [];

  const open = async (name: string, html: string, width = 1280, dark = false): Promise<Page> => {
    const path = join(folder, `${name}.html`);
    writeFileSync(path, html);
    const page = await browser.newPage({ viewport: { width, height: 900 }, colorScheme: dark ? 'dark' : 'light' });
    page.on('console', (message) => {
      if (message.type() === 'error' || message.type() === 'warning') faults.push(message.text());
    });
    page.on('pageerror', (error) => faults.push(error.message));
    page.on('dialog', (dialog) => {
      faults.push('a dialog opened');
      void dialog.dismiss();
    });
    page.on('request', (request) => {
      if (!/^(data|blob):/.test(request.url()) && request.url() !== pathToFileURL(path).href)
        faults.push(request.url());
    });
    await page.goto(pathToFileURL(path).href);
    return page;
  };

  beforeAll(async () => {
    browser = await chromium.launch({
      executablePath: chromiumPath,
      args: ['--no-sandbox', '--disable-gpu', '--disable-background-networking'],
    });
  });
  afterAll(async () => {
    await browser?.close();
    rmSync(folder, { recursive: true, force: true });
  });

  it('shows every figure with marks, without errors and without a request', async () => {
    for (const [name, html, charts, pictures] of [
      ['run', runHtml, 4, 4],
      ['appraisal', appraisalHtml, 3, 3],
      ['audit', renderReport(sampleAudit()), 4, 2],
      ['followup', renderReport(sampleFollowup()), 11, 0],
    ] as const) {
      faults.length = 0;
      const page = await open(name, html);
      expect(await page.locator('figure .plot.chart svg').count()).toBe(charts);
      expect(await page.locator('figure .plot.picture svg').count()).toBe(pictures);
      // Non-empty marks: at least one drawn curve with an extent in every chart, a decoded image in every picture.
      const extents = await page.evaluate(`[...document.querySelectorAll('figure .plot.chart svg')].map((svg) =>
        Math.max(...[...svg.querySelectorAll('path[stroke^="var(--one"]')].map((p) => p.getBBox().width)))`);
      for (const extent of extents as number[]) expect(extent).toBeGreaterThan(60);
      const images = (await page.evaluate(`Promise.all([...document.querySelectorAll('.plot image')].map(async (i) => {
        const image = new Image(); image.src = i.getAttribute('href'); await image.decode(); return image.naturalWidth; }))`)) as number[];
      expect(images.length).toBe(pictures);
      for (const width of images) expect(width).toBeGreaterThan(100);
      expect(faults).toEqual([]);
      await page.close();
    }
  });

  it('reads values under the pointer and by the arrow keys', async () => {
    faults.length = 0;
    const page = await open('hover', runHtml);
    const spectrum = page.locator('figure', { has: page.locator('h3', { hasText: 'Energy spectrum' }) });
    await spectrum.locator('svg').last().hover();
    await expect
      .poll(() => spectrum.locator('.reading').textContent())
      .toMatch(/wave number, rad\/m: [\d.]+\nmeasured: [\d.e-]+\nmodel: /);
    expect(await spectrum.locator('circle.dot').count()).toBeGreaterThan(1);
    const picture = page.locator('figure', { has: page.locator('h3', { hasText: 'VelocityX, transferred mean' }) });
    await picture.locator('svg').scrollIntoViewIfNeeded();
    const box = (await picture.locator('svg').boundingBox())!;
    // 15 % along the drawing lies upstream of the wake: 10 m/s.
    await page.mouse.move(box.x + 0.15 * box.width, box.y + 0.4 * box.height);
    await expect
      .poll(() => picture.locator('.reading').textContent())
      .toMatch(/^x 0\.\d+ m, y 0\.\d+ m\nVelocityX: 10 m\/s$/);
    await page.mouse.move(5, 5);
    await expect.poll(() => picture.locator('.reading').isHidden()).toBe(true);
    await spectrum.locator('.plot').focus();
    const waves: number[] = [];
    for (let i = 0; i < 2; i++) {
      await page.keyboard.press('ArrowRight');
      const text = (await spectrum.locator('.reading').textContent()) as string;
      waves.push(Number(/wave number, rad\/m: ([\d.]+)/.exec(text)?.[1]));
    }
    // The samples stand 8 % apart.
    expect(waves[1]! / waves[0]!).toBeCloseTo(1.08, 3);
    await page.keyboard.press('Escape');
    expect(await spectrum.locator('.reading').isHidden()).toBe(true);
    expect(faults).toEqual([]);
    await page.close();
  });

  it('downloads figures and tables as CSV', async () => {
    faults.length = 0;
    const page = await open('download', renderReport(sampleRun('run', '=1+1')));
    const save = async (title: string): Promise<string> => {
      const [download] = await Promise.all([
        page.waitForEvent('download'),
        page.getByRole('button', { name: `Download ${title} as CSV` }).click(),
      ]);
      expect(download.suggestedFilename()).toMatch(/^[a-z0-9-]+\.csv$/);
      return readFileSync(await download.path(), 'utf8');
    };
    const spectrum = (await save('Energy spectrum')).trim().split('\n');
    expect(spectrum[0]).toBe('series,"wave number, rad/m","energy density, m\u00b3/s\u00b2"');
    expect(spectrum.length).toBe(1 + 60 + 60 + 2);
    expect(spectrum[1]).toMatch(/^measured,5,0\.0\d+$/);
    const picture = (await save('=1+1, transferred mean')).trim().split('\n');
    expect(picture[0]).toBe("x (m),y (m),'=1+1 (m/s)");
    expect(picture.length).toBe(1 + 480 * 120);
    expect(picture[1]).toMatch(/^0\.004\d*,0\.99\d*,(9\.99\d*|10)$/);
    const table = (await save('Scaled divergence')).trim().split('\n');
    expect(table).toEqual([
      'field,rms,99th percentile,largest',
      'before control,0.081,0.22,0.9',
      'after control,0.00024,0.0007,0.004',
    ]);
    expect(faults).toEqual([]);
    await page.close();
  });

  it('shows hostile strings as text', async () => {
    faults.length = 0;
    for (const [name, html] of [
      ['hostile-run', renderReport(sampleRun(hostile, hostile))],
      ['hostile-appraisal', renderReport(sampleAppraisal(hostile, hostile))],
    ] as const) {
      const page = await open(name, html);
      expect(await page.locator('h1').textContent()).toBe(hostile);
      expect(await page.locator('img').count()).toBe(0);
      expect(await page.locator('script:not([type="application/json"])').count()).toBe(1);
      expect(await page.title()).toContain(hostile);
      await page.locator('figure svg').first().hover();
      await page.close();
    }
    expect(faults).toEqual([]);
  });

  it.each([
    ['run', 'light', 1280],
    ['appraisal', 'dark', 1280],
    ['appraisal', 'light', 390],
    ['run', 'dark', 390],
  ] as const)(
    'has no serious accessibility fault (%s, %s, %d px) and does not overflow',
    async (kind, theme, width) => {
      const source = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');
      const html = kind === 'run' ? runHtml : appraisalHtml;
      const page = await open(`axe-${kind}-${theme}-${width}`, html, width, theme === 'dark');
      await page.evaluate(source);
      const result = (await page.evaluate(`axe.run(document, { resultTypes: ['violations'] })`)) as AxeResult;
      const serious = result.violations.filter((v) => v.impact === 'serious' || v.impact === 'critical');
      expect(serious.map((v) => `${v.id}: ${v.nodes[0]?.html}`)).toEqual([]);
      expect(await page.evaluate('document.documentElement.scrollWidth - innerWidth')).toBeLessThanOrEqual(0);
      await page.close();
    },
  );
});

describe('report page', () => {
  it('states the caution once and every assumption', () => {
    const html = runHtml;
    expect(html.split('A start is not a validated result').length).toBe(2);
    expect(html).toContain('Length from k and epsilon; L11 = 0.39 L because nu is not known.');
    expect(html).toContain('epsilon was missing in 12 cells.');
  });

  it('holds no address of a network', () => {
    for (const page of [runHtml, appraisalHtml]) {
      const addresses = [...page.matchAll(/https?:\/\/[^\s"'<)]+/g)].map((m) => m[0]);
      // Names of XML vocabularies are not fetched.
      expect(addresses.filter((a) => !a.startsWith('http://www.w3.org/'))).toEqual([]);
    }
  });
});
