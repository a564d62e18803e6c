import type { Field } from '../basis/fields.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';
import { applyGradient, createGradient, type GradientOperator } from '../mesh/gradient.js';

export interface SlopeOptions {
  /** Limit slopes so that no new extrema arise inside the mesh; default true. */
  readonly limited?: boolean;
  readonly periodic?: PeriodicPairs | undefined;
}

/** A source field that may not be reconstructed below zero says so. */
export interface SourceField extends Field {
  readonly nonNegative?: boolean;
}

/** Points of boundary faces. */
function boundaryPoints(mesh: CellMesh): Uint8Array {
  const on = new Uint8Array(mesh.points.length / 3);
  for (let i = mesh.faceOffsets[mesh.innerFaceCount]!; i < mesh.facePoints.length; i++) on[mesh.facePoints[i]!] = 1;
  return on;
}

/**
 * Cells (1) whose neighbours across the faces lie on one linear function with them to rounding, judged by the slopes of
 * the cell and of each neighbour: nothing to limit there.
 */
function linearCells(
  operator: GradientOperator,
  values: Float64Array,
  components: number,
  component: number,
  slopes: Float64Array,
): Uint8Array {
  const { centroids, innerFaceCount, owner, neighbour, cellCount } = operator;
  const linear = new Uint8Array(cellCount).fill(1);
  for (let face = 0; face < innerFaceCount; face++) {
    const a = owner[face]!;
    const b = neighbour[face]!;
    if (linear[a] === 0 && linear[b] === 0) continue;
    const va = values[a * components + component]!;
    const rise = values[b * components + component]! - va;
    const p = 3 * (a * components + component);
    const q = 3 * (b * components + component);
    let byA = 0;
    let byB = 0;
    let size = Math.abs(rise);
    for (let i = 0; i < 3; i++) {
      const d = centroids[3 * b + i]! - centroids[3 * a + i]!;
      byA += slopes[p + i]! * d;
      byB += slopes[q + i]! * d;
      size += Math.abs(slopes[p + i]! * d);
    }
    if (Math.abs(rise - byA) > 1e-9 * size || Math.abs(rise - byB) > 1e-9 * size) {
      linear[a] = 0;
      linear[b] = 0;
    }
  }
  return linear;
}

/**
 * Scales the slopes of one component in place by the largest factor in [0, 1] that keeps the value at every vertex of a
 * cell within the values of the cells that share a vertex with it (Barth & Jespersen 1989, AIAA 89-0366, with the wider
 * neighbourhood of Park, Yoon & Kim 2010, J. Comput. Phys. 229:788-812). Vertices on the boundary have cells on one side
 * only: there the value may leave the cell's own, up or down, by as much as any of those cells does. Where the
 * cells around lie on one linear function the slope is kept.
 */
function limitComponent(
  mesh: CellMesh,
  operator: GradientOperator,
  geometry: MeshGeometry,
  field: SourceField,
  component: number,
  onBoundary: Uint8Array,
  slopes: Float64Array,
): void {
  const { points, faceOffsets, facePoints, cellFaceOffsets, cellFaces, cellCount } = mesh;
  const { components, values } = field;
  const low = new Float64Array(onBoundary.length).fill(Infinity);
  const high = new Float64Array(onBoundary.length).fill(-Infinity);
  for (let cell = 0; cell < cellCount; cell++) {
    const v = values[cell * components + component]!;
    for (let j = cellFaceOffsets[cell]!; j < cellFaceOffsets[cell + 1]!; j++) {
      const face = cellFaces[j]!;
      for (let i = faceOffsets[face]!; i < faceOffsets[face + 1]!; i++) {
        const p = facePoints[i]!;
        if (v < low[p]!) low[p] = v;
        if (v > high[p]!) high[p] = v;
      }
    }
  }
  const centre = geometry.cellCentroids;
  const linear = linearCells(operator, values, components, component, slopes);
  for (let cell = 0; cell < cellCount; cell++) {
    const v = values[cell * components + component]!;
    const o = 3 * (cell * components + component);
    const gx = slopes[o]!;
    const gy = slopes[o + 1]!;
    const gz = slopes[o + 2]!;
    if (gx === 0 && gy === 0 && gz === 0) continue;
    if (linear[cell] === 1 && field.nonNegative !== true) continue;
    let lowest = v;
    let highest = v;
    for (let j = cellFaceOffsets[cell]!; j < cellFaceOffsets[cell + 1]!; j++) {
      const face = cellFaces[j]!;
      for (let i = faceOffsets[face]!; i < faceOffsets[face + 1]!; i++) {
        const p = facePoints[i]!;
        if (high[p]! > highest) highest = high[p]!;
        if (low[p]! < lowest) lowest = low[p]!;
      }
    }
    const spread = Math.max(highest - v, v - lowest);
    // Rounding of the slopes must not trip the limiter on linear fields.
    const slack = 1e-12 * (spread + Math.abs(v));
    let factor = 1;
    for (let j = cellFaceOffsets[cell]!; j < cellFaceOffsets[cell + 1]!; j++) {
      const face = cellFaces[j]!;
      for (let i = faceOffsets[face]!; i < faceOffsets[face + 1]!; i++) {
        const p = facePoints[i]!;
        const rise =
          gx * (points[3 * p]! - centre[3 * cell]!) +
          gy * (points[3 * p + 1]! - centre[3 * cell + 1]!) +
          gz * (points[3 * p + 2]! - centre[3 * cell + 2]!);
        let room: number;
        if (onBoundary[p] === 1) room = spread;
        else room = rise > 0 ? highest - v : v - lowest;
        if (field.nonNegative === true && rise < 0) room = Math.min(room, Math.max(0, v));
        const size = Math.abs(rise);
        if (size > room + slack) factor = Math.min(factor, room / size);
      }
    }
    if (factor < 1) {
      slopes[o] = gx * factor;
      slopes[o + 1] = gy * factor;
      slopes[o + 2] = gz * factor;
    }
  }
}

/**
 * Slopes of cell values: least-squares gradients, limited unless asked otherwise.
 *
 * @returns for each field 3 x components x cells, as `applyGradient`
 */
export function cellSlopes(
  mesh: CellMesh,
  geometry: MeshGeometry,
  fields: readonly SourceField[],
  options: SlopeOptions = {},
): Float64Array[] {
  const operator = createGradient(mesh, geometry, options.periodic);
  const onBoundary = boundaryPoints(mesh);
  return fields.map((field) => {
    const slopes = applyGradient(operator, field.values, field.components);
    if (options.limited !== false)
      for (let k = 0; k < field.components; k++) limitComponent(mesh, operator, geometry, field, k, onBoundary, slopes);
    return slopes;
  });
}
