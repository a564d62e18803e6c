import { InputError } from '../basis/errors.js';
import { buildHierarchy, cycle, dot, type Hierarchy } from './aggregation.js';
import { divergence, type FaceOperator, scaledAdjoint } from './face-operator.js';
import { wideMatrix } from './wide-matrix.js';

export interface ProjectionOptions {
  /** Ends when |D u| (root of the sum of squares) is down to this share of its start; default 1e-6. */
  readonly tolerance?: number;
  /** Most iterations; default 1000. */
  readonly iterations?: number;
  /** Outward fluxes through the operator's `heldFaces`, m3/s. */
  readonly heldFluxes?: Float64Array;
  /** Called after every iteration with the present share of the start. */
  readonly progress?: (share: number) => void;
  /** A hierarchy built before for the same operator. */
  readonly hierarchy?: Hierarchy;
}

export interface ProjectionResult {
  /** 3 x cells: the projected velocity. */
  readonly velocity: Float64Array;
  readonly iterations: number;
  readonly converged: boolean;
  /** |D u| after every iteration over its start. */
  readonly history: readonly number[];
  /** Volume integral of |u|^2 / 2 before and after, m5/s2. */
  readonly energyBefore: number;
  readonly energyAfter: number;
  /** Volume integral of |change|^2 / 2. */
  readonly energyOfChange: number;
}

function volumeEnergy(volumes: Float64Array, velocity: Float64Array): number {
  let sum = 0;
  for (let c = 0; c < volumes.length; c += 1) {
    const x = velocity[3 * c] as number;
    const y = velocity[3 * c + 1] as number;
    const z = velocity[3 * c + 2] as number;
    sum += (volumes[c] as number) * (x * x + y * y + z * z);
  }
  return sum / 2;
}

/** The preconditioner of an operator; worth keeping when several fields are projected. */
export function buildPreconditioner(op: FaceOperator): Hierarchy {
  return buildHierarchy(wideMatrix(op));
}

/**
 * The smallest volume-weighted change of the cell velocities that makes the discrete divergence vanish,
 * u - W D^T (D W D^T)^+ D u with W = 1 / volume, by flexible conjugate gradients (Notay 2000, SIAM Journal on
 * Scientific Computing 22:1444) preconditioned by aggregation multigrid. The input is not changed.
 *
 * @param velocity  3 x cells, m/s
 * @throws InputError when held fluxes do not balance and nothing else can take the difference
 */
export function project(op: FaceOperator, velocity: Float64Array, options: ProjectionOptions = {}): ProjectionResult {
  const { tolerance = 1e-6, iterations: most = 1000, heldFluxes } = options;
  const n = op.cellCount;
  requireBalance(op, heldFluxes);
  const r = new Float64Array(n);
  divergence(op, velocity, r, heldFluxes);
  const start = Math.sqrt(dot(r, r));
  const energyBefore = volumeEnergy(op.volumes, velocity);
  const unchanged = {
    velocity: velocity.slice(),
    iterations: 0,
    converged: true,
    history: [],
    energyBefore,
    energyAfter: energyBefore,
    energyOfChange: 0,
  };
  // Below this lies rounding, part of it in the null space of D^T, which no potential answers.
  const floor = attainable(op, velocity, heldFluxes);
  if (start <= floor) return unchanged;
  const hierarchy = options.hierarchy ?? buildPreconditioner(op);
  const p = new Float64Array(n);
  const z = new Float64Array(n);
  const d = new Float64Array(n);
  const q = new Float64Array(n);
  const gradient = new Float64Array(3 * n);
  const history: number[] = [];
  let rhoBefore = 0;
  let converged = false;
  for (let step = 0; step < most; step += 1) {
    cycle(hierarchy, r, z);
    // Flexible: z is made orthogonal to the last direction by its own product, not by the residuals'.
    const beta = step === 0 ? 0 : -dot(z, q) / rhoBefore;
    for (let i = 0; i < n; i += 1) d[i] = (z[i] as number) + beta * (d[i] as number);
    scaledAdjoint(op, d, gradient);
    divergence(op, gradient, q);
    const rho = dot(d, q);
    if (!(rho > 0)) break;
    const alpha = dot(d, r) / rho;
    for (let i = 0; i < n; i += 1) {
      p[i] = (p[i] as number) + alpha * (d[i] as number);
      r[i] = (r[i] as number) - alpha * (q[i] as number);
    }
    rhoBefore = rho;
    const left = Math.sqrt(dot(r, r));
    const share = left / start;
    history.push(share);
    options.progress?.(share);
    if (share <= tolerance || left <= floor) {
      converged = true;
      break;
    }
  }
  scaledAdjoint(op, p, gradient);
  const projected = new Float64Array(3 * n);
  for (let i = 0; i < 3 * n; i += 1) projected[i] = (velocity[i] as number) - (gradient[i] as number);
  return {
    velocity: projected,
    iterations: history.length,
    converged,
    history,
    energyBefore,
    energyAfter: volumeEnergy(op.volumes, projected),
    energyOfChange: volumeEnergy(op.volumes, gradient),
  };
}

/** Size of |D u| below which only rounding is left, and what held fluxes lack of balance. */
function attainable(op: FaceOperator, velocity: Float64Array, heldFluxes: Float64Array | undefined): number {
  const { owner, neighbour, ownerWeights, neighbourWeights, freeCells, freeAreas, cellCount } = op;
  let squares = 0;
  const addProducts = (cells: Int32Array, list: Float64Array): void => {
    for (let i = 0; i < cells.length; i += 1) {
      const c = cells[i] as number;
      for (let d = 0; d < 3; d += 1) squares += ((list[3 * i + d] as number) * (velocity[3 * c + d] as number)) ** 2;
    }
  };
  addProducts(owner, ownerWeights);
  addProducts(neighbour, neighbourWeights);
  addProducts(freeCells, freeAreas);
  let net = 0;
  for (const flux of heldFluxes ?? []) {
    squares += flux * flux;
    net += flux;
  }
  const lacking = freeCells.length > 0 ? 0 : Math.abs(net) / Math.sqrt(Math.max(1, cellCount));
  // Products are rounded, and so are the centroids and areas in them: a few units in the last place each.
  return roundingUnits * 2 ** -52 * Math.sqrt(squares) + 2 * lacking;
}

const roundingUnits = 8;

function requireBalance(op: FaceOperator, heldFluxes: Float64Array | undefined): void {
  if (heldFluxes === undefined || op.freeCells.length > 0) return;
  let net = 0;
  let size = 0;
  for (const flux of heldFluxes) {
    net += flux;
    size += Math.abs(flux);
  }
  if (Math.abs(net) <= 1e-9 * size) return;
  throw new InputError({
    place: 'held boundary fluxes',
    cause: `they sum to ${net.toExponential(3)} m3/s (of ${size.toExponential(3)} in and out) and no boundary is free`,
    remedy: 'leave one boundary, for example the outflow, out of hold-flux',
  });
}

/**
 * Share of a fluctuation's energy that a discrete projection removes: what the first pressure solve of the run will
 * take away.
 */
export function projectionLoss(op: FaceOperator, fluctuation: Float64Array, hierarchy?: Hierarchy): number {
  const result = project(op, fluctuation, {
    // What is left unsolved counts by its square in the energy.
    tolerance: 1e-3,
    ...(hierarchy === undefined ? {} : { hierarchy }),
  });
  return result.energyBefore === 0 ? 0 : 1 - result.energyAfter / result.energyBefore;
}
