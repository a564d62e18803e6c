import { spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { DataArray } from '../../src/basis/dataset.js';
import { writeDataset } from '../../src/formats/registry.js';
import { hexBox, makeArray } from '../helpers/meshes.js';

const root = join(import.meta.dirname, '..', '..');

export interface Spoken {
  readonly code: number | null;
  readonly out: string;
  readonly err: string;
}

/** Runs the built command. */
export function eddygraft(folder: string, ...args: string[]): Spoken {
  const result = spawnSync(process.execPath, [join(root, 'bin', 'eddygraft.js'), ...args], {
    cwd: folder,
    encoding: 'utf8',
  });
  return { code: result.status, out: result.stdout, err: result.stderr };
}

export function newFolder(): string {
  return mkdtempSync(join(tmpdir(), 'eddygraft-cli-'));
}

/** A box of n^3 hexahedra in a file of the folder. */
export async function writeBox(path: string, n: number, cellArrays: readonly DataArray[] = []): Promise<void> {
  const mesh = hexBox(n, n, n, { lengths: [2, 1, 1] });
  await writeDataset(path, { mesh: { ...mesh, cellArrays }, cellArrays: [], pointArrays: [], notes: new Map() });
}

/** Rows of a channel-like profile: CoordinateY, VelocityX, k, epsilon. */
export function profileText(change: (row: string[], i: number) => string[] = (row) => row): string {
  const rows = Array.from({ length: 41 }, (_, i) => {
    const y = i / 40;
    const d = Math.max(Math.min(y, 1 - y), 0.005);
    return change([y, 4 * y * (1 - y) * 10, 0.4 * d + 0.02, (0.4 * d + 0.02) ** 1.5 / (1.2 * d)].map(String), i).join();
  });
  return `CoordinateY,VelocityX,TurbulentEnergyKinetic,TurbulentDissipation\n${rows.join('\n')}\n`;
}

export const caseText = `title: box
precursor: { file: profile.csv, constants: { ViscosityKinematic: 1.0e-4 } }
target: { file: box.vtu, walls: [{ plane: y, at: [0, 1] }], periodic: [x, z] }
fluctuations: { seed: 5, shells: 12, directions: 6 }
checks: { divergence: 1.0e-3, energy: 0.5 }
output: { file: out/start.vtu }
`;

/** A folder with a box, a profile and a case for them. */
export async function boxCase(n: number): Promise<string> {
  const folder = newFolder();
  await writeBox(join(folder, 'box.vtu'), n);
  writeFileSync(join(folder, 'profile.csv'), profileText());
  writeFileSync(join(folder, 'case.yaml'), caseText);
  mkdirSync(join(folder, 'out'));
  return folder;
}

export { makeArray };
