import { type Command, Option } from 'commander';
import { requireFree, writeFileBeside } from '../basis/half-written.js';
import { auditFile } from '../pipeline/audit-file.js';
import { alongPeriods, reportFigures } from '../pipeline/run-page.js';
import { auditReport } from '../report/audit-report.js';
import { renderReport } from '../report/render.js';
import { summaryTables } from '../report/terminal.js';
import { axisList, type CommonOptions, collectRename, nameList, positiveNumber, withCommonOptions } from './options.js';
import { openTerminal } from './terminal.js';
import { packageVersion } from './version.js';

interface AuditOptions extends CommonOptions {
  readonly periodic?: ('x' | 'y' | 'z')[];
  readonly walls?: string[];
  readonly rename?: Record<string, string>;
  readonly timeStep?: number;
  readonly weights: 'distance' | 'equal';
  readonly report?: string;
}

async function auditCommand(file: string, options: AuditOptions): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  if (options.report !== undefined) requireFree(options.report, options.overwrite === true);
  const outcome = await auditFile({
    file,
    rename: options.rename ?? {},
    periodic: options.periodic,
    walls: options.walls,
    timeStep: options.timeStep,
    weights: options.weights,
    progress: terminal.progress,
  });
  const page = auditReport({
    title: `Audit of ${file}`,
    audit: reportFigures(outcome.audit),
    operator: outcome.audit.divergence.operator,
    pictures: [],
    ...alongPeriods(outcome.audit),
    assumptions: outcome.assumptions,
    remarks: outcome.target.dataset.remarks,
    footer: [`eddygraft ${packageVersion()}`],
  });
  terminal.say(summaryTables(page));
  for (const assumption of outcome.assumptions) terminal.say(assumption);
  if (options.report !== undefined) {
    await writeFileBeside(options.report, renderReport(page));
    terminal.say(`Written: ${options.report}`);
  }
  terminal.json({ file, ...outcome.audit, assumptions: outcome.assumptions });
}

export function addAudit(program: Command): void {
  const command = program
    .command('audit')
    .description(
      'measure a velocity field on a mesh: divergence, energy, stresses, Courant number, from the file alone',
    )
    .argument('<start>', 'file with a mesh and Velocity on its cells')
    .addOption(
      new Option('--periodic <axes>', 'periodic directions, commas between (default: as the file says)').argParser(
        axisList,
      ),
    )
    .addOption(
      new Option('--walls <names>', 'boundary names that are walls, or all (default: as the file says)').argParser(
        nameList,
      ),
    )
    .addOption(new Option('--rename <pair>', 'FILE_NAME=StandardName; may be repeated').argParser(collectRename))
    .addOption(new Option('--time-step <s>', 'give Courant numbers for this time step').argParser(positiveNumber))
    .addOption(
      new Option('--weights <rule>', 'face value between cells').choices(['distance', 'equal']).default('distance'),
    )
    .option('--report <file>', 'write a page for people (.html)')
    .option('--overwrite', 'replace the page if it exists')
    .addHelpText('after', '\nExample:\n  eddygraft audit louvre-start.vtu --time-step 1e-4 --report audit.html')
    .action(auditCommand);
  withCommonOptions(command, { writes: false });
}
