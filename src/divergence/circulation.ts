import type { CellMesh } from '../mesh/cell-mesh.js';
import { findEdges, type MeshEdges } from './edges.js';

/** Places of the two Gauss points along an edge, as shares of its length. */
export const gaussPlaces = [0.5 - Math.sqrt(3) / 6, 0.5 + Math.sqrt(3) / 6] as const;

/** Edges worked on at a time: bounds the memory of points and potential. */
const edgeBlock = 8192;

/** Gauss points of a block of edges. */
export interface EdgePoints {
  /** 3 x points, two an edge, metres. */
  readonly points: Float64Array;
  /** Point numbers of the edge's two ends, 2 x edges of the block. */
  readonly ends: Int32Array;
}

/**
 * Fills in the vector potential at the Gauss points, 3 x points, m2/s. It must depend on nothing but the edge and the
 * place on it: two Gauss points of one edge are asked for once, on behalf of all faces that share it.
 */
export type PotentialOnEdges = (block: EdgePoints, out: Float64Array) => void;

function setGaussPoints(mesh: CellMesh, ends: Int32Array, out: Float64Array): void {
  const { points } = mesh;
  for (let e = 0; 2 * e < ends.length; e++) {
    const p = 3 * ends[2 * e]!;
    const q = 3 * ends[2 * e + 1]!;
    for (let g = 0; g < 2; g++) {
      const t = gaussPlaces[g as 0 | 1];
      for (let c = 0; c < 3; c++) out[6 * e + 3 * g + c] = (1 - t) * points[p + c]! + t * points[q + c]!;
    }
  }
}

/**
 * Integral of A . dl along every edge, lower to higher point, by the two-point Gauss rule (exact for cubic A along the
 * edge).
 *
 * @returns edges, m3/s
 */
export function edgeIntegrals(mesh: CellMesh, edges: MeshEdges, potential: PotentialOnEdges): Float64Array {
  const { points } = mesh;
  const integrals = new Float64Array(edges.count);
  const places = new Float64Array(6 * Math.min(edgeBlock, edges.count));
  const values = new Float64Array(places.length);
  for (let first = 0; first < edges.count; first += edgeBlock) {
    const count = Math.min(edgeBlock, edges.count - first);
    const ends = edges.points.subarray(2 * first, 2 * (first + count));
    const at = places.subarray(0, 6 * count);
    const a = values.subarray(0, 6 * count);
    setGaussPoints(mesh, ends, at);
    potential({ points: at, ends }, a);
    for (let e = 0; e < count; e++) {
      const p = 3 * ends[2 * e]!;
      const q = 3 * ends[2 * e + 1]!;
      let sum = 0;
      for (let c = 0; c < 3; c++) sum += (points[q + c]! - points[p + c]!) * (a[6 * e + c]! + a[6 * e + 3 + c]!);
      integrals[first + e] = sum / 2;
    }
  }
  return integrals;
}

/**
 * Flux of curl A through every face: by Stokes' theorem the circulation of A round its rim. Every edge of a closed cell
 * is run along twice, once each way, so the outward fluxes of any closed cell sum to zero whatever the quadrature. The
 * spokes of a fan about a warped face's centre would be run along both ways within the face: they drop out, and the flux
 * is that through any surface on the rim.
 *
 * @param integrals  of `edgeIntegrals`
 * @returns faces in the numbering of the mesh, m3/s, out of the owner
 * @see Hirani 2003, Discrete Exterior Calculus (thesis, Caltech): the boundary of a boundary is empty
 */
export function rimFluxes(mesh: CellMesh, edges: MeshEdges, integrals: Float64Array): Float64Array {
  const { faceOffsets, facePoints, faceCount } = mesh;
  const fluxes = new Float64Array(faceCount);
  for (let f = 0; f < faceCount; f++) {
    let sum = 0;
    for (let a = faceOffsets[f]!; a < faceOffsets[f + 1]!; a++) {
      const edge = edges.ofCorner[a]!;
      sum += facePoints[a] === edges.points[2 * edge] ? integrals[edge]! : -integrals[edge]!;
    }
    fluxes[f] = sum;
  }
  return fluxes;
}

/** Fluxes of curl A through all faces, m3/s, out of the owner; see `rimFluxes`. */
export function circulationFluxes(mesh: CellMesh, potential: PotentialOnEdges): Float64Array {
  const edges = findEdges(mesh);
  return rimFluxes(mesh, edges, edgeIntegrals(mesh, edges, potential));
}

/** Sum of the outward fluxes of every cell, m3/s. */
export function netFluxes(mesh: CellMesh, fluxes: Float64Array): Float64Array {
  const net = new Float64Array(mesh.cellCount);
  for (let f = 0; f < mesh.faceCount; f++) {
    net[mesh.owner[f]!]! += fluxes[f]!;
    if (f < mesh.innerFaceCount) net[mesh.neighbour[f]!]! -= fluxes[f]!;
  }
  return net;
}
