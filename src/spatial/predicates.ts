import { insphere as adaptiveInSphere, orient3d as adaptiveOrientation } from 'robust-predicates';

/*
 * Exact signs behind a cheap filter. The filters bound Shewchuk's permanents by the largest coordinate differences,
 * so that most calls end after one determinant; the others go to the adaptive predicates.
 *
 * @see Shewchuk 1997, Discrete & Computational Geometry 18:305, error bounds o3derrboundA = (7 + 56 e) e and
 * isperrboundA = (16 + 224 e) e with e = 2^-53; the permanents are at most 6 mx my mz and
 * 24 mx my mz (mx^2 + my^2 + mz^2).
 */
const orientationBound = 7.8e-16 * 6;
const inSphereBound = 1.8e-15 * 24;

/**
 * Six times the signed volume of the tetrahedron a b c d (points by number in `p`), sign exact: positive for
 * a = 0, b = x, c = y, d = z.
 */
export function orientation(p: Float64Array, a: number, b: number, c: number, d: number): number {
  return orientationAt(p, a, b, c, p[3 * d] as number, p[3 * d + 1] as number, p[3 * d + 2] as number);
}

/** The same with the last corner given by its coordinates. */
export function orientationAt(
  p: Float64Array,
  a: number,
  b: number,
  c: number,
  x: number,
  y: number,
  z: number,
): number {
  const ax = p[3 * a] as number;
  const ay = p[3 * a + 1] as number;
  const az = p[3 * a + 2] as number;
  const bx = p[3 * b] as number;
  const by = p[3 * b + 1] as number;
  const bz = p[3 * b + 2] as number;
  const cx = p[3 * c] as number;
  const cy = p[3 * c + 1] as number;
  const cz = p[3 * c + 2] as number;
  const adx = ax - x;
  const ady = ay - y;
  const adz = az - z;
  const bdx = bx - x;
  const bdy = by - y;
  const bdz = bz - z;
  const cdx = cx - x;
  const cdy = cy - y;
  const cdz = cz - z;
  const det = adz * (cdx * bdy - bdx * cdy) + bdz * (adx * cdy - cdx * ady) + cdz * (bdx * ady - adx * bdy);
  const mx = Math.max(Math.abs(adx), Math.abs(bdx), Math.abs(cdx));
  const my = Math.max(Math.abs(ady), Math.abs(bdy), Math.abs(cdy));
  const mz = Math.max(Math.abs(adz), Math.abs(bdz), Math.abs(cdz));
  const bound = orientationBound * mx * my * mz;
  if (det > bound || -det > bound) return det;
  return -adaptiveOrientation(ax, ay, az, bx, by, bz, cx, cy, cz, x, y, z);
}

/**
 * Positive when point e lies strictly inside the sphere through a b c d (positively oriented), negative outside,
 * 0 on it; sign exact.
 */
export function inSphere(p: Float64Array, a: number, b: number, c: number, d: number, e: number): number {
  const ex = p[3 * e] as number;
  const ey = p[3 * e + 1] as number;
  const ez = p[3 * e + 2] as number;
  const aex = (p[3 * a] as number) - ex;
  const aey = (p[3 * a + 1] as number) - ey;
  const aez = (p[3 * a + 2] as number) - ez;
  const bex = (p[3 * b] as number) - ex;
  const bey = (p[3 * b + 1] as number) - ey;
  const bez = (p[3 * b + 2] as number) - ez;
  const cex = (p[3 * c] as number) - ex;
  const cey = (p[3 * c + 1] as number) - ey;
  const cez = (p[3 * c + 2] as number) - ez;
  const dex = (p[3 * d] as number) - ex;
  const dey = (p[3 * d + 1] as number) - ey;
  const dez = (p[3 * d + 2] as number) - ez;
  const ab = aex * bey - bex * aey;
  const bc = bex * cey - cex * bey;
  const cd = cex * dey - dex * cey;
  const da = dex * aey - aex * dey;
  const ac = aex * cey - cex * aey;
  const bd = bex * dey - dex * bey;
  const abc = aez * bc - bez * ac + cez * ab;
  const bcd = bez * cd - cez * bd + dez * bc;
  const cda = cez * da + dez * ac + aez * cd;
  const dab = dez * ab + aez * bd + bez * da;
  const alift = aex * aex + aey * aey + aez * aez;
  const blift = bex * bex + bey * bey + bez * bez;
  const clift = cex * cex + cey * cey + cez * cez;
  const dlift = dex * dex + dey * dey + dez * dez;
  // Determinant for the orientation in which the tetrahedra of this program are positive: sign turned.
  const det = -(dlift * abc - clift * dab + (blift * cda - alift * bcd));
  const mx = Math.max(Math.abs(aex), Math.abs(bex), Math.abs(cex), Math.abs(dex));
  const my = Math.max(Math.abs(aey), Math.abs(bey), Math.abs(cey), Math.abs(dey));
  const mz = Math.max(Math.abs(aez), Math.abs(bez), Math.abs(cez), Math.abs(dez));
  const bound = inSphereBound * mx * my * mz * (mx * mx + my * my + mz * mz);
  if (det > bound || -det > bound) return det;
  return exactInSphere(p, a, b, c, d, e);
}

function exactInSphere(p: Float64Array, a: number, b: number, c: number, d: number, e: number): number {
  return adaptiveInSphere(
    p[3 * a] as number,
    p[3 * a + 1] as number,
    p[3 * a + 2] as number,
    p[3 * b] as number,
    p[3 * b + 1] as number,
    p[3 * b + 2] as number,
    p[3 * c] as number,
    p[3 * c + 1] as number,
    p[3 * c + 2] as number,
    p[3 * d] as number,
    p[3 * d + 1] as number,
    p[3 * d + 2] as number,
    p[3 * e] as number,
    p[3 * e + 1] as number,
    p[3 * e + 2] as number,
  );
}
