import { fourierPlan, nextPowerOfTwo, realPower } from './fourier.js';

/** One-sided power spectral density; its integral over frequency is the variance of the signal. */
export interface PowerSpectrum {
  /** Hz, from 0 to the Nyquist frequency. */
  readonly frequency: Float64Array;
  /** Signal unit squared per Hz. */
  readonly density: Float64Array;
  readonly segmentLength: number;
  readonly segments: number;
}

export interface WelchOptions {
  /** Samples a segment, a power of two; default: the longest that still gives about eight segments. */
  readonly segmentLength?: number;
}

/** Longest power of two of which at least `segments` half-overlapping pieces fit into n samples, at least 16. */
export function segmentLengthFor(n: number, segments = 8): number {
  const wanted = (2 * n) / (segments + 1);
  return Math.max(16, nextPowerOfTwo(Math.floor(wanted) + 1) / 2);
}

/**
 * Welch's averaged periodogram: half-overlapping segments, each freed of its mean, periodic Hann window, density.
 *
 * @param signal  n values at equal steps, n >= the segment length
 * @param step  seconds between values
 * @throws RangeError when the signal is shorter than one segment
 * @see Welch 1967, IEEE Trans. Audio Electroacoust. 15:70-73
 */
export function welchSpectrum(signal: Float64Array, step: number, options: WelchOptions = {}): PowerSpectrum {
  const length = options.segmentLength ?? segmentLengthFor(signal.length);
  if (signal.length < length) {
    throw new RangeError(`A spectrum needs ${length} values, the signal has ${signal.length}.`);
  }
  const plan = fourierPlan(length / 2);
  const window = Float64Array.from({ length }, (_, i) => 0.5 - 0.5 * Math.cos((2 * Math.PI * i) / length));
  let windowPower = 0;
  for (const w of window) windowPower += w * w;
  const bins = length / 2 + 1;
  const density = new Float64Array(bins);
  const power = new Float64Array(bins);
  const piece = new Float64Array(length);
  let segments = 0;
  for (let start = 0; start + length <= signal.length; start += length / 2) {
    let mean = 0;
    for (let i = 0; i < length; i++) mean += signal[start + i] as number;
    mean /= length;
    for (let i = 0; i < length; i++) piece[i] = ((signal[start + i] as number) - mean) * (window[i] as number);
    realPower(plan, piece, power);
    for (let k = 0; k < bins; k++) density[k] = (density[k] as number) + (power[k] as number);
    segments++;
  }
  const scale = step / (windowPower * segments);
  const frequency = new Float64Array(bins);
  for (let k = 0; k < bins; k++) {
    frequency[k] = k / (length * step);
    density[k] = (density[k] as number) * scale * (k === 0 || k === bins - 1 ? 1 : 2);
  }
  return { frequency, density, segmentLength: length, segments };
}
