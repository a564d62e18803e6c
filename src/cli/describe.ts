import type { Command } from 'commander';
import { readDataset } from '../formats/registry.js';
import { figure, type ReportPage, type TableBlock } from '../report/page.js';
import { summaryTables } from '../report/terminal.js';
import { describeDataset, type FileDescription } from './describe-file.js';
import { type CommonOptions, withCommonOptions } from './options.js';
import { openTerminal } from './terminal.js';

interface DescribeOptions extends CommonOptions {
  readonly mesh: boolean;
}

function arraysTable(found: FileDescription): TableBlock {
  return {
    type: 'table',
    title: 'Arrays',
    terminal: true,
    columns: ['place', 'name', 'components', 'type', 'min', 'max', 'standard quantity', 'unit'].map((label) => ({
      label,
    })),
    rows: found.arrays.map((array) => [
      array.place,
      array.name,
      array.components,
      array.notFinite === 0 ? array.type : `${array.type}, ${array.notFinite} not finite`,
      array.min,
      array.max,
      array.standard ?? '',
      array.unit ?? '',
    ]),
  };
}

function listTable(title: string, columns: readonly string[], rows: TableBlock['rows']): TableBlock {
  return { type: 'table', title, terminal: true, columns: columns.map((label) => ({ label })), rows };
}

function factsOf(found: FileDescription): { label: string; value: string }[] {
  const types = Object.entries(found.cellTypes).map(([name, count]) => `${figure(count)} ${name}`);
  const facts = [
    { label: 'format', value: found.format },
    { label: 'points', value: figure(found.points) },
    { label: 'cells', value: types.length === 0 ? 'none (point cloud)' : types.join(', ') },
  ];
  for (const [axis, name] of ['x', 'y', 'z'].entries()) {
    const range = `${figure(found.low[axis]!)} to ${figure(found.high[axis]!)} m`;
    facts.push({
      label: `extent along ${name}`,
      value: found.missingAxes.includes(name) ? 'constant along it' : range,
    });
  }
  if (found.time !== undefined) facts.push({ label: 'time', value: `${figure(found.time)} s` });
  const { mesh } = found;
  if (mesh !== undefined) {
    facts.push(
      { label: 'volume cells', value: figure(mesh.cells) },
      { label: 'boundary faces', value: figure(mesh.boundaryFaces) },
      { label: 'volume', value: `${figure(mesh.volume)} m3` },
      { label: 'cell volumes', value: `${figure(mesh.smallestVolume)} to ${figure(mesh.largestVolume)} m3` },
    );
    if (mesh.badVolumes > 0) facts.push({ label: 'zero or negative volumes', value: figure(mesh.badVolumes) });
  }
  return facts;
}

function pageOf(found: FileDescription): ReportPage {
  const blocks: ReportPage['sections'][number]['blocks'][number][] = [{ type: 'facts', items: factsOf(found) }];
  if (found.zones.length > 1) {
    const rows = found.zones.map((zone) => [zone.name, zone.points, zone.cells]);
    blocks.push(listTable('Zones', ['zone', 'points', 'cells'], rows));
  }
  if (found.boundaries.length > 0) {
    const rows = found.boundaries.map((patch) => [patch.name, patch.kind, patch.faces]);
    blocks.push(listTable('Boundaries', ['boundary', 'kind', 'faces'], rows));
  }
  if (found.arrays.length > 0) blocks.push(arraysTable(found));
  if (found.suggestions.length > 0) {
    const rows = found.suggestions.map(({ standard, inFile, reason }) => [standard, inFile, reason]);
    blocks.push(
      listTable('Not standard, but perhaps meant (use rename)', ['standard quantity', 'in the file', 'why'], rows),
    );
  }
  return { title: found.file, kind: 'audit', footer: [], sections: [{ title: found.file, blocks }] };
}

async function runDescribe(file: string, options: DescribeOptions): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  terminal.progress.begin('read', 0);
  const dataset = await readDataset(file);
  terminal.progress.begin('describe', 0);
  const found = describeDataset({ ...dataset, file }, options.mesh);
  terminal.progress.end();
  terminal.say(summaryTables(pageOf(found)));
  for (const remark of found.remarks) terminal.remark(remark);
  terminal.json(found);
}

/** Adds `describe FILE`. */
export function addDescribe(program: Command): void {
  const command = program
    .command('describe')
    .summary('tell what a file holds')
    .description(
      'Tells what a file holds: zones, cells, extents, fields with their ranges, and which standard quantities were recognised.',
    )
    .argument('<file>', 'a file in any format that is read')
    .option('--no-mesh', 'do not measure the cells (faster)')
    .addHelpText('after', '\nExample:\n  eddygraft describe louvre-precursor.vtu');
  withCommonOptions(command, { writes: false });
  command.action((file: string, options: DescribeOptions) => runDescribe(file, options));
}
