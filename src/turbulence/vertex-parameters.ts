import type { CellMesh, PeriodicPairs } from '../mesh/cell-mesh.js';
import { column, type FluctuationPlan } from './plan.js';

/** Least root of a forest of equal vertices. */
function rootOf(parent: Int32Array, point: number): number {
  let root = point;
  while (parent[root] !== root) root = parent[root]!;
  let at = point;
  while (parent[at] !== root) {
    const next = parent[at]!;
    parent[at] = root;
    at = next;
  }
  return root;
}

/** Vertices that are one and the same across periods, by the nearest vertex of the mate face. */
function periodicClasses(mesh: CellMesh, periodic: PeriodicPairs | undefined): Int32Array {
  const parent = new Int32Array(mesh.points.length / 3).map((_, i) => i);
  if (periodic === undefined) return parent;
  for (let i = 0; i < periodic.lowFaces.length; i++) {
    const low = periodic.lowFaces[i]!;
    const high = periodic.highFaces[i]!;
    const [px, py, pz] = periodic.periods[periodic.periodOf[i]!]!;
    for (let a = mesh.faceOffsets[low]!; a < mesh.faceOffsets[low + 1]!; a++) {
      const p = mesh.facePoints[a]!;
      let best = -1;
      let least = Infinity;
      for (let b = mesh.faceOffsets[high]!; b < mesh.faceOffsets[high + 1]!; b++) {
        const q = mesh.facePoints[b]!;
        const d =
          (mesh.points[3 * q]! - mesh.points[3 * p]! - px) ** 2 +
          (mesh.points[3 * q + 1]! - mesh.points[3 * p + 1]! - py) ** 2 +
          (mesh.points[3 * q + 2]! - mesh.points[3 * p + 2]! - pz) ** 2;
        if (d < least) {
          least = d;
          best = q;
        }
      }
      const a0 = rootOf(parent, p);
      const b0 = rootOf(parent, best);
      if (a0 !== b0) parent[Math.max(a0, b0)] = Math.min(a0, b0);
    }
  }
  for (let i = 0; i < parent.length; i++) parent[i] = rootOf(parent, i);
  return parent;
}

/**
 * Parameters at the vertices of the mesh: means over the cells that meet there, the same on both sides of a period, with
 * amplitude zero on the vertices of the faces given (walls: no flux passes them). Interpolated linearly along an edge they
 * give each of its points one potential, whichever face asks.
 *
 * @param quietFaces  boundary faces on which the potential vanishes
 * @returns plan.columns x vertices
 */
export function vertexParameters(
  plan: FluctuationPlan,
  mesh: CellMesh,
  periodic: PeriodicPairs | undefined,
  quietFaces: Int32Array,
): Float64Array {
  const points = mesh.points.length / 3;
  const classes = periodicClasses(mesh, periodic);
  const { columns } = plan;
  const sum = new Float64Array(columns * points);
  const count = new Float64Array(points);
  // A cell counts once for every of its faces that meets the vertex: equal for all corners of the same kind.
  for (let f = 0; f < mesh.faceCount; f++) {
    for (let a = mesh.faceOffsets[f]!; a < mesh.faceOffsets[f + 1]!; a++) {
      const p = classes[mesh.facePoints[a]!]!;
      for (let side = 0; side < (f < mesh.innerFaceCount ? 2 : 1); side++) {
        const cell = side === 0 ? mesh.owner[f]! : mesh.neighbour[f]!;
        count[p]!++;
        for (let c = 0; c < columns; c++) sum[columns * p + c]! += plan.parameters[columns * cell + c]!;
      }
    }
  }
  const out = new Float64Array(columns * points);
  for (let i = 0; i < points; i++) {
    const p = classes[i]!;
    for (let c = 0; c < columns; c++) out[columns * i + c] = count[p]! > 0 ? sum[columns * p + c]! / count[p]! : 0;
  }
  const quiet = new Uint8Array(points);
  for (const f of quietFaces)
    for (let a = mesh.faceOffsets[f]!; a < mesh.faceOffsets[f + 1]!; a++) quiet[classes[mesh.facePoints[a]!]!] = 1;
  for (let i = 0; i < points; i++) if (quiet[classes[i]!] === 1) out[columns * i + column.amplitude] = 0;
  return out;
}
