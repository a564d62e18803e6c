import type { CellTopology } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { cellShape, polyhedronType } from './cell-types.js';

/** Faces of one cell at a time, gathered into arrays that are used again for the next cell. */
export interface FaceBuffer {
  count: number;
  /** count + 1 starts into `points`. */
  starts: Int32Array;
  points: Int32Array;
}

export function createFaceBuffer(): FaceBuffer {
  return { count: 0, starts: new Int32Array(64), points: new Int32Array(512) };
}

interface FlatShape {
  readonly faces: number;
  /** faces + 1 starts into `corners`. */
  readonly starts: Int32Array;
  readonly corners: Int32Array;
  readonly pointCount: number;
}

/** Face tables by cell type; undefined where a type has no volume. */
const flatShapes: readonly (FlatShape | undefined)[] = Array.from({ length: 256 }, (_, type) => {
  const shape = cellShape(type);
  if (shape === undefined || shape.dimension !== 3 || type === polyhedronType) return undefined;
  const starts = new Int32Array(shape.faces.length + 1);
  shape.faces.forEach((face, i) => {
    starts[i + 1] = starts[i]! + face.length;
  });
  return {
    faces: shape.faces.length,
    starts,
    corners: Int32Array.from(shape.faces.flat()),
    pointCount: shape.corners,
  };
});

/** Greatest number of faces that `readCellFaces` can give for a cell. */
export function faceCountBound(cells: CellTopology, cell: number): number {
  const type = cells.types[cell]!;
  if (type === polyhedronType) return cells.polyhedronFaces![cells.polyhedronOffsets![cell]!]!;
  return flatShapes[type]!.faces;
}

function grow(array: Int32Array, wanted: number): Int32Array {
  if (array.length >= wanted) return array;
  const larger = new Int32Array(2 * wanted);
  larger.set(array);
  return larger;
}

function broken(file: string, cell: number, cause: string): InputError {
  return new InputError({ file, place: `cell ${cell}`, cause, remedy: 'write the mesh anew from its source' });
}

/**
 * Reads the faces of a volume cell of any type. Equal points that follow each other count once, and faces that are left
 * with fewer than three corners are dropped: collapsed edges of hexahedra need no special treatment.
 *
 * @param pointOf  representative of each point where coincident points have been welded
 * @throws InputError when a polyhedron carries no faces or a cell has too few points
 */
export function readCellFaces(
  cells: CellTopology,
  cell: number,
  pointOf: Int32Array | undefined,
  out: FaceBuffer,
  file: string,
): void {
  const type = cells.types[cell]!;
  const shape = flatShapes[type];
  let kept = 0;
  let at = 0;
  if (shape !== undefined) {
    const begin = cells.offsets[cell]!;
    if (cells.offsets[cell + 1]! - begin < shape.pointCount) throw broken(file, cell, 'too few points for its type');
    const { connectivity } = cells;
    const { starts, corners, faces } = shape;
    const target = out.points;
    for (let f = 0; f < faces; f++) {
      const from = at;
      for (let i = starts[f]!; i < starts[f + 1]!; i++) {
        let p = connectivity[begin + corners[i]!]!;
        if (pointOf !== undefined) p = pointOf[p]!;
        if (at === from || target[at - 1] !== p) target[at++] = p;
      }
      if (at - from > 1 && target[at - 1] === target[from]) at--;
      if (at - from < 3) at = from;
      else out.starts[++kept] = at;
    }
    out.count = kept;
    return;
  }
  const { polyhedronFaces: stream, polyhedronOffsets: offsets } = cells;
  if (stream === undefined || offsets === undefined) throw broken(file, cell, 'a polyhedron without faces');
  const end = offsets[cell + 1]!;
  let read = offsets[cell]!;
  if (end - read < 1) throw broken(file, cell, 'a polyhedron without faces');
  const faces = stream[read++]!;
  out.starts = grow(out.starts, faces + 1);
  out.points = grow(out.points, end - read);
  for (let f = 0; f < faces; f++) {
    const from = at;
    const n = stream[read++]!;
    if (!(n >= 0 && read + n <= end)) throw broken(file, cell, 'the face list of a polyhedron is inconsistent');
    for (let i = 0; i < n; i++) {
      let p = stream[read++]!;
      if (pointOf !== undefined) p = pointOf[p]!;
      if (at === from || out.points[at - 1] !== p) out.points[at++] = p;
    }
    if (at - from > 1 && out.points[at - 1] === out.points[from]) at--;
    if (at - from < 3) at = from;
    else out.starts[++kept] = at;
  }
  out.count = kept;
}

/** Reverses the corner order of one face. */
export function reverseFace(faces: FaceBuffer, f: number): void {
  let i = faces.starts[f]!;
  let j = faces.starts[f + 1]! - 1;
  const { points } = faces;
  for (; i < j; i++, j--) {
    const held = points[i]!;
    points[i] = points[j]!;
    points[j] = held;
  }
}

/**
 * Six times the volume between a face and the point (x, y, z), positive when the face's area vector points away from it:
 * the fan about the mean of the corners.
 */
export function facePyramid(faces: FaceBuffer, f: number, xyz: Float64Array, x: number, y: number, z: number): number {
  const begin = faces.starts[f]!;
  const end = faces.starts[f + 1]!;
  const { points } = faces;
  let mx = 0;
  let my = 0;
  let mz = 0;
  for (let i = begin; i < end; i++) {
    const p = 3 * points[i]!;
    mx += xyz[p]!;
    my += xyz[p + 1]!;
    mz += xyz[p + 2]!;
  }
  mx = mx / (end - begin) - x;
  my = my / (end - begin) - y;
  mz = mz / (end - begin) - z;
  let sum = 0;
  let p = 3 * points[end - 1]!;
  let ax = xyz[p]! - x;
  let ay = xyz[p + 1]! - y;
  let az = xyz[p + 2]! - z;
  for (let i = begin; i < end; i++) {
    p = 3 * points[i]!;
    const bx = xyz[p]! - x;
    const by = xyz[p + 1]! - y;
    const bz = xyz[p + 2]! - z;
    sum += mx * (ay * bz - az * by) + my * (az * bx - ax * bz) + mz * (ax * by - ay * bx);
    ax = bx;
    ay = by;
    az = bz;
  }
  return sum;
}

/** Six times the volume of the cell whose faces are in the buffer. */
export function cellSixVolume(faces: FaceBuffer, xyz: Float64Array): number {
  const p = 3 * faces.points[0]!;
  let sum = 0;
  for (let f = 0; f < faces.count; f++) sum += facePyramid(faces, f, xyz, xyz[p]!, xyz[p + 1]!, xyz[p + 2]!);
  return sum;
}

/** True for cell types with a volume. */
export function isVolumeType(type: number): boolean {
  return type === polyhedronType || flatShapes[type] !== undefined;
}
