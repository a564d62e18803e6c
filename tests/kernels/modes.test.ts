import { expect, it } from 'vitest';
import { randomStream } from '../../src/basis/random.js';
import { blockPoints, type ModeKernel, type ModeTable, rows, shaped } from '../../src/kernels/mode-block.js';
import { openModeKernel } from '../../src/kernels/modes.js';
import { openPlainKernel } from '../../src/kernels/modes-plain.js';

const modes = 32;

function table(): ModeTable {
  const random = randomStream(5, 'kernel-test');
  const phases = new Float64Array(4 * modes);
  const vectors = new Float32Array(24 * modes);
  for (let n = 0; n < modes; n++) {
    for (let c = 0; c < 3; c++) phases[4 * n + c] = 20 * (random() - 0.5);
    phases[4 * n + 3] = random();
    for (let c = 0; c < 6; c++) vectors[24 * n + c] = random() - 0.5;
    for (let c = 6; c < 18; c++) vectors[24 * n + c] = random() - 0.3;
  }
  return { count: modes, phases, vectors };
}

function fill(kernel: ModeKernel): void {
  const random = randomStream(6, 'kernel-test');
  for (let i = 0; i < blockPoints; i++) {
    kernel.x[i] = 1000 * random();
    kernel.y[i] = random();
    kernel.z[i] = -100 * random();
  }
  for (let row = 0; row < rows.potential; row++)
    for (let i = 0; i < blockPoints; i++) kernel.rows[row]![i] = random() - 0.2;
  for (let row = rows.width; row < rows.moments; row++)
    for (let i = 0; i < blockPoints; i++) kernel.rows[row]![i] = 1.6 * (random() - 0.5);
  kernel.clear(rows.potential, 6);
  kernel.clear(rows.moments, rows.count - rows.moments);
}

function compare(run: (kernel: ModeKernel) => void, first: number, count: number): number {
  const fast = openModeKernel(table());
  const plain = openPlainKernel(table());
  for (const kernel of [fast, plain]) {
    fill(kernel);
    run(kernel);
  }
  let worst = 0;
  let square = 0;
  for (let row = first; row < first + count; row++)
    for (let i = 0; i < blockPoints; i++) {
      worst = Math.max(worst, Math.abs(fast.rows[row]![i]! - plain.rows[row]![i]!));
      square += plain.rows[row]![i]! ** 2;
    }
  expect(square).toBeGreaterThan(0);
  return worst / Math.sqrt(square / (count * blockPoints));
}

it('sums a plain shell as its twin in 64-bit numbers does', () => {
  expect(compare((k) => k.plainShell(blockPoints, 0, modes), rows.potential, 6)).toBeLessThan(4e-6);
});

it.each([
  ['cut-off', shaped.cut],
  ['polarisation', shaped.stress],
  ['both', shaped.cut | shaped.stress],
  ['both with gradients', shaped.cut | shaped.stress | shaped.slopes],
] as const)('sums a shaped shell: %s', (_, flags) => {
  expect(compare((k) => k.shapedShell(blockPoints, 0, modes, flags, 2.5), rows.potential, 6)).toBeLessThan(8e-6);
});

it.each([
  ['plain', 0, 2],
  ['cut-off', shaped.cut, 2],
  ['both', shaped.cut | shaped.stress, 8],
] as const)('sums moments: %s', (_, flags, count) => {
  expect(compare((k) => k.moments(blockPoints, 0, modes, flags, 2.5, 0.44), rows.moments, count)).toBeLessThan(4e-6);
});

it.each([
  ['plain', 0],
  ['both', shaped.cut | shaped.stress],
] as const)('sums the expected energy: %s', (_, flags) => {
  expect(compare((k) => k.expected(blockPoints, 0, modes, flags, 2.5), rows.expected, 10)).toBeLessThan(6e-6);
});
