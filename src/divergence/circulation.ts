import type { CellMesh, PeriodicPairs } from '../mesh/cell-mesh.js';
import { type MeshEdges, meshEdges, periodicEdgeClasses } from './edges.js';

/** Points on edges at which a potential is wanted. */
export interface EdgePoints {
  readonly count: number;
  /** 3 x count, metres. */
  readonly points: Float64Array;
  /** Mesh points at the two ends of the edge on which each lies. */
  readonly firstEnds: Int32Array;
  readonly secondEnds: Int32Array;
  /** Share of the way from the first to the second end, 0 to 1: for values interpolated between mesh points. */
  readonly shares: Float64Array;
}

/** Writes A (3 x count, m2/s) at the points; one value a place, whichever edge or face asks. */
export type PotentialAt = (at: EdgePoints, out: Float64Array) => void;

const batchEdges = 4096;
/** Gauss-Legendre with two points on [0, 1], exact for cubics (Abramowitz & Stegun 1964, table 25.4). */
const gauss = [0.5 - Math.sqrt(1 / 12), 0.5 + Math.sqrt(1 / 12)] as const;

/**
 * Integrals of A . dl along every edge by two-point Gauss quadrature.
 *
 * @returns edges, m3/s, along the edge from its first to its second point
 */
export function edgeIntegrals(mesh: CellMesh, edges: MeshEdges, potential: PotentialAt): Float64Array {
  const out = new Float64Array(edges.count);
  const points = new Float64Array(6 * batchEdges);
  const firstEnds = new Int32Array(2 * batchEdges);
  const secondEnds = new Int32Array(2 * batchEdges);
  const shares = new Float64Array(2 * batchEdges);
  const values = new Float64Array(6 * batchEdges);
  for (let begin = 0; begin < edges.count; begin += batchEdges) {
    const size = Math.min(batchEdges, edges.count - begin);
    for (let e = 0; e < size; e += 1) {
      const a = edges.points[2 * (begin + e)] as number;
      const b = edges.points[2 * (begin + e) + 1] as number;
      for (let g = 0; g < 2; g += 1) {
        const at = 2 * e + g;
        const share = gauss[g as 0];
        firstEnds[at] = a;
        secondEnds[at] = b;
        shares[at] = share;
        for (let c = 0; c < 3; c += 1) {
          const from = mesh.points[3 * a + c] as number;
          points[3 * at + c] = from + share * ((mesh.points[3 * b + c] as number) - from);
        }
      }
    }
    const count = 2 * size;
    potential(
      {
        count,
        points: points.subarray(0, 3 * count),
        firstEnds: firstEnds.subarray(0, count),
        secondEnds: secondEnds.subarray(0, count),
        shares: shares.subarray(0, count),
      },
      values.subarray(0, 3 * count),
    );
    for (let e = 0; e < size; e += 1) {
      const a = 3 * (edges.points[2 * (begin + e)] as number);
      const b = 3 * (edges.points[2 * (begin + e) + 1] as number);
      let sum = 0;
      for (let c = 0; c < 3; c += 1) {
        const mean = 0.5 * ((values[6 * e + c] as number) + (values[6 * e + 3 + c] as number));
        sum += mean * ((mesh.points[b + c] as number) - (mesh.points[a + c] as number));
      }
      out[begin + e] = sum;
    }
  }
  return out;
}

/**
 * Flux of u = curl A through every face by Stokes' theorem: the sum of A . dl around it, positive along the face's area
 * vector. A warped face is the fan of triangles about its centre, whose spokes are run through once in each direction
 * and drop out of the sum, so the fluxes need the outer edges only, hold for any surface spanned by them, and every edge
 * of a closed cell is met by two faces in opposite directions: the fluxes of each cell sum to zero for any integrals.
 *
 * @param integrals  edges, from `edgeIntegrals`
 * @returns faces, m3/s
 */
export function faceCirculations(mesh: CellMesh, edges: MeshEdges, integrals: Float64Array): Float64Array {
  const { faceCount, faceOffsets, facePoints } = mesh;
  const out = new Float64Array(faceCount);
  for (let face = 0; face < faceCount; face += 1) {
    let sum = 0;
    const end = faceOffsets[face + 1] as number;
    for (let i = faceOffsets[face] as number; i < end; i += 1) {
      const edge = edges.faceEdges[i] as number;
      const value = integrals[edge] as number;
      sum += edges.points[2 * edge] === facePoints[i] ? value : -value;
    }
    out[face] = sum;
  }
  return out;
}

export interface CirculationFluxes {
  /** Faces (mesh order: inner faces, then boundary faces), m3/s along the face's area vector. */
  readonly fluxes: Float64Array;
  /**
   * Largest difference between the integral of an edge and that of the periodic edge that stands for it, over the rms
   * integral: rounding when the potential is periodic. The integral of the standing edge is used for both.
   */
  readonly periodicMismatch: number;
}

/**
 * Face fluxes of a vector potential whose sum over every closed cell is zero to rounding, and equal on periodic mates.
 *
 * @param potential  called with batches of points on the edges
 */
export function circulationFluxes(mesh: CellMesh, potential: PotentialAt, periodic?: PeriodicPairs): CirculationFluxes {
  const edges = meshEdges(mesh);
  const integrals = edgeIntegrals(mesh, edges, potential);
  let periodicMismatch = 0;
  if (periodic !== undefined) {
    const { root, sign } = periodicEdgeClasses(mesh, edges, periodic);
    let squares = 0;
    for (let e = 0; e < edges.count; e += 1) {
      squares += (integrals[e] as number) ** 2;
      if (root[e] === e) continue;
      const value = (sign[e] as number) * (integrals[root[e] as number] as number);
      periodicMismatch = Math.max(periodicMismatch, Math.abs(value - (integrals[e] as number)));
      integrals[e] = value;
    }
    periodicMismatch = squares > 0 ? periodicMismatch / Math.sqrt(squares / edges.count) : 0;
  }
  return { fluxes: faceCirculations(mesh, edges, integrals), periodicMismatch };
}

/**
 * Net outward sum of face fluxes of every cell.
 *
 * @returns cells, m3/s
 */
export function netFaceFluxes(mesh: CellMesh, fluxes: Float64Array): Float64Array {
  const out = new Float64Array(mesh.cellCount);
  for (let face = 0; face < mesh.faceCount; face += 1) {
    const p = mesh.owner[face] as number;
    out[p] = (out[p] as number) + (fluxes[face] as number);
    if (face < mesh.innerFaceCount) {
      const n = mesh.neighbour[face] as number;
      out[n] = (out[n] as number) - (fluxes[face] as number);
    }
  }
  return out;
}

/** Columns of `faceKeys`. */
export const faceKeyColumns = 5;

/**
 * What a reader of face fluxes needs to find each face in the data set: number of its owner cell and of its neighbour
 * (-1 at the boundary) in the data set's order of cells, and its first three points, from 0. The right-hand rule over
 * the points gives the direction in which the flux counts positive: out of the owner. Faces come in the mesh's order:
 * those between two cells first, then the boundary's, each in the order in which the cells first meet them.
 *
 * @returns 5 x faces
 */
export function faceKeys(mesh: CellMesh): Int32Array {
  const out = new Int32Array(faceKeyColumns * mesh.faceCount);
  for (let face = 0; face < mesh.faceCount; face += 1) {
    const at = faceKeyColumns * face;
    out[at] = mesh.datasetCell[mesh.owner[face] as number] as number;
    out[at + 1] = face < mesh.innerFaceCount ? (mesh.datasetCell[mesh.neighbour[face] as number] as number) : -1;
    const begin = mesh.faceOffsets[face] as number;
    for (let i = 0; i < 3; i += 1) out[at + 2 + i] = mesh.facePoints[begin + i] as number;
  }
  return out;
}
