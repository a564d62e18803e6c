import { componentRms, type DivergenceFigures, divergenceFigures } from '../audit/divergence-figures.js';
import { InputError } from '../basis/errors.js';
import type { ProjectionSettings } from '../case/schema.js';
import type { Hierarchy } from '../divergence/aggregation.js';
import { boundaryCode, createFaceOperator, divergence, type FaceOperator } from '../divergence/face-operator.js';
import { buildPreconditioner, project, projectionLoss } from '../divergence/projection.js';
import { type Progress, timed } from './progress.js';
import { facesOf } from './selections.js';
import type { Target } from './target.js';

export interface ControlRequest {
  readonly target: Target;
  readonly walls: Int32Array;
  readonly projection: ProjectionSettings;
  /** Project the fluctuation; otherwise it is only measured. */
  readonly project: boolean;
  readonly tolerance: number;
}

export interface Controlled {
  /** 3 x cells. */
  readonly fluctuation: Float64Array;
  readonly mean: Float64Array | undefined;
  readonly before: DivergenceFigures;
  readonly after: DivergenceFigures;
  /** Net outward flux of every cell before and after, m3/s. */
  readonly netBefore: Float64Array;
  readonly netAfter: Float64Array;
  readonly operator: FaceOperator;
  readonly loss: number;
  readonly figures: Readonly<Record<string, unknown>>;
}

/** Walls let nothing through, held faces keep their flux, all others take the velocity of their cell. */
async function openOperator(request: ControlRequest): Promise<FaceOperator> {
  const { target, walls, projection } = request;
  const { mesh } = target;
  const boundary = new Uint8Array(mesh.faceCount - mesh.innerFaceCount).fill(boundaryCode.free);
  for (const face of walls) boundary[face - mesh.innerFaceCount] = boundaryCode.wall;
  for (const face of await facesOf(target, projection['hold-flux'])) {
    boundary[face - mesh.innerFaceCount] = boundaryCode.held;
  }
  return createFaceOperator(mesh, target.geometry, {
    periodic: target.periodic,
    boundary,
    weights: projection.weights,
  });
}

function heldFluxesOf(op: FaceOperator, target: Target, velocity: Float64Array): Float64Array {
  return Float64Array.from(op.heldFaces, (face) => {
    const cell = target.mesh.owner[face] as number;
    let flux = 0;
    for (let c = 0; c < 3; c += 1) {
      flux += (target.geometry.faceAreas[3 * face + c] as number) * (velocity[3 * cell + c] as number);
    }
    return flux;
  });
}

/**
 * Held fluxes must balance where no boundary is free: the boundaries and their fluxes are named.
 *
 * @throws InputError
 */
function requireBalance(op: FaceOperator, target: Target, fluxes: Float64Array): void {
  if (op.freeCells.length > 0) return;
  let net = 0;
  let size = 0;
  const byName = new Map<string, number>();
  op.heldFaces.forEach((face, i) => {
    const flux = fluxes[i] as number;
    const name = target.mesh.patches.find((patch) => patch.faces.includes(face))?.name ?? 'unnamed faces';
    byName.set(name, (byName.get(name) ?? 0) + flux);
    net += flux;
    size += Math.abs(flux);
  });
  if (Math.abs(net) <= 1e-9 * size) return;
  const list = [...byName].map(([name, flux]) => `${name} ${flux.toExponential(3)}`).join(', ');
  throw new InputError({
    file: target.file,
    place: 'projection.hold-flux',
    cause: `the held fluxes do not balance (${list} m3/s, net ${net.toExponential(3)}) and no boundary is free`,
    remedy: 'leave one boundary, for example the outflow, out of hold-flux',
  });
}

/** Net outward flux of the mean through every named boundary before and after its projection, m3/s. */
function boundaryFluxes(
  target: Target,
  op: FaceOperator,
  before: Float64Array,
  after: Float64Array,
): readonly { readonly name: string; readonly before: number; readonly after: number }[] {
  const { mesh, geometry } = target;
  const held = new Set(op.heldFaces);
  const through = (face: number, velocity: Float64Array): number => {
    const cell = mesh.owner[face] as number;
    let flux = 0;
    for (let c = 0; c < 3; c += 1) {
      flux += (geometry.faceAreas[3 * face + c] as number) * (velocity[3 * cell + c] as number);
    }
    return flux;
  };
  const lists: { readonly name: string; readonly faces: Int32Array }[] = [...mesh.patches];
  if (lists.length === 0) {
    const count = mesh.faceCount - mesh.innerFaceCount;
    lists.push({
      name: 'whole boundary',
      faces: Int32Array.from({ length: count }, (_, i) => mesh.innerFaceCount + i),
    });
  }
  return lists.map(({ name, faces }) => {
    let [first, second] = [0, 0];
    for (const face of faces) {
      const flux = through(face, before);
      first += flux;
      second += held.has(face) ? flux : through(face, after);
    }
    return { name, before: first, after: second };
  });
}

/**
 * Measures the divergence of the fluctuation, projects it where the case says so, measures again; the mean field too
 * where that is wanted.
 */
export async function controlDivergence(
  request: ControlRequest,
  fluctuation: Float64Array,
  mean: Float64Array | undefined,
  progress: Progress,
  timings: Map<string, number>,
): Promise<Controlled> {
  const { target } = request;
  const op = await openOperator(request);
  const { cellVolumes: volumes, cellCentroids } = target.geometry;
  const scale = componentRms(fluctuation, volumes);
  const measure = (net: Float64Array): DivergenceFigures => divergenceFigures(net, volumes, cellCentroids, scale);
  const netBefore = new Float64Array(op.cellCount);
  divergence(op, fluctuation, netBefore);
  const hierarchy: Hierarchy = await timed(progress, timings, 'prepare projection', 0, () => buildPreconditioner(op));
  const options = { tolerance: request.tolerance, iterations: request.projection.iterations, hierarchy };
  const run = (velocity: Float64Array, fluxes?: Float64Array) => {
    let done = 0;
    const end = Math.log(request.tolerance);
    return project(op, velocity, {
      ...options,
      ...(fluxes === undefined ? {} : { heldFluxes: fluxes }),
      progress: (share) => {
        const now = Math.min(100, (100 * Math.log(Math.max(share, request.tolerance))) / end);
        progress.advance(Math.max(0, now - done));
        done = Math.max(done, now);
      },
    });
  };
  const figures: Record<string, unknown> = {
    operator: `interpolated faces, weights by ${request.projection.weights === 'equal' ? 'halves' : 'distance'}`,
  };
  let controlled = fluctuation;
  if (request.project) {
    const result = await timed(progress, timings, 'project', 100, () => run(fluctuation));
    controlled = result.velocity;
    figures.fluctuation = {
      iterations: result.iterations,
      converged: result.converged,
      reduction: result.history.at(-1) ?? 0,
      energyRemoved: result.energyBefore > 0 ? 1 - result.energyAfter / result.energyBefore : 0,
    };
  }
  let projectedMean = mean;
  if (request.projection.mean && mean !== undefined) {
    const held = heldFluxesOf(op, target, mean);
    requireBalance(op, target, held);
    const result = await timed(progress, timings, 'project mean', 100, () => run(mean, held));
    projectedMean = result.velocity;
    figures.mean = {
      iterations: result.iterations,
      converged: result.converged,
      reduction: result.history.at(-1) ?? 0,
      energyOfChange: result.energyBefore > 0 ? result.energyOfChange / result.energyBefore : 0,
      boundaries: boundaryFluxes(target, op, mean, result.velocity),
    };
  }
  const netAfter = new Float64Array(op.cellCount);
  divergence(op, controlled, netAfter);
  const loss = await timed(progress, timings, 'projection loss', 0, () => projectionLoss(op, controlled, hierarchy));
  return {
    fluctuation: controlled,
    mean: projectedMean,
    before: measure(netBefore),
    after: measure(netAfter),
    netBefore,
    netAfter,
    operator: op,
    loss,
    figures,
  };
}
