import Delaunator from 'delaunator';
import { orient2d } from 'robust-predicates';
import { sharedFloat64, sharedInt32 } from '../basis/fields.js';

/** Delaunay triangulation of points in a plane, on shared memory. */
export interface PlaneTriangulation {
  /** 2 x n. */
  readonly points: Float64Array;
  /** 3 x triangles. */
  readonly triangles: Int32Array;
  /** 3 x triangles: the half-edge on the other side of each edge, -1 on the hull. */
  readonly halfedges: Int32Array;
}

function share(values: Int32Array | Uint32Array): Int32Array {
  const out = sharedInt32(values.length);
  out.set(values);
  return out;
}

/**
 * Triangulates with the delaunator library.
 *
 * @param points  2 x n
 * @returns the triangulation, or undefined when all points lie on one line
 */
export function triangulatePlane(points: Float64Array): PlaneTriangulation | undefined {
  const found = new Delaunator(points);
  if (found.triangles.length === 0) return undefined;
  const kept = sharedFloat64(points.length);
  kept.set(points);
  return { points: kept, triangles: share(found.triangles), halfedges: share(found.halfedges) };
}

/**
 * The triangle that holds a place, by a walk over edges that separate it from the triangle.
 *
 * @param from  triangle where the walk begins
 * @returns the triangle's number, or -1 - h with h the hull half-edge beyond which the place lies
 */
export function locateTriangle(t: PlaneTriangulation, x: number, y: number, from: number): number {
  const { points, triangles, halfedges } = t;
  let triangle = from;
  let came = -1;
  for (let step = 0; step <= triangles.length; step += 1) {
    let next = -1;
    for (let e = 3 * triangle; e < 3 * triangle + 3; e += 1) {
      const other = halfedges[e] as number;
      if (other >= 0 && other === came) continue;
      const a = triangles[e] as number;
      const b = triangles[e % 3 === 2 ? e - 2 : e + 1] as number;
      const ax = points[2 * a] as number;
      const ay = points[2 * a + 1] as number;
      // The library's triangles run so that a place inside has the non-negative sign of this predicate.
      if (orient2d(ax, ay, points[2 * b] as number, points[2 * b + 1] as number, x, y) < 0) {
        if (other < 0) return -1 - e;
        next = other;
        came = e;
        break;
      }
    }
    if (next < 0) return triangle;
    triangle = Math.floor(next / 3);
  }
  return triangle;
}
