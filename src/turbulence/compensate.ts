import { blockPoints, rows } from '../kernels/mode-block.js';
import { openModeKernel } from '../kernels/modes.js';
import { createBlock, cutOf, flagsOf, loadCells, openBlock, setWeights } from './block.js';
import { column, type FluctuationPlan } from './plan.js';
import { cellStencil, createStencil } from './stencil.js';

/**
 * Expected energy of curl(c A) in each cell over all phases: c^2 (P + Q . grad v + grad v . T grad v), v = ln c.
 * Ten numbers a cell: P, Q (3), T (XX XY XZ YY YZ ZZ).
 */
export function expectedRange(plan: FluctuationPlan, begin: number, end: number, out: Float32Array): void {
  const kernel = openModeKernel(plan.table);
  const block = createBlock(plan.columns);
  const { directions, shells } = plan.modes;
  const scale = (plan.wavelengthCells / (2 * Math.PI)) ** 2;
  for (let first = begin; first < end; first += blockPoints) {
    const points = Math.min(blockPoints, end - first);
    loadCells(plan, block, first, points, true);
    openBlock(plan, kernel, block, true);
    kernel.clear(rows.expected, 10);
    for (let s = 0; s < shells; s++) {
      const cut = cutOf(plan, block, s, scale, plan.taper);
      if (cut === 'none' || !setWeights(plan, kernel, block, s, true)) continue;
      kernel.expected(points, s * directions, directions, flagsOf(plan, cut, true), plan.taper);
    }
    for (let i = 0; i < points; i++)
      for (let c = 0; c < 10; c++) out[10 * (first + i) + c] = kernel.rows[rows.expected + c]![i]!;
  }
}

export interface Compensation {
  readonly iterations: number;
  /** rms of |k_expected / k - 1| weighted with the wanted energy. */
  readonly before: number;
  readonly after: number;
}

/** Weight of |grad v|^2 h^2 against squared residuals; also what keeps v smooth where nothing is wanted. */
const penalty = 0.02;
const newtonSteps = 8;
const innerSteps = 12;

interface Rows {
  readonly offsets: Int32Array;
  readonly others: Int32Array;
  /** 3 x entries. */
  readonly coefficients: Float32Array;
}

function gatherStencils(plan: FluctuationPlan): Rows {
  const s = createStencil();
  const offsets = new Int32Array(plan.cells + 1);
  for (let i = 0; i < plan.cells; i++) {
    offsets[i + 1] = offsets[i]! + plan.gradient.cellFaceOffsets[i + 1]! - plan.gradient.cellFaceOffsets[i]!;
  }
  let others = new Int32Array(offsets[plan.cells]!);
  let coefficients = new Float32Array(3 * others.length);
  let at = 0;
  for (let i = 0; i < plan.cells; i++) {
    cellStencil(plan.gradient, i, s);
    if (at + s.count > others.length) {
      const more = new Int32Array(Math.ceil(1.5 * (at + s.count)));
      more.set(others);
      others = more;
      const moreCoefficients = new Float32Array(3 * more.length);
      moreCoefficients.set(coefficients);
      coefficients = moreCoefficients;
    }
    offsets[i] = at;
    for (let j = 0; j < s.count; j++, at++) {
      others[at] = s.others[j]!;
      for (let a = 0; a < 3; a++) coefficients[3 * at + a] = s.coefficients[3 * j + a]!;
    }
  }
  offsets[plan.cells] = at;
  return { offsets, others, coefficients };
}

/**
 * Raises or lowers the amplitudes so that the expected energy, gradient term included, is the wanted one in each cell:
 * w <- exp(v) w with v from Gauss-Newton on the residuals ln(k_expected / k), weak penalty on grad v, conjugate gradients
 * with the mesh's gradient operator. Changes `plan.parameters` (amplitude).
 *
 * @param expected  10 x cells from `expectedRange`
 */
export function compensate(plan: FluctuationPlan, expected: Float32Array): Compensation {
  const n = plan.cells;
  const g = gatherStencils(plan);
  const v = new Float64Array(n);
  const slope = new Float64Array(3 * n);
  const sensitivity = new Float64Array(3 * n);
  const residual = new Float64Array(n);
  const heard = new Uint8Array(n);
  const width2 = new Float64Array(n);
  let energy = 0;
  for (let i = 0; i < n; i++) energy += plan.wanted[i]!;
  for (let i = 0; i < n; i++) {
    heard[i] = plan.wanted[i]! > (1e-6 * energy) / n && expected[10 * i]! > 0 ? 1 : 0;
    const at = plan.columns * i + column.width;
    width2[i] = (plan.parameters[at]! + plan.parameters[at + 3]! + plan.parameters[at + 5]!) / 3;
  }

  const gradientOf = (x: Float64Array, out: Float64Array): void => {
    for (let i = 0; i < n; i++) {
      let sx = 0;
      let sy = 0;
      let sz = 0;
      const own = x[i]!;
      for (let j = g.offsets[i]!; j < g.offsets[i + 1]!; j++) {
        const d = x[g.others[j]!]! - own;
        sx += g.coefficients[3 * j]! * d;
        sy += g.coefficients[3 * j + 1]! * d;
        sz += g.coefficients[3 * j + 2]! * d;
      }
      out[3 * i] = sx;
      out[3 * i + 1] = sy;
      out[3 * i + 2] = sz;
    }
  };
  /** out += transposed gradient of f (3 x cells). */
  const addTransposed = (f: Float64Array, out: Float64Array): void => {
    for (let i = 0; i < n; i++) {
      const fx = f[3 * i]!;
      const fy = f[3 * i + 1]!;
      const fz = f[3 * i + 2]!;
      let own = 0;
      for (let j = g.offsets[i]!; j < g.offsets[i + 1]!; j++) {
        const d = g.coefficients[3 * j]! * fx + g.coefficients[3 * j + 1]! * fy + g.coefficients[3 * j + 2]! * fz;
        out[g.others[j]!]! += d;
        own += d;
      }
      out[i]! -= own;
    }
  };
  const evaluate = (x: Float64Array): number => {
    gradientOf(x, slope);
    let objective = 0;
    for (let i = 0; i < n; i++) {
      const gx = slope[3 * i]!;
      const gy = slope[3 * i + 1]!;
      const gz = slope[3 * i + 2]!;
      objective += penalty * width2[i]! * (gx * gx + gy * gy + gz * gz);
      residual[i] = 0;
      if (heard[i] === 0) continue;
      const at = 10 * i;
      const tx = expected[at + 4]! * gx + expected[at + 5]! * gy + expected[at + 6]! * gz;
      const ty = expected[at + 5]! * gx + expected[at + 7]! * gy + expected[at + 8]! * gz;
      const tz = expected[at + 6]! * gx + expected[at + 8]! * gy + expected[at + 9]! * gz;
      const inner =
        expected[at]! + gx * (expected[at + 1]! + tx) + gy * (expected[at + 2]! + ty) + gz * (expected[at + 3]! + tz);
      const safe = Math.max(inner, 1e-6 * expected[at]!);
      residual[i] = 2 * x[i]! + Math.log(safe / plan.wanted[i]!);
      sensitivity[3 * i] = (expected[at + 1]! + 2 * tx) / safe;
      sensitivity[3 * i + 1] = (expected[at + 2]! + 2 * ty) / safe;
      sensitivity[3 * i + 2] = (expected[at + 3]! + 2 * tz) / safe;
      objective += residual[i]! ** 2;
    }
    return objective;
  };
  const flux = new Float64Array(3 * n);
  const difference = new Float64Array(3 * n);
  /** out = (J^T J + penalty) p. */
  const multiply = (p: Float64Array, out: Float64Array): void => {
    gradientOf(p, difference);
    for (let i = 0; i < n; i++) {
      const mu = penalty * width2[i]!;
      const o = 3 * i;
      let j = 0;
      if (heard[i] === 1) {
        j =
          2 * p[i]! +
          sensitivity[o]! * difference[o]! +
          sensitivity[o + 1]! * difference[o + 1]! +
          sensitivity[o + 2]! * difference[o + 2]!;
      }
      out[i] = 2 * j + 1e-9 * p[i]!;
      for (let a = 0; a < 3; a++) flux[o + a] = mu * difference[o + a]! + (j === 0 ? 0 : j * sensitivity[o + a]!);
    }
    addTransposed(flux, out);
  };
  const measure = (): number => {
    let square = 0;
    let weight = 0;
    for (let i = 0; i < n; i++) {
      if (heard[i] === 0) continue;
      square += plan.wanted[i]! * (Math.exp(residual[i]!) - 1) ** 2;
      weight += plan.wanted[i]!;
    }
    return weight > 0 ? Math.sqrt(square / weight) : 0;
  };

  let objective = evaluate(v);
  const before = measure();
  const diagonal = new Float64Array(n);
  const right = new Float64Array(n);
  let iterations = 0;
  for (; iterations < newtonSteps; iterations++) {
    for (let i = 0; i < n; i++) {
      const mu = penalty * width2[i]!;
      right[i] = -2 * residual[i]!;
      const used = heard[i] === 1 ? residual[i]! : 0;
      for (let a = 0; a < 3; a++) flux[3 * i + a] = -mu * slope[3 * i + a]! - used * sensitivity[3 * i + a]!;
    }
    addTransposed(flux, right);
    diagonalOf(g, heard, sensitivity, width2, diagonal);
    const step = innerSolve(multiply, diagonal, right);
    let length = 1;
    let next = objective;
    const trial = new Float64Array(n);
    let longest = 0;
    for (let i = 0; i < n; i++) longest = Math.max(longest, Math.abs(step[i]!));
    if (longest > 1.5) length = 1.5 / longest;
    for (let halving = 0; halving < 6; halving++) {
      for (let i = 0; i < n; i++) trial[i] = v[i]! + length * step[i]!;
      next = evaluate(trial);
      if (next < objective) break;
      length *= 0.5;
    }
    if (!(next < objective)) {
      evaluate(v);
      break;
    }
    v.set(trial);
    const gain = objective - next;
    objective = next;
    if (gain < 0.01 * objective) break;
  }
  const after = measure();
  for (let i = 0; i < n; i++) plan.parameters[plan.columns * i]! *= Math.exp(v[i]!);
  return { iterations, before, after };
}

/** Diagonal of J^T J and penalty, for the preconditioner. */
function diagonalOf(
  g: Rows,
  heard: Uint8Array,
  sensitivity: Float64Array,
  width2: Float64Array,
  out: Float64Array,
): void {
  out.fill(1e-9);
  for (let i = 0; i < heard.length; i++) {
    const mu = penalty * width2[i]!;
    let own = heard[i] === 1 ? 2 : 0;
    let ownX = 0;
    let ownY = 0;
    let ownZ = 0;
    for (let j = g.offsets[i]!; j < g.offsets[i + 1]!; j++) {
      const x = g.coefficients[3 * j]!;
      const y = g.coefficients[3 * j + 1]!;
      const z = g.coefficients[3 * j + 2]!;
      const d =
        heard[i] === 1 ? sensitivity[3 * i]! * x + sensitivity[3 * i + 1]! * y + sensitivity[3 * i + 2]! * z : 0;
      out[g.others[j]!]! += d * d + mu * (x * x + y * y + z * z);
      own -= d;
      ownX += x;
      ownY += y;
      ownZ += z;
    }
    out[i]! += own * own + mu * (ownX * ownX + ownY * ownY + ownZ * ownZ);
  }
}

function innerSolve(
  multiply: (p: Float64Array, out: Float64Array) => void,
  diagonal: Float64Array,
  right: Float64Array,
): Float64Array {
  const n = right.length;
  const x = new Float64Array(n);
  const r = right.slice();
  const p = new Float64Array(n);
  const ap = new Float64Array(n);
  let rz = 0;
  for (let i = 0; i < n; i++) {
    p[i] = r[i]! / diagonal[i]!;
    rz += r[i]! * p[i]!;
  }
  const stop = 1e-4 * rz;
  for (let step = 0; step < innerSteps && rz > stop && rz > 0; step++) {
    multiply(p, ap);
    let pap = 0;
    for (let i = 0; i < n; i++) pap += p[i]! * ap[i]!;
    const alpha = rz / pap;
    let next = 0;
    for (let i = 0; i < n; i++) {
      x[i]! += alpha * p[i]!;
      r[i]! -= alpha * ap[i]!;
      next += (r[i]! * r[i]!) / diagonal[i]!;
    }
    const beta = next / rz;
    for (let i = 0; i < n; i++) p[i] = r[i]! / diagonal[i]! + beta * p[i]!;
    rz = next;
  }
  return x;
}
