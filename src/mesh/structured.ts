import ndarray, { type NdArray } from 'ndarray';
import type { CellTopology, GridStructure } from '../basis/dataset.js';
import { sharedFloat64, sharedInt32 } from '../basis/fields.js';

/** Numbers of points along i, j, k. */
export function pointCounts(structure: GridStructure): [number, number, number] {
  const e = structure.extent;
  return [e[1] - e[0] + 1, e[3] - e[2] + 1, e[5] - e[4] + 1];
}

/** Numbers of cells along i, j, k; a direction with a single layer of points counts one. */
export function cellCounts(structure: GridStructure): [number, number, number] {
  return pointCounts(structure).map((n) => Math.max(1, n - 1)) as [number, number, number];
}

/** View of values at points as [k][j][i] (i fastest), without copying. */
export function pointView<T extends Float64Array | Int32Array>(values: T, structure: GridStructure): NdArray<T> {
  const [ni, nj, nk] = pointCounts(structure);
  return ndarray(values, [nk, nj, ni]) as unknown as NdArray<T>;
}

/** View of values at cells as [k][j][i] (i fastest), without copying. */
export function cellView<T extends Float64Array | Int32Array>(values: T, structure: GridStructure): NdArray<T> {
  const [ni, nj, nk] = cellCounts(structure);
  return ndarray(values, [nk, nj, ni]) as unknown as NdArray<T>;
}

/** Coordinates of the points of an image or rectilinear grid, 3 x points, i fastest. */
export function structuredPoints(structure: GridStructure): Float64Array {
  const [ni, nj, nk] = pointCounts(structure);
  const points = sharedFloat64(3 * ni * nj * nk);
  const { axes } = structure;
  const e = structure.extent;
  const origin = structure.origin ?? [0, 0, 0];
  const spacing = structure.spacing ?? [1, 1, 1];
  const d = structure.direction ?? [1, 0, 0, 0, 1, 0, 0, 0, 1];
  let at = 0;
  for (let k = 0; k < nk; k++)
    for (let j = 0; j < nj; j++)
      for (let i = 0; i < ni; i++, at += 3) {
        if (axes !== undefined) {
          points[at] = axes[0][i]!;
          points[at + 1] = axes[1][j]!;
          points[at + 2] = axes[2][k]!;
          continue;
        }
        const u = (i + e[0]) * spacing[0];
        const v = (j + e[2]) * spacing[1];
        const w = (k + e[4]) * spacing[2];
        points[at] = origin[0] + d[0]! * u + d[1]! * v + d[2]! * w;
        points[at + 1] = origin[1] + d[3]! * u + d[4]! * v + d[5]! * w;
        points[at + 2] = origin[2] + d[6]! * u + d[7]! * v + d[8]! * w;
      }
  return points;
}

/**
 * Cells of a structured grid: hexahedra, or quadrilaterals, lines or a vertex where directions have a single layer of
 * points.
 *
 * @param firstPoint  number of the grid's first point in the data set
 */
export function structuredCells(structure: GridStructure, firstPoint = 0): CellTopology {
  const n = pointCounts(structure);
  const strides = [1, n[0], n[0] * n[1]];
  const open = [0, 1, 2].filter((a) => n[a]! > 1);
  const counts = cellCounts(structure);
  const cells = counts[0] * counts[1] * counts[2];
  const [a, b, c] = open.map((axis) => strides[axis]!);
  const corner =
    c !== undefined
      ? [0, a!, a! + b!, b!, c, a! + c, a! + b! + c, b! + c]
      : b !== undefined
        ? [0, a!, a! + b, b]
        : a !== undefined
          ? [0, a]
          : [0];
  const type = [1, 3, 9, 12][open.length]!;
  const size = corner.length;
  const connectivity = sharedInt32(size * cells);
  const offsets = sharedInt32(cells + 1);
  let at = 0;
  let cell = 0;
  for (let k = 0; k < counts[2]; k++)
    for (let j = 0; j < counts[1]; j++)
      for (let i = 0; i < counts[0]; i++) {
        const base = firstPoint + i + n[0] * (j + n[1] * k);
        for (let v = 0; v < size; v++) connectivity[at++] = base + corner[v]!;
        offsets[++cell] = at;
      }
  return { types: new Uint8Array(cells).fill(type), offsets, connectivity };
}
