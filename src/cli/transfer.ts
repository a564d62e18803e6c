import { type Command, InvalidArgumentError, Option } from 'commander';
import { transferOnly } from '../pipeline/transfer-only.js';
import {
  type CommonOptions,
  collectConstant,
  collectRename,
  nameList,
  positiveNumber,
  positiveWholeNumber,
  withCommonOptions,
} from './options.js';
import { openTerminal } from './terminal.js';
import { packageVersion } from './version.js';

interface TransferCommandOptions extends CommonOptions {
  readonly output: string;
  readonly method: 'linear' | 'inverse-distance' | 'nearest' | 'conservative';
  readonly neighbours: number;
  readonly power: number;
  readonly outside: 'nearest' | 'extrapolate' | 'fail' | number;
  readonly quantities?: string[];
  readonly rename?: Record<string, string>;
  readonly constant?: Record<string, number>;
  readonly extrude?: 'x' | 'y' | 'z';
}

export function outsideRule(text: string): TransferCommandOptions['outside'] {
  if (text === 'nearest' || text === 'extrapolate' || text === 'fail') return text;
  const value = Number(text);
  if (text.trim() === '' || !Number.isFinite(value)) {
    throw new InvalidArgumentError(`'${text}' is not nearest, extrapolate, fail or a number.`);
  }
  return value;
}

async function transferCommand(precursor: string, target: string, options: TransferCommandOptions): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  const outcome = await transferOnly({
    precursor,
    target,
    output: options.output,
    reading: {
      rename: options.rename ?? {},
      constants: options.constant ?? {},
      quantities: options.quantities,
      extrude: options.extrude,
    },
    transfer: {
      method: options.method,
      neighbours: options.neighbours,
      power: options.power,
      outside: options.outside,
      logarithmic: true,
      limited: true,
    },
    workers: options.workers,
    memory: options.memory,
    overwrite: options.overwrite,
    dryRun: options.dryRun,
    version: packageVersion(),
    progress: terminal.progress,
  });
  const { transferred, cells } = outcome;
  for (const remark of outcome.remarks) terminal.remark(remark);
  if (outcome.unrecognised.length > 0) {
    terminal.remark(`Not recognised and left out: ${outcome.unrecognised.join(', ')} (--rename maps them).`);
  }
  for (const assumption of outcome.assumptions) terminal.say(assumption);
  const { counts } = transferred;
  terminal.say(
    `${[...transferred.fields.keys()].join(', ')} on ${cells} cells by ${transferred.method}: ${counts.inside} inside, ` +
      `${counts.nearest} nearest, ${counts.extrapolated} extrapolated, ${counts.constant} constant.`,
  );
  terminal.say(options.dryRun === true ? 'Dry run: nothing was written.' : `Written: ${options.output}`);
  terminal.json({
    output: options.dryRun === true ? null : options.output,
    cells,
    quantities: [...transferred.fields.keys()],
    method: transferred.method,
    outside: counts,
    unrecognised: outcome.unrecognised,
    assumptions: outcome.assumptions,
    remarks: outcome.remarks,
    seconds: outcome.seconds,
  });
}

export function addTransfer(program: Command): void {
  const command = program
    .command('transfer')
    .description("carry a precursor's fields to the cells of a target mesh, without a case file")
    .argument('<precursor>', 'file with the fields')
    .argument('<target>', 'file with the mesh')
    .requiredOption('-o, --output <file>', 'file to write: the target with the fields on its cells')
    .addOption(
      new Option('--method <name>', 'how')
        .choices(['linear', 'inverse-distance', 'nearest', 'conservative'])
        .default('linear'),
    )
    .addOption(new Option('--neighbours <n>', 'points of inverse-distance').argParser(positiveWholeNumber).default(8))
    .addOption(new Option('--power <p>', 'exponent of inverse-distance').argParser(positiveNumber).default(2))
    .addOption(
      new Option('--outside <rule>', 'cells outside the precursor: nearest, extrapolate, fail or a number')
        .argParser(outsideRule)
        .default('nearest'),
    )
    .addOption(new Option('--quantities <names>', 'only these standard names, commas between').argParser(nameList))
    .addOption(new Option('--rename <pair>', 'FILE_NAME=StandardName; may be repeated').argParser(collectRename))
    .addOption(new Option('--constant <pair>', 'StandardName=NUMBER; may be repeated').argParser(collectConstant))
    .addOption(new Option('--extrude <axis>', 'a plane section is constant along this axis').choices(['x', 'y', 'z']))
    .addHelpText(
      'after',
      '\nExample:\n  eddygraft transfer coarse.vtu fine.vtu -o mapped.vtu --rename u=VelocityX --outside extrapolate',
    )
    .action(transferCommand);
  withCommonOptions(command);
}
