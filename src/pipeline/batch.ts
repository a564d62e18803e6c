import { existsSync, readFileSync } from 'node:fs';
import { type BatchMember, expandBatch } from '../case/batch.js';
import { type ResolvedCase, readCase } from '../case/read-case.js';
import { stampFile } from './manifest.js';
import { type RunOptions, type RunResult, runCase } from './run.js';

export interface BatchOptions extends RunOptions {
  /** Does every n-th member from the i-th: shares of a batch on several machines. */
  readonly part?: { readonly index: number; readonly of: number } | undefined;
  /** Called when a member is done, skipped or failed. */
  readonly done: (outcome: BatchOutcome) => void;
}

export interface BatchOutcome {
  readonly caseFile: string;
  readonly target: string;
  readonly snapshot: string;
  readonly output: string;
  /** `skipped`: a start of the same inputs, case and seed is there already. */
  readonly state: 'done' | 'check failed' | 'skipped' | 'failed';
  readonly message: string;
  readonly result?: RunResult;
}

/** Cases with their targets and snapshots, one after the other. */
export async function listBatch(files: readonly string[]): Promise<readonly BatchMember[]> {
  const members: BatchMember[] = [];
  for (const file of files) members.push(...expandBatch(await readCase(file)));
  return members;
}

interface Kept {
  readonly passed?: boolean;
  readonly seed?: number | null;
  readonly case?: unknown;
  readonly inputs?: readonly { readonly sha256: string }[];
  readonly outputs?: readonly { readonly path: string; readonly sha256: string }[];
}

/** True when the manifest beside the output belongs to the same case, inputs and seed, and the start is unchanged. */
async function isThere(given: ResolvedCase, seed: number | undefined): Promise<Kept | undefined> {
  const { manifest, file } = given.output;
  if (!existsSync(manifest) || !existsSync(file)) return undefined;
  let kept: Kept;
  try {
    kept = JSON.parse(readFileSync(manifest, 'utf8')) as Kept;
  } catch {
    return undefined;
  }
  const settings = given.fluctuations;
  const wanted = settings === 'none' ? null : (seed ?? settings.seed);
  if (kept.seed !== wanted || JSON.stringify(kept.case) !== JSON.stringify(given)) return undefined;
  const inputs = await Promise.all(
    [...new Set([given.file, ...given.precursor.files, given.target.file])].map(stampFile),
  );
  const same = inputs.every((stamp, i) => stamp.sha256 === kept.inputs?.[i]?.sha256);
  const start = await stampFile(file);
  return same && kept.outputs?.some((stamp) => stamp.sha256 === start.sha256) === true ? kept : undefined;
}

/**
 * Runs the members of a batch in order. Members whose start is there already are skipped, so that an interrupted batch
 * goes on where it was; a member that fails does not stop the others.
 */
export async function runBatch(
  members: readonly BatchMember[],
  options: BatchOptions,
): Promise<readonly BatchOutcome[]> {
  const outcomes: BatchOutcome[] = [];
  const { part } = options;
  for (const [place, member] of members.entries()) {
    if (part !== undefined && place % part.of !== part.index - 1) continue;
    const common = {
      caseFile: member.case.file,
      target: member.target,
      snapshot: String(member.snapshot),
      output: member.case.output.file,
    };
    let outcome: BatchOutcome;
    try {
      const kept = options.overwrite === true ? undefined : await isThere(member.case, options.seed);
      if (kept !== undefined) {
        const state = kept.passed === false ? 'check failed' : 'skipped';
        outcome = { ...common, state, message: 'the start of these inputs is there already' };
      } else {
        const result = await runCase(member.case, options);
        const { passed } = result.manifest;
        outcome = {
          ...common,
          state: passed ? 'done' : 'check failed',
          message: passed ? '' : 'a check of the case failed',
          result,
        };
      }
    } catch (error) {
      outcome = { ...common, state: 'failed', message: error instanceof Error ? error.message : String(error) };
    }
    outcomes.push(outcome);
    options.done(outcome);
  }
  return outcomes;
}
