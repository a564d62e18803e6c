import { InputError } from '../basis/errors.js';
import { buildTriangleTree, createNearestTriangle, nearestTriangle } from '../spatial/triangle-tree.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from './cell-mesh.js';
import { facesOnPlane, meshExtent, planeTolerance } from './periodic.js';

/** Polygons of a surface file. */
export interface SurfacePolygons {
  /** 3 x n, metres. */
  readonly points: Float64Array;
  /** polygons + 1 starts into `connectivity`. */
  readonly offsets: Int32Array;
  readonly connectivity: Int32Array;
  /** For messages. */
  readonly file?: string;
}

/**
 * Which boundary faces: a boundary's name, `all` (every face that is not periodic), faces on planes normal to an axis,
 * faces whose centre is in a box, faces that lie on a surface.
 */
export type BoundarySelection =
  | string
  | { readonly plane: 'x' | 'y' | 'z'; readonly at: number | readonly number[] }
  | { readonly box: readonly (readonly number[])[] }
  | { readonly surface: SurfacePolygons };

interface Context {
  readonly mesh: CellMesh;
  readonly geometry: MeshGeometry;
  readonly periodic: PeriodicPairs | undefined;
  readonly file: string | undefined;
}

function nothing(context: Context, place: string, cause: string, remedy: string): InputError {
  return new InputError({ ...(context.file === undefined ? {} : { file: context.file }), place, cause, remedy });
}

function byName(context: Context, name: string): number[] {
  const { mesh } = context;
  const patches = mesh.patches.filter((p) => p.name === name);
  const faces = patches.flatMap((p) => [...p.faces]);
  if (faces.length > 0) return faces;
  const known = mesh.patches.map((p) => p.name);
  throw nothing(
    context,
    `boundary ${name}`,
    patches.length > 0 ? 'it holds no boundary face of the mesh' : 'the mesh has no boundary of this name',
    known.length === 0
      ? 'the file names no boundaries, so select by plane, box, surface or all'
      : `its boundaries are ${known.join(', ')}`,
  );
}

function byPlane(context: Context, plane: 'x' | 'y' | 'z', at: number | readonly number[]): number[] {
  const axis = { x: 0, y: 1, z: 2 }[plane];
  const { low, high } = meshExtent(context.mesh);
  const tolerance = planeTolerance * Math.max(high[0] - low[0], high[1] - low[1], high[2] - low[2]);
  return (typeof at === 'number' ? [at] : at).flatMap((value) => {
    const faces = facesOnPlane(context.mesh, axis, value, tolerance);
    if (faces.length > 0) return faces;
    throw nothing(
      context,
      `plane ${plane} = ${value}`,
      'no boundary face lies on it',
      `the mesh reaches from ${plane} = ${low[axis]} to ${high[axis]}`,
    );
  });
}

function byBox(context: Context, box: readonly (readonly number[])[]): number[] {
  const { mesh, geometry } = context;
  const [a, b] = box;
  const found: number[] = [];
  for (let face = mesh.innerFaceCount; face < mesh.faceCount; face++) {
    let inside = true;
    for (let i = 0; i < 3; i++) {
      const v = geometry.faceCentroids[3 * face + i]!;
      inside &&= v >= Math.min(a![i]!, b![i]!) && v <= Math.max(a![i]!, b![i]!);
    }
    if (inside) found.push(face);
  }
  if (found.length > 0) return found;
  throw nothing(context, `box ${JSON.stringify(box)}`, 'no boundary face has its centre inside', 'enlarge the box');
}

/** Polygons as triangles about their mean. */
function surfaceTriangles(surface: SurfacePolygons): Float64Array {
  const out: number[] = [];
  for (let i = 0; i + 1 < surface.offsets.length; i++) {
    const rim = surface.connectivity.subarray(surface.offsets[i]!, surface.offsets[i + 1]!);
    const n = rim.length;
    if (n < 3) continue;
    const corner = (j: number): number[] => [0, 1, 2].map((a) => surface.points[3 * rim[j % n]! + a]!);
    if (n === 3) {
      out.push(...corner(0), ...corner(1), ...corner(2));
      continue;
    }
    const mean = [0, 1, 2].map((a) => rim.reduce((s, p) => s + surface.points[3 * p + a]! / n, 0));
    for (let j = 0; j < n; j++) out.push(...corner(j), ...corner(j + 1), ...mean);
  }
  return Float64Array.from(out);
}

/**
 * Faces that lie on the surface: centre and corners within a fiftieth of the face's size (square root of its area), and
 * the face within 45 degrees of the triangle beneath its centre, so that faces that only touch it with an edge stay out.
 */
function bySurface(context: Context, surface: SurfacePolygons): number[] {
  const { mesh, geometry } = context;
  const triangles = surfaceTriangles(surface);
  const tree = buildTriangleTree(triangles);
  const nearest = createNearestTriangle();
  const found: number[] = [];
  for (let face = mesh.innerFaceCount; face < mesh.faceCount; face++) {
    const area = geometry.faceAreas.subarray(3 * face, 3 * face + 3);
    const size = Math.hypot(area[0]!, area[1]!, area[2]!);
    const limit = 4e-4 * size;
    const centre = geometry.faceCentroids;
    nearestTriangle(tree, centre[3 * face]!, centre[3 * face + 1]!, centre[3 * face + 2]!, limit, nearest);
    if (nearest.triangle < 0) continue;
    const t = triangles.subarray(9 * nearest.triangle, 9 * nearest.triangle + 9);
    const u = [0, 1, 2].map((a) => t[3 + a]! - t[a]!);
    const v = [0, 1, 2].map((a) => t[6 + a]! - t[a]!);
    const n = [0, 1, 2].map((a) => u[(a + 1) % 3]! * v[(a + 2) % 3]! - u[(a + 2) % 3]! * v[(a + 1) % 3]!);
    const along = Math.abs(n[0]! * area[0]! + n[1]! * area[1]! + n[2]! * area[2]!);
    let on = along > Math.SQRT1_2 * size * Math.hypot(n[0]!, n[1]!, n[2]!);
    for (let i = mesh.faceOffsets[face]!; on && i < mesh.faceOffsets[face + 1]!; i++) {
      const p = 3 * mesh.facePoints[i]!;
      nearestTriangle(tree, mesh.points[p]!, mesh.points[p + 1]!, mesh.points[p + 2]!, limit, nearest);
      on = nearest.triangle >= 0;
    }
    if (on) found.push(face);
  }
  if (found.length > 0) return found;
  throw nothing(
    context,
    surface.file === undefined ? 'surface' : `surface ${surface.file}`,
    'no boundary face lies on it',
    'check its units and position',
  );
}

function all(context: Context): number[] {
  const { mesh, periodic } = context;
  const taken = new Uint8Array(mesh.faceCount - mesh.innerFaceCount);
  for (const faces of [periodic?.lowFaces, periodic?.highFaces])
    for (const f of faces ?? []) taken[f - mesh.innerFaceCount] = 1;
  const found: number[] = [];
  taken.forEach((t, i) => {
    if (t === 0) found.push(i + mesh.innerFaceCount);
  });
  return found;
}

/**
 * Boundary faces that any of the selections takes, each once, in rising order.
 *
 * @throws InputError when a selection takes no face, or a name is unknown
 */
export function selectBoundaryFaces(
  mesh: CellMesh,
  geometry: MeshGeometry,
  selections: readonly BoundarySelection[],
  options: { readonly periodic?: PeriodicPairs | undefined; readonly file?: string | undefined } = {},
): Int32Array {
  const context = { mesh, geometry, periodic: options.periodic, file: options.file };
  const chosen = new Set<number>();
  for (const selection of selections) {
    let faces: number[];
    if (typeof selection === 'string') {
      const named = mesh.patches.some((p) => p.name === selection);
      faces = selection === 'all' && !named ? all(context) : byName(context, selection);
    } else if ('plane' in selection) faces = byPlane(context, selection.plane, selection.at);
    else if ('box' in selection) faces = byBox(context, selection.box);
    else faces = bySurface(context, selection.surface);
    for (const f of faces) chosen.add(f);
  }
  return Int32Array.from(chosen).sort();
}
