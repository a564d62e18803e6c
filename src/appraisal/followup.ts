import { InputError } from '../basis/errors.js';
import type { History } from './history.js';
import { parseTable } from './history.js';
import { type SpectralPeak, spectralPeaks, strouhal } from './signal/peak.js';
import { readSlope, type SlopeReading } from './signal/slope.js';
import {
  integralTime,
  meanStandardError,
  moments,
  type RunningMean,
  runningMean,
  timeForMeanError,
  timeForVarianceError,
} from './signal/statistics.js';
import { batchLengthFor, marginalStandardError } from './signal/transient.js';
import { type PowerSpectrum, welchSpectrum } from './signal/welch.js';

/** What was expected of a probe before the run (a line of the monitor plan). */
export interface Expectation {
  readonly cellWidth?: number;
  /** m2/s2, k of the precursor. */
  readonly k?: number;
}

export interface FollowupOptions {
  /** Discard this much physical time instead of what the rule finds, s. */
  readonly discard?: number;
  /** m, of every probe that `expectations` does not know. */
  readonly cellWidth?: number;
  readonly expectations?: ReadonlyMap<string, Expectation>;
  /** m and m/s, for Strouhal numbers. */
  readonly referenceLength?: number;
  readonly referenceSpeed?: number;
  /** Wanted standard error of means (of the reference speed, or of the signal's own mean) and of variances, relative. */
  readonly meanError?: number;
  readonly varianceError?: number;
}

/** One signal after its transient. */
export interface SignalReading {
  readonly name: string;
  /** s of physical time at which the kept part begins. */
  readonly transientEnd: number;
  readonly transientEnded: boolean;
  readonly duration: number;
  readonly mean: number;
  readonly deviation: number;
  readonly integralTime: number;
  /** Half-width of the 95 % interval of the mean. */
  readonly meanHalfWidth: number;
  readonly spectrum: PowerSpectrum;
  readonly peaks: readonly (SpectralPeak & { readonly strouhal?: number })[];
  readonly running: RunningMean;
  /** s still to be averaged for the wanted errors; 0 when reached. */
  readonly remainingForMean: number;
  readonly remainingForVariance: number;
}

export type ProbeVerdict = 'resolving' | 'too dissipative here' | 'noise piles up' | 'undecided';

/** The velocities of one probe. */
export interface ProbeReading {
  readonly name: string;
  readonly meanVelocity: readonly [number, number, number];
  readonly speed: number;
  readonly resolvedK: number;
  /** resolvedK over the precursor's k. */
  readonly kRatio?: number;
  /** Fluctuation along the mean velocity. */
  readonly streamwise: SignalReading;
  readonly cutoffFrequency?: number;
  readonly slope?: SlopeReading;
  readonly verdict: ProbeVerdict;
  readonly words: string;
}

export interface FollowupReading {
  readonly file: string;
  readonly step: number;
  readonly samples: number;
  readonly start: number;
  readonly end: number;
  /** Largest end of a transient over all signals, s; the run's own. */
  readonly transientEnd: number;
  readonly transientEnded: boolean;
  readonly slowestSignal: string;
  readonly signals: readonly SignalReading[];
  readonly probes: readonly ProbeReading[];
  /** s still to be run for every signal's wanted errors. */
  readonly remaining: number;
  readonly remarks: readonly string[];
}

/**
 * @param speed  m/s, for velocities: what errors of the mean are relative to; otherwise: the larger of mean and deviation
 */
function readSignal(
  history: History,
  name: string,
  values: Float64Array,
  options: FollowupOptions,
  speed?: number,
): SignalReading {
  const { step, start } = history;
  const found = marginalStandardError(values, batchLengthFor(values.length));
  const wanted = options.discard === undefined ? found.samples : Math.round(options.discard / step);
  // An unfinished transient leaves the second half to look at, and says so.
  const cut = Math.min(
    wanted,
    values.length - 32,
    Math.floor(options.discard === undefined ? values.length / 2 : wanted),
  );
  const rest = values.subarray(Math.max(0, cut));
  const duration = rest.length * step;
  const { mean, variance } = moments(rest);
  const integral = integralTime(rest, step);
  const spectrum = welchSpectrum(rest, step);
  const { referenceLength, referenceSpeed } = options;
  const peaks = spectralPeaks(spectrum).map((peak) =>
    referenceLength === undefined || referenceSpeed === undefined
      ? peak
      : { ...peak, strouhal: strouhal(peak.frequency, referenceLength, referenceSpeed) },
  );
  const scale = speed ?? Math.max(Math.abs(mean), Math.sqrt(variance));
  const meanHalfWidth = 1.959964 * meanStandardError(variance, integral, duration);
  // A mean that is zero within its interval has no relative error.
  const noMean = speed === undefined && Math.abs(mean) <= meanHalfWidth;
  const forMean = scale > 0 && !noMean ? timeForMeanError(variance, integral, (options.meanError ?? 0.01) * scale) : 0;
  const forVariance = timeForVarianceError(integral, options.varianceError ?? 0.05);
  return {
    name,
    transientEnd: start + Math.max(0, cut) * step,
    transientEnded: options.discard !== undefined || found.ended,
    duration,
    mean,
    deviation: Math.sqrt(variance),
    integralTime: integral,
    meanHalfWidth,
    spectrum,
    peaks,
    running: runningMean(rest, start + Math.max(0, cut) * step, step, integral),
    remainingForMean: variance > 0 ? Math.max(0, forMean - duration) : 0,
    remainingForVariance: variance > 0 ? Math.max(0, forVariance - duration) : 0,
  };
}

const toThree = (x: number): string => String(Number(x.toPrecision(3)));

/**
 * Verdict on one probe. The spectrum of a run that carries its eddies follows -5/3 down to a good part of the grid's
 * cut-off; this program calls it resolving when it has not fallen to half of the line before a quarter of the cut-off
 * frequency (waves of eight cells), and too dissipative when it has (own rule; common practice has no fixed number).
 */
function judgeProbe(
  slope: SlopeReading | undefined,
  cutoff: number | undefined,
  nyquist: number,
): { verdict: ProbeVerdict; words: string } {
  if (slope === undefined)
    return { verdict: 'undecided', words: 'undecided: the record is too short above the integral frequency' };
  if (slope.decades < 0.2) {
    return {
      verdict: 'undecided',
      words: `undecided: no stretch of -5/3 is to be seen (${toThree(slope.decades)} decades)`,
    };
  }
  if (cutoff === undefined) {
    const where = slope.leaves === undefined ? 'up to the last frequency' : `up to ${toThree(slope.leaves)} Hz`;
    return {
      verdict: 'undecided',
      words: `undecided: follows -5/3 ${where}; give CellWidth to compare with the grid's cut-off`,
    };
  }
  if (slope.pileUp) {
    return {
      verdict: 'noise piles up',
      words: 'noise piles up: the spectrum rises above twice the -5/3 line at its end',
    };
  }
  if (slope.leaves === undefined) {
    return nyquist < 0.25 * cutoff
      ? {
          verdict: 'undecided',
          words: `undecided: sampled too slowly (up to ${toThree(nyquist)} Hz) to see the cut-off at ${toThree(cutoff)} Hz`,
        }
      : {
          verdict: 'resolving',
          words: `resolving: follows -5/3 as far as it was sampled, ${toThree(nyquist / cutoff)} of the grid's cut-off`,
        };
  }
  const part = slope.leaves / cutoff;
  const where = `leaves -5/3 at ${toThree(slope.leaves)} Hz, ${toThree(part)} of the grid's cut-off (waves of ${toThree(2 / part)} cells)`;
  return part >= 0.25
    ? { verdict: 'resolving', words: `resolving: ${where}` }
    : { verdict: 'too dissipative here', words: `too dissipative here: ${where}` };
}

/** Speed that errors of a probe's velocities are measured by. */
function probeSpeed(history: History, columns: readonly string[], options: FollowupOptions): number {
  if (options.referenceSpeed !== undefined) return options.referenceSpeed;
  return Math.hypot(...columns.map((column) => moments(history.signals.get(column) as Float64Array).mean));
}

function readProbe(
  history: History,
  name: string,
  columns: readonly [string, string, string],
  components: readonly SignalReading[],
  options: FollowupOptions,
): ProbeReading {
  const parts = columns.map((column) => history.signals.get(column) as Float64Array);
  const cut = Math.max(...components.map((c) => Math.round((c.transientEnd - history.start) / history.step)));
  const rests = parts.map((p) => p.subarray(cut));
  const stats = rests.map((rest) => moments(rest));
  const meanVelocity = stats.map((s) => s.mean) as [number, number, number];
  const speed = Math.hypot(...meanVelocity);
  const resolvedK = 0.5 * stats.reduce((sum, s) => sum + s.variance, 0);
  const direction = speed > 0 ? meanVelocity.map((x) => x / speed) : [1, 0, 0];
  const n = rests[0]?.length ?? 0;
  const along = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    for (let a = 0; a < 3; a++)
      along[i] = (along[i] as number) + (direction[a] as number) * ((rests[a] as Float64Array)[i] as number);
  }
  const started = history.start + cut * history.step;
  const kept: History = { ...history, start: started };
  const scale = probeSpeed(history, columns, options);
  const read = readSignal(kept, `${name} along the mean flow`, along, { ...options, discard: 0 }, scale);
  const streamwise: SignalReading = { ...read, transientEnded: components.every((c) => c.transientEnded) };
  const expected = options.expectations?.get(name);
  const width = expected?.cellWidth ?? options.cellWidth;
  const cutoffFrequency =
    width === undefined ? undefined : Math.max(speed, Math.sqrt((2 / 3) * resolvedK)) / (2 * width);
  const nyquist = 0.5 / history.step;
  // von Karman's one-dimensional spectrum bends at kappa_e U / 2 pi = 0.747 / (2 pi T_int); twice that is inertial.
  const bend = 0.7468 / (2 * Math.PI * streamwise.integralTime);
  const slope = readSlope(
    streamwise.spectrum,
    Math.max(2 * bend, streamwise.spectrum.frequency[2] as number),
    cutoffFrequency ?? nyquist,
  );
  const { verdict, words } = judgeProbe(slope, cutoffFrequency, nyquist);
  return {
    name,
    meanVelocity,
    speed,
    resolvedK,
    ...(expected?.k === undefined || !(expected.k > 0) ? {} : { kRatio: resolvedK / expected.k }),
    streamwise,
    ...(cutoffFrequency === undefined ? {} : { cutoffFrequency }),
    ...(slope === undefined ? {} : { slope }),
    verdict,
    words,
  };
}

/**
 * Reads one history of the started run: has the transient ended, is the spectrum resolved, how long to average.
 *
 * @throws InputError when what is left after the discarded time is shorter than 32 samples
 * @see White 1997 (transient); Welch 1967 (spectra); Tennekes & Lumley 1972, section 6.4 (averaging)
 */
export function followUp(history: History, options: FollowupOptions = {}): FollowupReading {
  const end = history.start + (history.samples - 1) * history.step;
  if (options.discard !== undefined && history.samples - Math.round(options.discard / history.step) < 32) {
    throw new InputError({
      file: history.file,
      cause: `${options.discard} s to discard leave fewer than 32 samples of ${toThree(end - history.start)} s`,
      remedy: 'discard less or let the run go on',
    });
  }
  const speedOf = new Map<string, number>();
  for (const columns of history.probes.values()) {
    const speed = probeSpeed(history, columns, options);
    for (const column of columns) speedOf.set(column, speed);
  }
  const signals = [...history.signals].map(([name, values]) =>
    readSignal(history, name, values, options, speedOf.get(name)),
  );
  const probes = [...history.probes].map(([name, columns]) => {
    const components = columns.map((column) => signals.find((s) => s.name === column) as SignalReading);
    return readProbe(history, name, columns, components, options);
  });
  let slowest = signals[0] as SignalReading;
  for (const signal of signals) if (signal.transientEnd > slowest.transientEnd) slowest = signal;
  const remaining = Math.max(0, ...signals.map((s) => Math.max(s.remainingForMean, s.remainingForVariance)));
  return {
    file: history.file,
    step: history.step,
    samples: history.samples,
    start: history.start,
    end,
    transientEnd: slowest.transientEnd,
    transientEnded: signals.every((s) => s.transientEnded),
    slowestSignal: slowest.name,
    signals,
    probes,
    remaining,
    remarks: history.remarks,
  };
}

/** The same signal in two histories. */
export interface SignalComparison {
  readonly name: string;
  readonly means: readonly number[];
  readonly deviations: readonly number[];
  /** Difference of each mean from the first, in combined standard errors; above 2 it is hardly chance. */
  readonly standardErrors: readonly number[];
}

/** Compares signals of equal names over several histories; the first is the reference. */
export function compareHistories(readings: readonly FollowupReading[]): readonly SignalComparison[] {
  const [first, ...others] = readings;
  if (first === undefined || others.length === 0) return [];
  return first.signals.flatMap((signal) => {
    const same = readings.map((reading) => reading.signals.find((s) => s.name === signal.name));
    if (same.some((s) => s === undefined)) return [];
    const found = same as SignalReading[];
    return [
      {
        name: signal.name,
        means: found.map((s) => s.mean),
        deviations: found.map((s) => s.deviation),
        standardErrors: found.map((s) => {
          const error = Math.hypot(s.meanHalfWidth, signal.meanHalfWidth) / 1.959964;
          return error > 0 ? Math.abs(s.mean - signal.mean) / error : 0;
        }),
      },
    ];
  });
}

/**
 * Expectations from a monitor plan as `monitorsCsv` writes it.
 *
 * @throws InputError when the columns Monitor and CellWidth are missing
 */
export function readExpectations(text: string, file: string): ReadonlyMap<string, Expectation> {
  const { names, rows, lines } = parseTable(text, file);
  const name = names.indexOf('Monitor');
  const width = names.indexOf('CellWidth');
  const energy = names.indexOf('TurbulentEnergyKinetic');
  if (name < 0 || width < 0) {
    throw new InputError({
      file,
      cause: 'there are no columns Monitor and CellWidth',
      remedy: 'give the monitor plan that appraise wrote',
    });
  }
  const result = new Map<string, Expectation>();
  rows.forEach((row, i) => {
    const cellWidth = Number(row[width]);
    const k = energy < 0 ? Number.NaN : Number(row[energy]);
    if (!(cellWidth > 0)) {
      throw new InputError({
        file,
        place: `line ${lines[i]}`,
        cause: `CellWidth is ${row[width]}`,
        remedy: 'give metres above zero',
      });
    }
    result.set(row[name] as string, { cellWidth, ...(k > 0 ? { k } : {}) });
  });
  return result;
}
