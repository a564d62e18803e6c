import type { CellMesh, MeshGeometry } from '../mesh/cell-mesh.js';
import { reserveSurface, type Surface } from './conservative-clip.js';

/** Cells as bodies that can be cut; plain data. */
export interface BodyMesh {
  readonly points: Float64Array;
  readonly faceOffsets: Int32Array;
  readonly facePoints: Int32Array;
  readonly owner: Int32Array;
  readonly cellFaceOffsets: Int32Array;
  readonly cellFaces: Int32Array;
  readonly faceAreas: Float64Array;
  readonly faceCentroids: Float64Array;
  readonly cellCentroids: Float64Array;
  /** Faces: 1 when plane to rounding. */
  readonly plane: Uint8Array;
  /** Cells: 1 when all faces are plane and the cell is convex. */
  readonly convex: Uint8Array;
}

/** Planes count as plane, and cells as convex, to this share of the face's size. */
const flatness = 1e-13;

/** Rounding that the height of a point over a face may carry: of the face's size, and of its coordinates. */
function heightRounding(g: MeshGeometry, face: number, size: number): number {
  const c = g.faceCentroids;
  const o = 3 * face;
  const far = Math.abs(c[o]!) + Math.abs(c[o + 1]!) + Math.abs(c[o + 2]!);
  return Math.max(flatness * Math.sqrt(size), 4e-16 * far);
}

/**
 * Largest height of a face's corners over the plane of another (or the same) face, the plane's normal being of length 1.
 */
function highest(mesh: CellMesh, face: number, nx: number, ny: number, nz: number, d: number, both: boolean): number {
  const { points: xyz, faceOffsets, facePoints } = mesh;
  let top = -Infinity;
  for (let i = faceOffsets[face]!; i < faceOffsets[face + 1]!; i++) {
    const p = 3 * facePoints[i]!;
    let h = nx * xyz[p]! + ny * xyz[p + 1]! + nz * xyz[p + 2]! - d;
    if (both && h < 0) h = -h;
    if (h > top) top = h;
  }
  return top;
}

export function bodiesOf(mesh: CellMesh, geometry: MeshGeometry): BodyMesh {
  const { points: xyz, faceOffsets, facePoints, owner, cellFaceOffsets, cellFaces } = mesh;
  const { faceAreas: area, faceCentroids: centre } = geometry;
  const plane = new Uint8Array(mesh.faceCount);
  for (let face = 0; face < mesh.faceCount; face++) {
    if (faceOffsets[face + 1]! - faceOffsets[face]! === 3) {
      plane[face] = 1;
      continue;
    }
    const o = 3 * face;
    const size = Math.sqrt(area[o]! ** 2 + area[o + 1]! ** 2 + area[o + 2]! ** 2);
    const nx = area[o]! / size;
    const ny = area[o + 1]! / size;
    const nz = area[o + 2]! / size;
    const d = nx * centre[o]! + ny * centre[o + 1]! + nz * centre[o + 2]!;
    if (highest(mesh, face, nx, ny, nz, d, true) <= heightRounding(geometry, face, size)) plane[face] = 1;
  }
  const convex = new Uint8Array(mesh.cellCount);
  for (let cell = 0; cell < mesh.cellCount; cell++) {
    const begin = cellFaceOffsets[cell]!;
    const end = cellFaceOffsets[cell + 1]!;
    let good = true;
    for (let j = begin; good && j < end; j++) good = plane[cellFaces[j]!] === 1;
    for (let j = begin; good && j < end; j++) {
      const face = cellFaces[j]!;
      const o = 3 * face;
      const size = Math.sqrt(area[o]! ** 2 + area[o + 1]! ** 2 + area[o + 2]! ** 2);
      const sign = (owner[face] === cell ? 1 : -1) / size;
      const nx = sign * area[o]!;
      const ny = sign * area[o + 1]!;
      const nz = sign * area[o + 2]!;
      const d = nx * centre[o]! + ny * centre[o + 1]! + nz * centre[o + 2]!;
      const limit = heightRounding(geometry, face, size);
      for (let m = begin; good && m < end; m++)
        if (m !== j) good = highest(mesh, cellFaces[m]!, nx, ny, nz, d, false) <= limit;
    }
    convex[cell] = good ? 1 : 0;
  }
  return {
    points: xyz,
    faceOffsets,
    facePoints,
    owner,
    cellFaceOffsets,
    cellFaces,
    faceAreas: geometry.faceAreas,
    faceCentroids: geometry.faceCentroids,
    cellCentroids: geometry.cellCentroids,
    plane,
    convex,
  };
}

let localPoints = new Int32Array(64);

/** Surface of a cell relative to an origin: plane faces as polygons, warped ones as fans about the mean of their corners. */
export function cellSurface(b: BodyMesh, cell: number, ox: number, oy: number, oz: number, s: Surface): void {
  const { points: xyz, faceOffsets, facePoints, owner, cellFaceOffsets, cellFaces } = b;
  let corners = 0;
  for (let j = cellFaceOffsets[cell]!; j < cellFaceOffsets[cell + 1]!; j++)
    corners += faceOffsets[cellFaces[j]! + 1]! - faceOffsets[cellFaces[j]!]!;
  reserveSurface(s, 2 * corners, corners + 1, 3 * corners);
  if (localPoints.length < 2 * corners) localPoints = new Int32Array(4 * corners);
  s.vertexCount = 0;
  s.faceCount = 0;
  let at = 0;
  const add = (x: number, y: number, z: number): number => {
    const v = 3 * s.vertexCount;
    s.vertices[v] = x;
    s.vertices[v + 1] = y;
    s.vertices[v + 2] = z;
    return s.vertexCount++;
  };
  const local = (p: number): number => {
    for (let v = 0; v < s.vertexCount; v++) if (localPoints[v] === p) return v;
    localPoints[s.vertexCount] = p;
    return add(xyz[3 * p]! - ox, xyz[3 * p + 1]! - oy, xyz[3 * p + 2]! - oz);
  };
  for (let j = cellFaceOffsets[cell]!; j < cellFaceOffsets[cell + 1]!; j++) {
    const face = cellFaces[j]!;
    const begin = faceOffsets[face]!;
    const end = faceOffsets[face + 1]!;
    const out = owner[face] === cell;
    if (b.plane[face] === 1) {
      s.starts[s.faceCount++] = at;
      if (out) for (let i = begin; i < end; i++) s.rims[at++] = local(facePoints[i]!);
      else for (let i = end - 1; i >= begin; i--) s.rims[at++] = local(facePoints[i]!);
      continue;
    }
    let mx = 0;
    let my = 0;
    let mz = 0;
    for (let i = begin; i < end; i++) {
      const p = 3 * facePoints[i]!;
      mx += xyz[p]!;
      my += xyz[p + 1]!;
      mz += xyz[p + 2]!;
    }
    const n = end - begin;
    localPoints[s.vertexCount] = -1;
    const mean = add(mx / n - ox, my / n - oy, mz / n - oz);
    for (let i = begin; i < end; i++) {
      const p = local(facePoints[i]!);
      const q = local(facePoints[i + 1 < end ? i + 1 : begin]!);
      s.starts[s.faceCount++] = at;
      s.rims[at++] = out ? p : q;
      s.rims[at++] = out ? q : p;
      s.rims[at++] = mean;
    }
  }
  s.starts[s.faceCount] = at;
}

/** Half-spaces n.x <= d that together are a convex body. */
export interface HalfSpaces {
  count: number;
  /** 4 x planes: n x y z (unit), d. */
  planes: Float64Array;
}

export function createHalfSpaces(): HalfSpaces {
  return { count: 0, planes: new Float64Array(4 * 64) };
}

/** Half-spaces of a convex cell relative to an origin; the two cells of a face get the same plane from its two sides. */
export function cellHalfSpaces(b: BodyMesh, cell: number, ox: number, oy: number, oz: number, h: HalfSpaces): void {
  const begin = b.cellFaceOffsets[cell]!;
  const count = b.cellFaceOffsets[cell + 1]! - begin;
  if (h.planes.length < 4 * count) h.planes = new Float64Array(8 * count);
  h.count = count;
  for (let j = 0; j < count; j++) {
    const face = b.cellFaces[begin + j]!;
    const o = 3 * face;
    const size = Math.hypot(b.faceAreas[o]!, b.faceAreas[o + 1]!, b.faceAreas[o + 2]!);
    const sign = (b.owner[face] === cell ? 1 : -1) / size;
    const nx = sign * b.faceAreas[o]!;
    const ny = sign * b.faceAreas[o + 1]!;
    const nz = sign * b.faceAreas[o + 2]!;
    h.planes[4 * j] = nx;
    h.planes[4 * j + 1] = ny;
    h.planes[4 * j + 2] = nz;
    h.planes[4 * j + 3] =
      nx * (b.faceCentroids[o]! - ox) + ny * (b.faceCentroids[o + 1]! - oy) + nz * (b.faceCentroids[o + 2]! - oz);
  }
}

const corner = [
  [1, 2, 3],
  [0, 3, 2],
  [0, 1, 3],
  [0, 2, 1],
] as const;

/**
 * Half-spaces of the tetrahedron at `t` (four vertices, 12 numbers).
 *
 * @returns +1 or -1, the sign of its volume; 0 when it has none
 */
export function tetrahedronHalfSpaces(t: Float64Array, h: HalfSpaces): number {
  const ux = t[3]! - t[0]!;
  const uy = t[4]! - t[1]!;
  const uz = t[5]! - t[2]!;
  const vx = t[6]! - t[0]!;
  const vy = t[7]! - t[1]!;
  const vz = t[8]! - t[2]!;
  const wx = t[9]! - t[0]!;
  const wy = t[10]! - t[1]!;
  const wz = t[11]! - t[2]!;
  const volume = ux * (vy * wz - vz * wy) + uy * (vz * wx - vx * wz) + uz * (vx * wy - vy * wx);
  if (volume === 0) return 0;
  const sign = volume > 0 ? 1 : -1;
  h.count = 4;
  for (let f = 0; f < 4; f++) {
    const [a, b, c] = corner[f]!;
    const px = t[3 * b]! - t[3 * a]!;
    const py = t[3 * b + 1]! - t[3 * a + 1]!;
    const pz = t[3 * b + 2]! - t[3 * a + 2]!;
    const qx = t[3 * c]! - t[3 * a]!;
    const qy = t[3 * c + 1]! - t[3 * a + 1]!;
    const qz = t[3 * c + 2]! - t[3 * a + 2]!;
    let nx = sign * (py * qz - pz * qy);
    let ny = sign * (pz * qx - px * qz);
    let nz = sign * (px * qy - py * qx);
    const size = Math.hypot(nx, ny, nz);
    if (!(size > 0)) return 0;
    nx /= size;
    ny /= size;
    nz /= size;
    h.planes[4 * f] = nx;
    h.planes[4 * f + 1] = ny;
    h.planes[4 * f + 2] = nz;
    h.planes[4 * f + 3] = nx * t[3 * a]! + ny * t[3 * a + 1]! + nz * t[3 * a + 2]!;
  }
  return sign;
}
