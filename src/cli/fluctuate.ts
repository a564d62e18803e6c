import { type Command, Option } from 'commander';
import { fluctuationDefaults } from '../case/schema.js';
import { fluctuateOnly } from '../pipeline/fluctuate-only.js';
import {
  axisList,
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

interface FluctuateOptions extends CommonOptions {
  readonly output: string;
  readonly intensity?: number;
  readonly length?: number;
  readonly control: 'modes' | 'potential' | 'projection';
  readonly stress: 'isotropic' | 'eddy-viscosity' | 'precursor';
  readonly spectrum: 'von-karman-pao' | 'pope';
  readonly periodic?: ('x' | 'y' | 'z')[];
  readonly walls?: string[];
  readonly shells: number;
  readonly directions: number;
  readonly wavelengthCells: number;
  readonly subgrid: 'model' | 'none';
  readonly rename?: Record<string, string>;
  readonly constant?: Record<string, number>;
}

async function fluctuateCommand(file: string, options: FluctuateOptions): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  const outcome = await fluctuateOnly({
    file,
    output: options.output,
    rename: options.rename ?? {},
    constants: options.constant ?? {},
    periodic: options.periodic ?? [],
    walls: options.walls ?? [],
    settings: {
      ...fluctuationDefaults,
      seed: options.seed ?? fluctuationDefaults.seed,
      energy: options.intensity === undefined ? 'precursor' : { intensity: options.intensity },
      length: options.length === undefined ? 'precursor' : { constant: options.length },
      control: options.control,
      stress: options.stress,
      spectrum: options.spectrum,
      shells: options.shells,
      directions: options.directions,
      'wavelength-cells': options.wavelengthCells,
      subgrid: options.subgrid,
    },
    workers: options.workers,
    memory: options.memory,
    overwrite: options.overwrite,
    dryRun: options.dryRun,
    version: packageVersion(),
    progress: terminal.progress,
  });
  const { audit } = outcome;
  for (const remark of outcome.remarks) terminal.remark(remark);
  for (const assumption of outcome.assumptions) terminal.say(assumption);
  const { energy, divergence } = audit;
  terminal.say(
    `k, volume means in m2/s2: wanted ${energy.wanted?.toPrecision(4)}, resolvable ${energy.resolvable?.toPrecision(4)}, ` +
      `recovered ${energy.recovered.toPrecision(4)}, left to the model ${energy.modelled?.toPrecision(4)}.`,
  );
  terminal.say(
    `Scaled divergence, rms: ${divergence.before?.scaledRms.toExponential(2)} before control, ` +
      `${divergence.after.scaledRms.toExponential(2)} after; a projection would remove ` +
      `${((audit.projectionLoss ?? 0) * 100).toPrecision(2)} % of the energy.`,
  );
  terminal.say(options.dryRun === true ? 'Dry run: nothing was written.' : `Written: ${options.output}`);
  terminal.json({
    output: options.dryRun === true ? null : options.output,
    seed: outcome.seed,
    audit,
    fluctuations: outcome.figures,
    assumptions: outcome.assumptions,
    seconds: outcome.seconds,
  });
}

export function addFluctuate(program: Command): void {
  const d = fluctuationDefaults;
  const command = program
    .command('fluctuate')
    .description('only the fluctuations, on a file that holds mean fields on its own cells')
    .argument('<field>', 'file with a mesh and mean fields on its cells')
    .requiredOption('-o, --output <file>', 'file to write')
    .addOption(
      new Option('--intensity <share>', "k = 3/2 (share x local speed)^2, instead of the file's k").argParser(
        positiveNumber,
      ),
    )
    .addOption(new Option('--length <metres>', "k^(3/2) / epsilon, instead of the file's").argParser(positiveNumber))
    .addOption(
      new Option('--control <grade>', 'divergence control')
        .choices(['modes', 'potential', 'projection'])
        .default(d.control),
    )
    .addOption(
      new Option('--stress <source>', 'shape of the stresses')
        .choices(['isotropic', 'eddy-viscosity', 'precursor'])
        .default(d.stress),
    )
    .addOption(
      new Option('--spectrum <name>', 'model spectrum').choices(['von-karman-pao', 'pope']).default('von-karman-pao'),
    )
    .addOption(new Option('--periodic <axes>', 'periodic directions, commas between').argParser(axisList))
    .addOption(new Option('--walls <names>', 'boundary names that are walls, or all').argParser(nameList))
    .addOption(new Option('--shells <n>', 'bands of wave number').argParser(positiveWholeNumber).default(d.shells))
    .addOption(
      new Option('--directions <n>', 'modes in each band').argParser(positiveWholeNumber).default(d.directions),
    )
    .addOption(
      new Option('--wavelength-cells <n>', 'shortest wave laid on the mesh, in cells')
        .argParser(positiveNumber)
        .default(d['wavelength-cells']),
    )
    .addOption(
      new Option('--subgrid <kind>', 'will a sub-grid model act on the run')
        .choices(['model', 'none'])
        .default(d.subgrid),
    )
    .addOption(new Option('--rename <pair>', 'FILE_NAME=StandardName; may be repeated').argParser(collectRename))
    .addOption(new Option('--constant <pair>', 'StandardName=NUMBER; may be repeated').argParser(collectConstant))
    .addHelpText(
      'after',
      '\nExample:\n  eddygraft fluctuate mean.vtu -o start.vtu --intensity 0.05 --length 0.01 --periodic x,z --walls all',
    )
    .action(fluctuateCommand);
  withCommonOptions(command, { seed: true });
}
