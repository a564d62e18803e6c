import { blockPoints, type ModeKernel, rows, shaped } from '../kernels/mode-block.js';
import { openModeKernel } from '../kernels/modes.js';
import { type Block, createBlock, loadCells, openBlock } from './block.js';
import { cellFlag, column, type FluctuationPlan } from './plan.js';
import { multipliersOf, smallestShare } from './polarisation.js';
import { type ShellShare, shellShare } from './shell-table.js';
import { composeSymmetric, eigenSymmetric } from './symmetric.js';

/** Passes over the mode set (after the first look) that correct the multipliers for its finite number of directions. */
const corrections = 1;
/** Shells with less than this share of k do not count while the multipliers are corrected. */
const coarsely = 1e-3;
/** Seeded energy is raised by at most this to make up for waves between the two cut-offs. */
const largestRaise = 4;
/** Cells to the shortest wave that a run resolves. */
const resolvableCells = 2;

const values = new Float64Array(3);
const vectors = new Float64Array(9);
const multipliers = new Float64Array(3);
const share: ShellShare = { share: 0, byWave: 0, byEta: 0 };

/**
 * The nearest tensor with trace 1 and eigenvalues of at least `smallestShare`; true when it had to be moved by more than
 * that (a velocity cannot have negative eigenvalues).
 */
function realise(tensor: Float64Array): boolean {
  eigenSymmetric(tensor, 0, values, vectors);
  let negative = false;
  let sum = 0;
  for (let e = 0; e < 3; e++) {
    if (values[e]! < -1e-9) negative = true;
    values[e] = Math.max(values[e]!, smallestShare);
    sum += values[e]!;
  }
  for (let e = 0; e < 3; e++) values[e]! /= sum;
  composeSymmetric(values, vectors, tensor, 0);
  return negative;
}

/** Half the multipliers for a realisable tensor, from the table for polarisations uniform on the sphere. */
function setMultipliers(plan: FluctuationPlan, tensor: Float64Array, parameters: Float64Array, at: number): void {
  eigenSymmetric(tensor, 0, values, vectors);
  let sum = 0;
  for (let e = 0; e < 3; e++) {
    values[e] = Math.max(values[e]!, smallestShare);
    sum += values[e]!;
  }
  for (let e = 0; e < 3; e++) values[e]! /= sum;
  multipliersOf(plan.polarisationTable!, values, multipliers);
  for (let e = 0; e < 3; e++) multipliers[e]! *= 0.5;
  composeSymmetric(multipliers, vectors, parameters, at);
}

/**
 * Energy of one mode of a shell into the row `weight`; computed in the first pass over a block, kept for the others.
 *
 * @returns false when the shell holds less than `least` of k everywhere in the block
 */
function setShares(
  plan: FluctuationPlan,
  block: Block,
  shell: number,
  shares: Float64Array,
  first: boolean,
  row: Float32Array | Float64Array,
  least: number,
): boolean {
  const at = shell * blockPoints;
  let most = 0;
  for (let i = 0; i < block.points; i++) {
    if (first) {
      shellShare(plan.shellTable, block.spectra[i]!, shell, share);
      shares[at + i] = share.share;
    }
    const e = shares[at + i]!;
    row[i] = e / plan.modes.directions;
    if (e > most) most = e;
  }
  return most >= least;
}

/** Seeded and resolvable energy, and second moments with the multipliers, of the block's points for k = 1. */
function sumMoments(
  plan: FluctuationPlan,
  kernel: ModeKernel,
  block: Block,
  stress: boolean,
  shares: Float64Array,
  least: number,
): void {
  const first = !stress;
  const { directions, shells } = plan.modes;
  const seededScale = (plan.wavelengthCells / (2 * Math.PI)) ** 2;
  const ratio = (Math.min(resolvableCells, plan.wavelengthCells) / plan.wavelengthCells) ** 2;
  // The resolvable cut-off fades over half its width to either side.
  const fade = 0.5 / plan.taper;
  kernel.clear(rows.moments, 8);
  openBlock(plan, kernel, block, false);
  const w = kernel.rows[rows.weight]!;
  for (let s = 0; s < shells; s++) {
    const highest = block.widest * plan.modes.longest[s]! ** 2 * seededScale;
    const lowest = block.narrowest * plan.modes.shortest[s]! ** 2 * seededScale;
    if (lowest * ratio >= 1 + fade) continue;
    if (!setShares(plan, block, s, shares, first, w, least)) continue;
    const whole = highest <= 1 - 2 * fade && highest * ratio <= 1 - fade;
    const flags = (whole ? 0 : shaped.cut) | (stress ? shaped.stress : 0);
    kernel.moments(block.points, s * directions, directions, flags, plan.taper, ratio);
  }
}

/**
 * Sets amplitude, polarisation multipliers, wanted energy and resolvable share of cells [begin, end): what the cell's two
 * cut-offs leave of the local spectrum, with the energy between them kept on the seeded waves.
 *
 * Polarisation: q_n = exp(a_n . Lambda a_n) / Z with Lambda from a table for directions uniform on the sphere, then passes
 * R <- R + (wanted - found) over the mode set itself, found with the cell's own shares and cut-off.
 */
export function weighRange(plan: FluctuationPlan, begin: number, end: number): void {
  const kernel = openModeKernel(plan.table);
  const block = createBlock(plan.columns);
  const { columns, covariance } = plan;
  const targets = new Float64Array(6 * blockPoints);
  const aims = new Float64Array(6 * blockPoints);
  const tensor = new Float64Array(6);
  const shares = new Float64Array(plan.modes.shells * blockPoints);
  for (let first = begin; first < end; first += blockPoints) {
    const points = Math.min(blockPoints, end - first);
    loadCells(plan, block, first, points, false);
    if (covariance !== undefined) {
      for (let i = 0; i < points; i++) {
        const at = 6 * (first + i);
        const trace = covariance[at]! + covariance[at + 3]! + covariance[at + 5]!;
        for (let c = 0; c < 6; c++) {
          const third = c === 0 || c === 3 || c === 5 ? 1 / 3 : 0;
          tensor[c] = trace > 0 ? covariance[at + c]! / trace : third;
        }
        if (realise(tensor)) plan.flags[first + i]! |= cellFlag.clipped;
        targets.set(tensor, 6 * i);
        aims.set(tensor, 6 * i);
        setMultipliers(plan, tensor, block.parameters, i * columns + column.polarisation);
      }
    }
    sumMoments(plan, kernel, block, false, shares, 1e-12);
    const seeded = kernel.rows[rows.moments]!;
    const isotropic = Float64Array.from(seeded);
    const resolvable = Float64Array.from(kernel.rows[rows.moments + 1]!);
    if (covariance !== undefined) {
      sumMoments(plan, kernel, block, true, shares, corrections > 0 ? coarsely : 1e-12);
      for (let pass = 0; pass < corrections; pass++) {
        for (let i = 0; i < points; i++) {
          if (!(seeded[i]! > 1e-20)) continue;
          for (let c = 0; c < 6; c++) {
            const found = kernel.rows[rows.moments + 2 + c]![i]! / seeded[i]!;
            tensor[c] = aims[6 * i + c]! + targets[6 * i + c]! - found;
          }
          realise(tensor);
          aims.set(tensor, 6 * i);
          setMultipliers(plan, tensor, block.parameters, i * columns + column.polarisation);
        }
        sumMoments(plan, kernel, block, true, shares, pass < corrections - 1 ? coarsely : 1e-12);
      }
    }
    for (let i = 0; i < points; i++) {
      finishCell(plan, first + i, isotropic[i]!, seeded[i]!, resolvable[i]!);
      if (covariance === undefined) continue;
      const from = i * columns + column.polarisation;
      plan.parameters.set(block.parameters.subarray(from, from + 6), (first + i) * columns + column.polarisation);
    }
  }
}

/**
 * @param isotropic   seeded share of k, directions alike
 * @param weighted    the same with the polarisation multipliers, which are not normalised
 * @param resolvable  resolvable share of k
 */
function finishCell(
  plan: FluctuationPlan,
  cell: number,
  isotropic: number,
  weighted: number,
  resolvable: number,
): void {
  const { parameters, k, seeding } = plan;
  const carried = Math.min(1, resolvable);
  if (carried > largestRaise * isotropic) plan.flags[cell]! |= cellFlag.coarse;
  const laid = Math.min(carried, largestRaise * isotropic);
  const energy = k[cell]! * seeding[cell]! ** 2;
  plan.resolvableShare[cell] = laid;
  plan.wanted[cell] = energy * laid;
  parameters[cell * plan.columns] = weighted > 1e-20 ? Math.sqrt((energy * laid) / weighted) : 0;
}
