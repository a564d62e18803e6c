import { blockPoints, type ModeKernel, rows, shaped } from '../kernels/mode-block.js';
import { openModeKernel } from '../kernels/modes.js';
import { type Block, createBlock, cutOf, flagsOf, loadCells, openBlock, setWeights } from './block.js';
import { column, type FluctuationPlan } from './plan.js';

/** Where the synthesis writes; both 3 x cells, interleaved. */
export interface SynthesisOutput {
  /** Vector potential A0, m2/s. */
  readonly potential: Float64Array;
  /** u0 = curl A0, m/s. */
  readonly velocity: Float64Array;
}

function sumBlock(plan: FluctuationPlan, kernel: ModeKernel, block: Block, slopes: boolean): void {
  const { directions, shells } = plan.modes;
  const scale = (plan.wavelengthCells / (2 * Math.PI)) ** 2;
  kernel.clear(rows.potential, 6);
  let quiet = true;
  for (let i = 0; i < block.points; i++) {
    const at = i * plan.columns;
    const g = 3 * at;
    if (block.parameters[at] !== 0) quiet = false;
    if (slopes && (block.gradients[g] !== 0 || block.gradients[g + 1] !== 0 || block.gradients[g + 2] !== 0)) {
      quiet = false;
    }
  }
  if (quiet) return;
  openBlock(plan, kernel, block, slopes);
  if (!slopes) for (let c = 0; c < 3; c++) kernel.rows[rows.weightGradient + c]!.fill(0);
  for (let s = 0; s < shells; s++) {
    const cut = cutOf(plan, block, s, scale, plan.taper);
    if (cut === 'none' || !setWeights(plan, kernel, block, s, slopes)) continue;
    const flags = flagsOf(plan, cut, slopes);
    if ((flags & (shaped.cut | shaped.stress)) === 0) kernel.plainShell(block.points, s * directions, directions);
    else kernel.shapedShell(block.points, s * directions, directions, flags, plan.taper);
  }
}

/**
 * Superimposes the modes on the centres of cells [begin, end):
 *
 *   A0(x) = sum_n w_n(x) b_n cos(K_n.x + phi_n),  b_n = K_n x a_n / K_n^2
 *   u0(x) = curl A0 = sum_n [ w_n a_n sin(K_n.x + phi_n) + grad w_n x b_n cos(K_n.x + phi_n) ]
 *
 * The continuous field is solenoidal for any variation of the weights; grad w_n follows by the chain rule from the
 * gradients of the cell's stored parameters. Grade `modes` leaves the second term out (and the potential at what it is).
 * Blocks of 64 cells are counted from `begin`; a cell's result does not depend on the others of its block beyond rounding
 * of shells left out as negligible, so ranges should begin on multiples of 64.
 *
 * @see Kraichnan 1970 (global modes); src/turbulence/README.md (weights on the potential)
 * @throws MachineError when the kernel has not been built
 */
export function synthesiseRange(plan: FluctuationPlan, begin: number, end: number, out: SynthesisOutput): void {
  const kernel = openModeKernel(plan.table);
  const block = createBlock(plan.columns);
  const slopes = plan.grade === 'potential';
  const c = plan.centroids;
  for (let first = begin; first < end; first += blockPoints) {
    const points = Math.min(blockPoints, end - first);
    loadCells(plan, block, first, points, slopes);
    for (let i = 0; i < points; i++) {
      kernel.x[i] = c[3 * (first + i)]!;
      kernel.y[i] = c[3 * (first + i) + 1]!;
      kernel.z[i] = c[3 * (first + i) + 2]!;
    }
    sumBlock(plan, kernel, block, slopes);
    for (let a = 0; a < 3; a++) {
      const potential = kernel.rows[rows.potential + a]!;
      const velocity = kernel.rows[rows.velocity + a]!;
      for (let i = 0; i < points; i++) {
        out.potential[3 * (first + i) + a] = potential[i]!;
        out.velocity[3 * (first + i) + a] = velocity[i]!;
      }
    }
  }
}

/**
 * Vector potential A0 at points whose parameters are given, for circulations along edges.
 *
 * @param points      3 x m, metres
 * @param parameters  plan.columns x m, interpolated from cells (see `vertexParameters`): whatever interpolation is used
 *                    must give every point of an edge one value, whichever cell or face asks
 * @param out         3 x m, m2/s
 */
export function potentialAtPoints(
  plan: FluctuationPlan,
  points: Float64Array,
  parameters: Float64Array,
  out: Float64Array,
): void {
  const kernel = openModeKernel(plan.table);
  const block = createBlock(plan.columns);
  const total = points.length / 3;
  for (let first = 0; first < total; first += blockPoints) {
    const count = Math.min(blockPoints, total - first);
    block.points = count;
    block.parameters.set(parameters.subarray(plan.columns * first, plan.columns * (first + count)));
    for (let i = 0; i < count; i++) {
      kernel.x[i] = points[3 * (first + i)]!;
      kernel.y[i] = points[3 * (first + i) + 1]!;
      kernel.z[i] = points[3 * (first + i) + 2]!;
    }
    sumBlock(plan, kernel, block, false);
    for (let a = 0; a < 3; a++) {
      const potential = kernel.rows[rows.potential + a]!;
      for (let i = 0; i < count; i++) out[3 * (first + i) + a] = potential[i]!;
    }
  }
}

/** True when the plan carries polarisation multipliers. */
export function hasStress(plan: FluctuationPlan): boolean {
  return plan.columns > column.polarisation;
}
