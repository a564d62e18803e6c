import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { recogniseFields } from '../../src/basis/quantities.js';
import { readDataset } from '../../src/formats/registry.js';

interface Summary {
  readonly meanGridRatio: number;
  readonly meanLength: number;
  readonly meanWidth: number;
  readonly meanWantedWidth: number;
  readonly meanShare: number;
  readonly ratioBelow5: number;
  readonly verdict: string;
}

it('judges the louvre sample as a hand calculation does', async () => {
  const root = join(import.meta.dirname, '..', '..');
  const { makeLouvre } = (await import(join(root, 'samples', 'louvre', 'make.mjs'))) as {
    makeLouvre: () => Promise<unknown>;
  };
  await makeLouvre();
  const folder = mkdtempSync(join(tmpdir(), 'eddygraft-louvre-'));
  try {
    const data = join(root, 'samples', 'louvre', 'generated');
    const output = join(folder, 'appraisal.vtu');
    const args = [
      '--extrude',
      'z',
      '--constant',
      'ViscosityKinematic=1.5e-5',
      '--periodic',
      'z',
      '--json',
      '-o',
      output,
    ];
    const told = spawnSync(
      process.execPath,
      [join(root, 'bin', 'eddygraft.js'), 'appraise', join(data, 'section.vtu'), join(data, 'target.vtu'), ...args],
      { encoding: 'utf8' },
    );
    expect(told.status, told.stderr).toBe(0);
    const { summary } = JSON.parse(told.stdout) as { readonly summary: Summary };

    // Every cell: GridRatio is L = k^(3/2) / epsilon over the cube root of the volume, both in the file.
    const { fields } = recogniseFields((await readDataset(output)).cellArrays, { file: output });
    const ratio = fields.get('GridRatio')?.values as Float64Array;
    const length = fields.get('IntegralLength')?.values as Float64Array;
    const width = fields.get('CellWidth')?.values as Float64Array;
    for (let c = 0; c < ratio.length; c += 997) {
      expect(ratio[c]).toBeCloseTo((length[c] as number) / (width[c] as number), 9);
    }

    // By hand: eddies of L = 22 mm on cells of 9.8 mm, L / CellWidth = 2.3, far below 5 (common practice: marginal).
    expect(summary.meanLength).toBeCloseTo(0.0223, 3);
    expect(summary.meanWidth).toBeCloseTo(0.00975, 4);
    expect(summary.ratioBelow5).toBeGreaterThan(0.99);
    // A von Karman spectrum at infinite Reynolds number carries 0.43 of k at L / CellWidth = 2.37 (0.379 at 2, 0.510 at 3)
    // and needs L / CellWidth = 12 for 0.8. Here L / eta is about 280 (R_lambda about 110), where L11 / L is about 0.55
    // instead of 0.39 (Pope 2000, figure 6.24): lengths count 1.4 times, so about 0.51 at 2.37 and 8 or less for 0.8.
    expect(summary.meanShare).toBeGreaterThan(0.43);
    expect(summary.meanShare).toBeLessThan(0.6);
    expect(summary.meanLength / summary.meanWantedWidth).toBeGreaterThan(4.5);
    expect(summary.meanLength / summary.meanWantedWidth).toBeLessThan(12);
    expect(summary.verdict).toBe('too coarse');
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
});
