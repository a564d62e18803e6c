import { solveDefinite } from './symmetric.js';

/**
 * Exponential weights q_n = exp(a_n . Lambda a_n) / Z with the wanted second moment sum share_n q_n a_n a_n = R,
 * by Newton's iteration on the convex potential ln Z - Lambda : R.
 *
 * @param directions  3 x n unit vectors
 * @param shares      n, sum 1
 * @param wanted      R as XX XY XZ YY YZ ZZ, trace 1
 * @returns weights q_n (share-weighted mean 1) and the largest error of a component of R; undefined when no weights were found
 */
export function polarisationWeights(
  directions: Float64Array,
  shares: Float64Array,
  wanted: ArrayLike<number>,
): { weights: Float64Array; lambda: Float64Array; error: number } | undefined {
  const n = shares.length;
  const lambda = new Float64Array(6);
  const weights = new Float64Array(n);
  const products = new Float64Array(6 * n);
  for (let i = 0; i < n; i++) {
    let c = 0;
    for (let p = 0; p < 3; p++)
      for (let q = p; q < 3; q++)
        products[6 * i + c++] = (p === q ? 1 : 2) * directions[3 * i + p]! * directions[3 * i + q]!;
  }
  // Off-diagonal products are doubled in `products`, so off-diagonal components of R are doubled as targets.
  const target = Float64Array.from({ length: 6 }, (_, c) => wanted[c]! * (c === 0 || c === 3 || c === 5 ? 1 : 2));
  const evaluate = (l: Float64Array): { potential: number; moment: Float64Array; second: Float64Array } => {
    let z = 0;
    const moment = new Float64Array(6);
    const second = new Float64Array(36);
    let top = -Infinity;
    const exponent = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      let e = 0;
      for (let c = 0; c < 6; c++) e += l[c]! * products[6 * i + c]!;
      exponent[i] = e;
      top = Math.max(top, e);
    }
    for (let i = 0; i < n; i++) {
      const w = shares[i]! * Math.exp(exponent[i]! - top);
      weights[i] = w / shares[i]!;
      z += w;
      for (let c = 0; c < 6; c++) {
        moment[c]! += w * products[6 * i + c]!;
        for (let d = 0; d < 6; d++) second[6 * c + d]! += w * products[6 * i + c]! * products[6 * i + d]!;
      }
    }
    for (let i = 0; i < n; i++) weights[i]! /= z;
    let potential = Math.log(z) + top;
    for (let c = 0; c < 6; c++) {
      moment[c]! /= z;
      potential -= l[c]! * target[c]!;
    }
    for (let c = 0; c < 36; c++) second[c]! /= z;
    return { potential, moment, second };
  };
  let state = evaluate(lambda);
  for (let step = 0; step < 40; step++) {
    const residual = Float64Array.from({ length: 6 }, (_, c) => target[c]! - state.moment[c]!);
    const error = Math.max(...residual.map(Math.abs));
    if (error < 1e-12) return { weights, lambda, error };
    const matrix = new Float64Array(36);
    for (let c = 0; c < 6; c++)
      for (let d = 0; d < 6; d++)
        matrix[6 * c + d] = state.second[6 * c + d]! - state.moment[c]! * state.moment[d]! + (c === d ? 1e-9 : 0);
    // The trace of Lambda is free (|a| = 1): hold it at zero.
    for (const c of [0, 3, 5]) for (const d of [0, 3, 5]) matrix[6 * c + d]! += 1;
    if (!solveDefinite(matrix, residual)) return undefined;
    let length = 1;
    let next = state;
    const trial = new Float64Array(6);
    for (let halving = 0; halving < 30; halving++) {
      for (let c = 0; c < 6; c++) trial[c] = lambda[c]! + length * residual[c]!;
      next = evaluate(trial);
      if (next.potential <= state.potential + 1e-14) break;
      length *= 0.5;
    }
    lambda.set(trial);
    state = next;
    if (lambda.some((l) => Math.abs(l) > 300)) return undefined;
  }
  const error = Math.max(...Array.from({ length: 6 }, (_, c) => Math.abs(target[c]! - state.moment[c]!)));
  return error < 1e-6 ? { weights, lambda, error } : undefined;
}

/** Grid of the table over ln(r2 / r1), ln(r3 / r1). */
const step = 0.125;
const half = 40;
const size = 2 * half + 1;

/**
 * Multipliers for polarisations uniform on the sphere: with r the eigenvalues of R, lambda_2 - lambda_1 =
 * f(ln(r2 / r1), ln(r3 / r1)), and lambda_3 - lambda_1 by exchanging the arguments.
 */
export interface PolarisationTable {
  readonly values: Float64Array;
}

/** Second moments <a_i^2> of exp(sum lambda_i a_i^2) on the sphere. */
function sphereMoments(
  l: readonly [number, number, number],
  nodes: readonly (readonly [number, number, number, number])[],
) {
  const m = [0, 0, 0];
  const mm = new Float64Array(9);
  let z = 0;
  const top = Math.max(...l);
  for (const [a, b, c, w] of nodes) {
    const e = w * Math.exp(l[0] * a + l[1] * b + l[2] * c - top);
    z += e;
    const s = [a, b, c];
    for (let i = 0; i < 3; i++) {
      m[i]! += e * s[i]!;
      for (let j = 0; j < 3; j++) mm[3 * i + j]! += e * s[i]! * s[j]!;
    }
  }
  return { m: m.map((v) => v / z), mm: mm.map((v) => v / z) };
}

/** Squares of the components at the nodes of a product rule on one octant, concentrated near its edges. */
function octantNodes(): (readonly [number, number, number, number])[] {
  const n = 28;
  const nodes: (readonly [number, number, number, number])[] = [];
  const graded = (i: number, count: number): [number, number] => {
    // Midpoint rule after t = s^3 (10 - 15 s + 6 s^2), dense at both ends.
    const s = (i + 0.5) / count;
    return [s ** 3 * (10 - 15 * s + 6 * s * s), (30 * s * s * (1 - s) ** 2) / count];
  };
  for (let i = 0; i < n; i++) {
    const [c, wc] = graded(i, n);
    for (let j = 0; j < n; j++) {
      const [t, wt] = graded(j, n);
      const phi = (Math.PI / 2) * t;
      nodes.push([(1 - c * c) * Math.cos(phi) ** 2, (1 - c * c) * Math.sin(phi) ** 2, c * c, wc * wt]);
    }
  }
  return nodes;
}

function solveEigen(
  r: readonly number[],
  start: readonly [number, number, number],
  nodes: readonly (readonly [number, number, number, number])[],
): [number, number, number] {
  let l: [number, number, number] = [0, start[1] - start[0], start[2] - start[0]];
  for (let iteration = 0; iteration < 60; iteration++) {
    const { m, mm } = sphereMoments(l, nodes);
    const f = [r[1]! - m[1]!, r[2]! - m[2]!];
    if (Math.abs(f[0]!) / r[1]! + Math.abs(f[1]!) / r[2]! < 1e-10) break;
    const a = mm[4]! - m[1]! ** 2;
    const b = mm[5]! - m[1]! * m[2]!;
    const d = mm[8]! - m[2]! ** 2;
    const det = a * d - b * b;
    let s1 = (d * f[0]! - b * f[1]!) / det;
    let s2 = (a * f[1]! - b * f[0]!) / det;
    const longest = Math.max(Math.abs(s1) / (1 + Math.abs(l[1])), Math.abs(s2) / (1 + Math.abs(l[2])));
    if (longest > 0.5) {
      s1 *= 0.5 / longest;
      s2 *= 0.5 / longest;
    }
    l = [0, l[1] + s1, l[2] + s2];
  }
  return l;
}

let made: PolarisationTable | undefined;

/** Computes the table once a process (about 0.2 s). */
export function polarisationTable(): PolarisationTable {
  if (made !== undefined) return made;
  const nodes = octantNodes();
  const values = new Float64Array(size * size);
  // Only r1 >= r2 >= r3 is solved; the other orders follow by exchange.
  for (let i = 0; i <= half; i++) {
    let start: [number, number, number] = i === 0 ? [0, 0, 0] : [0, at(values, half - i + 1, half - i + 1), 0];
    start = [0, start[1], start[1]];
    for (let j = i; j <= half; j++) {
      const r2 = Math.exp(-i * step);
      const r3 = Math.exp(-j * step);
      const sum = 1 + r2 + r3;
      const l = solveEigen([1 / sum, r2 / sum, r3 / sum], start, nodes);
      start = l;
      put(values, -i, -j, l[1]);
      put(values, -j, -i, l[2]);
      // Reference eigenvalue 2 or 3 instead of 1: (ln r1/r2, ln r3/r2) and so on.
      put(values, i, i - j, -l[1]);
      put(values, i - j, i, l[2] - l[1]);
      put(values, j, j - i, -l[2]);
      put(values, j - i, j, l[1] - l[2]);
    }
  }
  made = { values };
  return made;
}

const at = (values: Float64Array, i: number, j: number): number => values[i * size + j]!;

function put(values: Float64Array, i: number, j: number, value: number): void {
  if (Math.abs(i) <= half && Math.abs(j) <= half) values[(i + half) * size + (j + half)] = value;
}

/** f(x, y) by bilinear interpolation of f, with Catmull-Rom's cubic along each axis. */
function lookUp(values: Float64Array, x: number, y: number): number {
  const u = Math.min(half - 1.001, Math.max(-half + 1, x / step)) + half;
  const v = Math.min(half - 1.001, Math.max(-half + 1, y / step)) + half;
  const i = Math.floor(u);
  const j = Math.floor(v);
  const s = u - i;
  const t = v - j;
  let sum = 0;
  for (let a = -1; a <= 2; a++) {
    const wa = cubic(a, s);
    const r = Math.min(size - 1, Math.max(0, i + a)) * size;
    for (let b = -1; b <= 2; b++) sum += wa * cubic(b, t) * values[r + Math.min(size - 1, Math.max(0, j + b))]!;
  }
  return sum;
}

function cubic(node: number, t: number): number {
  if (node === -1) return 0.5 * t * (-1 + t * (2 - t));
  if (node === 0) return 1 + 0.5 * t * t * (3 * t - 5);
  if (node === 1) return 0.5 * t * (1 + t * (4 - 3 * t));
  return 0.5 * t * t * (t - 1);
}

/** Ratio of eigenvalues below which tensors are clipped: no finite mode set carries flatter states. */
export const smallestShare = 0.01;

/**
 * Multipliers lambda (largest one 0) for the eigenvalues r of R, trace 1, each at least `smallestShare`.
 */
export function multipliersOf(table: PolarisationTable, r: Float64Array, out: Float64Array): void {
  let top = 0;
  if (r[1]! > r[top]!) top = 1;
  if (r[2]! > r[top]!) top = 2;
  const p = (top + 1) % 3;
  const q = (top + 2) % 3;
  const x = Math.log(r[p]! / r[top]!);
  const y = Math.log(r[q]! / r[top]!);
  out[top] = 0;
  out[p] = lookUp(table.values, x, y);
  out[q] = lookUp(table.values, y, x);
}
