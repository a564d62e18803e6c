import { basename, dirname, extname, relative, sep } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { Command } from 'commander';
import { InputError } from '../basis/errors.js';
import { requireFree, writeFileBeside } from '../basis/half-written.js';
import { parseCase } from '../case/read-case.js';
import { formats, readDataset } from '../formats/registry.js';
import { caseText, hintsOf } from './init-case.js';
import { type CommonOptions, withCommonOptions } from './options.js';
import { openTerminal } from './terminal.js';

interface InitOptions extends CommonOptions {
  readonly output: string;
}

/** Path as it stands in a file of `folder`, with strokes on every system. */
function pathFrom(folder: string, path: string): string {
  return relative(folder, path).split(sep).join('/');
}

/** Start file beside the case: the target's format where that is written, else .vtu. */
function startName(target: string): string {
  const extension = extname(target);
  const writable = formats.some((format) => format.write !== undefined && format.extensions.includes(extension));
  return `${basename(target, extension)}-start${writable ? extension : '.vtu'}`;
}

async function runInit(precursor: string, target: string, options: InitOptions): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  const { output } = options;
  requireFree(output, options.overwrite === true);
  terminal.progress.begin('read precursor', 0);
  const from = await readDataset(precursor);
  terminal.progress.begin('read target', 0);
  const to = await readDataset(target);
  terminal.progress.end();
  if (to.cells === undefined) {
    throw new InputError({
      file: target,
      cause: 'the target has points but no cells',
      remedy: 'give a file with a mesh',
    });
  }
  const hints = hintsOf(from, to);
  const folder = dirname(output);
  const text = caseText(
    {
      precursor: pathFrom(folder, precursor),
      target: pathFrom(folder, target),
      start: startName(target),
      title: `${basename(target, extname(target))} from ${basename(precursor, extname(precursor))}`,
      schema: fileURLToPath(new URL('../case/case.schema.json', import.meta.url)),
    },
    hints,
  );
  parseCase(text, output);
  if (options.dryRun !== true) await writeFileBeside(output, text);
  for (const remark of [...from.remarks, ...to.remarks]) terminal.remark(remark);
  const unnamed = hints.proposals.map(({ standard, inFile }) => `${inFile} as ${standard}`);
  if (unnamed.length > 0) terminal.remark(`Proposed in comments, to be confirmed by you: ${unnamed.join(', ')}.`);
  terminal.say(options.dryRun === true ? text : `${output} written; look it over, then: eddygraft run ${output}`);
  terminal.json({
    file: output,
    written: options.dryRun !== true,
    recognised: [...hints.held],
    proposals: hints.proposals,
    ...(hints.scale === undefined ? {} : { scale: hints.scale }),
    ...(hints.extrude === undefined ? {} : { extrude: hints.extrude }),
  });
}

/** Adds `init PRECURSOR TARGET`. */
export function addInit(program: Command): void {
  const command = program
    .command('init')
    .summary('write a commented case file for two files')
    .description(
      'Writes a commented case file for a precursor and a target. What only looks like a standard quantity is proposed in comments, never taken.',
    )
    .argument('<precursor>', 'the result that fields come from')
    .argument('<target>', 'the mesh that is to be started')
    .option('-o, --output <file>', 'case file to write', 'case.yaml')
    .addHelpText('after', '\nExample:\n  eddygraft init louvre-precursor.vtu louvre-les.vtu -o louvre.yaml');
  withCommonOptions(command);
  command.action((precursor: string, target: string, options: InitOptions) => runInit(precursor, target, options));
}
