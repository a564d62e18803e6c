import { rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, it } from 'vitest';
import { recogniseFields } from '../../src/basis/quantities.js';
import { randomStream } from '../../src/basis/random.js';
import { readDataset } from '../../src/formats/registry.js';
import { eddygraft, newFolder, writeBox } from './cases.js';

let folder = '';
beforeAll(async () => {
  folder = newFolder();
  await writeBox(join(folder, 'box.vtu'), 8);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const names =
  'CoordinateX,CoordinateY,CoordinateZ,VelocityX,VelocityY,VelocityZ,TurbulentEnergyKinetic,TurbulentDissipation';

async function start(name: string, precursor: string): Promise<Map<string, { readonly values: Float64Array }>> {
  writeFileSync(
    join(folder, `${name}.yaml`),
    `precursor: ${precursor}
target: { file: box.vtu, periodic: [z] }
fluctuations: { seed: 3, shells: 8, directions: 6 }
checks: { energy: none, divergence: none }
output: { file: ${name}-start.vtu, report: none }
`,
  );
  const { code, err } = eddygraft(folder, 'run', `${name}.yaml`, '--quiet');
  expect(code, err).toBe(0);
  const file = join(folder, `${name}-start.vtu`);
  return recogniseFields((await readDataset(file)).cellArrays, { file }).fields;
}

it('a half model mirrored and the full model give the same start', async () => {
  const random = randomStream(2, 'half');
  const half = Array.from(
    { length: 900 },
    () => [1 + 1.1 * random(), -0.1 + 1.2 * random(), -0.1 + 1.2 * random()] as const,
  );
  // Even in x - 1: u_y, u_z and k; odd: u_x.
  const row = (x: number, y: number, z: number): string =>
    [x, y, z, Math.sin(x - 1), y, 1 + z * (x - 1) ** 2, 0.1 + (x - 1) ** 2, 0.5 + y].join();
  const right = half.map(([x, y, z]) => row(x, y, z));
  const left = half.map(([x, y, z]) => row(2 - x, y, z));
  writeFileSync(join(folder, 'half.csv'), `${names}\n${right.join('\n')}\n`);
  writeFileSync(join(folder, 'full.csv'), `${names}\n${[...right, ...left].join('\n')}\n`);
  const mirrored = await start('mirrored', '{ file: half.csv, placement: { mirror: [{ plane: x, at: 1 }] } }');
  const full = await start('full', '{ file: full.csv }');
  for (const name of ['Velocity', 'VelocityMean', 'TurbulentEnergyKinetic']) {
    full.get(name)?.values.forEach((value, i) => {
      expect(mirrored.get(name)?.values[i]).toBeCloseTo(value, 9);
    });
  }
});

it('an extruded section gives fields that do not change along the span', async () => {
  const random = randomStream(4, 'section');
  const rows = Array.from({ length: 400 }, () => {
    const [x, y] = [-0.1 + 2.2 * random(), -0.1 + 1.2 * random()];
    return [x, y, 0.37, Math.sin(x), Math.cos(y), 0, 0.1 + x * y * 0.01 + 0.01, 0.5].join();
  });
  writeFileSync(join(folder, 'section.csv'), `${names}\n${rows.join('\n')}\n`);
  const fields = await start('section', '{ file: section.csv, placement: { extrude: z } }');
  const mean = fields.get('VelocityMean')?.values as Float64Array;
  // 8 x 8 x 8 cells, x fastest: layers of 64 cells along z.
  for (let i = 0; i < mean.length; i += 1) expect(mean[i]).toBe(mean[i % 192]);
});

it('a mesh one cell thick is started', async () => {
  const { hexBox } = await import('../helpers/meshes.js');
  const { writeDataset } = await import('../../src/formats/registry.js');
  const thin = hexBox(16, 16, 1, { lengths: [2, 1, 0.05] });
  await writeDataset(join(folder, 'thin.vtu'), { mesh: thin, cellArrays: [], pointArrays: [], notes: new Map() });
  writeFileSync(
    join(folder, 'thin.yaml'),
    `precursor: { file: full.csv }
target: { file: thin.vtu, periodic: [z] }
fluctuations: { seed: 3, shells: 8, directions: 6 }
checks: { energy: none, divergence: none }
output: { file: thin-start.vtu, report: none }
`,
  );
  const { code, err } = eddygraft(folder, 'run', 'thin.yaml', '--quiet');
  expect(code, err).toBe(0);
});
