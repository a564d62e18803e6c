import type { CellTopology } from '../../basis/dataset.js';
import { cellShape } from '../../mesh/cell-types.js';

/** Polygons by point numbers, grown one by one. */
export interface PolygonList {
  readonly points: number[];
  /** Number of points of each polygon. */
  readonly sizes: number[];
}

export function emptyPolygons(): PolygonList {
  return { points: [], sizes: [] };
}

export function addPolygon(list: PolygonList, points: ArrayLike<number>, base: number): void {
  for (let i = 0; i < points.length; i++) list.points.push((points[i] as number) + base);
  list.sizes.push(points.length);
}

/**
 * Faces of a structured zone that lie on one index plane.
 *
 * @param sizes  points along i, j, k
 * @param axis   direction of the plane's normal
 * @param index  point index of the plane, from 0
 * @param begin  first cell along each axis (that of `axis` is not used), from 0
 * @param end    one past the last cell along each axis
 */
export function structuredFaces(
  list: PolygonList,
  sizes: readonly number[],
  axis: number,
  index: number,
  begin: readonly number[],
  end: readonly number[],
  base: number,
): void {
  const strides = [1, sizes[0] as number, (sizes[0] as number) * (sizes[1] as number)];
  const [u, v] = [(axis + 1) % 3, (axis + 2) % 3];
  const [su, sv] = [strides[u] as number, strides[v] as number];
  for (let b = begin[v] as number; b < (end[v] as number); b++) {
    for (let a = begin[u] as number; a < (end[u] as number); a++) {
      const p = base + index * (strides[axis] as number) + a * su + b * sv;
      list.points.push(p, p + su, p + su + sv, p + sv);
      list.sizes.push(4);
    }
  }
}

/**
 * Outer faces of a zone's cells all of whose points are marked: what a boundary given by points means.
 *
 * @param marked  by point of the zone
 */
export function facesOfMarkedPoints(
  list: PolygonList,
  cells: CellTopology,
  cellBegin: number,
  cellEnd: number,
  pointBegin: number,
  marked: Uint8Array,
): void {
  // A face met twice lies between two cells.
  const found = new Map<string, number[] | undefined>();
  const candidate = (points: number[]): void => {
    const key = [...points].sort((a, b) => a - b).join(' ');
    found.set(key, found.has(key) ? undefined : points);
  };
  for (let c = cellBegin; c < cellEnd; c++) {
    const begin = cells.offsets[c] as number;
    const end = cells.offsets[c + 1] as number;
    let some = 0;
    for (let i = begin; i < end; i++) some += marked[(cells.connectivity[i] as number) - pointBegin] as number;
    if (some < 3) continue;
    if (cells.types[c] === 42) {
      const stream = cells.polyhedronFaces as Int32Array;
      let at = (cells.polyhedronOffsets as Int32Array)[c] as number;
      const faces = stream[at++] as number;
      for (let f = 0; f < faces; f++) {
        const n = stream[at++] as number;
        const points = Array.from(stream.subarray(at, at + n));
        at += n;
        if (points.every((point) => marked[point - pointBegin] === 1)) candidate(points);
      }
      continue;
    }
    for (const face of cellShape(cells.types[c] as number)?.faces ?? []) {
      const points = face.map((corner) => cells.connectivity[begin + corner] as number);
      if (points.every((point) => marked[point - pointBegin] === 1)) candidate(points);
    }
  }
  for (const points of found.values()) if (points !== undefined) addPolygon(list, points, 0);
}
