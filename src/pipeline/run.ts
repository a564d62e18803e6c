import { dirname } from 'node:path';
import { type AuditFigures, auditField } from '../audit/audit.js';
import { componentRms, scaledDivergence } from '../audit/divergence-figures.js';
import { InputError } from '../basis/errors.js';
import { type Field, sharedFloat64 } from '../basis/fields.js';
import { requireFree, writeFileBeside } from '../basis/half-written.js';
import type { ResolvedCase } from '../case/read-case.js';
import { writeNpy } from '../formats/npy.js';
import { formatToWrite } from '../formats/registry.js';
import { cellWidths } from '../mesh/cell-width.js';
import type { Controlled } from './control.js';
import { controlDivergence } from './control.js';
import { faceFluxes } from './face-fluxes.js';
import { type FluctuationResult, fluctuateFields } from './fluctuate-fields.js';
import { type CheckResult, type Manifest, peakMemoryBytes, stampFile } from './manifest.js';
import { placedPrecursor } from './placed-precursor.js';
import type { Precursor } from './precursor.js';
import { type Progress, timed } from './progress.js';
import { facesOf } from './selections.js';
import { loadTarget, type Target } from './target.js';
import { type Transferred, transferFields } from './transfer-fields.js';
import { openWorkers, type Workers } from './workers.js';
import { outsideField, writeStart } from './write-start.js';

export interface RunOptions {
  readonly workers?: number | undefined;
  /** Bytes; refused when an estimate exceeds them. */
  readonly memory?: number | undefined;
  readonly overwrite?: boolean | undefined;
  readonly dryRun?: boolean | undefined;
  readonly seed?: number | undefined;
  readonly version: string;
  readonly progress: Progress;
  /** Renders the report page; the manifest and the arrays are handed to it. */
  readonly report?: (result: RunResult) => string;
}

export interface RunResult {
  readonly manifest: Manifest;
  readonly audit: AuditFigures;
  readonly precursor: Precursor;
  readonly target: Target;
  readonly transferred: Transferred;
  readonly fluctuations: FluctuationResult | undefined;
  readonly controlled: Controlled | undefined;
  /** Boundary faces that are walls. */
  readonly walls: Int32Array;
  /** Everything written on the cells, by name. */
  readonly fields: ReadonlyMap<string, Field>;
}

/** Resident bytes a run needs, from measurements: cells carry geometry, parameters and fields; see DEVELOPERS.md. */
export function memoryEstimate(cells: number, points: number): number {
  return 200e6 + 1400 * cells + 450 * points;
}

/** @throws InputError when the estimate exceeds what the user allows */
export function refuseBeyond(memory: number | undefined, target: Target, precursor?: Precursor): void {
  if (memory === undefined) return;
  const points = precursor?.clouds.reduce((sum, cloud) => sum + cloud.points.length / 3, 0) ?? 0;
  const needed = memoryEstimate(target.mesh.cellCount, points);
  if (needed <= memory) return;
  throw new InputError({
    file: target.file,
    cause: `this case needs about ${(needed / 2 ** 30).toFixed(1)} GiB and --memory allows ${(memory / 2 ** 30).toFixed(1)} GiB`,
    remedy: 'raise --memory, or start from a smaller target',
  });
}

/** Centres of wall faces, where the velocity is zero, and the directions of the faces. */
function wallPlaces(
  target: Target,
  walls: Int32Array,
): { readonly points: Float64Array; readonly areas: Float64Array } {
  const points = new Float64Array(3 * walls.length);
  const areas = new Float64Array(3 * walls.length);
  walls.forEach((face, i) => {
    points.set(target.geometry.faceCentroids.subarray(3 * face, 3 * face + 3), 3 * i);
    areas.set(target.geometry.faceAreas.subarray(3 * face, 3 * face + 3), 3 * i);
  });
  return { points, areas };
}

function checksOf(
  settings: ResolvedCase['checks'],
  audit: AuditFigures,
  withProjection: boolean,
): readonly CheckResult[] {
  const checks: CheckResult[] = [];
  const { divergence, energy } = settings;
  if (divergence !== 'none' && withProjection) {
    checks.push({
      name: 'divergence',
      limit: divergence,
      value: audit.divergence.after.scaledRms,
      passed: audit.divergence.after.scaledRms <= divergence,
      meaning: 'scaled rms divergence of the fluctuation after control',
    });
  }
  const { resolvable, recovered } = audit.energy;
  if (energy !== 'none' && resolvable !== null) {
    const value = resolvable > 0 ? Math.abs(recovered / resolvable - 1) : recovered;
    checks.push({
      name: 'energy',
      limit: energy,
      value,
      passed: value <= energy,
      meaning: 'recovered against resolvable energy, volume means',
    });
  }
  return checks;
}

function sum(a: Float64Array, b: Float64Array): Float64Array {
  const out = sharedFloat64(a.length);
  for (let i = 0; i < a.length; i += 1) out[i] = (a[i] as number) + (b[i] as number);
  return out;
}

interface Start {
  readonly fields: Map<string, Field>;
  readonly audit: AuditFigures;
}

/** The resolvable part of the wanted stresses: their shape, the energy that the mesh can carry. */
export function resolvableCovariance(fluctuations: FluctuationResult): Float64Array | undefined {
  const { plan, total, wanted } = fluctuations;
  return plan.covariance?.map((value, i) => {
    const k = total[Math.floor(i / 6)] as number;
    return k > 0 ? (value * (wanted[Math.floor(i / 6)] as number)) / k : 0;
  });
}

/** The fields of the start and their audit. */
export function finishStart(
  target: Target,
  transferred: Pick<Transferred, 'fields' | 'outside'> & Partial<Pick<Transferred, 'distance'>>,
  fluctuations: FluctuationResult | undefined,
  controlled: Controlled | undefined,
  timeStep: number | undefined,
): Start {
  const fields = new Map<string, Field>(transferred.fields);
  const cells = target.mesh.cellCount;
  const vector = (values: Float64Array): Field => ({ components: 3, values });
  const scalar = (values: Float64Array): Field => ({ components: 1, values });
  const mean = controlled?.mean ?? transferred.fields.get('Velocity')?.values;
  fields.set('Outside', outsideField(transferred.outside));
  if (transferred.distance !== undefined) fields.set('OutsideDistance', scalar(transferred.distance));
  fields.set('CellWidth', scalar(cellWidths(target.geometry)));
  if (fluctuations === undefined || controlled === undefined) {
    const velocity = mean ?? new Float64Array(3 * cells);
    if (mean !== undefined) fields.set('Velocity', vector(mean));
    const zero = { scaledRms: 0, scaledP99: 0, scaledMax: 0, where: [0, 0, 0] as const };
    const audit = auditField({
      mesh: target.mesh,
      geometry: target.geometry,
      velocity,
      fluctuation: new Float64Array(3 * cells),
      outside: transferred.outside,
      divergenceAfter: zero,
      timeStep,
    });
    return { fields, audit };
  }
  const { fluctuation } = controlled;
  const velocity = mean === undefined ? fluctuation : sum(mean, fluctuation);
  fields.set('Velocity', vector(velocity));
  if (mean !== undefined) fields.set('VelocityMean', vector(mean));
  fields.set('VelocityFluctuation', vector(fluctuation));
  fields.set('TurbulentEnergyKinetic', scalar(fluctuations.modelled));
  fields.set('TurbulentEnergyKineticTotal', scalar(fluctuations.total));
  fields.set('ResolvableShare', scalar(fluctuations.resolvableShare));
  fields.set('IntegralLength', scalar(fluctuations.scales.length));
  if (fluctuations.wallDistance !== undefined) fields.set('WallDistance', scalar(fluctuations.wallDistance));
  const audit = auditField({
    mesh: target.mesh,
    geometry: target.geometry,
    periodic: target.periodic,
    velocity,
    fluctuation,
    fluctuationBefore: fluctuations.velocity,
    operator: String(controlled.figures.operator),
    covarianceWanted: resolvableCovariance(fluctuations),
    wanted: fluctuations.total,
    resolvable: fluctuations.wanted,
    modelled: fluctuations.modelled,
    outside: transferred.outside,
    divergenceBefore: controlled.before,
    divergenceAfter: controlled.after,
    projectionLoss: controlled.loss,
    timeStep,
  });
  return { fields, audit };
}

/** Scaled divergence of every cell before and after control, for the report. */
export function scaledFields(
  result: RunResult,
): { readonly before: Float64Array; readonly after: Float64Array } | undefined {
  const { controlled, target } = result;
  if (controlled === undefined) return undefined;
  const volumes = target.geometry.cellVolumes;
  const scale = componentRms(controlled.fluctuation, volumes);
  return {
    before: scaledDivergence(controlled.netBefore, volumes, scale),
    after: scaledDivergence(controlled.netAfter, volumes, scale),
  };
}

/** Circulation fluxes where the case asks for them. */
async function circulationOf(
  given: ResolvedCase,
  target: Target,
  walls: Int32Array,
  fluctuations: FluctuationResult | undefined,
  progress: Progress,
  timings: Map<string, number>,
): Promise<Float64Array | undefined> {
  if (given.output['face-fluxes'] === undefined) return undefined;
  if (fluctuations === undefined || fluctuations.plan.grade === 'modes') {
    throw new InputError({
      file: given.file,
      place: 'output.face-fluxes',
      cause: 'circulation fluxes need a vector potential, and this case has none',
      remedy: 'choose control: potential or projection, or leave face-fluxes out',
    });
  }
  const { plan, multiplier } = fluctuations;
  return timed(progress, timings, 'face fluxes', 0, () => faceFluxes(target, plan, multiplier, walls));
}

async function withWorkers<T>(count: number | undefined, work: (workers: Workers) => Promise<T>): Promise<T> {
  const workers = openWorkers(count);
  try {
    return await work(workers);
  } finally {
    await workers.close();
  }
}

/**
 * The main job, whole: read, transfer, fluctuate, control divergence, audit, write.
 *
 * @throws InputError and MachineError; nothing is written then
 */
export async function runCase(given: ResolvedCase, options: RunOptions): Promise<RunResult> {
  const { progress } = options;
  if (given.targets !== undefined || given.snapshots !== undefined) {
    throw new InputError({
      file: given.file,
      place: given.targets === undefined ? 'snapshots' : 'targets',
      cause: 'this case is a batch of several starts',
      remedy: 'use eddygraft batch',
    });
  }
  const overwrite = options.overwrite === true;
  const { fluctuations: settings } = given;
  const seed = settings === 'none' ? null : (options.seed ?? settings.seed);
  formatToWrite(given.output.file);
  for (const path of [given.output.file, given.output.manifest, given.output.report, given.output['face-fluxes']]) {
    if (path !== undefined && options.dryRun !== true) requireFree(path, overwrite);
  }
  const timings = new Map<string, number>();
  return withWorkers(options.workers, async (workers) => {
    const precursor = await placedPrecursor(given, progress, timings);
    const target = await loadTarget(given.target.file, given.target.periodic, progress, timings);
    refuseBeyond(options.memory, target, precursor);
    const walls = await facesOf(target, given.target.walls);
    const transferred = await transferFields(
      precursor,
      target,
      {
        ...given.transfer,
        ...(given.transfer['wall-points'] && walls.length > 0 ? { wallPoints: wallPlaces(target, walls) } : {}),
      },
      workers,
      progress,
      timings,
    );
    const fluctuations =
      settings === 'none'
        ? undefined
        : await fluctuateFields(
            {
              target,
              fields: transferred.fields,
              walls,
              settings: { ...settings, seed: seed ?? settings.seed },
              omega: given.precursor.omega,
            },
            workers,
            progress,
            timings,
          );
    const mean = transferred.fields.get('Velocity')?.values;
    const controlled =
      fluctuations === undefined || settings === 'none'
        ? undefined
        : await controlDivergence(
            {
              target,
              walls,
              projection: given.projection,
              project: settings.control === 'projection',
              tolerance: settings.tolerance,
            },
            fluctuations.velocity,
            mean,
            progress,
            timings,
          );
    const start = await timed(progress, timings, 'audit', 0, () =>
      finishStart(target, transferred, fluctuations, controlled, given.audit['time-step']),
    );
    const checks = checksOf(given.checks, start.audit, settings !== 'none' && settings.control === 'projection');
    const inputs = await timed(progress, timings, 'checksums', 0, () =>
      Promise.all([...new Set([given.file, ...given.precursor.files, given.target.file])].map(stampFile)),
    );
    const provenance = {
      program: 'eddygraft',
      version: options.version,
      seed,
      periodic: given.target.periodic,
      walls: given.target.walls,
      case: given.title,
      checksPassed: checks.every((check) => check.passed),
      inputs: inputs.map(({ sha256 }) => sha256),
    };
    const assumptions = [
      ...precursor.assumptions,
      ...transferred.assumptions,
      ...(fluctuations?.assumptions ?? []),
      ...(transferred.counts.nearest > 0
        ? [`${transferred.counts.nearest} cells lie outside the precursor and took the nearest value.`]
        : []),
    ];
    const build = (outputs: Manifest['outputs']): Manifest => ({
      program: 'eddygraft',
      version: options.version,
      node: process.version,
      finished: new Date().toISOString(),
      passed: checks.every((check) => check.passed),
      checks,
      case: given,
      seed,
      inputs,
      outputs,
      assumptions,
      remarks: [...precursor.dataset.remarks, ...target.dataset.remarks],
      transfer: { method: transferred.method, ...transferred.counts },
      fluctuations: fluctuations?.figures ?? null,
      projection: controlled?.figures ?? null,
      audit: start.audit,
      seconds: Object.fromEntries([...timings].map(([stage, seconds]) => [stage, Number(seconds.toFixed(3))])),
      peakMemoryBytes: peakMemoryBytes(),
    });
    const results = {
      audit: start.audit,
      precursor,
      target,
      transferred,
      fluctuations,
      controlled,
      walls,
      fields: start.fields,
    };
    if (options.dryRun === true) return { ...results, manifest: build([]) };
    const fluxes = await circulationOf(given, target, walls, fluctuations, progress, timings);
    await timed(progress, timings, 'write start', 0, () =>
      writeStart(given.output.file, target.dataset, target.mesh, start.fields, JSON.stringify(provenance), {
        numberType: given.output['number-type'],
        compress: given.output.compress,
        ...(fluxes === undefined ? {} : { faceFluxes: fluxes }),
      }),
    );
    const written = [await stampFile(given.output.file)];
    const fluxFile = given.output['face-fluxes'];
    if (fluxes !== undefined && fluxFile !== undefined) {
      await writeNpy(fluxFile, fluxes);
      written.push(await stampFile(fluxFile));
    }
    const { report } = given.output;
    if (report !== undefined && options.report !== undefined) {
      const render = options.report;
      const page = await timed(progress, timings, 'report', 0, () => render({ ...results, manifest: build(written) }));
      await writeFileBeside(report, page);
      written.push(await stampFile(report));
    }
    const manifest = build(written);
    await writeFileBeside(given.output.manifest, `${JSON.stringify(manifest, null, 2)}\n`);
    return { ...results, manifest };
  });
}

/** Folder in which a case's outputs lie. */
export function outputFolder(given: ResolvedCase): string {
  return dirname(given.output.file);
}
