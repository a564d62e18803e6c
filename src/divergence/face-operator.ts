import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';

/** Treatment of a boundary face that is not periodic. */
export const boundaryCode = {
  /** No flux passes. */
  wall: 0,
  /** The flux is given and not changed. */
  held: 1,
  /** The face takes the velocity of its cell. */
  free: 2,
} as const;

export interface FaceOperatorOptions {
  readonly periodic?: PeriodicPairs | undefined;
  /** A code of `boundaryCode` for every boundary face (face number less innerFaceCount); default all walls. */
  readonly boundary?: Uint8Array;
  /** Face value between two cells: by distance (default) or one half each. */
  readonly weights?: 'distance' | 'equal';
}

/**
 * The discrete divergence by interpolated faces: the net outward volume flux of every cell is the sum over its faces
 * of S_f . u_f, with u_f = (1 - t) u_P + t u_N and t = n . (x_f - x_P) / n . (x_N - x_P) clipped to [0, 1].
 * Plain data.
 */
export interface FaceOperator {
  readonly cellCount: number;
  /** Links between two cells: inner faces, then periodic pairs. */
  readonly linkCount: number;
  readonly owner: Int32Array;
  readonly neighbour: Int32Array;
  /** 3 x links: (1 - t) S. */
  readonly ownerWeights: Float64Array;
  /** 3 x links: t S. */
  readonly neighbourWeights: Float64Array;
  /** Cells behind free boundary faces and the area vectors of those faces (3 x). */
  readonly freeCells: Int32Array;
  readonly freeAreas: Float64Array;
  /** Faces whose flux is held, and their cells. */
  readonly heldFaces: Int32Array;
  readonly heldCells: Int32Array;
  readonly volumes: Float64Array;
  readonly weights: 'distance' | 'equal';
}

function interpolation(
  areas: Float64Array,
  centres: Float64Array,
  cells: Float64Array,
  face: number,
  p: number,
  n: number,
  shift: readonly [number, number, number],
): number {
  let toFace = 0;
  let toCell = 0;
  for (let c = 0; c < 3; c += 1) {
    const s = areas[3 * face + c] as number;
    const from = cells[3 * p + c] as number;
    toFace += s * ((centres[3 * face + c] as number) - from);
    toCell += s * ((cells[3 * n + c] as number) - shift[c as 0] - from);
  }
  const t = toCell === 0 ? 0.5 : toFace / toCell;
  return t < 0 ? 0 : Math.min(t, 1);
}

/**
 * Builds the operator.
 *
 * @see Ferziger & Peric, Computational Methods for Fluid Dynamics, section 4.4 (linear interpolation to face centres)
 */
export function createFaceOperator(
  mesh: CellMesh,
  geometry: MeshGeometry,
  options: FaceOperatorOptions = {},
): FaceOperator {
  const { periodic, boundary, weights = 'distance' } = options;
  const inner = mesh.innerFaceCount;
  const pairs = periodic?.lowFaces.length ?? 0;
  const linkCount = inner + pairs;
  const owner = new Int32Array(linkCount);
  const neighbour = new Int32Array(linkCount);
  const ownerWeights = new Float64Array(3 * linkCount);
  const neighbourWeights = new Float64Array(3 * linkCount);
  const { faceAreas, faceCentroids, cellCentroids } = geometry;
  const none = [0, 0, 0] as const;
  const isPeriodic = new Uint8Array(mesh.faceCount - inner);
  for (let link = 0; link < linkCount; link += 1) {
    const pair = link - inner;
    const face = pair < 0 ? link : (periodic?.lowFaces[pair] as number);
    const p = mesh.owner[face] as number;
    let n: number;
    let shift: readonly [number, number, number] = none;
    if (pair < 0) n = mesh.neighbour[face] as number;
    else {
      const mate = periodic?.highFaces[pair] as number;
      n = mesh.owner[mate] as number;
      shift = periodic?.periods[periodic.periodOf[pair] as number] ?? none;
      isPeriodic[face - inner] = 1;
      isPeriodic[mate - inner] = 1;
    }
    owner[link] = p;
    neighbour[link] = n;
    const t = weights === 'equal' ? 0.5 : interpolation(faceAreas, faceCentroids, cellCentroids, face, p, n, shift);
    for (let c = 0; c < 3; c += 1) {
      const s = faceAreas[3 * face + c] as number;
      ownerWeights[3 * link + c] = (1 - t) * s;
      neighbourWeights[3 * link + c] = t * s;
    }
  }
  const freeFaces: number[] = [];
  const heldFaces: number[] = [];
  for (let b = 0; b < isPeriodic.length; b += 1) {
    if (isPeriodic[b] === 1) continue;
    const code = boundary?.[b] ?? boundaryCode.wall;
    if (code === boundaryCode.free) freeFaces.push(inner + b);
    else if (code === boundaryCode.held) heldFaces.push(inner + b);
  }
  const freeAreas = new Float64Array(3 * freeFaces.length);
  freeFaces.forEach((face, i) => {
    freeAreas.set(faceAreas.subarray(3 * face, 3 * face + 3), 3 * i);
  });
  return {
    cellCount: mesh.cellCount,
    linkCount,
    owner,
    neighbour,
    ownerWeights,
    neighbourWeights,
    freeCells: Int32Array.from(freeFaces, (face) => mesh.owner[face] as number),
    freeAreas,
    heldFaces: Int32Array.from(heldFaces),
    heldCells: Int32Array.from(heldFaces, (face) => mesh.owner[face] as number),
    volumes: geometry.cellVolumes,
    weights,
  };
}

/**
 * D u: net outward volume flux of every cell, m3/s.
 *
 * @param velocity    3 x cells, m/s
 * @param out         cells
 * @param heldFluxes  outward flux through each of `heldFaces`, m3/s; none when left out
 */
export function divergence(
  op: FaceOperator,
  velocity: Float64Array,
  out: Float64Array,
  heldFluxes?: Float64Array,
): void {
  const { owner, neighbour, ownerWeights: a, neighbourWeights: b, linkCount } = op;
  out.fill(0);
  for (let link = 0; link < linkCount; link += 1) {
    const p = owner[link] as number;
    const n = neighbour[link] as number;
    const i = 3 * link;
    const flux =
      (a[i] as number) * (velocity[3 * p] as number) +
      (a[i + 1] as number) * (velocity[3 * p + 1] as number) +
      (a[i + 2] as number) * (velocity[3 * p + 2] as number) +
      (b[i] as number) * (velocity[3 * n] as number) +
      (b[i + 1] as number) * (velocity[3 * n + 1] as number) +
      (b[i + 2] as number) * (velocity[3 * n + 2] as number);
    out[p] = (out[p] as number) + flux;
    out[n] = (out[n] as number) - flux;
  }
  const { freeCells, freeAreas, heldCells } = op;
  for (let f = 0; f < freeCells.length; f += 1) {
    const p = freeCells[f] as number;
    out[p] =
      (out[p] as number) +
      (freeAreas[3 * f] as number) * (velocity[3 * p] as number) +
      (freeAreas[3 * f + 1] as number) * (velocity[3 * p + 1] as number) +
      (freeAreas[3 * f + 2] as number) * (velocity[3 * p + 2] as number);
  }
  if (heldFluxes !== undefined) {
    for (let f = 0; f < heldCells.length; f += 1) {
      const p = heldCells[f] as number;
      out[p] = (out[p] as number) + (heldFluxes[f] as number);
    }
  }
}

/**
 * W D^T p with W = 1 / volume: the change of velocity that a potential p makes.
 *
 * @param out  3 x cells
 */
export function scaledAdjoint(op: FaceOperator, p: Float64Array, out: Float64Array): void {
  const { owner, neighbour, ownerWeights: a, neighbourWeights: b, linkCount, volumes } = op;
  out.fill(0);
  for (let link = 0; link < linkCount; link += 1) {
    const c = owner[link] as number;
    const n = neighbour[link] as number;
    const difference = (p[c] as number) - (p[n] as number);
    const i = 3 * link;
    const ci = 3 * c;
    const ni = 3 * n;
    out[ci] = (out[ci] as number) + (a[i] as number) * difference;
    out[ci + 1] = (out[ci + 1] as number) + (a[i + 1] as number) * difference;
    out[ci + 2] = (out[ci + 2] as number) + (a[i + 2] as number) * difference;
    out[ni] = (out[ni] as number) + (b[i] as number) * difference;
    out[ni + 1] = (out[ni + 1] as number) + (b[i + 1] as number) * difference;
    out[ni + 2] = (out[ni + 2] as number) + (b[i + 2] as number) * difference;
  }
  const { freeCells, freeAreas } = op;
  for (let f = 0; f < freeCells.length; f += 1) {
    const c = freeCells[f] as number;
    for (let d = 0; d < 3; d += 1) {
      out[3 * c + d] = (out[3 * c + d] as number) + (freeAreas[3 * f + d] as number) * (p[c] as number);
    }
  }
  for (let c = 0; c < op.cellCount; c += 1) {
    const w = 1 / (volumes[c] as number);
    out[3 * c] = (out[3 * c] as number) * w;
    out[3 * c + 1] = (out[3 * c + 1] as number) * w;
    out[3 * c + 2] = (out[3 * c + 2] as number) * w;
  }
}
