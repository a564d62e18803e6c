/** Symmetric 3 x 3 tensors as six numbers XX XY XZ YY YZ ZZ. */

/**
 * Eigenvalues and eigenvectors by Jacobi's rotations.
 *
 * @param t        array holding the tensor at `at`
 * @param values   3 eigenvalues, unsorted
 * @param vectors  9 numbers, eigenvector j in 3 j ... 3 j + 2
 */
export function eigenSymmetric(t: ArrayLike<number>, at: number, values: Float64Array, vectors: Float64Array): void {
  let xx = t[at]!;
  let xy = t[at + 1]!;
  let xz = t[at + 2]!;
  let yy = t[at + 3]!;
  let yz = t[at + 4]!;
  let zz = t[at + 5]!;
  vectors.fill(0);
  vectors[0] = 1;
  vectors[4] = 1;
  vectors[8] = 1;
  const tiny = 1e-30 + 1e-28 * (xx * xx + yy * yy + zz * zz);
  for (let sweep = 0; sweep < 20; sweep++) {
    if (xy * xy + xz * xz + yz * yz <= tiny) break;
    for (let pair = 0; pair < 3; pair++) {
      const p = pair === 2 ? 1 : 0;
      const q = pair === 0 ? 1 : 2;
      const off = pair === 0 ? xy : pair === 1 ? xz : yz;
      if (off === 0) continue;
      const dp = p === 0 ? xx : yy;
      const dq = q === 1 ? yy : zz;
      const theta = (dq - dp) / (2 * off);
      const tan = (theta < 0 ? -1 : 1) / (Math.abs(theta) + Math.sqrt(theta * theta + 1));
      const c = 1 / Math.sqrt(tan * tan + 1);
      const s = tan * c;
      if (pair === 0) {
        xx -= tan * off;
        yy += tan * off;
        xy = 0;
        const a = xz;
        xz = c * a - s * yz;
        yz = s * a + c * yz;
      } else if (pair === 1) {
        xx -= tan * off;
        zz += tan * off;
        xz = 0;
        const a = xy;
        xy = c * a - s * yz;
        yz = s * a + c * yz;
      } else {
        yy -= tan * off;
        zz += tan * off;
        yz = 0;
        const a = xy;
        xy = c * a - s * xz;
        xz = s * a + c * xz;
      }
      for (let r = 0; r < 3; r++) {
        const vp = vectors[3 * p + r]!;
        const vq = vectors[3 * q + r]!;
        vectors[3 * p + r] = c * vp - s * vq;
        vectors[3 * q + r] = s * vp + c * vq;
      }
    }
  }
  values[0] = xx;
  values[1] = yy;
  values[2] = zz;
}

/** The tensor with the given eigenvalues and eigenvectors. */
export function composeSymmetric(
  values: ArrayLike<number>,
  vectors: ArrayLike<number>,
  out: Float32Array | Float64Array,
  at: number,
): void {
  let c = at;
  for (let i = 0; i < 3; i++)
    for (let j = i; j < 3; j++) {
      out[c++] =
        values[0]! * vectors[i]! * vectors[j]! +
        values[1]! * vectors[3 + i]! * vectors[3 + j]! +
        values[2]! * vectors[6 + i]! * vectors[6 + j]!;
    }
}

/** Smallest and largest eigenvalue in closed form (Smith 1961, Comm. ACM 4:168); `out` gets the two. */
export function extremeEigenvalues(t: ArrayLike<number>, at: number, out: Float64Array): void {
  const xx = t[at]!;
  const xy = t[at + 1]!;
  const xz = t[at + 2]!;
  const yy = t[at + 3]!;
  const yz = t[at + 4]!;
  const zz = t[at + 5]!;
  const m = (xx + yy + zz) / 3;
  const a = xx - m;
  const b = yy - m;
  const c = zz - m;
  const p2 = (a * a + b * b + c * c + 2 * (xy * xy + xz * xz + yz * yz)) / 6;
  if (p2 <= 1e-28 * m * m) {
    out[0] = m;
    out[1] = m;
    return;
  }
  const p = Math.sqrt(p2);
  const det = a * (b * c - yz * yz) - xy * (xy * c - yz * xz) + xz * (xy * yz - b * xz);
  const r = Math.min(1, Math.max(-1, det / (2 * p2 * p)));
  const phi = Math.acos(r) / 3;
  out[1] = m + 2 * p * Math.cos(phi);
  out[0] = m + 2 * p * Math.cos(phi + (2 * Math.PI) / 3);
}

/** Solves a dense symmetric positive definite system in place by Cholesky's factors; false when it is not definite. */
export function solveDefinite(matrix: Float64Array, rhs: Float64Array): boolean {
  const n = rhs.length;
  for (let j = 0; j < n; j++) {
    let d = matrix[j * n + j]!;
    for (let k = 0; k < j; k++) d -= matrix[j * n + k]! ** 2;
    if (!(d > 0)) return false;
    const root = Math.sqrt(d);
    matrix[j * n + j] = root;
    for (let i = j + 1; i < n; i++) {
      let s = matrix[i * n + j]!;
      for (let k = 0; k < j; k++) s -= matrix[i * n + k]! * matrix[j * n + k]!;
      matrix[i * n + j] = s / root;
    }
  }
  for (let i = 0; i < n; i++) {
    let s = rhs[i]!;
    for (let k = 0; k < i; k++) s -= matrix[i * n + k]! * rhs[k]!;
    rhs[i] = s / matrix[i * n + i]!;
  }
  for (let i = n - 1; i >= 0; i--) {
    let s = rhs[i]!;
    for (let k = i + 1; k < n; k++) s -= matrix[k * n + i]! * rhs[k]!;
    rhs[i] = s / matrix[i * n + i]!;
  }
  return true;
}
