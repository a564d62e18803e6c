import { buildCellLocator, type CellLocator, locateCell } from '../mesh/cell-locator.js';
import type { CellMesh, MeshGeometry } from '../mesh/cell-mesh.js';
import { faceTriangles } from '../mesh/wall-distance.js';
import {
  buildTriangleTree,
  closestOnTriangle,
  createNearestTriangle,
  nearestTriangle,
  type TriangleTree,
} from '../spatial/triangle-tree.js';
import { cellSlopes, type SlopeOptions, type SourceField } from './cell-linear-slopes.js';

/** How places outside the source mesh get values. */
export type OutsideRule = 'nearest' | 'extrapolate' | number;

/** Codes of the `Outside` array. */
export const insideCode = 0;
export const nearestCode = 1;
export const extrapolatedCode = 2;
export const constantCode = 3;

export interface CellLinearOptions extends SlopeOptions {
  /** Default `nearest`: the value at the nearest point of the source's boundary. */
  readonly outside?: OutsideRule;
}

/** All that `cellLinearRange` reads; plain data. */
export interface CellLinearPlan {
  readonly locator: CellLocator;
  readonly boundary: TriangleTree;
  /** Cell behind each boundary triangle. */
  readonly boundaryCells: Int32Array;
  readonly centroids: Float64Array;
  readonly volumes: Float64Array;
  readonly fields: readonly {
    readonly components: number;
    readonly values: Float64Array;
    readonly slopes: Float64Array;
  }[];
  readonly outside: OutsideRule;
}

/** Where `cellLinearRange` writes. */
export interface CellLinearOutput {
  /** One array a field, components x targets. */
  readonly fields: readonly Float64Array[];
  /** targets: 0 inside, 1 nearest, 2 extrapolated, 3 constant. */
  readonly outside: Uint8Array;
  /** targets: distance to the source mesh, m; 0 inside. */
  readonly distance: Float64Array;
}

/** Triangles of all boundary faces and the cells behind them. */
export function boundaryOf(mesh: CellMesh): { boundary: TriangleTree; boundaryCells: Int32Array } {
  const faces = Int32Array.from({ length: mesh.faceCount - mesh.innerFaceCount }, (_, i) => i + mesh.innerFaceCount);
  const triangles = faceTriangles(mesh, faces);
  const cells = new Int32Array(triangles.length / 9);
  let at = 0;
  for (const f of faces) {
    const n = mesh.faceOffsets[f + 1]! - mesh.faceOffsets[f]!;
    for (let i = 0; i < (n === 3 ? 1 : n); i++) cells[at++] = mesh.owner[f]!;
  }
  return { boundary: buildTriangleTree(triangles), boundaryCells: cells };
}

/**
 * Prepares linear transfer from a mesh whose fields stand at cells: value of the containing cell plus its slope times the
 * distance from its centroid.
 *
 * @param fields  values at the cells of `mesh` (volume cells only, in its numbering)
 */
export function prepareCellLinear(
  mesh: CellMesh,
  geometry: MeshGeometry,
  fields: readonly SourceField[],
  options: CellLinearOptions = {},
): CellLinearPlan {
  const slopes = cellSlopes(mesh, geometry, fields, options);
  return {
    locator: buildCellLocator(mesh),
    ...boundaryOf(mesh),
    centroids: geometry.cellCentroids,
    volumes: geometry.cellVolumes,
    fields: fields.map((f, i) => ({ components: f.components, values: f.values, slopes: slopes[i]! })),
    outside: options.outside ?? 'nearest',
  };
}

const closest = new Float64Array(3);

/** Writes all fields of target i from the given cell, evaluated at (x, y, z). */
function evaluate(
  plan: CellLinearPlan,
  cell: number,
  x: number,
  y: number,
  z: number,
  i: number,
  out: readonly Float64Array[],
): void {
  const dx = x - plan.centroids[3 * cell]!;
  const dy = y - plan.centroids[3 * cell + 1]!;
  const dz = z - plan.centroids[3 * cell + 2]!;
  for (let f = 0; f < plan.fields.length; f++) {
    const { components, values, slopes } = plan.fields[f]!;
    const target = out[f]!;
    for (let k = 0; k < components; k++) {
      const s = 3 * (cell * components + k);
      target[i * components + k] =
        values[cell * components + k]! + slopes[s]! * dx + slopes[s + 1]! * dy + slopes[s + 2]! * dz;
    }
  }
}

/**
 * Writes a target that no source cell holds by the rule of the plan: the value at the nearest boundary point; the same
 * slope carried on outwards by at most one width (cube root of the volume) of the cell there; or a number.
 */
export function evaluateOutside(
  plan: CellLinearPlan,
  x: number,
  y: number,
  z: number,
  i: number,
  out: CellLinearOutput,
  nearest: ReturnType<typeof createNearestTriangle>,
): void {
  // Ties between triangles are broken by the order of the search: without a hint it is the same for any range.
  nearest.hint = -1;
  nearestTriangle(plan.boundary, x, y, z, Infinity, nearest);
  const distance = Math.sqrt(nearest.distance2);
  out.distance[i] = distance;
  if (typeof plan.outside === 'number') {
    for (let f = 0; f < plan.fields.length; f++) {
      const { components } = plan.fields[f]!;
      out.fields[f]!.fill(plan.outside, i * components, (i + 1) * components);
    }
    out.outside[i] = constantCode;
    return;
  }
  const cell = plan.boundaryCells[nearest.triangle]!;
  closestOnTriangle(plan.boundary, nearest.place, x, y, z, closest);
  let share = 0;
  if (plan.outside === 'extrapolate' && distance > 0) share = Math.min(1, Math.cbrt(plan.volumes[cell]!) / distance);
  evaluate(
    plan,
    cell,
    closest[0]! + share * (x - closest[0]!),
    closest[1]! + share * (y - closest[1]!),
    closest[2]! + share * (z - closest[2]!),
    i,
    out.fields,
  );
  out.outside[i] = plan.outside === 'extrapolate' ? extrapolatedCode : nearestCode;
}

/**
 * Transfers to targets [begin, end).
 *
 * @param targets  3 x n places, metres
 */
export function cellLinearRange(
  plan: CellLinearPlan,
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
    if (cell < 0) {
      evaluateOutside(plan, x, y, z, i, out, nearest);
      continue;
    }
    evaluate(plan, cell, x, y, z, i, out.fields);
    out.outside[i] = insideCode;
    out.distance[i] = 0;
  }
}
