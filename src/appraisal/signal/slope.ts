import type { PowerSpectrum } from './welch.js';

/** Where a spectrum follows f^(-5/3) and where it leaves it. */
export interface SlopeReading {
  /** Density of the fitted line at 1 Hz: line = level f^(-5/3). */
  readonly level: number;
  /** Hz: first frequency of the stretch within 1.5 dB (a factor of 1.41) of the line. */
  readonly begins: number;
  /** Hz: where the spectrum falls below half of the line and stays there; undefined: not before the last frequency. */
  readonly leaves: number | undefined;
  /** Decades between `begins` and `leaves` (or the last frequency). */
  readonly decades: number;
  /** Local logarithmic slope over the stretch; -1.67 for an inertial range. */
  readonly slope: number;
  /** The last bins lie above twice the line: energy piles up at the end. */
  readonly pileUp: boolean;
}

const binsPerDecade = 12;
const inertial = 5 / 3;

/** Medians of a spectrum in logarithmic bins: single lines do not count. Zero frequency and Nyquist are left out. */
export function logBins(spectrum: PowerSpectrum): { frequency: Float64Array; density: Float64Array } {
  const frequencies: number[] = [];
  const densities: number[] = [];
  let bucket: number[] = [];
  let key = Number.NaN;
  let logSum = 0;
  const flush = (): void => {
    if (bucket.length === 0) return;
    const count = bucket.length;
    bucket.sort((a, b) => a - b);
    const middle = count >> 1;
    densities.push(
      count % 2 === 1
        ? (bucket[middle] as number)
        : 0.5 * ((bucket[middle - 1] as number) + (bucket[middle] as number)),
    );
    frequencies.push(Math.exp(logSum / count));
    bucket = [];
    logSum = 0;
  };
  for (let k = 1; k < spectrum.frequency.length - 1; k++) {
    const f = spectrum.frequency[k] as number;
    const here = Math.floor(Math.log10(f) * binsPerDecade);
    if (here !== key) flush();
    key = here;
    bucket.push(spectrum.density[k] as number);
    logSum += Math.log(f);
  }
  flush();
  return { frequency: Float64Array.from(frequencies), density: Float64Array.from(densities) };
}

function fittedSlope(frequency: Float64Array, density: Float64Array, begin: number, end: number): number {
  let n = 0;
  let sx = 0;
  let sy = 0;
  let sxx = 0;
  let sxy = 0;
  for (let i = begin; i <= end; i++) {
    const x = Math.log(frequency[i] as number);
    const y = Math.log(density[i] as number);
    n++;
    sx += x;
    sy += y;
    sxx += x * x;
    sxy += x * y;
  }
  return n < 2 ? Number.NaN : (n * sxy - sx * sy) / (n * sxx - sx * sx);
}

/**
 * Fits the -5/3 line through the plateau of the compensated spectrum f^(5/3) S (means over three bins) and reads where
 * the spectrum leaves it.
 *
 * @param from  Hz: frequencies below belong to the energy-containing motion and are not looked at
 * @param to  Hz: frequencies above (beyond the grid's cut-off) take no part in the fit
 * @returns undefined when fewer than five bins remain
 * @see Kolmogorov 1941 (the slope); the factor of two and the three bins are this program's own reading rule
 */
export function readSlope(spectrum: PowerSpectrum, from: number, to: number): SlopeReading | undefined {
  const { frequency, density } = logBins(spectrum);
  const first = frequency.findIndex((f) => f >= from);
  if (first < 0 || frequency.length - first < 5) return undefined;
  const last = frequency.length - 1;
  const compensated = Float64Array.from(frequency, (f, i) => f ** inertial * (density[i] as number));
  let level = 0;
  let peak = first + 1;
  for (let i = first + 1; i < last; i++) {
    if ((frequency[i] as number) > to && i > first + 1) break;
    const mean = ((compensated[i - 1] as number) + (compensated[i] as number) + (compensated[i + 1] as number)) / 3;
    if (mean > level) {
      level = mean;
      peak = i;
    }
  }
  let begin = peak;
  while (begin > first && (compensated[begin - 1] as number) > level / Math.SQRT2) begin--;
  let end = last;
  while (end > peak && (compensated[end] as number) < level / 2) end--;
  const pileUp = (compensated[last] as number) > 2 * level && (compensated[last - 1] as number) > 2 * level;
  const left = end < last;
  let leaves: number | undefined;
  if (left) {
    // Where the straight piece between two bins crosses half of the line.
    const a = Math.log((compensated[end] as number) / (level / 2));
    const b = Math.log((compensated[end + 1] as number) / (level / 2));
    const part = a > 0 && b < 0 ? a / (a - b) : 0;
    const low = Math.log(frequency[end] as number);
    leaves = Math.exp(low + part * (Math.log(frequency[end + 1] as number) - low));
  }
  const begins = frequency[begin] as number;
  return {
    level,
    begins,
    leaves,
    decades: Math.log10((leaves ?? (frequency[last] as number)) / begins),
    slope: fittedSlope(frequency, density, begin, Math.max(end, begin + 1)),
    pileUp,
  };
}
