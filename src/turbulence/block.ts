import { blockPoints, type ModeKernel, rows, shaped } from '../kernels/mode-block.js';
import { column, type FluctuationPlan } from './plan.js';
import { type CellSpectrum, openCell, type ShellShare, shellShare } from './shell-table.js';
import { cellStencil, createStencil } from './stencil.js';
import { extremeEigenvalues } from './symmetric.js';

/** Parameters of the points of a block, and their gradients where wanted. */
export interface Block {
  points: number;
  /** columns x 64. */
  readonly parameters: Float64Array;
  /** 3 x columns x 64. */
  readonly gradients: Float64Array;
  /** Spectrum of each point. */
  readonly spectra: readonly CellSpectrum[];
  /** Smallest and largest eigenvalue of the width tensors in the block. */
  narrowest: number;
  widest: number;
}

export function createBlock(columns: number): Block {
  return {
    points: 0,
    parameters: new Float64Array(columns * blockPoints),
    gradients: new Float64Array(3 * columns * blockPoints),
    spectra: Array.from({ length: blockPoints }, () => ({ column: 0, t: 0, lnNorm: 0, normSlope: 0, eta: 0 })),
    narrowest: 0,
    widest: 0,
  };
}

const stencil = createStencil();

/** Loads cells `begin` ... `begin + points - 1`; gradients by the plan's operator. */
export function loadCells(plan: FluctuationPlan, block: Block, begin: number, points: number, slopes: boolean): void {
  const { columns, parameters } = plan;
  block.points = points;
  block.parameters.set(parameters.subarray(columns * begin, columns * (begin + points)));
  if (!slopes) return;
  const out = block.gradients;
  out.fill(0);
  for (let i = 0; i < points; i++) {
    const cell = begin + i;
    cellStencil(plan.gradient, cell, stencil);
    const { others, coefficients, count } = stencil;
    for (let j = 0; j < count; j++) {
      const from = others[j]! * columns;
      const own = i * columns;
      const cx = coefficients[3 * j]!;
      const cy = coefficients[3 * j + 1]!;
      const cz = coefficients[3 * j + 2]!;
      for (let c = 0; c < columns; c++) {
        const difference = parameters[from + c]! - block.parameters[own + c]!;
        if (difference === 0) continue;
        const o = 3 * (own + c);
        out[o]! += cx * difference;
        out[o + 1]! += cy * difference;
        out[o + 2]! += cz * difference;
      }
    }
  }
}

const extremes = new Float64Array(2);

/** Puts the shape parameters of the block into the kernel and opens the spectra. */
export function openBlock(plan: FluctuationPlan, kernel: ModeKernel, block: Block, slopes: boolean): void {
  const { columns } = plan;
  const tensors = columns > column.polarisation ? 2 : 1;
  block.narrowest = Infinity;
  block.widest = 0;
  for (let i = 0; i < block.points; i++) {
    const at = i * columns;
    openCell(plan.shellTable, block.parameters[at + 1]!, block.parameters[at + 2]!, block.spectra[i]!);
    extremeEigenvalues(block.parameters, at + column.width, extremes);
    block.narrowest = Math.min(block.narrowest, extremes[0]!);
    block.widest = Math.max(block.widest, extremes[1]!);
    for (let t = 0; t < tensors; t++) {
      const from = t === 0 ? column.width : column.polarisation;
      const row = t === 0 ? rows.width : rows.polarisation;
      const slope = t === 0 ? rows.widthGradient : rows.polarisationGradient;
      for (let c = 0; c < 6; c++) {
        kernel.rows[row + c]![i] = block.parameters[at + from + c]!;
        if (!slopes) continue;
        const g = 3 * (at + from + c);
        kernel.rows[slope + c]![i] = block.gradients[g]!;
        kernel.rows[slope + 6 + c]![i] = block.gradients[g + 1]!;
        kernel.rows[slope + 12 + c]![i] = block.gradients[g + 2]!;
      }
    }
  }
  // The last vector of four may hold points that do not count; they must not hold old numbers that overflow.
  for (let i = block.points; i < ((block.points + 3) & ~3); i++) {
    for (let row = 0; row < rows.count; row++) kernel.rows[row]![i] = 0;
  }
}

/** How the cut-off treats a shell in this block. */
export type Cut = 'whole' | 'partly' | 'none';

/** @param scale  (shortest wave in cells / 2 pi)^2 */
export function cutOf(plan: FluctuationPlan, block: Block, shell: number, scale: number, taper: number): Cut {
  const { longest, shortest } = plan.modes;
  if (block.widest * longest[shell]! ** 2 * scale <= 1 - 1 / taper) return 'whole';
  return block.narrowest * shortest[shell]! ** 2 * scale >= 1 ? 'none' : 'partly';
}

const share: ShellShare = { share: 0, byWave: 0, byEta: 0 };
/** Shares of k below which a shell is left out. */
const negligible = 1e-12;

/**
 * Weights of one shell and their gradients into the kernel.
 *
 *   W = alpha sqrt(4 e_s / D),  grad W = sqrt(4 e_s / D) [grad alpha + alpha / 2 (d ln e_s / d ln kappa_e grad ln kappa_e
 *       + d ln e_s / d ln eta grad ln eta)]
 *
 * @returns false when the shell holds nothing in this block
 */
export function setWeights(
  plan: FluctuationPlan,
  kernel: ModeKernel,
  block: Block,
  shell: number,
  slopes: boolean,
): boolean {
  const { columns, shellTable } = plan;
  const w = kernel.rows[rows.weight]!;
  const gx = kernel.rows[rows.weightGradient]!;
  const gy = kernel.rows[rows.weightGradient + 1]!;
  const gz = kernel.rows[rows.weightGradient + 2]!;
  const perMode = 4 / plan.modes.directions;
  let most = 0;
  for (let i = 0; i < block.points; i++) {
    shellShare(shellTable, block.spectra[i]!, shell, share);
    if (share.share > most) most = share.share;
    const at = i * columns;
    const root = Math.sqrt(perMode * share.share);
    const alpha = block.parameters[at]!;
    w[i] = alpha * root;
    if (!slopes) continue;
    const p = 0.5 * alpha * share.byWave;
    const q = 0.5 * alpha * share.byEta;
    const g = 3 * at;
    const s = block.gradients;
    gx[i] = root * (s[g]! + p * s[g + 3]! + q * s[g + 6]!);
    gy[i] = root * (s[g + 1]! + p * s[g + 4]! + q * s[g + 7]!);
    gz[i] = root * (s[g + 2]! + p * s[g + 5]! + q * s[g + 8]!);
  }
  return most > negligible;
}

/** Flags of the shaped kernel for a shell. */
export function flagsOf(plan: FluctuationPlan, cut: Cut, slopes: boolean): number {
  const stress = plan.columns > column.polarisation;
  return (cut === 'partly' ? shaped.cut : 0) | (stress ? shaped.stress : 0) | (slopes ? shaped.slopes : 0);
}
