import { type AuditFigures, auditField } from '../audit/audit.js';
import { componentRms, divergenceFigures } from '../audit/divergence-figures.js';
import { InputError } from '../basis/errors.js';
import type { Field } from '../basis/fields.js';
import { recogniseFields } from '../basis/quantities.js';
import type { FaceSelection } from '../case/parts.js';
import { boundaryCode, createFaceOperator, divergence } from '../divergence/face-operator.js';
import { buildPreconditioner, projectionLoss } from '../divergence/projection.js';
import { type Progress, timed } from './progress.js';
import { facesOf } from './selections.js';
import { loadTarget, type PeriodicDirection, type Target } from './target.js';
import { provenanceNote } from './write-start.js';

export interface AuditRequest {
  readonly file: string;
  readonly rename: Readonly<Record<string, string>>;
  /** Undefined: what the file's own note says, or none. */
  readonly periodic?: readonly PeriodicDirection[] | undefined;
  readonly walls?: readonly FaceSelection[] | undefined;
  readonly timeStep?: number | undefined;
  readonly weights: 'distance' | 'equal';
  readonly progress: Progress;
}

export interface AuditOutcome {
  readonly audit: AuditFigures;
  readonly target: Target;
  readonly fields: ReadonlyMap<string, Field>;
  readonly assumptions: readonly string[];
}

interface Noted {
  readonly periodic?: readonly PeriodicDirection[];
  readonly walls?: readonly FaceSelection[];
}

/** What a start file says of itself; nothing for files made elsewhere or with a damaged note. */
function noteOf(text: string | undefined): Noted {
  if (text === undefined) return {};
  try {
    const note: unknown = JSON.parse(text);
    return typeof note === 'object' && note !== null ? (note as Noted) : {};
  } catch {
    return {};
  }
}

function toCells(target: Target, field: Field): Float64Array {
  const { mesh } = target;
  const out = new Float64Array(mesh.cellCount * field.components);
  for (let c = 0; c < mesh.cellCount; c += 1) {
    const from = (mesh.datasetCell[c] as number) * field.components;
    for (let i = 0; i < field.components; i += 1) out[c * field.components + i] = field.values[from + i] as number;
  }
  return out;
}

/**
 * Measures a finished start, or any velocity on the cells of a mesh, from its file alone.
 *
 * @throws InputError when the file has no mesh or no Velocity on its cells
 */
export async function auditFile(request: AuditRequest): Promise<AuditOutcome> {
  const { file, progress } = request;
  const timings = new Map<string, number>();
  const plain = await loadTarget(file, [], progress, timings);
  const noted = noteOf(plain.dataset.notes.get(provenanceNote));
  const periodic = request.periodic ?? noted.periodic ?? [];
  const wallsWanted = request.walls ?? noted.walls ?? [];
  const target = periodic.length === 0 ? plain : await loadTarget(file, periodic, progress, timings);
  const walls = await facesOf(target, wallsWanted);
  const found = recogniseFields(target.dataset.cellArrays, { file, rename: request.rename });
  const fields = new Map(
    [...found.fields].map(([name, field]) => [name, { ...field, values: toCells(target, field) }]),
  );
  const velocity = fields.get('Velocity')?.values;
  if (velocity === undefined) {
    throw new InputError({
      file,
      place: 'cell data',
      cause: 'there is no Velocity on the cells to measure',
      remedy: 'map the arrays with --rename u=VelocityX (or a vector with --rename U=Velocity)',
    });
  }
  const assumptions: string[] = [];
  const mean = fields.get('VelocityMean')?.values;
  let fluctuation = fields.get('VelocityFluctuation')?.values;
  if (fluctuation === undefined && mean !== undefined) fluctuation = velocity.map((v, i) => v - (mean[i] as number));
  if (fluctuation === undefined) {
    assumptions.push('The file does not split the velocity: the fluctuation is the velocity less its volume mean.');
  }
  if (periodic.length === 0) assumptions.push('No direction is taken as periodic.');
  if (walls.length === 0)
    assumptions.push('No boundary is taken as a wall: boundary faces take the velocity of their cell.');
  const total = fields.get('TurbulentEnergyKineticTotal')?.values;
  const share = fields.get('ResolvableShare')?.values;
  const modelled = fields.get('TurbulentEnergyKinetic')?.values;
  const { mesh, geometry } = target;
  const boundary = new Uint8Array(mesh.faceCount - mesh.innerFaceCount).fill(boundaryCode.free);
  for (const face of walls) boundary[face - mesh.innerFaceCount] = boundaryCode.wall;
  const op = createFaceOperator(mesh, geometry, { periodic: target.periodic, boundary, weights: request.weights });
  const measured = fluctuation ?? lessMean(velocity, geometry.cellVolumes);
  const net = new Float64Array(mesh.cellCount);
  divergence(op, measured, net);
  const volumes = geometry.cellVolumes;
  const loss = await timed(progress, timings, 'projection loss', 0, () =>
    projectionLoss(op, measured, buildPreconditioner(op)),
  );
  const outside = fields.get('Outside')?.values;
  const audit = auditField({
    mesh,
    geometry,
    periodic: target.periodic,
    operator: `interpolated faces, weights by ${request.weights === 'equal' ? 'halves' : 'distance'}`,
    velocity,
    fluctuation: measured,
    wanted: total,
    resolvable:
      total === undefined || modelled === undefined ? undefined : total.map((k, c) => k - (modelled[c] as number)),
    modelled: total === undefined || share === undefined ? undefined : modelled,
    outside: outside === undefined ? undefined : Uint8Array.from(outside),
    divergenceAfter: divergenceFigures(net, volumes, geometry.cellCentroids, componentRms(measured, volumes)),
    projectionLoss: loss,
    timeStep: request.timeStep,
  });
  return { audit, target, fields, assumptions };
}

function lessMean(velocity: Float64Array, volumes: Float64Array): Float64Array {
  const out = velocity.slice();
  const volume = volumes.reduce((sum, v) => sum + v, 0);
  for (let i = 0; i < 3; i += 1) {
    let sum = 0;
    for (let c = 0; c < volumes.length; c += 1) sum += (volumes[c] as number) * (velocity[3 * c + i] as number);
    for (let c = 0; c < volumes.length; c += 1) out[3 * c + i] = (out[3 * c + i] as number) - sum / volume;
  }
  return out;
}
