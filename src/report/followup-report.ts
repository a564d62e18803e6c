import { fiveThirdsLine, profileChart, spectrumChart } from './figures.js';
import { type Block, type ChartBlock, figure, type ReportPage, type Section, type TableBlock } from './page.js';
import { timeText } from './units.js';

interface SpectrumValues {
  readonly frequency: Float64Array;
  readonly density: Float64Array;
  readonly segments: number;
}

export interface SignalFigures {
  readonly name: string;
  readonly transientEnd: number;
  readonly transientEnded: boolean;
  readonly duration: number;
  readonly mean: number;
  readonly deviation: number;
  readonly integralTime: number;
  readonly meanHalfWidth: number;
  readonly spectrum: SpectrumValues;
  readonly peaks: readonly { readonly frequency: number; readonly prominence: number; readonly strouhal?: number }[];
  readonly running: { readonly time: Float64Array; readonly mean: Float64Array; readonly halfWidth: Float64Array };
  readonly remainingForMean: number;
  readonly remainingForVariance: number;
}

export interface ProbeFigures {
  readonly name: string;
  readonly meanVelocity: readonly [number, number, number];
  readonly speed: number;
  readonly resolvedK: number;
  readonly kRatio?: number;
  readonly streamwise: SignalFigures;
  readonly cutoffFrequency?: number;
  readonly slope?: { readonly level: number; readonly begins: number; readonly leaves: number | undefined };
  readonly verdict: string;
  readonly words: string;
}

export interface HistoryFigures {
  readonly file: string;
  readonly step: number;
  readonly samples: number;
  readonly start: number;
  readonly end: number;
  readonly transientEnd: number;
  readonly transientEnded: boolean;
  readonly slowestSignal: string;
  readonly signals: readonly SignalFigures[];
  readonly probes: readonly ProbeFigures[];
  readonly remaining: number;
  readonly remarks: readonly string[];
}

export interface FollowupReportData {
  readonly title: string;
  readonly subtitle?: string;
  readonly readings: readonly HistoryFigures[];
  /** Raw signals to draw, by file and name; decimated by the page. */
  readonly traces?: readonly {
    readonly file: string;
    readonly name: string;
    readonly time: ArrayLike<number>;
    readonly values: ArrayLike<number>;
    readonly transientEnd: number;
  }[];
  readonly comparison: readonly {
    readonly name: string;
    readonly means: readonly number[];
    readonly deviations: readonly number[];
    readonly standardErrors: readonly number[];
  }[];
  readonly meanError: number;
  readonly varianceError: number;
  readonly assumptions: readonly string[];
  readonly footer: readonly string[];
}

const three = (x: number): number => Number(x.toPrecision(3));

function signalsTable(reading: HistoryFigures, title: string): TableBlock {
  return {
    type: 'table',
    title,
    terminal: true,
    columns: [
      { label: 'signal' },
      { label: 'transient ends at', unit: 's' },
      { label: 'mean' },
      { label: '95 % interval, +-' },
      { label: 'deviation' },
      { label: 'integral time', unit: 's' },
      { label: 'line at', unit: 'Hz' },
      { label: 'Strouhal number' },
      { label: 'still for the mean', unit: 's' },
      { label: 'still for the variance', unit: 's' },
    ],
    rows: reading.signals.map((s) => [
      s.name,
      s.transientEnded ? Number(s.transientEnd.toPrecision(5)) : 'not ended',
      Number(s.mean.toPrecision(5)),
      three(s.meanHalfWidth),
      three(s.deviation),
      three(s.integralTime),
      s.peaks[0] === undefined ? null : Number(s.peaks[0].frequency.toPrecision(4)),
      s.peaks[0]?.strouhal === undefined ? null : three(s.peaks[0].strouhal),
      three(s.remainingForMean),
      three(s.remainingForVariance),
    ]),
    note: 'Transient by the marginal-standard-error rule (White 1997). A line is a peak at least five times above its surroundings.',
  };
}

function probesTable(reading: HistoryFigures, title: string): TableBlock {
  return {
    type: 'table',
    title,
    terminal: true,
    columns: [
      { label: 'probe' },
      { label: 'mean speed', unit: 'm/s' },
      { label: 'resolved k', unit: 'm2/s2' },
      { label: "over the precursor's" },
      { label: "grid's cut-off", unit: 'Hz' },
      { label: 'leaves -5/3 at', unit: 'Hz' },
      { label: 'in words' },
    ],
    rows: reading.probes.map((p) => [
      p.name,
      three(p.speed),
      three(p.resolvedK),
      p.kRatio === undefined ? null : three(p.kRatio),
      p.cutoffFrequency === undefined ? null : three(p.cutoffFrequency),
      p.slope?.leaves === undefined ? null : three(p.slope.leaves),
      p.words,
    ]),
  };
}

function probeSpectrum(probe: ProbeFigures): ChartBlock {
  const { frequency, density, segments } = probe.streamwise.spectrum;
  const measured = { name: 'measured', x: frequency.subarray(1), y: density.subarray(1) };
  const top = frequency[frequency.length - 1] as number;
  const line =
    probe.slope === undefined
      ? fiveThirdsLine(measured, frequency[1] as number, top)
      : {
          name: 'slope -5/3',
          x: [probe.slope.begins / 2, top],
          y: [probe.slope.begins / 2, top].map((f) => (probe.slope as { level: number }).level * f ** (-5 / 3)),
          faint: true,
        };
  return spectrumChart({
    title: `Spectrum at ${probe.name}`,
    caption: `${probe.words}. Fluctuation along the mean flow, ${segments} averaged segments (Welch 1967).`,
    x: { label: 'frequency', unit: 'Hz' },
    y: { label: 'power spectral density', unit: 'm2/s' },
    curves: [measured, ...(line === undefined ? [] : [line])],
    cutoffs: [
      ...(probe.cutoffFrequency === undefined ? [] : [{ value: probe.cutoffFrequency, label: 'cut-off of the grid' }]),
      ...(probe.slope?.leaves === undefined ? [] : [{ value: probe.slope.leaves, label: 'leaves -5/3' }]),
      ...(probe.streamwise.peaks[0] === undefined
        ? []
        : [{ value: probe.streamwise.peaks[0].frequency, label: 'line' }]),
    ],
  });
}

function signalSpectrum(signal: SignalFigures): ChartBlock {
  return spectrumChart({
    title: `Spectrum of ${signal.name}`,
    caption: `${signal.spectrum.segments} averaged segments (Welch 1967).`,
    x: { label: 'frequency', unit: 'Hz' },
    y: { label: 'power spectral density', unit: '1/Hz' },
    curves: [{ name: 'measured', x: signal.spectrum.frequency.subarray(1), y: signal.spectrum.density.subarray(1) }],
    cutoffs: signal.peaks.map((p) => ({
      value: p.frequency,
      label: p.strouhal === undefined ? 'line' : `St ${figure(p.strouhal, 3)}`,
    })),
  });
}

function runningChart(signal: SignalFigures): ChartBlock {
  const { time, mean, halfWidth } = signal.running;
  // The first few values of a running mean are noise that would set the scale.
  const from = Math.min(Math.floor(time.length / 12), time.length - 2);
  const x = time.subarray(from);
  const centre = mean.subarray(from);
  const half = halfWidth.subarray(from);
  return profileChart(
    `Running mean of ${signal.name}`,
    'Mean since the end of the transient, with its 95 % interval from the integral time scale.',
    { label: 'time', unit: 's' },
    { label: signal.name },
    [
      { name: 'running mean', x, y: centre },
      { name: '95 % interval', x, y: centre.map((m, i) => m + (half[i] as number)), faint: true },
      { name: '95 % interval, lower', x, y: centre.map((m, i) => m - (half[i] as number)), faint: true },
    ],
  );
}

function traceCharts(data: FollowupReportData, file: string): Block[] {
  return (data.traces ?? [])
    .filter((trace) => trace.file === file)
    .map((trace) =>
      profileChart(
        `History of ${trace.name}`,
        '',
        { label: 'time', unit: 's' },
        { label: trace.name },
        [{ name: trace.name, x: trace.time, y: trace.values }],
        [{ axis: 'x', value: trace.transientEnd, label: 'transient ends' }],
      ),
    );
}

/** Signals that belong to no probe: coefficients and the like. */
function loneSignals(reading: HistoryFigures): readonly SignalFigures[] {
  return reading.signals.filter((s) => !/Velocity[XYZ]$/.test(s.name));
}

/** Figures a page holds at most, so that a rake of a hundred probes stays readable; the tables hold all. */
const mostFigures = 12;

function historySection(data: FollowupReportData, reading: HistoryFigures, alone: boolean): Section {
  const suffix = alone ? '' : ` of ${reading.file}`;
  const blocks: Block[] = [];
  if (reading.probes.length > 0) blocks.push(probesTable(reading, `Probes${suffix}`));
  blocks.push(signalsTable(reading, `Signals${suffix}`));
  blocks.push(...traceCharts(data, reading.file).slice(0, 4));
  blocks.push(...reading.probes.slice(0, mostFigures).map(probeSpectrum));
  blocks.push(...loneSignals(reading).slice(0, mostFigures).map(signalSpectrum));
  const means = [...loneSignals(reading), ...reading.probes.map((p) => p.streamwise)].slice(0, 4);
  blocks.push(...means.map(runningChart));
  const left = reading.probes.length - mostFigures;
  if (left > 0)
    blocks.push({
      type: 'text',
      text: `Spectra of ${left} more probes are left out; the table above holds their figures.`,
    });
  return { title: alone ? 'Signals, spectra, means' : reading.file, blocks };
}

function verdictOf(data: FollowupReportData): NonNullable<ReportPage['verdict']> {
  const ended = data.readings.every((r) => r.transientEnded);
  const probes = data.readings.flatMap((r) => r.probes);
  const poor = probes.filter((p) => p.verdict === 'too dissipative here' || p.verdict === 'noise piles up');
  const resolving = probes.filter((p) => p.verdict === 'resolving');
  const remaining = Math.max(...data.readings.map((r) => r.remaining));
  const transient = ended
    ? `The transient has ended at ${timeText(Math.max(...data.readings.map((r) => r.transientEnd)))}`
    : `The transient has not ended in ${data.readings
        .filter((r) => !r.transientEnded)
        .map((r) => r.slowestSignal)
        .join(', ')}`;
  const spectra =
    probes.length === 0
      ? ''
      : `; ${resolving.length} of ${probes.length} probes resolve their turbulence, ${poor.length} do not`;
  const more =
    remaining > 0
      ? `; ${timeText(remaining)} more are to be averaged for the wanted errors`
      : '; the wanted errors are reached';
  return {
    level: !ended || poor.length > resolving.length ? 'bad' : remaining > 0 || poor.length > 0 ? 'watch' : 'good',
    words: `${transient}${spectra}${more}.`,
  };
}

/** Spectra of the same probe in all histories, one chart a probe. */
function overlaidSpectra(readings: readonly HistoryFigures[]): ChartBlock[] {
  const [first] = readings;
  if (first === undefined) return [];
  return first.probes.slice(0, 4).flatMap((probe) => {
    const same = readings.map((r) => r.probes.find((p) => p.name === probe.name));
    if (same.some((p) => p === undefined)) return [];
    return [
      spectrumChart({
        title: `Spectra at ${probe.name} in all histories`,
        caption: 'Fluctuation along the mean flow (Welch 1967).',
        x: { label: 'frequency', unit: 'Hz' },
        y: { label: 'power spectral density', unit: 'm2/s' },
        curves: (same as ProbeFigures[]).map((p, i) => ({
          name: (readings[i] as HistoryFigures).file,
          x: p.streamwise.spectrum.frequency.subarray(1),
          y: p.streamwise.spectrum.density.subarray(1),
        })),
        cutoffs:
          probe.cutoffFrequency === undefined ? [] : [{ value: probe.cutoffFrequency, label: 'cut-off of the grid' }],
      }),
    ];
  });
}

/** Page of `followup`. */
export function followupReport(data: FollowupReportData): ReportPage {
  const alone = data.readings.length === 1;
  const summary: Block = {
    type: 'table',
    title: 'Histories',
    terminal: true,
    columns: [
      { label: 'file' },
      { label: 'samples' },
      { label: 'step', unit: 's' },
      { label: 'from', unit: 's' },
      { label: 'to', unit: 's' },
      { label: 'transient ends at', unit: 's' },
      { label: 'slowest signal' },
      { label: 'still to be averaged', unit: 's' },
    ],
    rows: data.readings.map((r) => [
      r.file,
      r.samples,
      three(r.step),
      three(r.start),
      Number(r.end.toPrecision(5)),
      r.transientEnded ? Number(r.transientEnd.toPrecision(5)) : 'not ended',
      r.slowestSignal,
      three(r.remaining),
    ]),
    note: `Wanted standard errors: ${data.meanError} of the mean (velocities: of the speed), ${data.varianceError} of variances.`,
  };
  const sections: Section[] = [
    { title: 'Has the start taken', blocks: [summary] },
    ...data.readings.map((r) => historySection(data, r, alone)),
  ];
  if (data.comparison.length > 0) {
    sections.push({
      title: 'The histories compared',
      blocks: [
        {
          type: 'table',
          title: 'Means and deviations side by side',
          terminal: true,
          columns: [
            { label: 'signal' },
            ...data.readings.flatMap((r) => [{ label: `mean, ${r.file}` }, { label: `deviation, ${r.file}` }]),
            { label: 'largest difference', unit: 'standard errors' },
          ],
          rows: data.comparison.map((c) => [
            c.name,
            ...c.means.flatMap((m, i) => [Number(m.toPrecision(4)), three(c.deviations[i] as number)]),
            three(Math.max(...c.standardErrors)),
          ]),
          note: 'Differences of means from the first history; above two standard errors they are hardly chance.',
        },
        ...overlaidSpectra(data.readings),
      ],
    });
  }
  sections.push({
    title: 'Assumptions and remarks',
    blocks: [{ type: 'list', items: [...data.assumptions, ...data.readings.flatMap((r) => r.remarks)] }],
  });
  return {
    title: data.title,
    kind: 'follow-up',
    ...(data.subtitle === undefined ? {} : { subtitle: data.subtitle }),
    verdict: verdictOf(data),
    footer: data.footer,
    sections,
  };
}
