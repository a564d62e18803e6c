import { cellBoxes } from '../mesh/cell-locator.js';
import type { CellMesh, MeshGeometry } from '../mesh/cell-mesh.js';
import { type BoxTree, buildBoxTree, createFoundItems, itemsNear } from '../spatial/box-tree.js';
import { createNearestTriangle } from '../spatial/triangle-tree.js';
import {
  type CellLinearOptions,
  type CellLinearOutput,
  type CellLinearPlan,
  evaluateOutside,
  extrapolatedCode,
  insideCode,
  prepareCellLinear,
} from './cell-linear.js';
import type { SourceField } from './cell-linear-slopes.js';
import { type BodyMesh, bodiesOf } from './conservative-cells.js';
import { addOverlap } from './conservative-overlap.js';

export interface ConservativeOptions extends CellLinearOptions {
  /** 1: source values constant over a cell; 2 (default): with their slopes. */
  readonly order?: 1 | 2;
}

/** All that `conservativeRange` reads; plain data. */
export interface ConservativePlan {
  readonly source: BodyMesh;
  readonly target: BodyMesh;
  readonly tree: BoxTree;
  /** 6 x source cells. */
  readonly sourceBoxes: Float64Array;
  /** Target volumes, m3. */
  readonly volumes: Float64Array;
  readonly order: 1 | 2;
  /** Slopes, and values for targets that no source cell touches. */
  readonly linear: CellLinearPlan;
}

export interface ConservativeOutput extends CellLinearOutput {
  /** targets: share of the cell's volume that the source mesh covers; 1 inside. */
  readonly covered: Float64Array;
}

/** Targets covered by less than 1 - this are flagged as partly extrapolated. */
export const coverTolerance = 1e-9;

/**
 * Prepares volume-weighted transfer between two meshes: the value of a target cell is the mean of the source over what the
 * cell shares with the source mesh, V_T f_T = sum_S |T n S| (f_S + slope_S . (x_TS - x_S)), with x_TS the centroid of the
 * shared part. Integrals over the overlap are kept to rounding, with and without slopes.
 *
 * @param fields  values at the cells of `source`; to keep momentum and energy pass density times them and divide afterwards
 * @see Dukowicz & Kodis 1987, SIAM J. Sci. Stat. Comput. 8:305-321; Farrell & Maddison 2011, Comput. Methods Appl. Mech.
 *   Eng. 200:89-100 (supermesh)
 */
export function prepareConservative(
  source: { readonly mesh: CellMesh; readonly geometry: MeshGeometry },
  target: { readonly mesh: CellMesh; readonly geometry: MeshGeometry },
  fields: readonly SourceField[],
  options: ConservativeOptions = {},
): ConservativePlan {
  const sourceBoxes = cellBoxes(source.mesh);
  return {
    source: bodiesOf(source.mesh, source.geometry),
    target: bodiesOf(target.mesh, target.geometry),
    tree: buildBoxTree(sourceBoxes),
    sourceBoxes,
    volumes: target.geometry.cellVolumes,
    order: options.order ?? 2,
    linear: prepareCellLinear(source.mesh, source.geometry, fields, options),
  };
}

const found = createFoundItems();
const sum = new Float64Array(4);
const box = new Float64Array(6);

function boxOf(b: BodyMesh, cell: number): void {
  box.fill(Infinity, 0, 3);
  box.fill(-Infinity, 3, 6);
  for (let j = b.cellFaceOffsets[cell]!; j < b.cellFaceOffsets[cell + 1]!; j++) {
    const face = b.cellFaces[j]!;
    for (let i = b.faceOffsets[face]!; i < b.faceOffsets[face + 1]!; i++) {
      const p = 3 * b.facePoints[i]!;
      for (let a = 0; a < 3; a++) {
        const v = b.points[p + a]!;
        if (v < box[a]!) box[a] = v;
        if (v > box[3 + a]!) box[3 + a] = v;
      }
    }
  }
}

/** Transfers to target cells [begin, end). */
export function conservativeRange(plan: ConservativePlan, begin: number, end: number, out: ConservativeOutput): void {
  const { source, target, tree, sourceBoxes, linear } = plan;
  const nearest = createNearestTriangle();
  const centre = target.cellCentroids;
  for (let i = begin; i < end; i++) {
    const ox = centre[3 * i]!;
    const oy = centre[3 * i + 1]!;
    const oz = centre[3 * i + 2]!;
    boxOf(target, i);
    itemsNear(tree, box, found);
    let shared = 0;
    for (let f = 0; f < linear.fields.length; f++) {
      const n = linear.fields[f]!.components;
      out.fields[f]!.fill(0, i * n, (i + 1) * n);
    }
    for (let c = 0; c < found.count; c++) {
      const cell = found.items[c]!;
      const o = 6 * cell;
      if (
        sourceBoxes[o]! >= box[3]! ||
        sourceBoxes[o + 3]! <= box[0]! ||
        sourceBoxes[o + 1]! >= box[4]! ||
        sourceBoxes[o + 4]! <= box[1]! ||
        sourceBoxes[o + 2]! >= box[5]! ||
        sourceBoxes[o + 5]! <= box[2]!
      )
        continue;
      sum.fill(0);
      addOverlap(source, cell, target, i, ox, oy, oz, sum);
      const v = sum[0]!;
      if (v === 0) continue;
      shared += v;
      // First moment of the shared part about the source centroid.
      const mx = sum[1]! + v * (ox - linear.centroids[3 * cell]!);
      const my = sum[2]! + v * (oy - linear.centroids[3 * cell + 1]!);
      const mz = sum[3]! + v * (oz - linear.centroids[3 * cell + 2]!);
      for (let f = 0; f < linear.fields.length; f++) {
        const { components, values, slopes } = linear.fields[f]!;
        const to = out.fields[f]!;
        for (let k = 0; k < components; k++) {
          const at = i * components + k;
          let part = v * values[cell * components + k]!;
          if (plan.order === 2) {
            const s = 3 * (cell * components + k);
            part += slopes[s]! * mx + slopes[s + 1]! * my + slopes[s + 2]! * mz;
          }
          to[at] = to[at]! + part;
        }
      }
    }
    const covered = shared / plan.volumes[i]!;
    // Below this share the overlap is rounding of touching boundaries.
    if (!(covered > coverTolerance)) {
      out.covered[i] = 0;
      evaluateOutside(linear, ox, oy, oz, i, out, nearest);
      continue;
    }
    out.covered[i] = covered;
    for (let f = 0; f < linear.fields.length; f++) {
      const n = linear.fields[f]!.components;
      for (let at = i * n; at < (i + 1) * n; at++) out.fields[f]![at] = out.fields[f]![at]! / shared;
    }
    out.outside[i] = covered < 1 - coverTolerance ? extrapolatedCode : insideCode;
    out.distance[i] = 0;
  }
}
