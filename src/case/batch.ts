import { basename, extname } from 'node:path';
import { InputError } from '../basis/errors.js';
import type { ResolvedCase } from './read-case.js';
import type { Snapshot } from './schema.js';

/** One cell of a case's matrix of targets and snapshots: a case of its own. */
export interface BatchMember {
  /** Name of the target file without folder and extension. */
  readonly target: string;
  readonly snapshot: Snapshot;
  readonly case: ResolvedCase;
}

/**
 * The matrix of a case, targets outermost; a case without `targets` and `snapshots` is a matrix of one.
 *
 * @throws InputError when two members would write the same file, or two targets have the same name
 */
export function expandBatch(whole: ResolvedCase): BatchMember[] {
  const { targets, snapshots, ...single } = whole;
  const members: BatchMember[] = [];
  for (const target of targets ?? [whole.target]) {
    const name = basename(target.file, extname(target.file));
    for (const snapshot of snapshots ?? [whole.precursor.snapshot]) {
      const fill = (path: string): string =>
        path.replaceAll('{target}', name).replaceAll('{snapshot}', String(snapshot));
      const { file, report, manifest, 'face-fluxes': fluxes, ...rest } = whole.output;
      members.push({
        target: name,
        snapshot,
        case: {
          ...single,
          target,
          precursor: { ...whole.precursor, snapshot },
          output: {
            ...rest,
            file: fill(file),
            report: report === undefined ? undefined : fill(report),
            manifest: fill(manifest),
            ...(fluxes === undefined ? {} : { 'face-fluxes': fill(fluxes) }),
          },
        },
      });
    }
  }
  requireDistinctOutputs(members, whole.file);
  return members;
}

function requireDistinctOutputs(members: readonly BatchMember[], file: string): void {
  const seen = new Set<string>();
  for (const { case: member } of members) {
    const { output } = member;
    for (const path of [output.file, output.report, output.manifest, output['face-fluxes']]) {
      if (path === undefined) continue;
      if (seen.has(path)) {
        throw new InputError({
          file,
          place: 'output',
          cause: `two members of the batch would write ${path}`,
          remedy: 'put {target} and {snapshot} into the names of the output, and give each target file its own name',
        });
      }
      seen.add(path);
    }
  }
}
