import KDBush from 'kdbush';
import { InputError } from '../basis/errors.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from './cell-mesh.js';

type Axis = 'x' | 'y' | 'z';
type Vector = readonly [number, number, number];

const axisNumber: Readonly<Record<Axis, number>> = { x: 0, y: 1, z: 2 };

interface Sides {
  readonly name: string;
  readonly period: Vector;
  readonly low: Int32Array;
  readonly high: Int32Array;
}

/** Ends of the mesh along an axis, of points that faces use. */
export function meshExtent(mesh: CellMesh): { readonly low: Vector; readonly high: Vector } {
  const low: [number, number, number] = [Infinity, Infinity, Infinity];
  const high: [number, number, number] = [-Infinity, -Infinity, -Infinity];
  for (let i = mesh.faceOffsets[mesh.innerFaceCount]!; i < mesh.facePoints.length; i++) {
    const p = 3 * mesh.facePoints[i]!;
    for (let a = 0; a < 3; a++) {
      const v = mesh.points[p + a]!;
      if (v < low[a]!) low[a] = v;
      if (v > high[a]!) high[a] = v;
    }
  }
  return { low, high };
}

/** Boundary faces whose corners all lie on the plane `axis = at`, to `tolerance`. */
export function facesOnPlane(mesh: CellMesh, axis: number, at: number, tolerance: number): number[] {
  const found: number[] = [];
  for (let face = mesh.innerFaceCount; face < mesh.faceCount; face++) {
    let on = true;
    for (let i = mesh.faceOffsets[face]!; on && i < mesh.faceOffsets[face + 1]!; i++)
      on = Math.abs(mesh.points[3 * mesh.facePoints[i]! + axis]! - at) <= tolerance;
    if (on) found.push(face);
  }
  return found;
}

/** Planes are recognised to this share of the mesh's largest extent. */
export const planeTolerance = 1e-6;

const coordinates = (g: MeshGeometry, face: number): string =>
  [0, 1, 2].map((a) => Number(g.faceCentroids[3 * face + a]!.toPrecision(6))).join(' ');

const areaOf = (g: MeshGeometry, face: number): number =>
  Math.hypot(g.faceAreas[3 * face]!, g.faceAreas[3 * face + 1]!, g.faceAreas[3 * face + 2]!);

/**
 * Mates of the low faces: the high face whose centre, moved back by the period, is nearest, closer than a fiftieth of
 * the face's size (square root of its area) and of the same area to 1 %.
 */
function mate(g: MeshGeometry, sides: Sides, file: string | undefined): Int32Array {
  const { low, high, period } = sides;
  const drop = [0, 1, 2].reduce((best, a) => (Math.abs(period[a]!) > Math.abs(period[best]!) ? a : best), 0);
  const u = (drop + 1) % 3;
  const v = (drop + 2) % 3;
  const centre = g.faceCentroids;
  const mates = new Int32Array(low.length).fill(-1);
  const taken = new Uint8Array(high.length);
  if (high.length > 0) {
    const tree = new KDBush(high.length);
    for (const face of high) tree.add(centre[3 * face + u]! - period[u]!, centre[3 * face + v]! - period[v]!);
    tree.finish();
    low.forEach((face, i) => {
      const x = centre[3 * face + u]!;
      const y = centre[3 * face + v]!;
      const area = areaOf(g, face);
      const reach = 0.02 * Math.sqrt(area);
      let best = -1;
      let nearest = reach * reach;
      for (const h of tree.within(x, y, reach)) {
        const other = high[h]!;
        if (taken[h] === 1 || Math.abs(areaOf(g, other) - area) > 0.01 * area) continue;
        let d2 = 0;
        for (let a = 0; a < 3; a++) d2 += (centre[3 * other + a]! - period[a]! - centre[3 * face + a]!) ** 2;
        if (d2 < nearest || (d2 === nearest && best < 0)) {
          nearest = d2;
          best = h;
        }
      }
      if (best >= 0) {
        taken[best] = 1;
        mates[i] = high[best]!;
      }
    });
  }
  const loose = low.filter((_, i) => mates[i]! < 0);
  const looseHigh = high.filter((_, h) => taken[h] === 0);
  if (loose.length + looseHigh.length > 0) {
    const first = loose[0] ?? looseHigh[0]!;
    throw new InputError({
      ...(file === undefined ? {} : { file }),
      place: sides.name,
      cause: `${loose.length} of ${low.length} faces on one periodic side and ${looseHigh.length} of ${high.length} on the other have no mate, the first at ${coordinates(g, first)}`,
      remedy: 'periodic sides need the same faces, moved by one translation',
    });
  }
  return mates;
}

function gather(g: MeshGeometry, all: readonly Sides[], file: string | undefined): PeriodicPairs {
  const low: number[] = [];
  const high: number[] = [];
  const of: number[] = [];
  all.forEach((sides, number) => {
    const mates = mate(g, sides, file);
    for (let i = 0; i < mates.length; i++) {
      low.push(sides.low[i]!);
      high.push(mates[i]!);
      of.push(number);
    }
  });
  return {
    periods: all.map((s) => s.period),
    lowFaces: Int32Array.from(low),
    highFaces: Int32Array.from(high),
    periodOf: Int32Array.from(of),
  };
}

/**
 * Pairs the boundary faces on the two extreme planes of each axis.
 *
 * @throws InputError when faces have no mate (how many, and where the first is), or none lie on a plane
 */
export function matchPeriodic(
  mesh: CellMesh,
  geometry: MeshGeometry,
  axes: readonly Axis[],
  file?: string,
): PeriodicPairs {
  const { low, high } = meshExtent(mesh);
  const extent = Math.max(high[0] - low[0], high[1] - low[1], high[2] - low[2]);
  const all = axes.map((name): Sides => {
    const axis = axisNumber[name];
    // Thin meshes: the two planes must stay apart.
    const tolerance = Math.min(planeTolerance * extent, 0.01 * (high[axis]! - low[axis]!));
    const period: [number, number, number] = [0, 0, 0];
    period[axis] = high[axis]! - low[axis]!;
    cleanPeriod(period);
    const sides = {
      name: `periodic axis ${name}`,
      period,
      low: Int32Array.from(facesOnPlane(mesh, axis, low[axis]!, tolerance)),
      high: Int32Array.from(facesOnPlane(mesh, axis, high[axis]!, tolerance)),
    };
    if (sides.low.length === 0 || sides.high.length === 0)
      throw new InputError({
        ...(file === undefined ? {} : { file }),
        place: sides.name,
        cause: `no boundary faces lie on the plane ${name} = ${sides.low.length === 0 ? low[axis] : high[axis]}`,
        remedy: 'the ends of the mesh along a periodic axis must be planes',
      });
    return sides;
  });
  return gather(geometry, all, file);
}

function patchFaces(mesh: CellMesh, name: string, file: string | undefined): Int32Array {
  const faces = mesh.patches.filter((p) => p.name === name).flatMap((p) => [...p.faces]);
  if (faces.length > 0) return Int32Array.from(faces);
  const known = mesh.patches.map((p) => p.name);
  throw new InputError({
    ...(file === undefined ? {} : { file }),
    place: `boundary ${name}`,
    cause: known.includes(name) ? 'it holds no boundary face of the mesh' : 'the mesh has no boundary of this name',
    remedy: known.length === 0 ? 'the file names no boundaries' : `its boundaries are ${known.join(', ')}`,
  });
}

function centreOf(g: MeshGeometry, faces: Int32Array): [number, number, number] {
  const sum: [number, number, number] = [0, 0, 0];
  let total = 0;
  for (const face of faces) {
    const area = areaOf(g, face);
    total += area;
    for (let a = 0; a < 3; a++) sum[a] = sum[a]! + area * g.faceCentroids[3 * face + a]!;
  }
  return sum.map((s) => s / total) as [number, number, number];
}

/**
 * Takes the rounding out of a translation, so that the same period found from planes and from boundaries is the same
 * number: wave vectors are snapped to it, and a start must not depend on how its period was named.
 */
function cleanPeriod(period: [number, number, number]): void {
  const size = Math.hypot(...period);
  for (let a = 0; a < 3; a++) {
    const v = period[a as 0];
    period[a as 0] = Math.abs(v) < 1e-9 * size ? 0 : Number(v.toPrecision(14));
  }
}

/**
 * Pairs the faces of named boundaries, two names a period; the translation is that of their centres.
 *
 * @throws InputError when a name is unknown or faces have no mate
 */
export function matchPeriodicPatches(
  mesh: CellMesh,
  geometry: MeshGeometry,
  pairs: readonly (readonly [string, string])[],
  file?: string,
): PeriodicPairs {
  const all = pairs.map(([first, second]): Sides => {
    let low = patchFaces(mesh, first, file);
    let high = patchFaces(mesh, second, file);
    let a = centreOf(geometry, low);
    let b = centreOf(geometry, high);
    if (b[0] - a[0] + (b[1] - a[1]) + (b[2] - a[2]) < 0) {
      [low, high] = [high, low];
      [a, b] = [b, a];
    }
    const period: [number, number, number] = [b[0] - a[0], b[1] - a[1], b[2] - a[2]];
    cleanPeriod(period);
    return {
      name: `periodic boundaries ${first}, ${second}`,
      period,
      low,
      high,
    };
  });
  return gather(geometry, all, file);
}
