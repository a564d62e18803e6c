import { readFileSync } from 'node:fs';
import { type Command, Option } from 'commander';
import {
  compareHistories,
  type FollowupReading,
  followUp,
  readExpectations,
  type SignalReading,
} from '../appraisal/followup.js';
import { type History, readHistory } from '../appraisal/history.js';
import { requireFree, writeFileBeside } from '../basis/half-written.js';
import { type FollowupReportData, followupReport } from '../report/followup-report.js';
import { renderReport } from '../report/render.js';
import { summaryTables } from '../report/terminal.js';
import { type CommonOptions, nonNegativeNumber, positiveNumber, withCommonOptions } from './options.js';
import { openTerminal } from './terminal.js';

interface FollowupCommandOptions extends CommonOptions {
  readonly time?: string;
  readonly discard?: number;
  readonly monitors?: string;
  readonly cellWidth?: number;
  readonly referenceLength?: number;
  readonly referenceSpeed?: number;
  readonly meanError: number;
  readonly varianceError: number;
  readonly report?: string;
}

const number = (flags: string, text: string, parser = positiveNumber): Option =>
  new Option(flags, text).argParser(parser);

/** Signals to draw as they are: coefficients first, then velocities along x. */
function tracesOf(histories: readonly History[], readings: readonly FollowupReading[]): FollowupReportData['traces'] {
  return histories.flatMap((history, i) => {
    const names = [...history.signals.keys()];
    const isVelocity = (name: string): boolean => /Velocity[XYZ]$/.test(name);
    const chosen = [...names.filter((n) => !isVelocity(n)), ...names.filter((n) => n.endsWith('VelocityX'))].slice(
      0,
      4,
    );
    const time = Float64Array.from({ length: history.samples }, (_, s) => history.start + s * history.step);
    return chosen.map((name) => ({
      file: history.file,
      name,
      time,
      values: history.signals.get(name) as Float64Array,
      transientEnd: readings[i]?.signals.find((s) => s.name === name)?.transientEnd ?? history.start,
    }));
  });
}

/** Figures of a signal without its curves. */
function signalDocument(signal: SignalReading): object {
  const { spectrum, running: _running, ...figures } = signal;
  return { ...figures, spectrumSegments: spectrum.segments, spectrumSegmentLength: spectrum.segmentLength };
}

function documentOf(reading: FollowupReading): object {
  return {
    ...reading,
    signals: reading.signals.map(signalDocument),
    probes: reading.probes.map((probe) => ({ ...probe, streamwise: signalDocument(probe.streamwise) })),
  };
}

function assumptionsOf(options: FollowupCommandOptions): string[] {
  const wide =
    options.monitors ?? (options.cellWidth === undefined ? undefined : `--cell-width ${options.cellWidth} m`);
  return [
    options.discard === undefined
      ? 'Each signal is cut where the marginal-standard-error rule says (White 1997); a transient that takes more than half of the record counts as not ended, and the second half is read.'
      : `The first ${options.discard} s were discarded as told.`,
    wide === undefined
      ? 'The cell width at the probes is not known, so spectra are not compared with the cut-off of the grid.'
      : `Cell widths from ${wide}; the cut-off frequency is the mean speed over two cell widths (Taylor's hypothesis).`,
    "A probe counts as resolving when its spectrum has not fallen to half of the -5/3 line before a quarter of the cut-off frequency (waves of eight cells); this limit is the program's own.",
    'Integral times are taken up to the first zero of the autocorrelation; intervals follow error^2 = 2 T_int / T (Tennekes & Lumley 1972).',
    options.referenceLength === undefined || options.referenceSpeed === undefined
      ? 'No reference length and speed were given: frequencies are not made into Strouhal numbers.'
      : `Strouhal numbers with ${options.referenceLength} m and ${options.referenceSpeed} m/s.`,
  ];
}

async function runFollowup(files: readonly string[], options: FollowupCommandOptions, version: string): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  if (options.report !== undefined) requireFree(options.report, options.overwrite === true);
  const expectations =
    options.monitors === undefined
      ? undefined
      : readExpectations(readFileSync(options.monitors, 'utf8'), options.monitors);
  const histories: History[] = [];
  const readings: FollowupReading[] = [];
  for (const file of files) {
    const history = readHistory(
      readFileSync(file, 'utf8'),
      file,
      options.time === undefined ? {} : { time: options.time },
    );
    histories.push(history);
    readings.push(
      followUp(history, {
        meanError: options.meanError,
        varianceError: options.varianceError,
        ...(expectations === undefined ? {} : { expectations }),
        ...(options.discard === undefined ? {} : { discard: options.discard }),
        ...(options.cellWidth === undefined ? {} : { cellWidth: options.cellWidth }),
        ...(options.referenceLength === undefined ? {} : { referenceLength: options.referenceLength }),
        ...(options.referenceSpeed === undefined ? {} : { referenceSpeed: options.referenceSpeed }),
      }),
    );
    for (const remark of history.remarks) terminal.remark(remark);
  }
  const comparison = compareHistories(readings);
  const traces = tracesOf(histories, readings);
  const page = followupReport({
    title: files.length === 1 ? `Follow-up of ${files[0]}` : `Follow-up of ${files.length} histories`,
    readings,
    ...(traces === undefined ? {} : { traces }),
    comparison,
    meanError: options.meanError,
    varianceError: options.varianceError,
    assumptions: assumptionsOf(options),
    footer: [`eddygraft ${version}`, ...files],
  });
  if (options.report !== undefined && options.dryRun !== true) {
    await writeFileBeside(options.report, renderReport(page));
    terminal.remark(`Report: ${options.report}`);
  }
  terminal.say(summaryTables(page));
  terminal.json({ histories: readings.map(documentOf), comparison, verdict: page.verdict });
}

/** Adds `followup HISTORY...`. */
export function addFollowup(program: Command): void {
  const command = program
    .command('followup')
    .summary('read monitor histories of the started run')
    .description(
      'Reads monitor histories from the started run: has the transient ended, is the spectrum resolved, how long to average.',
    )
    .argument(
      '<history...>',
      'CSV files: a header line, a column Time, one column a signal (NAME.VelocityX, ...Y, ...Z)',
    )
    .option('--time <column>', 'name of the time column (default: Time or t)')
    .addOption(number('--discard <seconds>', 'discard this much instead of what the rule finds', nonNegativeNumber))
    .option('--monitors <file>', 'monitor plan that appraise wrote: cell widths and expected k by probe name')
    .addOption(number('--cell-width <metres>', 'cell width at probes that the plan does not name'))
    .addOption(number('--reference-length <metres>', 'for Strouhal numbers'))
    .addOption(number('--reference-speed <speed>', 'm/s, for Strouhal numbers and for errors of mean velocities'))
    .addOption(number('--mean-error <error>', 'wanted standard error of means, relative').default(0.01))
    .addOption(number('--variance-error <error>', 'wanted standard error of variances, relative').default(0.05))
    .option('--report <file>', 'write a report page (HTML)')
    .addHelpText(
      'after',
      '\nExample:\n  eddygraft followup probes.csv --monitors monitors.csv --reference-length 0.04 --reference-speed 12 --report followup.html',
    );
  withCommonOptions(command);
  command.action((files: string[], options: FollowupCommandOptions) =>
    runFollowup(files, options, program.version() ?? ''),
  );
}
