import type { Command } from 'commander';
import { readCase } from '../case/read-case.js';
import { runCase } from '../pipeline/run.js';
import { runPage, runSummary } from '../pipeline/run-page.js';
import { renderReport } from '../report/render.js';
import { summaryTables } from '../report/terminal.js';
import { type CommonOptions, withCommonOptions } from './options.js';
import { openTerminal } from './terminal.js';
import { packageVersion } from './version.js';

async function runCommand(file: string, options: CommonOptions): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  const given = await readCase(file);
  const result = await runCase(given, {
    workers: options.workers,
    memory: options.memory,
    overwrite: options.overwrite,
    dryRun: options.dryRun,
    seed: options.seed,
    version: packageVersion(),
    progress: terminal.progress,
    report: (found) => renderReport(runPage(found)),
  });
  const { manifest } = result;
  for (const remark of manifest.remarks) terminal.remark(remark);
  terminal.say(summaryTables(runSummary(result)));
  if (options.dryRun === true) terminal.say('Dry run: nothing was written.');
  else
    terminal.say(`Written: ${[given.output.file, given.output.manifest, given.output.report ?? ''].join(' ').trim()}`);
  terminal.json(manifest);
  if (!manifest.passed) process.exitCode = 1;
}

export function addRun(program: Command): void {
  const command = program
    .command('run')
    .description('the main job, whole: transfer, fluctuations, divergence control, audit, start file, manifest, report')
    .argument('<case>', 'case file (YAML)')
    .addHelpText('after', '\nExample:\n  eddygraft run louvre.yaml --seed 7 --overwrite')
    .action(runCommand);
  withCommonOptions(command, { seed: true });
}
