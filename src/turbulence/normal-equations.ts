import type { Basis } from './multiplier-field.js';
import { solveDefinite } from './symmetric.js';

/** Rows of a sparse matrix: values and columns of row r at offsets[r] ... offsets[r + 1] - 1. */
export interface SparseRows {
  readonly offsets: Int32Array;
  readonly columns: Int32Array;
  readonly values: Float64Array;
}

/** Unknowns up to which the normal equations are solved by Cholesky's factors. */
const denseLimit = 600;

/**
 * Step s of Gauss-Newton: minimises |J s + r|^2 + mu sum over boxes |grad(v + s)|^2 + tiny |s|^2.
 *
 * @param bases  gradient of the unknown function at the boxes
 * @param mu     weight of the gradients, m2
 * @param ridge  weight of |s|^2, share of the largest diagonal: keeps steps short along what no residual sees
 */
export function solveNormal(
  jacobian: SparseRows,
  residual: Float64Array,
  bases: readonly Basis[],
  mu: number,
  values: Float64Array,
  ridge: number,
): Float64Array {
  const n = values.length;
  const rightSide = new Float64Array(n);
  const rows = residual.length;
  for (let r = 0; r < rows; r++)
    for (let j = jacobian.offsets[r]!; j < jacobian.offsets[r + 1]!; j++)
      rightSide[jacobian.columns[j]!]! -= jacobian.values[j]! * residual[r]!;
  for (const basis of bases) {
    for (let a = 0; a < 3; a++) {
      let g = 0;
      for (let i = 0; i < basis.count; i++) g += basis.gradient[3 * i + a]! * values[basis.index[i]!]!;
      for (let i = 0; i < basis.count; i++) rightSide[basis.index[i]!]! -= mu * g * basis.gradient[3 * i + a]!;
    }
  }
  const diagonal = new Float64Array(n);
  for (let j = 0; j < jacobian.values.length; j++) diagonal[jacobian.columns[j]!]! += jacobian.values[j]! ** 2;
  const tiny = ridge * Math.max(1e-30, ...diagonal);
  if (n <= denseLimit) {
    const matrix = new Float64Array(n * n);
    for (let r = 0; r < rows; r++)
      for (let j = jacobian.offsets[r]!; j < jacobian.offsets[r + 1]!; j++) {
        const row = jacobian.columns[j]! * n;
        for (let l = jacobian.offsets[r]!; l < jacobian.offsets[r + 1]!; l++)
          matrix[row + jacobian.columns[l]!]! += jacobian.values[j]! * jacobian.values[l]!;
      }
    for (const basis of bases)
      for (let i = 0; i < basis.count; i++)
        for (let j = 0; j < basis.count; j++) {
          let product = 0;
          for (let a = 0; a < 3; a++) product += basis.gradient[3 * i + a]! * basis.gradient[3 * j + a]!;
          matrix[basis.index[i]! * n + basis.index[j]!]! += mu * product;
        }
    for (let i = 0; i < n; i++) matrix[i * n + i]! += tiny;
    if (solveDefinite(matrix, rightSide)) return rightSide;
    return new Float64Array(n);
  }
  return conjugateGradients(jacobian, bases, mu, tiny, diagonal, rightSide);
}

function conjugateGradients(
  jacobian: SparseRows,
  bases: readonly Basis[],
  mu: number,
  tiny: number,
  diagonal: Float64Array,
  rightSide: Float64Array,
): Float64Array {
  const n = rightSide.length;
  const rows = jacobian.offsets.length - 1;
  const multiply = (x: Float64Array, out: Float64Array): void => {
    for (let i = 0; i < n; i++) out[i] = tiny * x[i]!;
    for (let r = 0; r < rows; r++) {
      let sum = 0;
      const end = jacobian.offsets[r + 1]!;
      for (let j = jacobian.offsets[r]!; j < end; j++) sum += jacobian.values[j]! * x[jacobian.columns[j]!]!;
      for (let j = jacobian.offsets[r]!; j < end; j++) out[jacobian.columns[j]!]! += jacobian.values[j]! * sum;
    }
    for (const basis of bases)
      for (let a = 0; a < 3; a++) {
        let g = 0;
        for (let i = 0; i < basis.count; i++) g += basis.gradient[3 * i + a]! * x[basis.index[i]!]!;
        for (let i = 0; i < basis.count; i++) out[basis.index[i]!]! += mu * g * basis.gradient[3 * i + a]!;
      }
  };
  const scale = diagonal.map((d) => 1 / (d + tiny));
  const x = new Float64Array(n);
  const r = rightSide.slice();
  const z = r.map((v, i) => v * scale[i]!);
  const p = z.slice();
  const ap = new Float64Array(n);
  let rz = r.reduce((s, v, i) => s + v * z[i]!, 0);
  const stop = 1e-8 * rz;
  for (let step = 0; step < 200 && rz > stop && rz > 0; step++) {
    multiply(p, ap);
    const alpha = rz / p.reduce((s, v, i) => s + v * ap[i]!, 0);
    for (let i = 0; i < n; i++) {
      x[i]! += alpha * p[i]!;
      r[i]! -= alpha * ap[i]!;
      z[i] = r[i]! * scale[i]!;
    }
    const next = r.reduce((s, v, i) => s + v * z[i]!, 0);
    for (let i = 0; i < n; i++) p[i] = z[i]! + (next / rz) * p[i]!;
    rz = next;
  }
  return x;
}
