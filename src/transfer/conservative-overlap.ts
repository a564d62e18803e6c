import {
  type BodyMesh,
  cellHalfSpaces,
  cellSurface,
  createHalfSpaces,
  tetrahedronHalfSpaces,
} from './conservative-cells.js';
import { addMoments, createSurface, cutSurface, type Surface } from './conservative-clip.js';

const whole = createSurface();
const pieces: [Surface, Surface] = [createSurface(), createSurface()];
const planes = createHalfSpaces();
const tetrahedron = new Float64Array(12);
const box = new Float64Array(6);

/** True when nothing of `whole` lies within a half-space: cheaper to know before the first cut. */
function allBeyond(p: number): boolean {
  const { vertices, vertexCount } = whole;
  const nx = planes.planes[4 * p]!;
  const ny = planes.planes[4 * p + 1]!;
  const nz = planes.planes[4 * p + 2]!;
  const d = planes.planes[4 * p + 3]!;
  for (let v = 0; v < 3 * vertexCount; v += 3)
    if (nx * vertices[v]! + ny * vertices[v + 1]! + nz * vertices[v + 2]! <= d) return false;
  return true;
}

/** Cuts `whole` by the half-spaces and adds what is left. */
function addCut(sign: number, sum: Float64Array): void {
  for (let p = 0; p < planes.count; p++) if (allBeyond(p)) return;
  let current = whole;
  let next = 0;
  for (let p = 0; p < planes.count; p++) {
    const o = 4 * p;
    const result = cutSurface(
      current,
      planes.planes[o]!,
      planes.planes[o + 1]!,
      planes.planes[o + 2]!,
      planes.planes[o + 3]!,
      pieces[next]!,
    );
    if (result === 0) return;
    if (result === 2) {
      current = pieces[next]!;
      next = 1 - next;
    }
  }
  addMoments(current, sign, sum);
}

/** True when the tetrahedron's box misses the box of `whole`. */
function apart(): boolean {
  const t = tetrahedron;
  for (let a = 0; a < 3; a++) {
    const low = Math.min(t[a]!, t[3 + a]!, t[6 + a]!, t[9 + a]!);
    const high = Math.max(t[a]!, t[3 + a]!, t[6 + a]!, t[9 + a]!);
    if (low >= box[3 + a]! || high <= box[a]!) return true;
  }
  return false;
}

/**
 * Adds volume and first moment (about the origin) of what two cells share to sum[0] and sum[1..3].
 *
 * One cell is the surface that is cut, the other the cutter: as it stands when convex, else as tetrahedra between the
 * mean of its corners and its face fans, counted with their sign. Faces being the same fans for both cells that own
 * them, the overlaps of one cell with all cells of the other mesh tile it without gap or double count.
 */
export function addOverlap(
  a: BodyMesh,
  cellA: number,
  b: BodyMesh,
  cellB: number,
  ox: number,
  oy: number,
  oz: number,
  sum: Float64Array,
): void {
  if (b.convex[cellB] === 1 || a.convex[cellA] === 1) {
    const cutterIsB = b.convex[cellB] === 1;
    cellSurface(cutterIsB ? a : b, cutterIsB ? cellA : cellB, ox, oy, oz, whole);
    cellHalfSpaces(cutterIsB ? b : a, cutterIsB ? cellB : cellA, ox, oy, oz, planes);
    addCut(1, sum);
    return;
  }
  cellSurface(a, cellA, ox, oy, oz, whole);
  box.fill(Infinity, 0, 3);
  box.fill(-Infinity, 3, 6);
  for (let v = 0; v < whole.vertexCount; v++)
    for (let i = 0; i < 3; i++) {
      box[i] = Math.min(box[i]!, whole.vertices[3 * v + i]!);
      box[3 + i] = Math.max(box[3 + i]!, whole.vertices[3 * v + i]!);
    }
  addTetrahedra(b, cellB, ox, oy, oz, sum);
}

function addTetrahedra(b: BodyMesh, cell: number, ox: number, oy: number, oz: number, sum: Float64Array): void {
  const { points: xyz, faceOffsets, facePoints, owner, cellFaceOffsets, cellFaces, cellCentroids } = b;
  const t = tetrahedron;
  t[0] = cellCentroids[3 * cell]! - ox;
  t[1] = cellCentroids[3 * cell + 1]! - oy;
  t[2] = cellCentroids[3 * cell + 2]! - oz;
  for (let j = cellFaceOffsets[cell]!; j < cellFaceOffsets[cell + 1]!; j++) {
    const face = cellFaces[j]!;
    const begin = faceOffsets[face]!;
    const end = faceOffsets[face + 1]!;
    const n = end - begin;
    const orientation = owner[face] === cell ? 1 : -1;
    const put = (at: number, p: number): void => {
      t[at] = xyz[3 * p]! - ox;
      t[at + 1] = xyz[3 * p + 1]! - oy;
      t[at + 2] = xyz[3 * p + 2]! - oz;
    };
    const cutOne = (): void => {
      if (apart()) return;
      const sign = tetrahedronHalfSpaces(t, planes);
      if (sign !== 0) addCut(sign * orientation, sum);
    };
    if (n === 3) {
      for (let i = 0; i < 3; i++) put(3 + 3 * i, facePoints[begin + i]!);
      cutOne();
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
    for (let i = begin; i < end; i++) {
      put(3, facePoints[i]!);
      put(6, facePoints[i + 1 < end ? i + 1 : begin]!);
      t[9] = mx / n - ox;
      t[10] = my / n - oy;
      t[11] = mz / n - oz;
      cutOne();
    }
  }
}
