import { sharedFloat64 } from '../basis/fields.js';
import { type BoxTree, buildBoxTree } from '../spatial/box-tree.js';
import type { CellMesh } from './cell-mesh.js';

/** Finds the cell that contains a place; plain data on shared arrays. */
export interface CellLocator {
  readonly tree: BoxTree;
  /** 6 x cells in the order of `tree.items`: low x y z, high x y z. */
  readonly boxes: Float64Array;
  readonly mesh: Pick<CellMesh, 'points' | 'faceOffsets' | 'facePoints' | 'owner' | 'cellFaceOffsets' | 'cellFaces'>;
}

/** Boxes around cells, 6 x cells: low x y z, high x y z. */
export function cellBoxes(mesh: CellMesh): Float64Array {
  const { points, faceOffsets, facePoints, cellFaceOffsets, cellFaces } = mesh;
  const boxes = new Float64Array(6 * mesh.cellCount);
  for (let cell = 0; cell < mesh.cellCount; cell++) {
    const o = 6 * cell;
    for (let a = 0; a < 3; a++) {
      boxes[o + a] = Infinity;
      boxes[o + 3 + a] = -Infinity;
    }
    for (let j = cellFaceOffsets[cell]!; j < cellFaceOffsets[cell + 1]!; j++) {
      const face = cellFaces[j]!;
      for (let i = faceOffsets[face]!; i < faceOffsets[face + 1]!; i++) {
        const p = 3 * facePoints[i]!;
        for (let a = 0; a < 3; a++) {
          const v = points[p + a]!;
          if (v < boxes[o + a]!) boxes[o + a] = v;
          if (v > boxes[o + 3 + a]!) boxes[o + 3 + a] = v;
        }
      }
    }
  }
  return boxes;
}

export function buildCellLocator(mesh: CellMesh): CellLocator {
  const all = cellBoxes(mesh);
  const tree = buildBoxTree(all);
  const boxes = sharedFloat64(all.length);
  for (let i = 0; i < mesh.cellCount; i++) boxes.set(all.subarray(6 * tree.items[i]!, 6 * tree.items[i]! + 6), 6 * i);
  const { points, faceOffsets, facePoints, owner, cellFaceOffsets, cellFaces } = mesh;
  return { tree, boxes, mesh: { points, faceOffsets, facePoints, owner, cellFaceOffsets, cellFaces } };
}

/**
 * +1 or -1 when the ray from (x, y, z) towards +x passes the triangle, by the sense of its area vector along x; 0 when not.
 *
 * The rim of the triangle, seen along x, is wound around (y, z) with half-open edges, each evaluated from its lower to
 * its upper end. Two triangles that share an edge so come to the same answer about it, and the windings of all cells that
 * tile a body add up to exactly one at a place inside: none falls between cells.
 */
function rayThroughTriangle(
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  cx: number,
  cy: number,
  cz: number,
  x: number,
  y: number,
  z: number,
): number {
  const a = az > z;
  const b = bz > z;
  const c = cz > z;
  let w = 0;
  if (a !== b) {
    if (b) {
      if ((by - ay) * (z - az) > (y - ay) * (bz - az)) w++;
    } else if ((ay - by) * (z - bz) > (y - by) * (az - bz)) w--;
  }
  if (b !== c) {
    if (c) {
      if ((cy - by) * (z - bz) > (y - by) * (cz - bz)) w++;
    } else if ((by - cy) * (z - cz) > (y - cy) * (bz - cz)) w--;
  }
  if (c !== a) {
    if (a) {
      if ((ay - cy) * (z - cz) > (y - cy) * (az - cz)) w++;
    } else if ((cy - ay) * (z - az) > (y - ay) * (cz - az)) w--;
  }
  if (w === 0) return 0;
  // Ahead of the place or behind it: side of the triangle's plane.
  const ux = bx - ax;
  const uy = by - ay;
  const uz = bz - az;
  const vx = cx - ax;
  const vy = cy - ay;
  const vz = cz - az;
  const side = (uy * vz - uz * vy) * (x - ax) + (uz * vx - ux * vz) * (y - ay) + (ux * vy - uy * vx) * (z - az);
  return w > 0 ? (side < 0 ? 1 : 0) : side > 0 ? -1 : 0;
}

/** How often the surface of a cell (faces as fans) winds around a place: 1 inside, 0 outside. */
export function windingOfCell(mesh: CellLocator['mesh'], cell: number, x: number, y: number, z: number): number {
  const { points, faceOffsets, facePoints, owner, cellFaceOffsets, cellFaces } = mesh;
  let winding = 0;
  for (let j = cellFaceOffsets[cell]!; j < cellFaceOffsets[cell + 1]!; j++) {
    const face = cellFaces[j]!;
    const begin = faceOffsets[face]!;
    const end = faceOffsets[face + 1]!;
    const n = end - begin;
    let mx = 0;
    let my = 0;
    let mz = 0;
    let above = 0;
    let ahead = 0;
    for (let i = begin; i < end; i++) {
      const p = 3 * facePoints[i]!;
      mx += points[p]!;
      my += points[p + 1]!;
      mz += points[p + 2]!;
      if (points[p + 2]! > z) above++;
      if (points[p]! > x) ahead++;
    }
    if (above === 0 || above === n || ahead === 0) continue;
    let passes = 0;
    let p = 3 * facePoints[end - 1]!;
    if (n === 3) {
      const q = 3 * facePoints[begin]!;
      const r = 3 * facePoints[begin + 1]!;
      passes = rayThroughTriangle(
        points[q]!,
        points[q + 1]!,
        points[q + 2]!,
        points[r]!,
        points[r + 1]!,
        points[r + 2]!,
        points[p]!,
        points[p + 1]!,
        points[p + 2]!,
        x,
        y,
        z,
      );
    } else {
      mx /= n;
      my /= n;
      mz /= n;
      for (let i = begin; i < end; i++) {
        const q = 3 * facePoints[i]!;
        passes += rayThroughTriangle(
          points[p]!,
          points[p + 1]!,
          points[p + 2]!,
          points[q]!,
          points[q + 1]!,
          points[q + 2]!,
          mx,
          my,
          mz,
          x,
          y,
          z,
        );
        p = q;
      }
    }
    winding += owner[face] === cell ? passes : -passes;
  }
  return winding;
}

const stack = new Int32Array(64);

/** Cell that contains the place (planar and warped faces alike, as triangle fans), or -1 outside the mesh. */
export function locateCell(locator: CellLocator, x: number, y: number, z: number): number {
  const { tree, boxes, mesh } = locator;
  const { bounds, right, first, count, items } = tree;
  let top = 0;
  stack[top++] = 0;
  while (top > 0) {
    const node = stack[--top]!;
    const o = 6 * node;
    if (
      x < bounds[o]! ||
      x > bounds[o + 3]! ||
      y < bounds[o + 1]! ||
      y > bounds[o + 4]! ||
      z < bounds[o + 2]! ||
      z > bounds[o + 5]!
    )
      continue;
    if (right[node]! >= 0) {
      stack[top++] = right[node]!;
      stack[top++] = node + 1;
      continue;
    }
    const end = first[node]! + count[node]!;
    for (let i = first[node]!; i < end; i++) {
      const b = 6 * i;
      if (
        x >= boxes[b]! &&
        x <= boxes[b + 3]! &&
        y >= boxes[b + 1]! &&
        y <= boxes[b + 4]! &&
        z >= boxes[b + 2]! &&
        z <= boxes[b + 5]! &&
        windingOfCell(mesh, items[i]!, x, y, z) > 0
      )
        return items[i]!;
    }
  }
  return -1;
}
