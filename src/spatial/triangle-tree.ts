import { sharedFloat64 } from '../basis/fields.js';
import { type BoxTree, buildBoxTree } from './box-tree.js';

/** Triangles in a bounding-volume tree. */
export interface TriangleTree {
  readonly tree: BoxTree;
  /** 9 x triangles: three vertices, in the order of `tree.items`. */
  readonly corners: Float64Array;
}

/** Result of `nearestTriangle`; used again. */
export interface NearestTriangle {
  /** Number of the triangle as given to `buildTriangleTree`, -1 when none is closer than the limit. */
  triangle: number;
  distance2: number;
  /** Its place in the tree's order, -1 when none. */
  place: number;
  /** Nodes and triangles are searched with this place first; keep it between near-by queries. */
  hint: number;
}

export function createNearestTriangle(): NearestTriangle {
  return { triangle: -1, distance2: Infinity, place: -1, hint: -1 };
}

/** @param triangles  9 x n: three vertices each, metres */
export function buildTriangleTree(triangles: Float64Array): TriangleTree {
  const n = triangles.length / 9;
  const boxes = new Float64Array(6 * n);
  for (let t = 0; t < n; t++)
    for (let a = 0; a < 3; a++) {
      const p = triangles[9 * t + a]!;
      const q = triangles[9 * t + 3 + a]!;
      const r = triangles[9 * t + 6 + a]!;
      boxes[6 * t + a] = Math.min(p, q, r);
      boxes[6 * t + 3 + a] = Math.max(p, q, r);
    }
  const tree = buildBoxTree(boxes);
  const corners = sharedFloat64(9 * n);
  for (let i = 0; i < n; i++) corners.set(triangles.subarray(9 * tree.items[i]!, 9 * tree.items[i]! + 9), 9 * i);
  return { tree, corners };
}

/** Square of the distance between a point and the triangle at `o`: projection onto the region of the triangle it falls in. */
function triangleDistance2(c: Float64Array, o: number, x: number, y: number, z: number): number {
  const ax = c[o]!;
  const ay = c[o + 1]!;
  const az = c[o + 2]!;
  const ux = c[o + 3]! - ax;
  const uy = c[o + 4]! - ay;
  const uz = c[o + 5]! - az;
  const vx = c[o + 6]! - ax;
  const vy = c[o + 7]! - ay;
  const vz = c[o + 8]! - az;
  const px = x - ax;
  const py = y - ay;
  const pz = z - az;
  const uu = ux * ux + uy * uy + uz * uz;
  const uv = ux * vx + uy * vy + uz * vz;
  const vv = vx * vx + vy * vy + vz * vz;
  const up = ux * px + uy * py + uz * pz;
  const vp = vx * px + vy * py + vz * pz;
  const det = uu * vv - uv * uv;
  let s = vv * up - uv * vp;
  let t = uu * vp - uv * up;
  if (s >= 0 && t >= 0 && s + t <= det && det > 0) {
    s /= det;
    t /= det;
    const dx = px - s * ux - t * vx;
    const dy = py - s * uy - t * vy;
    const dz = pz - s * uz - t * vz;
    return dx * dx + dy * dy + dz * dz;
  }
  // On the rim: the nearest of the three edges.
  let best = square(px, py, pz);
  if (uu > 0) {
    s = up < 0 ? 0 : up > uu ? 1 : up / uu;
    best = Math.min(best, square(px - s * ux, py - s * uy, pz - s * uz));
  }
  if (vv > 0) {
    t = vp < 0 ? 0 : vp > vv ? 1 : vp / vv;
    best = Math.min(best, square(px - t * vx, py - t * vy, pz - t * vz));
  }
  const wx = vx - ux;
  const wy = vy - uy;
  const wz = vz - uz;
  const ww = wx * wx + wy * wy + wz * wz;
  if (ww > 0) {
    const qx = px - ux;
    const qy = py - uy;
    const qz = pz - uz;
    const wq = wx * qx + wy * qy + wz * qz;
    const r = wq < 0 ? 0 : wq > ww ? 1 : wq / ww;
    best = Math.min(best, square(qx - r * wx, qy - r * wy, qz - r * wz));
  }
  return best;
}

const square = (dx: number, dy: number, dz: number): number => dx * dx + dy * dy + dz * dz;

const stack = new Int32Array(64);
const stackDistance = new Float64Array(64);

function boxDistance2(b: Float64Array, o: number, x: number, y: number, z: number): number {
  const dx = x < b[o]! ? b[o]! - x : x > b[o + 3]! ? x - b[o + 3]! : 0;
  const dy = y < b[o + 1]! ? b[o + 1]! - y : y > b[o + 4]! ? y - b[o + 4]! : 0;
  const dz = z < b[o + 2]! ? b[o + 2]! - z : z > b[o + 5]! ? z - b[o + 5]! : 0;
  return dx * dx + dy * dy + dz * dz;
}

/**
 * Finds the triangle nearest to a point, if it is closer than the square root of `limit2`.
 *
 * The distance does not depend on the hint or on the order of the search; among triangles at exactly the same distance
 * the number may.
 */
export function nearestTriangle(
  triangles: TriangleTree,
  x: number,
  y: number,
  z: number,
  limit2: number,
  result: NearestTriangle,
): void {
  const { bounds, right, first, count, items } = triangles.tree;
  const { corners } = triangles;
  let best = limit2;
  let place = -1;
  if (result.hint >= 0) {
    const d = triangleDistance2(corners, 9 * result.hint, x, y, z);
    if (d < best) {
      best = d;
      place = result.hint;
    }
  }
  let top = 0;
  const d0 = boxDistance2(bounds, 0, x, y, z);
  if (items.length > 0 && d0 < best) {
    stack[0] = 0;
    stackDistance[0] = d0;
    top = 1;
  }
  while (top > 0) {
    top--;
    if (stackDistance[top]! >= best) continue;
    const node = stack[top]!;
    const r = right[node]!;
    if (r < 0) {
      const begin = first[node]!;
      for (let i = begin; i < begin + count[node]!; i++) {
        const d = triangleDistance2(corners, 9 * i, x, y, z);
        if (d < best) {
          best = d;
          place = i;
        }
      }
      continue;
    }
    const dl = boxDistance2(bounds, 6 * (node + 1), x, y, z);
    const dr = boxDistance2(bounds, 6 * r, x, y, z);
    const leftFirst = dl <= dr;
    const far = leftFirst ? dr : dl;
    if (far < best) {
      stack[top] = leftFirst ? r : node + 1;
      stackDistance[top++] = far;
    }
    const near = leftFirst ? dl : dr;
    if (near < best) {
      stack[top] = leftFirst ? node + 1 : r;
      stackDistance[top++] = near;
    }
  }
  result.triangle = place < 0 ? -1 : items[place]!;
  result.place = place;
  if (place >= 0) result.hint = place;
  result.distance2 = best;
}

/**
 * Nearest point of a triangle.
 *
 * @param place  place of the triangle in the tree's order
 * @param out    3, written
 */
export function closestOnTriangle(
  triangles: TriangleTree,
  place: number,
  x: number,
  y: number,
  z: number,
  out: Float64Array,
): void {
  const c = triangles.corners;
  const o = 9 * place;
  const p = [x, y, z];
  const along = (from: number, to: number): [number, number] => {
    // Nearest point of an edge: share of the way, squared distance.
    let uu = 0;
    let up = 0;
    for (let a = 0; a < 3; a++) {
      const u = c[to + a]! - c[from + a]!;
      uu += u * u;
      up += u * (p[a]! - c[from + a]!);
    }
    const t = uu > 0 ? Math.min(1, Math.max(0, up / uu)) : 0;
    let d2 = 0;
    for (let a = 0; a < 3; a++) d2 += (p[a]! - c[from + a]! - t * (c[to + a]! - c[from + a]!)) ** 2;
    return [t, d2];
  };
  let uu = 0;
  let uv = 0;
  let vv = 0;
  let up = 0;
  let vp = 0;
  for (let a = 0; a < 3; a++) {
    const u = c[o + 3 + a]! - c[o + a]!;
    const v = c[o + 6 + a]! - c[o + a]!;
    const q = p[a]! - c[o + a]!;
    uu += u * u;
    uv += u * v;
    vv += v * v;
    up += u * q;
    vp += v * q;
  }
  const det = uu * vv - uv * uv;
  const s = vv * up - uv * vp;
  const t = uu * vp - uv * up;
  if (det > 0 && s >= 0 && t >= 0 && s + t <= det) {
    for (let a = 0; a < 3; a++)
      out[a] = c[o + a]! + (s / det) * (c[o + 3 + a]! - c[o + a]!) + (t / det) * (c[o + 6 + a]! - c[o + a]!);
    return;
  }
  let best = Infinity;
  for (const [from, to] of [
    [o, o + 3],
    [o + 3, o + 6],
    [o + 6, o],
  ] as const) {
    const [share, d2] = along(from, to);
    if (d2 < best) {
      best = d2;
      for (let a = 0; a < 3; a++) out[a] = c[from + a]! + share * (c[to + a]! - c[from + a]!);
    }
  }
}
