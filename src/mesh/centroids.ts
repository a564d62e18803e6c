import type { Dataset } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { sharedFloat64 } from '../basis/fields.js';
import { createFaceBuffer, type FaceBuffer, isVolumeType, readCellFaces } from './cell-faces.js';
import { cellShape, polyhedronType } from './cell-types.js';
import { orientPolyhedron } from './polyhedron-orientation.js';

/** Centroid of the body that the face fans bound; the mean of the rims when it has no volume. */
function bodyCentroid(faces: FaceBuffer, xyz: Float64Array, out: Float64Array, o: number): void {
  const { starts, points, count } = faces;
  let rx = 0;
  let ry = 0;
  let rz = 0;
  const total = starts[count]!;
  for (let i = 0; i < total; i++) {
    const p = 3 * points[i]!;
    rx += xyz[p]!;
    ry += xyz[p + 1]!;
    rz += xyz[p + 2]!;
  }
  rx /= total;
  ry /= total;
  rz /= total;
  let v = 0;
  let sx = 0;
  let sy = 0;
  let sz = 0;
  for (let f = 0; f < count; f++) {
    const begin = starts[f]!;
    const end = starts[f + 1]!;
    let mx = 0;
    let my = 0;
    let mz = 0;
    for (let i = begin; i < end; i++) {
      const p = 3 * points[i]!;
      mx += xyz[p]!;
      my += xyz[p + 1]!;
      mz += xyz[p + 2]!;
    }
    mx = mx / (end - begin) - rx;
    my = my / (end - begin) - ry;
    mz = mz / (end - begin) - rz;
    let p = 3 * points[end - 1]!;
    let ax = xyz[p]! - rx;
    let ay = xyz[p + 1]! - ry;
    let az = xyz[p + 2]! - rz;
    for (let i = begin; i < end; i++) {
      p = 3 * points[i]!;
      const bx = xyz[p]! - rx;
      const by = xyz[p + 1]! - ry;
      const bz = xyz[p + 2]! - rz;
      const t = mx * (ay * bz - az * by) + my * (az * bx - ax * bz) + mz * (ax * by - ay * bx);
      v += t;
      sx += t * (mx + ax + bx);
      sy += t * (my + ay + by);
      sz += t * (mz + az + bz);
      ax = bx;
      ay = by;
      az = bz;
    }
  }
  const scale = v === 0 ? 0 : 1 / (4 * v);
  out[o] = rx + scale * sx;
  out[o + 1] = ry + scale * sy;
  out[o + 2] = rz + scale * sz;
}

/** Adds a triangle's area times its centroid; `sum` holds area, then x, y, z moments. */
function addTriangle(xyz: Float64Array, a: number, b: number, c: number, n: Float64Array, sum: Float64Array): void {
  const ux = xyz[b]! - xyz[a]!;
  const uy = xyz[b + 1]! - xyz[a + 1]!;
  const uz = xyz[b + 2]! - xyz[a + 2]!;
  const vx = xyz[c]! - xyz[a]!;
  const vy = xyz[c + 1]! - xyz[a + 1]!;
  const vz = xyz[c + 2]! - xyz[a + 2]!;
  const w = n[0]! * (uy * vz - uz * vy) + n[1]! * (uz * vx - ux * vz) + n[2]! * (ux * vy - uy * vx);
  sum[0] = sum[0]! + w;
  for (let i = 0; i < 3; i++) sum[1 + i] = sum[1 + i]! + (w * (xyz[a + i]! + xyz[b + i]! + xyz[c + i]!)) / 3;
}

/** Area vector (doubled) of a polygon, with its corners relative to the first. */
function polygonNormal(xyz: Float64Array, rim: ArrayLike<number>, n: Float64Array): void {
  n.fill(0);
  const o = 3 * rim[0]!;
  for (let i = 1; i + 1 < rim.length; i++) {
    const a = 3 * rim[i]!;
    const b = 3 * rim[i + 1]!;
    const ux = xyz[a]! - xyz[o]!;
    const uy = xyz[a + 1]! - xyz[o + 1]!;
    const uz = xyz[a + 2]! - xyz[o + 2]!;
    const vx = xyz[b]! - xyz[o]!;
    const vy = xyz[b + 1]! - xyz[o + 1]!;
    const vz = xyz[b + 2]! - xyz[o + 2]!;
    n[0] = n[0]! + uy * vz - uz * vy;
    n[1] = n[1]! + uz * vx - ux * vz;
    n[2] = n[2]! + ux * vy - uy * vx;
  }
}

const pixelRim = [0, 1, 3, 2];

/** Corners of a cell below three dimensions in rim order. */
function cornersOf(type: number, points: Int32Array): ArrayLike<number> {
  const corners = cellShape(type)!.corners;
  if (type === 8) return pixelRim.map((i) => points[i]!);
  return corners === 0 ? points : points.subarray(0, corners);
}

/** Centroid of a polygon, a strip, a polyline or points; the mean of the corners where the measure is zero. */
function flatCentroid(xyz: Float64Array, type: number, points: Int32Array, out: Float64Array, o: number): void {
  const rim = cornersOf(type, points);
  const n = rim.length;
  const sum = new Float64Array(4);
  const dimension = cellShape(type)!.dimension;
  if (dimension === 2 && type !== 6) {
    const normal = new Float64Array(3);
    polygonNormal(xyz, rim, normal);
    for (let i = 1; i + 1 < n; i++) addTriangle(xyz, 3 * rim[0]!, 3 * rim[i]!, 3 * rim[i + 1]!, normal, sum);
  } else if (dimension === 2) {
    for (let i = 0; i + 2 < n; i++) {
      const normal = new Float64Array(3);
      const t = [rim[i]!, rim[i + 1]!, rim[i + 2]!];
      polygonNormal(xyz, t, normal);
      const size = Math.hypot(normal[0]!, normal[1]!, normal[2]!) || 1;
      addTriangle(
        xyz,
        3 * t[0]!,
        3 * t[1]!,
        3 * t[2]!,
        normal.map((v) => v / size),
        sum,
      );
    }
  } else if (dimension === 1) {
    for (let i = 0; i + 1 < n; i++) {
      const a = 3 * rim[i]!;
      const b = 3 * rim[i + 1]!;
      const w = Math.hypot(xyz[b]! - xyz[a]!, xyz[b + 1]! - xyz[a + 1]!, xyz[b + 2]! - xyz[a + 2]!);
      sum[0] = sum[0]! + w;
      for (let j = 0; j < 3; j++) sum[1 + j] = sum[1 + j]! + 0.5 * w * (xyz[a + j]! + xyz[b + j]!);
    }
  }
  if (!(sum[0]! > 0)) {
    sum.fill(0);
    sum[0] = n;
    for (let i = 0; i < n; i++) for (let j = 0; j < 3; j++) sum[1 + j] = sum[1 + j]! + xyz[3 * rim[i]! + j]!;
  }
  for (let j = 0; j < 3; j++) out[o + j] = sum[1 + j]! / sum[0]!;
}

/**
 * Centroids of all cells of a data set, of any dimension, in the numbering of the data set.
 *
 * @returns 3 x cells, interleaved, in the units of the data set's points
 * @throws InputError when there are no cells or a cell type is not supported
 */
export function datasetCentroids(dataset: Dataset): Float64Array {
  const { cells, file, points: xyz } = dataset;
  if (cells === undefined) throw new InputError({ file, cause: 'the file holds no cells' });
  const n = cells.types.length;
  const out = sharedFloat64(3 * n);
  const buffer = createFaceBuffer();
  for (let c = 0; c < n; c++) {
    const type = cells.types[c]!;
    if (isVolumeType(type)) {
      readCellFaces(cells, c, undefined, buffer, file);
      if (type === polyhedronType) orientPolyhedron(buffer, xyz);
      if (buffer.count === 0) throw new InputError({ file, place: `cell ${c}`, cause: 'the cell has no faces' });
      bodyCentroid(buffer, xyz, out, 3 * c);
      continue;
    }
    if (cellShape(type) === undefined)
      throw new InputError({ file, place: `cell ${c}`, cause: `cells of type ${type} are not supported` });
    const own = cells.connectivity.subarray(cells.offsets[c]!, cells.offsets[c + 1]!);
    if (own.length === 0) throw new InputError({ file, place: `cell ${c}`, cause: 'the cell has no points' });
    flatCentroid(xyz, type, own, out, 3 * c);
  }
  return out;
}
