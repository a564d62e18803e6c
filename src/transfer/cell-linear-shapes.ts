/** Shape functions of cells with few corners, on the unit cell (VTK corner order; voxels are re-ordered to hexahedra). */
export type ShapeKind = 4 | 5 | 6 | 8;

/** Shape functions (n) and their derivatives (3 x n: d/dr, d/ds, d/dt of each). */
function evaluateShape(kind: ShapeKind, r: number, s: number, t: number, n: Float64Array, d: Float64Array): void {
  const put = (i: number, value: number, dr: number, ds: number, dt: number): void => {
    n[i] = value;
    d[3 * i] = dr;
    d[3 * i + 1] = ds;
    d[3 * i + 2] = dt;
  };
  const q = 1 - r;
  const p = 1 - s;
  const u = 1 - t;
  if (kind === 4) {
    put(0, 1 - r - s - t, -1, -1, -1);
    put(1, r, 1, 0, 0);
    put(2, s, 0, 1, 0);
    put(3, t, 0, 0, 1);
  } else if (kind === 5) {
    put(0, q * p * u, -p * u, -q * u, -q * p);
    put(1, r * p * u, p * u, -r * u, -r * p);
    put(2, r * s * u, s * u, r * u, -r * s);
    put(3, q * s * u, -s * u, q * u, -q * s);
    put(4, t, 0, 0, 1);
  } else if (kind === 6) {
    const l = 1 - r - s;
    put(0, l * u, -u, -u, -l);
    put(1, r * u, u, 0, -r);
    put(2, s * u, 0, u, -s);
    put(3, l * t, -t, -t, l);
    put(4, r * t, t, 0, r);
    put(5, s * t, 0, t, s);
  } else {
    put(0, q * p * u, -p * u, -q * u, -q * p);
    put(1, r * p * u, p * u, -r * u, -r * p);
    put(2, r * s * u, s * u, r * u, -r * s);
    put(3, q * s * u, -s * u, q * u, -q * s);
    put(4, q * p * t, -p * t, -q * t, q * p);
    put(5, r * p * t, p * t, -r * t, r * p);
    put(6, r * s * t, s * t, r * t, r * s);
    put(7, q * s * t, -s * t, q * t, q * s);
  }
}

const derivatives = new Float64Array(24);

/**
 * Weights of the corners at a place: shape functions where the unit cell maps onto it, found by Newton's iteration.
 *
 * @param corners  3 x kind, relative to the place
 * @param weights  kind, written; their sum is 1 and the weighted corners are the place
 * @returns false when the iteration does not settle in the unit cell (places by warped faces, apex of a pyramid, cells so
 *   distorted that the map folds)
 */
export function shapeWeights(kind: ShapeKind, corners: Float64Array, weights: Float64Array): boolean {
  let r = kind === 8 || kind === 5 ? 0.5 : 0.25;
  let s = r;
  let t = kind === 5 ? 0.25 : kind === 6 ? 0.5 : r;
  let size = 0;
  let sense = 0;
  for (let i = 0; i < 3 * kind; i++) size = Math.max(size, Math.abs(corners[i]!));
  for (let round = 0; round < 20; round++) {
    evaluateShape(kind, r, s, t, weights, derivatives);
    let fx = 0;
    let fy = 0;
    let fz = 0;
    let xr = 0;
    let xs = 0;
    let xt = 0;
    let yr = 0;
    let ys = 0;
    let yt = 0;
    let zr = 0;
    let zs = 0;
    let zt = 0;
    for (let i = 0; i < kind; i++) {
      const x = corners[3 * i]!;
      const y = corners[3 * i + 1]!;
      const z = corners[3 * i + 2]!;
      const w = weights[i]!;
      const dr = derivatives[3 * i]!;
      const ds = derivatives[3 * i + 1]!;
      const dt = derivatives[3 * i + 2]!;
      fx += w * x;
      fy += w * y;
      fz += w * z;
      xr += dr * x;
      xs += ds * x;
      xt += dt * x;
      yr += dr * y;
      ys += ds * y;
      yt += dt * y;
      zr += dr * z;
      zs += ds * z;
      zt += dt * z;
    }
    const cx = ys * zt - yt * zs;
    const cy = yt * zr - yr * zt;
    const cz = yr * zs - ys * zr;
    const det = xr * cx + xs * cy + xt * cz;
    if (round === 0) sense = Math.sign(det);
    if (Math.abs(fx) + Math.abs(fy) + Math.abs(fz) <= 1e-14 * size) {
      const low = Math.min(r, s, t);
      const high = Math.max(r, s, t);
      // Where the map has folded over, another point of the unit cell belongs to the place.
      return low >= -1e-9 && high <= 1 + 1e-9 && det * sense > 0;
    }
    if (!(Math.abs(det) > 1e-20 * size * size * size)) return false;
    r -= (fx * cx + fy * (xt * zs - xs * zt) + fz * (xs * yt - xt * ys)) / det;
    s -= (fx * cy + fy * (xr * zt - xt * zr) + fz * (xt * yr - xr * yt)) / det;
    t -= (fx * cz + fy * (xs * zr - xr * zs) + fz * (xr * ys - xs * yr)) / det;
    if (!(Math.abs(r) < 4 && Math.abs(s) < 4 && Math.abs(t) < 4)) return false;
  }
  return false;
}
