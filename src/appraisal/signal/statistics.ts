import { fourierPlan, nextPowerOfTwo, transform } from './fourier.js';

export interface Moments {
  readonly mean: number;
  readonly variance: number;
}

export function moments(signal: Float64Array): Moments {
  let mean = 0;
  for (const x of signal) mean += x;
  mean /= signal.length;
  let variance = 0;
  for (const x of signal) variance += (x - mean) ** 2;
  return { mean, variance: variance / signal.length };
}

/** Autocorrelation coefficient at lags 0 ... n - 1 (biased estimate, which keeps it positive definite). */
export function autocorrelation(signal: Float64Array): Float64Array {
  const n = signal.length;
  const plan = fourierPlan(nextPowerOfTwo(2 * n));
  const real = new Float64Array(plan.length);
  const imaginary = new Float64Array(plan.length);
  const { mean } = moments(signal);
  for (let i = 0; i < n; i++) real[i] = (signal[i] as number) - mean;
  transform(plan, real, imaginary);
  for (let i = 0; i < plan.length; i++) {
    real[i] = (real[i] as number) ** 2 + (imaginary[i] as number) ** 2;
    imaginary[i] = 0;
  }
  transform(plan, real, imaginary);
  const zero = real[0] as number;
  const result = new Float64Array(n);
  for (let i = 0; i < n; i++) result[i] = zero > 0 ? (real[i] as number) / zero : i === 0 ? 1 : 0;
  return result;
}

/**
 * Integral time scale: the autocorrelation integrated up to its first zero, which for a signal that swings
 * periodically is larger than the whole integral and therefore gives cautious intervals.
 *
 * @param step  seconds between values
 * @returns seconds
 * @see Tennekes & Lumley 1972, section 6.4
 */
export function integralTime(signal: Float64Array, step: number): number {
  const r = autocorrelation(signal);
  let sum = 0;
  for (let i = 1; i < r.length; i++) {
    const before = r[i - 1] as number;
    const after = r[i] as number;
    if (after <= 0) return (sum + (0.5 * before * before) / (before - after)) * step;
    sum += 0.5 * (before + after);
  }
  return sum * step;
}

/**
 * Standard error of the mean of a record of length T, sigma sqrt(2 T_int / T), not above sigma.
 *
 * @see Tennekes & Lumley 1972, section 6.4
 */
export function meanStandardError(variance: number, integral: number, duration: number): number {
  return Math.sqrt(variance * Math.min(1, (2 * integral) / duration));
}

/**
 * Averaging time for a wanted standard error of the mean: error^2 = (2 T_int / T) variance.
 *
 * @param error  in the unit of the signal
 * @returns seconds
 * @see Tennekes & Lumley 1972, section 6.4
 */
export function timeForMeanError(variance: number, integral: number, error: number): number {
  return (2 * integral * variance) / (error * error);
}

/**
 * Averaging time for a wanted relative standard error of the variance of a Gaussian signal with exponential
 * correlation: error^2 = 2 T_int / T.
 *
 * @see Tennekes & Lumley 1972, section 6.4
 */
export function timeForVarianceError(integral: number, relativeError: number): number {
  return (2 * integral) / (relativeError * relativeError);
}

/** Running mean and the half-width of its 95 % interval at `points` equally spaced times. */
export interface RunningMean {
  readonly time: Float64Array;
  readonly mean: Float64Array;
  readonly halfWidth: Float64Array;
}

const normalQuantile95 = 1.959964;

export function runningMean(
  signal: Float64Array,
  start: number,
  step: number,
  integral: number,
  points = 240,
): RunningMean {
  const n = signal.length;
  const count = Math.min(points, n);
  const time = new Float64Array(count);
  const mean = new Float64Array(count);
  const halfWidth = new Float64Array(count);
  let m = 0;
  let squares = 0;
  let next = 0;
  for (let i = 0; i < n; i++) {
    const x = signal[i] as number;
    const difference = x - m;
    m += difference / (i + 1);
    squares += difference * (x - m);
    if (i + 1 < ((next + 1) * n) / count) continue;
    time[next] = start + i * step;
    mean[next] = m;
    halfWidth[next] = normalQuantile95 * meanStandardError(squares / (i + 1), integral, Math.max((i + 1) * step, step));
    next++;
  }
  return { time, mean, halfWidth };
}
