/**
 * ln c of the multiplier of the potential as a smooth function with its analytic gradient; plain data.
 *
 * `layers`: a function of one coordinate, piecewise cubic through knots with three-point slopes (continuous slope).
 * `windows`: quadratic B-splines on a regular grid over one to three coordinates (continuous slope).
 * No axes: a constant.
 */
export interface MultiplierField {
  readonly kind: 'constant' | 'layers' | 'windows';
  /** 3 x axes, unit vectors of the coordinates on which c depends. */
  readonly axes: Float64Array;
  /** Knots of `layers`. */
  readonly knots: Float64Array;
  /** Of `windows`: first coordinate, spacing and number along each axis; numbers wrap round where `wrapped` is 1. */
  readonly origin: Float64Array;
  readonly spacing: Float64Array;
  readonly counts: Int32Array;
  readonly wrapped: Uint8Array;
  /** Values at the knots, or spline coefficients. */
  readonly values: Float64Array;
}

/** Coefficients with which ln c and its gradient at a point follow from `values`. */
export interface Basis {
  count: number;
  readonly index: Int32Array;
  readonly value: Float64Array;
  /** 3 x 27. */
  readonly gradient: Float64Array;
}

export function createBasis(): Basis {
  return { count: 0, index: new Int32Array(27), value: new Float64Array(27), gradient: new Float64Array(81) };
}

/** Slope at a knot as coefficients of the values at the knots before, at and behind it. */
function slopeWeights(knots: Float64Array, j: number): [number, number, number] {
  const n = knots.length;
  if (j === 0) {
    const h = knots[1]! - knots[0]!;
    return [0, -1 / h, 1 / h];
  }
  if (j === n - 1) {
    const h = knots[n - 1]! - knots[n - 2]!;
    return [-1 / h, 1 / h, 0];
  }
  const p = knots[j]! - knots[j - 1]!;
  const q = knots[j + 1]! - knots[j]!;
  return [-q / (p * (p + q)), 1 / p - 1 / q, p / (q * (p + q))];
}

function add(basis: Basis, index: number, value: number, slope: number, axis: Float64Array): void {
  for (let i = 0; i < basis.count; i++) {
    if (basis.index[i] === index) {
      basis.value[i]! += value;
      for (let a = 0; a < 3; a++) basis.gradient[3 * i + a]! += slope * axis[a]!;
      return;
    }
  }
  const i = basis.count++;
  basis.index[i] = index;
  basis.value[i] = value;
  for (let a = 0; a < 3; a++) basis.gradient[3 * i + a] = slope * axis[a]!;
}

function layerBasis(field: MultiplierField, s: number, basis: Basis): void {
  const { knots, axes } = field;
  const n = knots.length;
  if (n === 1) {
    add(basis, 0, 1, 0, axes);
    return;
  }
  let low = 0;
  let high = n - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (knots[middle]! <= s) low = middle;
    else high = middle;
  }
  const h = knots[low + 1]! - knots[low]!;
  const t = (s - knots[low]!) / h;
  const outside = t < 0 || t > 1;
  // Beyond the outermost knots the function goes on straight.
  const end = t < 0 ? 0 : 1;
  const values = outside ? [1 - end, end] : [(1 - t) ** 2 * (1 + 2 * t), t * t * (3 - 2 * t)];
  const slopes = outside ? [0, 0] : [(-6 * t * (1 - t)) / h, (6 * t * (1 - t)) / h];
  const fromSlope = outside ? [(1 - end) * t * h, end * (t - 1) * h] : [t * (1 - t) ** 2 * h, -t * t * (1 - t) * h];
  const slopeOfSlope = outside ? [1 - end, end] : [(1 - t) * (1 - 3 * t), t * (3 * t - 2)];
  for (let e = 0; e < 2; e++) {
    const j = low + e;
    add(basis, j, values[e]!, slopes[e]!, axes);
    const w = slopeWeights(knots, j);
    for (let d = 0; d < 3; d++) {
      if (w[d] !== 0) add(basis, j + d - 1, fromSlope[e]! * w[d]!, slopeOfSlope[e]! * w[d]!, axes);
    }
  }
}

const splineValues = new Float64Array(9);
const splineSlopes = new Float64Array(9);
const splineIndex = new Int32Array(9);

function windowBasis(field: MultiplierField, x: number, y: number, z: number, basis: Basis): void {
  const dimensions = field.counts.length;
  let total = 1;
  for (let d = 0; d < dimensions; d++) {
    const s = x * field.axes[3 * d]! + y * field.axes[3 * d + 1]! + z * field.axes[3 * d + 2]!;
    const n = field.counts[d]!;
    const h = field.spacing[d]!;
    const u = (s - field.origin[d]!) / h;
    const wraps = field.wrapped[d] === 1;
    const cell = wraps ? Math.floor(u) : Math.min(n - 3, Math.max(0, Math.floor(u)));
    const t = wraps ? u - cell : Math.min(1, Math.max(0, u - cell));
    splineValues[3 * d] = 0.5 * (1 - t) ** 2;
    splineValues[3 * d + 1] = 0.5 + t * (1 - t);
    splineValues[3 * d + 2] = 0.5 * t * t;
    const moves = wraps || (u - cell >= 0 && u - cell <= 1);
    splineSlopes[3 * d] = moves ? (t - 1) / h : 0;
    splineSlopes[3 * d + 1] = moves ? (1 - 2 * t) / h : 0;
    splineSlopes[3 * d + 2] = moves ? t / h : 0;
    for (let e = 0; e < 3; e++) splineIndex[3 * d + e] = wraps ? (((cell + e) % n) + n) % n : cell + e;
    total *= 3;
  }
  for (let i = 0; i < total; i++) {
    let index = 0;
    let stride = 1;
    let value = 1;
    let rest = i;
    for (let d = 0; d < dimensions; d++) {
      const e = 3 * d + (rest % 3);
      rest = Math.floor(rest / 3);
      index += stride * splineIndex[e]!;
      stride *= field.counts[d]!;
      value *= splineValues[e]!;
    }
    basis.index[i] = index;
    basis.value[i] = value;
    for (let a = 0; a < 3; a++) basis.gradient[3 * i + a] = 0;
    for (let d = 0; d < dimensions; d++) {
      let slope = 1;
      rest = i;
      for (let f = 0; f < dimensions; f++) {
        const e = 3 * f + (rest % 3);
        rest = Math.floor(rest / 3);
        slope *= f === d ? splineSlopes[e]! : splineValues[e]!;
      }
      for (let a = 0; a < 3; a++) basis.gradient[3 * i + a]! += slope * field.axes[3 * d + a]!;
    }
  }
  basis.count = total;
}

/** Fills `basis` for the point (x, y, z). */
export function basisAt(field: MultiplierField, x: number, y: number, z: number, basis: Basis): void {
  basis.count = 0;
  if (field.kind === 'constant') {
    basis.count = 1;
    basis.index[0] = 0;
    basis.value[0] = 1;
    basis.gradient.fill(0, 0, 3);
  } else if (field.kind === 'layers') {
    layerBasis(field, x * field.axes[0]! + y * field.axes[1]! + z * field.axes[2]!, basis);
  } else windowBasis(field, x, y, z, basis);
}

const shared = createBasis();

/** ln c at a point; `gradient` gets its three derivatives, 1/m. */
export function lnMultiplierAt(
  field: MultiplierField,
  x: number,
  y: number,
  z: number,
  gradient: Float64Array,
): number {
  basisAt(field, x, y, z, shared);
  let v = 0;
  gradient.fill(0);
  for (let i = 0; i < shared.count; i++) {
    const y0 = field.values[shared.index[i]!]!;
    v += shared.value[i]! * y0;
    for (let a = 0; a < 3; a++) gradient[a]! += shared.gradient[3 * i + a]! * y0;
  }
  return v;
}

/**
 * Applies the multiplier in place to cells [begin, end): A = c A0, u = curl(c A0) = c u0 + grad c x A0.
 *
 * @param centroids  3 x cells
 */
export function applyMultiplierRange(
  field: MultiplierField,
  centroids: Float64Array,
  potential: Float64Array,
  velocity: Float64Array,
  begin: number,
  end: number,
): void {
  const g = new Float64Array(3);
  for (let i = begin; i < end; i++) {
    const at = 3 * i;
    const c = Math.exp(lnMultiplierAt(field, centroids[at]!, centroids[at + 1]!, centroids[at + 2]!, g));
    const ax = potential[at]!;
    const ay = potential[at + 1]!;
    const az = potential[at + 2]!;
    velocity[at] = c * (velocity[at]! + g[1]! * az - g[2]! * ay);
    velocity[at + 1] = c * (velocity[at + 1]! + g[2]! * ax - g[0]! * az);
    velocity[at + 2] = c * (velocity[at + 2]! + g[0]! * ay - g[1]! * ax);
    potential[at] = c * ax;
    potential[at + 1] = c * ay;
    potential[at + 2] = c * az;
  }
}
