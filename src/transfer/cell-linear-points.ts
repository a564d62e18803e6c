import type { Dataset } from '../basis/dataset.js';
import type { Field } from '../basis/fields.js';
import { buildCellLocator, type CellLocator, locateCell } from '../mesh/cell-locator.js';
import type { CellMesh, MeshGeometry } from '../mesh/cell-mesh.js';
import {
  closestOnTriangle,
  createNearestTriangle,
  nearestTriangle,
  type TriangleTree,
} from '../spatial/triangle-tree.js';
import {
  boundaryOf,
  type CellLinearOutput,
  constantCode,
  extrapolatedCode,
  insideCode,
  nearestCode,
  type OutsideRule,
} from './cell-linear.js';
import { type ShapeKind, shapeWeights } from './cell-linear-shapes.js';

/** All that `pointLinearRange` reads; plain data. */
export interface PointLinearPlan {
  readonly locator: CellLocator;
  readonly boundary: TriangleTree;
  readonly boundaryCells: Int32Array;
  readonly volumes: Float64Array;
  /** Cell types and corners in the numbering of the data set. */
  readonly types: Uint8Array;
  readonly offsets: Int32Array;
  readonly connectivity: Int32Array;
  readonly datasetCell: Int32Array;
  readonly fields: readonly Field[];
  readonly outside: OutsideRule;
}

const hexahedron = [0, 1, 2, 3, 4, 5, 6, 7] as const;
const voxel = [0, 1, 3, 2, 4, 5, 7, 6] as const;

/** Kind of shape functions by VTK cell type; other cells are divided into tetrahedra. */
function shapeKind(type: number): ShapeKind | 0 {
  if (type === 12 || type === 11 || type === 25 || type === 29 || type === 33 || type === 72 || type === 79) return 8;
  if (type === 10 || type === 24 || type === 71 || type === 78) return 4;
  if (type === 13 || type === 26 || type === 31 || type === 32 || type === 73 || type === 80) return 6;
  if (type === 14 || type === 27 || type === 37 || type === 74 || type === 81) return 5;
  return 0;
}

/**
 * Prepares linear transfer from fields that stand at the points of a mesh: shape functions in tetrahedra, pyramids, wedges
 * and hexahedra; elsewhere linear in the tetrahedra between the mean of the corners, the means of the faces and the edges.
 *
 * @param fields  values at the points of the data set
 */
export function preparePointLinear(
  dataset: Dataset,
  mesh: CellMesh,
  geometry: MeshGeometry,
  fields: readonly Field[],
  options: { readonly outside?: OutsideRule } = {},
): PointLinearPlan {
  const { types, offsets, connectivity } = dataset.cells!;
  return {
    locator: buildCellLocator(mesh),
    ...boundaryOf(mesh),
    volumes: geometry.cellVolumes,
    types,
    offsets,
    connectivity,
    datasetCell: mesh.datasetCell,
    fields: fields.map((f) => ({ components: f.components, values: f.values })),
    outside: options.outside ?? 'nearest',
  };
}

/** Weighted points of one place; grows as needed. */
let chosen = new Int32Array(64);
let weight = new Float64Array(64);
let count = 0;
const corners = new Float64Array(24);
const weights = new Float64Array(8);
const bary = new Float64Array(4);
const bestBary = new Float64Array(4);

function choose(point: number, w: number): void {
  if (count === chosen.length) {
    const moreChosen = new Int32Array(2 * count);
    moreChosen.set(chosen);
    chosen = moreChosen;
    const moreWeight = new Float64Array(2 * count);
    moreWeight.set(weight);
    weight = moreWeight;
  }
  chosen[count] = point;
  weight[count++] = w;
}

/** Barycentric coordinates of the origin in the tetrahedron (a, b, c, d); smallest of the four, -Infinity when it is flat. */
function barycentric(t: Float64Array): number {
  const ux = t[3]! - t[0]!;
  const uy = t[4]! - t[1]!;
  const uz = t[5]! - t[2]!;
  const vx = t[6]! - t[0]!;
  const vy = t[7]! - t[1]!;
  const vz = t[8]! - t[2]!;
  const wx = t[9]! - t[0]!;
  const wy = t[10]! - t[1]!;
  const wz = t[11]! - t[2]!;
  const cx = vy * wz - vz * wy;
  const cy = vz * wx - vx * wz;
  const cz = vx * wy - vy * wx;
  const det = ux * cx + uy * cy + uz * cz;
  if (det === 0) return -Infinity;
  const px = -t[0]!;
  const py = -t[1]!;
  const pz = -t[2]!;
  bary[1] = (px * cx + py * cy + pz * cz) / det;
  bary[2] = (px * (wy * uz - wz * uy) + py * (wz * ux - wx * uz) + pz * (wx * uy - wy * ux)) / det;
  bary[3] = (px * (uy * vz - uz * vy) + py * (uz * vx - ux * vz) + pz * (ux * vy - uy * vx)) / det;
  bary[0] = 1 - bary[1]! - bary[2]! - bary[3]!;
  return Math.min(bary[0]!, bary[1]!, bary[2]!, bary[3]!);
}

const tetrahedron = new Float64Array(12);

/** Weights in the tetrahedron of the cell that holds the place, or comes closest to it. */
function fanWeights(plan: PointLinearPlan, cell: number, x: number, y: number, z: number): void {
  const { points, faceOffsets, facePoints, cellFaceOffsets, cellFaces } = plan.locator.mesh;
  const t = tetrahedron;
  const firstFace = cellFaceOffsets[cell]!;
  const lastFace = cellFaceOffsets[cell + 1]!;
  let total = 0;
  t.fill(0, 0, 3);
  for (let j = firstFace; j < lastFace; j++)
    for (let i = faceOffsets[cellFaces[j]!]!; i < faceOffsets[cellFaces[j]! + 1]!; i++, total++)
      for (let a = 0; a < 3; a++) t[a] = t[a]! + points[3 * facePoints[i]! + a]!;
  t[0] = t[0]! / total - x;
  t[1] = t[1]! / total - y;
  t[2] = t[2]! / total - z;
  let best = -Infinity;
  let bestFace = -1;
  let bestEdge = -1;
  for (let j = firstFace; j < lastFace; j++) {
    const begin = faceOffsets[cellFaces[j]!]!;
    const end = faceOffsets[cellFaces[j]! + 1]!;
    t.fill(0, 9, 12);
    for (let i = begin; i < end; i++)
      for (let a = 0; a < 3; a++) t[9 + a] = t[9 + a]! + points[3 * facePoints[i]! + a]! / (end - begin);
    t[9] = t[9]! - x;
    t[10] = t[10]! - y;
    t[11] = t[11]! - z;
    for (let i = begin; i < end; i++) {
      const p = 3 * facePoints[i]!;
      const q = 3 * facePoints[i + 1 < end ? i + 1 : begin]!;
      t[3] = points[p]! - x;
      t[4] = points[p + 1]! - y;
      t[5] = points[p + 2]! - z;
      t[6] = points[q]! - x;
      t[7] = points[q + 1]! - y;
      t[8] = points[q + 2]! - z;
      const smallest = barycentric(t);
      if (smallest > best) {
        best = smallest;
        bestBary.set(bary);
        bestFace = cellFaces[j]!;
        bestEdge = i;
      }
    }
  }
  for (let j = firstFace; j < lastFace; j++)
    for (let i = faceOffsets[cellFaces[j]!]!; i < faceOffsets[cellFaces[j]! + 1]!; i++)
      choose(facePoints[i]!, bestBary[0]! / total);
  const begin = faceOffsets[bestFace]!;
  const end = faceOffsets[bestFace + 1]!;
  choose(facePoints[bestEdge]!, bestBary[1]!);
  choose(facePoints[bestEdge + 1 < end ? bestEdge + 1 : begin]!, bestBary[2]!);
  for (let i = begin; i < end; i++) choose(facePoints[i]!, bestBary[3]! / (end - begin));
}

/** Writes all fields of target i by the cell's weights at (x, y, z). */
function evaluate(
  plan: PointLinearPlan,
  cell: number,
  x: number,
  y: number,
  z: number,
  i: number,
  out: readonly Float64Array[],
): void {
  const number = plan.datasetCell[cell]!;
  const type = plan.types[number]!;
  const kind = shapeKind(type);
  count = 0;
  if (kind !== 0) {
    const order = type === 11 ? voxel : hexahedron;
    const begin = plan.offsets[number]!;
    const { points } = plan.locator.mesh;
    for (let v = 0; v < kind; v++) {
      const p = 3 * plan.connectivity[begin + order[v]!]!;
      corners[3 * v] = points[p]! - x;
      corners[3 * v + 1] = points[p + 1]! - y;
      corners[3 * v + 2] = points[p + 2]! - z;
    }
    if (shapeWeights(kind, corners, weights))
      for (let v = 0; v < kind; v++) choose(plan.connectivity[begin + order[v]!]!, weights[v]!);
  }
  if (count === 0) fanWeights(plan, cell, x, y, z);
  for (let f = 0; f < plan.fields.length; f++) {
    const { components, values } = plan.fields[f]!;
    for (let k = 0; k < components; k++) {
      let sum = 0;
      for (let v = 0; v < count; v++) sum += weight[v]! * values[chosen[v]! * components + k]!;
      out[f]![i * components + k] = sum;
    }
  }
}

const closest = new Float64Array(3);

/**
 * Transfers to targets [begin, end).
 *
 * @param targets  3 x n places, metres
 */
export function pointLinearRange(
  plan: PointLinearPlan,
  targets: Float64Array,
  begin: number,
  end: number,
  out: CellLinearOutput,
): void {
  const nearest = createNearestTriangle();
  for (let i = begin; i < end; i++) {
    const x = targets[3 * i]!;
    const y = targets[3 * i + 1]!;
    const z = targets[3 * i + 2]!;
    const cell = locateCell(plan.locator, x, y, z);
    if (cell >= 0) {
      evaluate(plan, cell, x, y, z, i, out.fields);
      out.outside[i] = insideCode;
      out.distance[i] = 0;
      continue;
    }
    nearest.hint = -1;
    nearestTriangle(plan.boundary, x, y, z, Infinity, nearest);
    const distance = Math.sqrt(nearest.distance2);
    out.distance[i] = distance;
    if (typeof plan.outside === 'number') {
      for (let f = 0; f < plan.fields.length; f++) {
        const n = plan.fields[f]!.components;
        out.fields[f]!.fill(plan.outside, i * n, (i + 1) * n);
      }
      out.outside[i] = constantCode;
      continue;
    }
    const behind = plan.boundaryCells[nearest.triangle]!;
    closestOnTriangle(plan.boundary, nearest.place, x, y, z, closest);
    let share = 0;
    if (plan.outside === 'extrapolate' && distance > 0)
      share = Math.min(1, Math.cbrt(plan.volumes[behind]!) / distance);
    evaluate(
      plan,
      behind,
      closest[0]! + share * (x - closest[0]!),
      closest[1]! + share * (y - closest[1]!),
      closest[2]! + share * (z - closest[2]!),
      i,
      out.fields,
    );
    out.outside[i] = plan.outside === 'extrapolate' ? extrapolatedCode : nearestCode;
  }
}
