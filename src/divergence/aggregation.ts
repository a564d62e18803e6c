import type { SparseMatrix } from './wide-matrix.js';

/**
 * Aggregation multigrid: levels by two passes of pairwise matching along the strongest negative coupling, Galerkin
 * coarse matrices with piecewise constant prolongation, symmetric Gauss-Seidel, and on every coarser level two steps
 * of flexible conjugate gradients (the K-cycle). Matching by strength follows the wide stencil of an interpolated-face
 * operator, which couples next neighbours but one: its checkerboard near-null vectors are constants on the aggregates.
 *
 * @see Notay 2010, Electronic Transactions on Numerical Analysis 37:123 (pairwise aggregation, K-cycle);
 * Notay & Vassilevski 2008, Numerical Linear Algebra with Applications 15:473
 */
export interface Hierarchy {
  readonly levels: readonly Level[];
}

interface Level {
  readonly matrix: SparseMatrix;
  /** Aggregate of every unknown on the next level; absent on the coarsest. */
  readonly aggregateOf?: Int32Array;
  readonly work: {
    readonly residual: Float64Array;
    readonly rhs: Float64Array;
    readonly x: Float64Array;
    readonly z: Float64Array;
    readonly d1: Float64Array;
    readonly q1: Float64Array;
    readonly d2: Float64Array;
    readonly q2: Float64Array;
    readonly r: Float64Array;
  };
}

const coarsest = 400;
const strong = 0.25;
const mostLevels = 30;

function pairwise(matrix: SparseMatrix): { aggregateOf: Int32Array; count: number } {
  const { size, rowStarts, columns, values } = matrix;
  const aggregateOf = new Int32Array(size).fill(-1);
  let count = 0;
  for (let i = 0; i < size; i += 1) {
    if (aggregateOf[i] !== -1) continue;
    let strongest = 0;
    let mate = -1;
    let mateValue = 0;
    for (let e = rowStarts[i] as number; e < (rowStarts[i + 1] as number); e += 1) {
      const value = values[e] as number;
      if (value < strongest) strongest = value;
      if (aggregateOf[columns[e] as number] === -1 && columns[e] !== i && value < mateValue) {
        mate = columns[e] as number;
        mateValue = value;
      }
    }
    aggregateOf[i] = count;
    if (mate >= 0 && mateValue <= strong * strongest) aggregateOf[mate] = count;
    count += 1;
  }
  return { aggregateOf, count };
}

function galerkin(matrix: SparseMatrix, aggregateOf: Int32Array, count: number): SparseMatrix {
  const { size, rowStarts, columns, values, diagonal: fine } = matrix;
  const starts = new Int32Array(count + 1);
  for (let i = 0; i < size; i += 1) {
    const g = (aggregateOf[i] as number) + 1;
    starts[g] = (starts[g] as number) + 1;
  }
  for (let g = 0; g < count; g += 1) starts[g + 1] = (starts[g + 1] as number) + (starts[g] as number);
  const members = new Int32Array(size);
  const at = starts.slice(0, count);
  for (let i = 0; i < size; i += 1) {
    const g = aggregateOf[i] as number;
    members[at[g] as number] = i;
    at[g] = (at[g] as number) + 1;
  }
  const rowStart = new Int32Array(count + 1);
  const outColumns = new Int32Array(columns.length);
  const outValues = new Float32Array(columns.length);
  const diagonal = new Float64Array(count);
  const slotOf = new Int32Array(count).fill(-1);
  let used = 0;
  for (let g = 0; g < count; g += 1) {
    const first = used;
    let own = 0;
    for (let m = starts[g] as number; m < (starts[g + 1] as number); m += 1) {
      const i = members[m] as number;
      own += fine[i] as number;
      for (let e = rowStarts[i] as number; e < (rowStarts[i + 1] as number); e += 1) {
        const h = aggregateOf[columns[e] as number] as number;
        if (h === g) {
          own += values[e] as number;
          continue;
        }
        let slot = slotOf[h] as number;
        if (slot < first) {
          slot = used;
          slotOf[h] = slot;
          outColumns[slot] = h;
          outValues[slot] = 0;
          used += 1;
        }
        outValues[slot] = (outValues[slot] as number) + (values[e] as number);
      }
    }
    diagonal[g] = own;
    rowStart[g + 1] = used;
  }
  return {
    size: count,
    rowStarts: rowStart,
    columns: outColumns.slice(0, used),
    values: outValues.slice(0, used),
    diagonal,
  };
}

function createWork(size: number, isFinest: boolean): Level['work'] {
  const make = (): Float64Array => new Float64Array(size);
  // The finest level lends only its residual: the outer iteration has vectors of its own.
  const none = new Float64Array(0);
  const coarse = (): Float64Array => (isFinest ? none : make());
  return {
    residual: make(),
    rhs: coarse(),
    x: coarse(),
    z: coarse(),
    d1: coarse(),
    q1: coarse(),
    d2: coarse(),
    q2: coarse(),
    r: coarse(),
  };
}

/** Builds the levels of a symmetric, positive (semi-)definite matrix. */
export function buildHierarchy(matrix: SparseMatrix): Hierarchy {
  const levels: Level[] = [];
  let present = matrix;
  while (levels.length < mostLevels) {
    const work = createWork(present.size, levels.length === 0);
    if (present.size <= coarsest) {
      levels.push({ matrix: present, work });
      break;
    }
    const first = pairwise(present);
    const middle = galerkin(present, first.aggregateOf, first.count);
    const second = pairwise(middle);
    if (second.count > 0.9 * present.size) {
      levels.push({ matrix: present, work });
      break;
    }
    const aggregateOf = first.aggregateOf.map((g) => second.aggregateOf[g] as number);
    levels.push({ matrix: present, aggregateOf, work });
    present = galerkin(middle, second.aggregateOf, second.count);
  }
  return { levels };
}

/** Forward (or backward) Gauss-Seidel on M x = b. */
function gaussSeidel(matrix: SparseMatrix, b: Float64Array, x: Float64Array, forward: boolean): void {
  const { size, rowStarts, columns, values, diagonal } = matrix;
  for (let k = 0; k < size; k += 1) {
    const i = forward ? k : size - 1 - k;
    const d = diagonal[i] as number;
    if (d <= 0) continue;
    let sum = b[i] as number;
    const end = rowStarts[i + 1] as number;
    for (let e = rowStarts[i] as number; e < end; e += 1) {
      sum -= (values[e] as number) * (x[columns[e] as number] as number);
    }
    x[i] = sum / d;
  }
}

function multiply(matrix: SparseMatrix, x: Float64Array, out: Float64Array): void {
  const { size, rowStarts, columns, values, diagonal } = matrix;
  for (let i = 0; i < size; i += 1) {
    let sum = (diagonal[i] as number) * (x[i] as number);
    const end = rowStarts[i + 1] as number;
    for (let e = rowStarts[i] as number; e < end; e += 1) {
      sum += (values[e] as number) * (x[columns[e] as number] as number);
    }
    out[i] = sum;
  }
}

export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i += 1) sum += (a[i] as number) * (b[i] as number);
  return sum;
}

const coarseSweeps = 12;

/** One cycle: x = M^-1 b, approximately; x is overwritten. */
export function cycle(hierarchy: Hierarchy, b: Float64Array, x: Float64Array, depth = 0): void {
  const level = hierarchy.levels[depth] as Level;
  const { matrix, aggregateOf, work } = level;
  x.fill(0);
  if (aggregateOf === undefined) {
    for (let sweep = 0; sweep < coarseSweeps; sweep += 1) {
      gaussSeidel(matrix, b, x, true);
      gaussSeidel(matrix, b, x, false);
    }
    return;
  }
  gaussSeidel(matrix, b, x, true);
  const { residual } = work;
  multiply(matrix, x, residual);
  const next = hierarchy.levels[depth + 1] as Level;
  const { rhs } = next.work;
  rhs.fill(0);
  for (let i = 0; i < matrix.size; i += 1) {
    const g = aggregateOf[i] as number;
    rhs[g] = (rhs[g] as number) + (b[i] as number) - (residual[i] as number);
  }
  solveCoarse(hierarchy, depth + 1);
  const coarse = next.work.x;
  for (let i = 0; i < matrix.size; i += 1) x[i] = (x[i] as number) + (coarse[aggregateOf[i] as number] as number);
  gaussSeidel(matrix, b, x, false);
}

/** At most two steps of flexible conjugate gradients on a coarser level, preconditioned by its own cycle. */
function solveCoarse(hierarchy: Hierarchy, depth: number): void {
  const level = hierarchy.levels[depth] as Level;
  const { matrix, work } = level;
  const { rhs, x, z, d1, q1, d2, q2, r } = work;
  if (level.aggregateOf === undefined) {
    cycle(hierarchy, rhs, x, depth);
    return;
  }
  const size = matrix.size;
  cycle(hierarchy, rhs, d1, depth);
  multiply(matrix, d1, q1);
  const rho1 = dot(d1, q1);
  if (!(rho1 > 0)) {
    x.set(d1);
    return;
  }
  const alpha1 = dot(d1, rhs) / rho1;
  let before = 0;
  let after = 0;
  for (let i = 0; i < size; i += 1) {
    const value = (rhs[i] as number) - alpha1 * (q1[i] as number);
    before += (rhs[i] as number) ** 2;
    after += value * value;
    r[i] = value;
  }
  if (after <= 0.0625 * before) {
    for (let i = 0; i < size; i += 1) x[i] = alpha1 * (d1[i] as number);
    return;
  }
  cycle(hierarchy, r, z, depth);
  d2.set(z);
  multiply(matrix, d2, q2);
  const gamma = dot(d2, q1);
  const beta = dot(d2, q2);
  const rho2 = beta - (gamma * gamma) / rho1;
  const alpha2 = dot(d2, r);
  const second = rho2 > 0 ? alpha2 / rho2 : 0;
  const first = alpha1 - (gamma * second) / rho1;
  for (let i = 0; i < size; i += 1) x[i] = first * (d1[i] as number) + second * (d2[i] as number);
}
