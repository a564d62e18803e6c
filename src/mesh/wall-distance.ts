import { sharedFloat64 } from '../basis/fields.js';
import {
  buildTriangleTree,
  createNearestTriangle,
  nearestTriangle,
  type TriangleTree,
} from '../spatial/triangle-tree.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from './cell-mesh.js';

/** All that a range of `wallDistanceRange` reads; plain data. */
export interface WallDistancePlan {
  readonly triangles: TriangleTree;
  /** Places to measure from, 3 x n. */
  readonly points: Float64Array;
  /** 3 x images: translations of the point, the first zero. */
  readonly shifts: Float64Array;
}

/** Triangles of faces: fans about the mean of the corners, a triangle as it is. */
export function faceTriangles(mesh: CellMesh, faces: Int32Array): Float64Array {
  let count = 0;
  for (const f of faces) {
    const n = mesh.faceOffsets[f + 1]! - mesh.faceOffsets[f]!;
    count += n === 3 ? 1 : n;
  }
  const out = new Float64Array(9 * count);
  let at = 0;
  for (const f of faces) {
    const rim = mesh.facePoints.subarray(mesh.faceOffsets[f]!, mesh.faceOffsets[f + 1]!);
    const n = rim.length;
    const put = (p: number): void => {
      for (let a = 0; a < 3; a++) out[at++] = mesh.points[3 * p + a]!;
    };
    if (n === 3) {
      for (let i = 0; i < 3; i++) put(rim[i]!);
      continue;
    }
    const mean = [0, 0, 0];
    for (let i = 0; i < n; i++) for (let a = 0; a < 3; a++) mean[a] = mean[a]! + mesh.points[3 * rim[i]! + a]! / n;
    for (let i = 0; i < n; i++) {
      put(rim[i]!);
      put(rim[(i + 1) % n]!);
      for (let a = 0; a < 3; a++) out[at++] = mean[a]!;
    }
  }
  return out;
}

/** Sums of -1, 0 or +1 of each period, 3 x images, zero first. */
export function periodicShifts(periodic: PeriodicPairs | undefined): Float64Array {
  let shifts: [number, number, number][] = [[0, 0, 0]];
  for (const p of periodic?.periods ?? [])
    shifts = [0, -1, 1].flatMap((s) =>
      shifts.map(([x, y, z]): [number, number, number] => [x + s * p[0], y + s * p[1], z + s * p[2]]),
    );
  return Float64Array.from(shifts.flat());
}

/** @param points  places to measure from, 3 x n; the cell centroids when left out */
export function prepareWallDistance(
  mesh: CellMesh,
  geometry: MeshGeometry,
  wallFaces: Int32Array,
  periodic?: PeriodicPairs,
  points: Float64Array = geometry.cellCentroids,
): WallDistancePlan {
  return { triangles: buildTriangleTree(faceTriangles(mesh, wallFaces)), points, shifts: periodicShifts(periodic) };
}

/**
 * Distances of places [begin, end) to the nearest point of the wall faces and their periodic images, exact for the faces
 * as triangle fans; infinite without walls.
 */
export function wallDistanceRange(plan: WallDistancePlan, begin: number, end: number, out: Float64Array): void {
  const { triangles, points, shifts } = plan;
  const nearest = createNearestTriangle();
  for (let i = begin; i < end; i++) {
    let best = Infinity;
    for (let s = 0; s < shifts.length; s += 3) {
      nearestTriangle(
        triangles,
        points[3 * i]! + shifts[s]!,
        points[3 * i + 1]! + shifts[s + 1]!,
        points[3 * i + 2]! + shifts[s + 2]!,
        best,
        nearest,
      );
      best = nearest.distance2;
    }
    out[i] = Math.sqrt(best);
  }
}

/** Distance of every cell centroid to the nearest wall face, m. */
export function wallDistance(
  mesh: CellMesh,
  geometry: MeshGeometry,
  wallFaces: Int32Array,
  periodic?: PeriodicPairs,
): Float64Array {
  const out = sharedFloat64(mesh.cellCount);
  wallDistanceRange(prepareWallDistance(mesh, geometry, wallFaces, periodic), 0, mesh.cellCount, out);
  return out;
}
