import { type Command, InvalidArgumentError, Option } from 'commander';
import { type BatchOutcome, listBatch, runBatch } from '../pipeline/batch.js';
import { runPage } from '../pipeline/run-page.js';
import type { TableBlock } from '../report/page.js';
import { renderReport } from '../report/render.js';
import { summaryTables } from '../report/terminal.js';
import { type CommonOptions, withCommonOptions } from './options.js';
import { openTerminal } from './terminal.js';
import { packageVersion } from './version.js';

interface BatchCommandOptions extends CommonOptions {
  readonly part?: { readonly index: number; readonly of: number };
}

function partOf(text: string): { index: number; of: number } {
  const match = /^(\d+)\/(\d+)$/.exec(text);
  const index = Number(match?.[1]);
  const of = Number(match?.[2]);
  if (match === null || index < 1 || index > of) {
    throw new InvalidArgumentError(`'${text}' is not of the form I/N with I from 1 to N.`);
  }
  return { index, of };
}

function tableOf(outcomes: readonly BatchOutcome[]): TableBlock {
  return {
    type: 'table',
    title: 'Members',
    terminal: true,
    columns: ['target', 'snapshot', 'state', 'recovered k, m2/s2', 'scaled divergence', 'start'].map((label) => ({
      label,
    })),
    rows: outcomes.map((outcome) => [
      outcome.target,
      outcome.snapshot,
      outcome.state,
      outcome.result?.audit.energy.recovered.toPrecision(4) ?? '',
      outcome.result?.audit.divergence.after.scaledRms.toExponential(2) ?? '',
      outcome.output,
    ]),
  };
}

async function batchCommand(files: readonly string[], options: BatchCommandOptions): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  const members = await listBatch(files);
  let count = 0;
  const outcomes = await runBatch(members, {
    workers: options.workers,
    memory: options.memory,
    overwrite: options.overwrite,
    dryRun: options.dryRun,
    seed: options.seed,
    part: options.part,
    version: packageVersion(),
    progress: terminal.progress,
    report: (found) => renderReport(runPage(found)),
    done: (outcome) => {
      count += 1;
      terminal.remark(
        `${count}: ${outcome.output} ${outcome.state}${outcome.message === '' ? '' : `: ${outcome.message}`}`,
      );
    },
  });
  terminal.say(
    summaryTables({
      title: `Batch of ${outcomes.length}`,
      kind: 'run',
      footer: [],
      sections: [{ title: 'Members', blocks: [tableOf(outcomes)] }],
    }),
  );
  terminal.json(outcomes.map(({ result, ...outcome }) => ({ ...outcome, audit: result?.audit ?? null })));
  if (outcomes.some((outcome) => outcome.state === 'failed')) process.exitCode = 2;
  else if (outcomes.some((outcome) => outcome.state === 'check failed')) process.exitCode = 1;
}

export function addBatch(program: Command): void {
  const command = program
    .command('batch')
    .description('several cases, or every target with every snapshot of a case; goes on where it was interrupted')
    .argument('<cases...>', 'case files; `targets` and `snapshots` in them make a matrix')
    .addOption(new Option('--part <i/n>', 'do every n-th member from the i-th').argParser(partOf))
    .addHelpText('after', '\nExample:\n  eddygraft batch refinements.yaml --part 1/4')
    .action(batchCommand);
  withCommonOptions(command, { seed: true });
}
