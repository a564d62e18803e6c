import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Command } from 'commander';
import { afterAll, afterEach, describe, expect, it, vi } from 'vitest';
import { addFollowup } from '../../src/cli/followup.js';
import { ornsteinUhlenbeck, withSpectrum } from '../appraisal/signals.js';

const folder = mkdtempSync(join(tmpdir(), 'followup-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const n = 1 << 12;
const step = 1 / 1000;

/** A probe at 10 m/s with T_int = 0.02 s and spectrum down to half of -5/3 at 150 Hz, and a swinging lift. */
function writeHistory(name: string, seed: string): string {
  const integral = 0.02;
  const bend = 0.7468 / (2 * Math.PI * integral);
  const density = (f: number): number => 4 * integral * (1 + (f / bend) ** 2) ** (-5 / 6) * 0.5 ** ((f / 150) ** 4);
  const u = ['x', 'y', 'z'].map((c) => withSpectrum(n, step, density, `${seed} ${c}`));
  const lift = ornsteinUhlenbeck(n, step, 0.01, 0.05, seed);
  const rows = Array.from({ length: n }, (_, i) =>
    [i * step, 10 + u[0]![i]!, u[1]![i], u[2]![i], lift[i]! + 0.4 * Math.sin(2 * Math.PI * 40 * i * step)].join(','),
  );
  const path = join(folder, name);
  writeFileSync(path, `Time,wake01.VelocityX,wake01.VelocityY,wake01.VelocityZ,Lift\n${rows.join('\n')}\n`);
  return path;
}

const first = writeHistory('one.csv', 'one');
const second = writeHistory('two.csv', 'two');

let out: string[] = [];
async function run(...args: string[]): Promise<string> {
  out = [];
  vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    out.push(String(text));
    return true;
  });
  vi.spyOn(process.stderr, 'write').mockImplementation(() => true);
  const program = new Command('eddygraft').version('1.2.3').exitOverride();
  addFollowup(program);
  await program.parseAsync(['followup', ...args], { from: 'user' });
  return out.join('');
}
afterEach(() => vi.restoreAllMocks());

describe('followup command', () => {
  it('prints one JSON document with the figures', async () => {
    const monitors = join(folder, 'monitors.csv');
    writeFileSync(monitors, 'Monitor,CellWidth,TurbulentEnergyKinetic\nwake01,0.0125,1.5\n');
    const text = await run(
      first,
      '--json',
      '--monitors',
      monitors,
      '--reference-length',
      '0.05',
      '--reference-speed',
      '10',
    );
    const document = JSON.parse(text) as {
      histories: {
        probes: { verdict: string; kRatio: number; cutoffFrequency: number }[];
        signals: { name: string; peaks: { strouhal: number }[] }[];
      }[];
    };
    const [probe] = document.histories[0]!.probes;
    expect(probe!.verdict).toBe('resolving');
    expect(probe!.cutoffFrequency).toBeCloseTo(400, -1);
    expect(probe!.kRatio).toBeGreaterThan(0.7);
    expect(document.histories[0]!.signals.find((s) => s.name === 'Lift')!.peaks[0]!.strouhal).toBeCloseTo(0.2, 2);
    expect(text).not.toContain('density":[');
  });

  it('prints tables and compares histories', async () => {
    const text = await run(first, second, '--cell-width', '0.0125');
    expect(text).toContain('2 of 2 probes resolve their turbulence');
    expect(text).toContain('Means and deviations side by side');
    expect(await run(first, '--quiet')).toBe('');
  });

  it('writes a report page and keeps what is there', async () => {
    const report = join(folder, 'page.html');
    await run(first, '--cell-width', '0.0125', '--report', report);
    const html = readFileSync(report, 'utf8');
    expect(html).toContain('Spectrum at wake01');
    expect(html).toContain('Running mean of Lift');
    expect(html).toContain('eddygraft 1.2.3');
    expect(html.length).toBeLessThan(500_000);
    await expect(run(first, '--report', report)).rejects.toThrow('exists already');
    await run(first, second, '--report', report, '--overwrite');
    expect(readFileSync(report, 'utf8')).toContain('Spectra at wake01 in all histories');
  });

  it('refuses what it cannot use', async () => {
    await expect(run(first, '--time', 'when')).rejects.toThrow('--time');
    await expect(run(join(folder, 'missing.csv'))).rejects.toThrow('ENOENT');
    await expect(run(first, '--cell-width', '-1')).rejects.toThrow('positive number');
    await expect(run(first, '--monitors', first)).rejects.toThrow('Monitor and CellWidth');
  });
});
