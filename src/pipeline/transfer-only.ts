import type { Field } from '../basis/fields.js';
import { requireFree } from '../basis/half-written.js';
import { formatToWrite } from '../formats/registry.js';
import { loadPrecursor, type PrecursorOptions } from './precursor.js';
import type { Progress } from './progress.js';
import { refuseBeyond } from './run.js';
import { loadTarget } from './target.js';
import { type TransferOptions, type Transferred, transferFields } from './transfer-fields.js';
import { openWorkers } from './workers.js';
import { outsideField, writeStart } from './write-start.js';

export interface TransferRequest {
  readonly precursor: string;
  readonly target: string;
  readonly output: string;
  readonly reading: PrecursorOptions;
  readonly transfer: Omit<TransferOptions, 'wallPoints'>;
  readonly workers?: number | undefined;
  /** Bytes; refused when an estimate exceeds them. */
  readonly memory?: number | undefined;
  readonly overwrite?: boolean | undefined;
  readonly dryRun?: boolean | undefined;
  readonly version: string;
  readonly progress: Progress;
}

export interface TransferOutcome {
  readonly transferred: Transferred;
  readonly cells: number;
  readonly unrecognised: readonly string[];
  readonly assumptions: readonly string[];
  readonly remarks: readonly string[];
  readonly seconds: Readonly<Record<string, number>>;
}

/** Mapping alone, without a case file. */
export async function transferOnly(request: TransferRequest): Promise<TransferOutcome> {
  const { progress, output } = request;
  formatToWrite(output);
  if (request.dryRun !== true) requireFree(output, request.overwrite === true);
  const timings = new Map<string, number>();
  const workers = openWorkers(request.workers);
  try {
    const precursor = await loadPrecursor(request.precursor, request.reading, progress, timings);
    const target = await loadTarget(request.target, [], progress, timings);
    refuseBeyond(request.memory, target, precursor);
    const transferred = await transferFields(precursor, target, request.transfer, workers, progress, timings);
    const fields = new Map<string, Field>(transferred.fields);
    fields.set('Outside', outsideField(transferred.outside));
    fields.set('OutsideDistance', { components: 1, values: transferred.distance });
    const provenance = JSON.stringify({
      program: 'eddygraft',
      version: request.version,
      precursor: request.precursor,
      method: transferred.method,
    });
    if (request.dryRun !== true) await writeStart(output, target.dataset, target.mesh, fields, provenance);
    return {
      transferred,
      cells: target.mesh.cellCount,
      unrecognised: precursor.unrecognised,
      assumptions: [...precursor.assumptions, ...transferred.assumptions],
      remarks: [...precursor.dataset.remarks, ...target.dataset.remarks],
      seconds: Object.fromEntries(timings),
    };
  } finally {
    await workers.close();
  }
}
