import type { AuditFigures } from '../audit/audit.js';
import { InputError } from '../basis/errors.js';
import { type Field, sharedFloat64 } from '../basis/fields.js';
import { requireFree } from '../basis/half-written.js';
import type { FaceSelection } from '../case/parts.js';
import { type FluctuationSettings, projectionDefaults } from '../case/schema.js';
import { formatToWrite } from '../formats/registry.js';
import { controlDivergence } from './control.js';
import { fluctuateFields } from './fluctuate-fields.js';
import { gatherPrecursor } from './precursor.js';
import type { Progress } from './progress.js';
import { finishStart, refuseBeyond } from './run.js';
import { facesOf } from './selections.js';
import { loadTarget, type PeriodicDirection } from './target.js';
import { openWorkers } from './workers.js';
import { writeStart } from './write-start.js';

export interface FluctuateRequest {
  readonly file: string;
  readonly output: string;
  readonly rename: Readonly<Record<string, string>>;
  readonly constants: Readonly<Record<string, number>>;
  readonly periodic: readonly PeriodicDirection[];
  readonly walls: readonly FaceSelection[];
  readonly settings: FluctuationSettings;
  readonly workers?: number | undefined;
  /** Bytes; refused when an estimate exceeds them. */
  readonly memory?: number | undefined;
  readonly overwrite?: boolean | undefined;
  readonly dryRun?: boolean | undefined;
  readonly version: string;
  readonly progress: Progress;
}

export interface FluctuateOutcome {
  readonly audit: AuditFigures;
  readonly seed: number;
  readonly assumptions: readonly string[];
  readonly remarks: readonly string[];
  readonly figures: Readonly<Record<string, unknown>>;
  readonly seconds: Readonly<Record<string, number>>;
}

/**
 * Fluctuations on a file that holds mean fields on its own cells.
 *
 * @throws InputError when the fields lie on points only, or energy or length are missing
 */
export async function fluctuateOnly(request: FluctuateRequest): Promise<FluctuateOutcome> {
  const { file, progress, settings } = request;
  formatToWrite(request.output);
  if (request.dryRun !== true) requireFree(request.output, request.overwrite === true);
  const timings = new Map<string, number>();
  const workers = openWorkers(request.workers);
  try {
    const target = await loadTarget(file, request.periodic, progress, timings);
    refuseBeyond(request.memory, target);
    const walls = await facesOf(target, request.walls);
    const { mesh } = target;
    const needsFile = settings.energy === 'precursor' || settings.length === 'precursor';
    const fields = new Map<string, Field>();
    if (target.dataset.cellArrays.length > 0 || needsFile) {
      const own = gatherPrecursor(
        { ...target.dataset, pointArrays: [] },
        { rename: request.rename, constants: request.constants },
      );
      for (const [name, field] of own.clouds[0]?.fields ?? []) {
        const values = sharedFloat64(mesh.cellCount * field.components);
        for (let c = 0; c < mesh.cellCount; c += 1) {
          const from = (mesh.datasetCell[c] as number) * field.components;
          for (let i = 0; i < field.components; i += 1) {
            values[c * field.components + i] = field.values[from + i] as number;
          }
        }
        fields.set(name, { components: field.components, values });
      }
    }
    if (fields.has('VelocityFluctuation')) {
      throw new InputError({
        file,
        place: 'VelocityFluctuation',
        cause: 'the file is a start already',
        remedy: 'give the file with the mean fields',
      });
    }
    for (const [name, value] of Object.entries(request.constants)) {
      fields.set(name, { components: 1, values: sharedFloat64(mesh.cellCount).fill(value) });
    }
    const fluctuations = await fluctuateFields(
      { target, fields, walls, settings, omega: 'two-equation' },
      workers,
      progress,
      timings,
    );
    const controlled = await controlDivergence(
      {
        target,
        walls,
        projection: projectionDefaults,
        project: settings.control === 'projection',
        tolerance: settings.tolerance,
      },
      fluctuations.velocity,
      fields.get('Velocity')?.values,
      progress,
      timings,
    );
    const outside = new Uint8Array(mesh.cellCount);
    const start = finishStart(target, { fields, outside }, fluctuations, controlled, undefined);
    start.fields.delete('Outside');
    const provenance = {
      program: 'eddygraft',
      version: request.version,
      seed: settings.seed,
      periodic: request.periodic,
      walls: request.walls,
    };
    if (request.dryRun !== true) {
      await writeStart(request.output, target.dataset, mesh, start.fields, JSON.stringify(provenance));
    }
    return {
      audit: start.audit,
      seed: settings.seed,
      assumptions: fluctuations.assumptions,
      remarks: target.dataset.remarks,
      figures: fluctuations.figures,
      seconds: Object.fromEntries(timings),
    };
  } finally {
    await workers.close();
  }
}
