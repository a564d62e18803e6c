import { inflateSync } from 'node:zlib';
import { decode } from 'fast-png';
import { describe, expect, it } from 'vitest';
import { drawChart, thin } from '../../src/report/chart.js';
import { embedJson, escapeHtml, prettyUnits } from '../../src/report/escape.js';
import { figure, type PictureBlock, type ReportPage } from '../../src/report/page.js';
import { divergingRamp, oklabLightness, roles, sequentialRamp, themeVariables } from '../../src/report/palette.js';
import { contourPath, drawPicture } from '../../src/report/picture.js';
import { summaryTables } from '../../src/report/terminal.js';
import { linearTicks, logTicks } from '../../src/report/ticks.js';

/** Contrast ratio of two colours (WCAG 2.1, relative luminance). */
function contrast(one: string, two: string): number {
  const luminance = (hex: string): number => {
    const [r, g, b] = [1, 3, 5].map((i) => {
      const x = Number.parseInt(hex.slice(i, i + 2), 16) / 255;
      return x <= 0.04045 ? x / 12.92 : ((x + 0.055) / 1.055) ** 2.4;
    }) as [number, number, number];
    return 0.2126 * r + 0.7152 * g + 0.0722 * b;
  };
  const [a, b] = [luminance(one), luminance(two)].sort((x, y) => y - x) as [number, number];
  return (a + 0.05) / (b + 0.05);
}

describe('colours', () => {
  it('rise in equal steps of perceived lightness', () => {
    const lightness = sequentialRamp().map(oklabLightness);
    for (let i = 1; i < lightness.length; i++) expect(lightness[i]! - lightness[i - 1]!).toBeGreaterThan(-2e-3);
    expect(lightness[0]).toBeCloseTo(0.23, 1);
    expect(lightness[254]).toBeCloseTo(0.96, 1);
    expect(lightness[127]).toBeCloseTo(0.595, 1);
    const two = divergingRamp().map(oklabLightness);
    for (let i = 0; i < 127; i++) expect(Math.abs(two[i]! - two[254 - i]!)).toBeLessThan(0.02);
  });

  it.each(['light', 'dark'] as const)('are readable in the %s theme', (theme) => {
    const colour = new Map([...themeVariables(theme).matchAll(/--(\w+):(#\w+);/g)].map((m) => [m[1]!, m[2]!]));
    for (const role of roles) {
      if (role === 'paper' || role === 'rule') continue;
      expect(contrast(colour.get(role)!, colour.get('paper')!)).toBeGreaterThan(4.5);
    }
  });
});

describe('ticks and numbers', () => {
  it('are round', () => {
    expect(linearTicks(0, 1)).toEqual([0, 0.2, 0.4, 0.6, 0.8, 1]);
    expect(linearTicks(-3, 17)).toEqual([0, 5, 10, 15]);
    expect(logTicks(0.5, 2000)).toEqual([1, 10, 100, 1000]);
    expect(logTicks(2, 30)).toEqual([2, 5, 10, 20]);
    expect(logTicks(1e-12, 1).length).toBeLessThan(9);
    expect([figure(0.000123456), figure(1234.5678), figure(31104), figure(Number.NaN), figure(-2e9)]).toEqual([
      '1.235e-4',
      '1235',
      '31 104',
      '-',
      '-2 000 000 000',
    ]);
    expect([prettyUnits('0.7 m2/s2'), prettyUnits('12 us'), prettyUnits('m3')]).toEqual([
      '0.7 m\u00b2/s\u00b2',
      '12 \u00b5s',
      'm\u00b3',
    ]);
  });

  it('escape', () => {
    expect(escapeHtml(`<a b="c" d='e'>&`)).toBe('&lt;a b=&quot;c&quot; d=&#39;e&#39;&gt;&amp;');
    expect(embedJson('</script>\u2028')).toBe('"\\u003c/script\\u003e\\u2028"');
  });
});

describe('charts', () => {
  it('put a point where the axes say', () => {
    const { svg, data } = drawChart({
      type: 'chart',
      title: 'check',
      caption: '',
      x: { label: 'f', unit: 'Hz', scale: 'log', range: [1, 100] },
      y: { label: 'S', scale: 'linear', range: [0, 10] },
      series: [{ name: 'one', kind: 'line', x: [1, 10, 100], y: [0, 5, 10] }],
      marks: [{ axis: 'x', value: 10, label: 'ten' }],
    });
    const [left, top, right, bottom] = data.plot;
    expect(svg).toContain(`M${left} ${bottom}L${(left + right) / 2} ${(top + bottom) / 2}L${right} ${top}`);
    expect(svg).toContain(`M${(left + right) / 2} ${top}V${bottom}`);
    expect(svg).toContain('var(--one)');
    expect(svg).not.toMatch(/#fe00/);
    expect(data.series[0]!.y).toEqual([0, 5, 10]);
  });

  it('thin long series without losing their extremes', () => {
    const y = new Float64Array(100_000);
    y[77_777] = 9;
    y[12_345] = -4;
    const thinned = thin({ name: 'x', kind: 'line', x: y.map((_, i) => i), y });
    expect(thinned.x.length).toBeLessThanOrEqual(1200);
    expect(Math.max(...thinned.y)).toBe(9);
    expect(Math.min(...thinned.y)).toBe(-4);
  });
});

describe('pictures', () => {
  const block: PictureBlock = {
    type: 'picture',
    title: 't',
    caption: '',
    quantity: 'q',
    unit: 'm/s',
    width: 4,
    height: 2,
    values: [1, 2, 3, 4, 5, 6, 7, Number.NaN],
    axes: ['x', 'y'],
    low: [0, 0],
    high: [4, 2],
    scale: 'linear',
    ramp: 'sequential',
    range: [1, 7],
  };

  it('hold colours by value and values to one part in 65534', () => {
    const { svg, data } = drawPicture(block);
    const png = decode(Buffer.from(/base64,([^"]+)"/.exec(svg)![1]!, 'base64'));
    expect([png.width, png.height]).toEqual([4, 2]);
    expect([...png.data]).toEqual([1, 43, 86, 128, 171, 213, 255, 0]);
    const raw = inflateSync(Buffer.from(data.codes, 'base64'));
    const values = Array.from({ length: 8 }, (_, i) => {
      const code = raw[i]! * 256 + raw[8 + i]!;
      return code === 0 ? Number.NaN : data.range[0] + ((code - 1) / 65534) * (data.range[1] - data.range[0]);
    });
    values.slice(0, 7).forEach((v, i) => {
      expect(v).toBeCloseTo(i + 1, 3);
    });
    expect(values[7]).toBeNaN();
  });

  it('draw contours between pixels on either side', () => {
    expect(contourPath([1, 1, 5, 5, 1, 1, 5, 5], 4, 2, 3)).toBe('M2 0V2');
    expect(contourPath([1, 1, 5, 5, 5, 5, Number.NaN, 5], 4, 2, 3)).toBe('M0 1H2M2 0V1');
  });
});

describe('terminal tables', () => {
  it('print facts and marked tables, and no control characters of files', () => {
    const page: ReportPage = {
      title: 'case \u001b[31mred',
      kind: 'audit',
      footer: [],
      verdict: { level: 'good', words: 'fine' },
      sections: [
        {
          title: 's',
          blocks: [
            { type: 'facts', items: [{ label: 'cells', value: '12' }] },
            {
              type: 'table',
              title: 'shown',
              terminal: true,
              columns: [{ label: 'a' }, { label: 'b', unit: 'm' }],
              rows: [['x', 1.5]],
            },
            { type: 'table', title: 'hidden', columns: [{ label: 'a' }], rows: [['y']] },
          ],
        },
      ],
    };
    const text = summaryTables(page);
    expect(text).toContain('case ?[31mred');
    expect(text).toMatch(/cells\s+12/);
    expect(text).toMatch(/shown\na\s+b, m\nx\s+1\.5/);
    expect(text).not.toContain('hidden');
  });
});
