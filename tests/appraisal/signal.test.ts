import { spawnSync } from 'node:child_process';
import FFT from 'fft.js';
import { describe, expect, it } from 'vitest';
import { fourierPlan, realPower, transform } from '../../src/appraisal/signal/fourier.js';
import { spectralPeaks, strouhal } from '../../src/appraisal/signal/peak.js';
import { readSlope } from '../../src/appraisal/signal/slope.js';
import {
  integralTime,
  meanStandardError,
  moments,
  runningMean,
  timeForMeanError,
  timeForVarianceError,
} from '../../src/appraisal/signal/statistics.js';
import { batchLengthFor, marginalStandardError } from '../../src/appraisal/signal/transient.js';
import { segmentLengthFor, welchSpectrum } from '../../src/appraisal/signal/welch.js';
import { gaussian, ornsteinUhlenbeck, withSpectrum } from './signals.js';

const scipyThere = spawnSync('/usr/bin/python3', ['-c', 'import scipy.signal']).status === 0;
if (!scipyThere) console.log('skipped: comparison with scipy.signal.welch (no scipy in /usr/bin/python3)');

describe('Fourier transform', () => {
  it.each([2, 8, 64, 1024])('of length %d agrees with fft.js', (n) => {
    const normal = gaussian(`fft ${n}`);
    const real = Float64Array.from({ length: n }, normal);
    const imaginary = Float64Array.from({ length: n }, normal);
    const reference = new FFT(n);
    const input = reference.createComplexArray();
    for (let i = 0; i < n; i++) {
      input[2 * i] = real[i] as number;
      input[2 * i + 1] = imaginary[i] as number;
    }
    const output = reference.createComplexArray();
    reference.transform(output, input);
    transform(fourierPlan(n), real, imaginary);
    for (let k = 0; k < n; k++) {
      expect(Math.abs((real[k] as number) - output[2 * k])).toBeLessThan(1e-11 * n);
      expect(Math.abs((imaginary[k] as number) - output[2 * k + 1])).toBeLessThan(1e-11 * n);
    }
  });

  it('gives the power of a real signal through half the length', () => {
    const n = 128;
    const signal = Float64Array.from({ length: n }, gaussian('real'));
    const real = Float64Array.from(signal);
    const imaginary = new Float64Array(n);
    transform(fourierPlan(n), real, imaginary);
    const power = new Float64Array(n / 2 + 1);
    realPower(fourierPlan(n / 2), signal, power);
    for (let k = 0; k <= n / 2; k++) {
      expect(power[k]).toBeCloseTo((real[k] as number) ** 2 + (imaginary[k] as number) ** 2, 9);
    }
  });

  it('refuses lengths that are no power of two', () => {
    expect(() => fourierPlan(12)).toThrow('power of two');
  });
});

describe('Welch spectrum', () => {
  it.skipIf(!scipyThere)('agrees with scipy.signal.welch', () => {
    const signal = ornsteinUhlenbeck(5000, 0.01, 0.2, 1.3, 'scipy');
    const ours = welchSpectrum(signal, 0.01, { segmentLength: 512 });
    const program = `
import sys, json, numpy, scipy.signal
x = numpy.array(json.load(sys.stdin))
f, p = scipy.signal.welch(x, fs=100.0, window='hann', nperseg=512, noverlap=256, detrend='constant', scaling='density')
print(json.dumps({'f': f.tolist(), 'p': p.tolist()}))`;
    const run = spawnSync('/usr/bin/python3', ['-c', program], {
      input: JSON.stringify([...signal]),
      encoding: 'utf8',
    });
    const theirs = JSON.parse(run.stdout) as { f: number[]; p: number[] };
    expect(theirs.f.length).toBe(ours.frequency.length);
    for (let k = 0; k < theirs.f.length; k++) {
      expect(ours.frequency[k]).toBeCloseTo(theirs.f[k] as number, 10);
      expect(Math.abs((ours.density[k] as number) / (theirs.p[k] as number) - 1)).toBeLessThan(1e-9);
    }
  });

  it('finds the density of white noise and of an Ornstein-Uhlenbeck process', () => {
    const noise = Float64Array.from({ length: 1 << 16 }, gaussian('white'));
    const white = welchSpectrum(noise, 0.5, { segmentLength: 256 });
    // One-sided density of white noise: 2 step times the variance, here the sample's own.
    let mean = 0;
    for (let k = 4; k < 124; k++) mean += (white.density[k] as number) / 120;
    expect(Math.abs(mean / moments(noise).variance - 1)).toBeLessThan(0.01);
    // S(f) = 4 sigma^2 T / (1 + (2 pi f T)^2).
    const process = welchSpectrum(ornsteinUhlenbeck(1 << 17, 0.02, 0.5, 2, 'density'), 0.02, { segmentLength: 1024 });
    for (const f of [0.2, 1, 3]) {
      const k = Math.round(f / (process.frequency[1] as number));
      let near = 0;
      let exact = 0;
      for (let j = k - 3; j <= k + 3; j++) {
        near += process.density[j] as number;
        exact += (4 * 4 * 0.5) / (1 + (2 * Math.PI * (process.frequency[j] as number) * 0.5) ** 2);
      }
      expect(Math.abs(near / exact - 1)).toBeLessThan(0.08);
    }
  });

  it('integrates to the variance', () => {
    const signal = ornsteinUhlenbeck(1 << 15, 0.1, 0.8, 1.7, 'variance');
    const { frequency, density } = welchSpectrum(signal, 0.1, { segmentLength: 2048 });
    let sum = 0;
    for (const d of density) sum += d * (frequency[1] as number);
    expect(Math.abs(sum / moments(signal).variance - 1)).toBeLessThan(0.05);
  });

  it('chooses segments that give at least eight averages', () => {
    for (const n of [100, 1000, 4096, 50_000]) {
      const length = segmentLengthFor(n);
      expect(Math.floor((2 * n) / length) - 1).toBeGreaterThanOrEqual(8);
    }
    expect(() => welchSpectrum(new Float64Array(10), 1, { segmentLength: 16 })).toThrow('16 values');
  });
});

describe('transient', () => {
  it('finds the end of a known ramp within a twenty-fifth of the record', () => {
    for (const seed of ['a', 'b', 'c', 'd', 'e']) {
      const n = 20_000;
      const noise = ornsteinUhlenbeck(n, 1, 5, 0.2, `ramp ${seed}`);
      const signal = noise.map((x, i) => x + 1 + (i < 4000 ? -3 * (1 - i / 4000) : 0));
      const { samples, ended } = marginalStandardError(signal, batchLengthFor(n));
      expect(ended).toBe(true);
      // The last tenth of the ramp is lower than the noise, so the rule may stop a little early.
      expect(samples).toBeGreaterThan(3200);
      expect(samples).toBeLessThan(4800);
    }
  });

  it('says that a ramp over the whole record has not ended', () => {
    const noise = ornsteinUhlenbeck(10_000, 1, 5, 0.05, 'drift');
    expect(marginalStandardError(noise.map((x, i) => x + i / 2000)).ended).toBe(false);
  });

  it('discards nothing of a constant and next to nothing of plain noise', () => {
    expect(marginalStandardError(new Float64Array(1000).fill(3)).samples).toBe(0);
    const normal = gaussian('stationary');
    expect(marginalStandardError(Float64Array.from({ length: 20_000 }, normal)).samples).toBeLessThan(6000);
  });

  it('agrees with the published formula evaluated term by term', () => {
    const signal = ornsteinUhlenbeck(200, 1, 3, 1, 'formula').map((x, i) => x + 4 * Math.exp(-i / 10));
    const means = Array.from({ length: 40 }, (_, b) => signal.slice(5 * b, 5 * b + 5).reduce((a, x) => a + x, 0) / 5);
    let best = Number.POSITIVE_INFINITY;
    let at = -1;
    for (let d = 0; d <= 35; d++) {
      const rest = means.slice(d);
      const mean = rest.reduce((a, x) => a + x, 0) / rest.length;
      const z = rest.reduce((a, x) => a + (x - mean) ** 2, 0) / rest.length ** 2;
      if (z < best) {
        best = z;
        at = d;
      }
    }
    const found = marginalStandardError(signal, 5);
    expect(found.samples).toBe(5 * at);
    expect(found.marginalError).toBeCloseTo(best, 10);
  });
});

describe('averaging', () => {
  it('knows the integral time of an Ornstein-Uhlenbeck process', () => {
    const signal = ornsteinUhlenbeck(200_000, 0.05, 1, 1, 'integral');
    expect(Math.abs(integralTime(signal, 0.05) - 1)).toBeLessThan(0.1);
  });

  it('predicts the scatter of means and variances of short records', () => {
    // 400 independent records of 100 integral times; exact finite-record factor for the mean: 0.0198 (Tennekes & Lumley).
    const records = 400;
    const means: number[] = [];
    const variances: number[] = [];
    for (let r = 0; r < records; r++) {
      const signal = ornsteinUhlenbeck(1000, 0.1, 1, 1, `record ${r}`);
      means.push(moments(signal).mean);
      // About the known mean, so that only the scatter of the squares counts.
      variances.push(signal.reduce((a, x) => a + x * x, 0) / signal.length);
    }
    const scatter = (values: readonly number[]): number => {
      const mean = values.reduce((a, x) => a + x, 0) / records;
      return Math.sqrt(values.reduce((a, x) => a + (x - mean) ** 2, 0) / records);
    };
    // The scatter of 400 values is known to 1 / sqrt(800) = 3.5 %; three of those.
    expect(Math.abs(scatter(means) / meanStandardError(1, 1, 100) - 1)).toBeLessThan(0.11);
    expect(Math.abs(scatter(variances) / Math.sqrt(2 / 100) - 1)).toBeLessThan(0.11);
  });

  it('gives the averaging times of the textbook', () => {
    // 1 % of the mean at 10 % intensity: 200 integral times; 2 % of the variance: 5000.
    expect(timeForMeanError(0.01, 1, 0.01)).toBeCloseTo(200, 9);
    expect(timeForVarianceError(1, 0.02)).toBeCloseTo(5000, 9);
  });

  it('covers the true mean with 95 % intervals about 95 times of 100', () => {
    let covered = 0;
    for (let r = 0; r < 200; r++) {
      const running = runningMean(ornsteinUhlenbeck(2000, 0.1, 1, 1, `cover ${r}`), 0, 0.1, 1, 50);
      if (Math.abs(running.mean[49] as number) < (running.halfWidth[49] as number)) covered++;
    }
    expect(covered).toBeGreaterThan(180);
    expect(covered).toBeLessThan(199);
  });
});

describe('shedding', () => {
  it('reads the Strouhal number from a synthetic signal in turbulence', () => {
    // Circular cylinder below the drag crisis: 0.21 (Ong & Wallace 1996 at Re 3900); D = 0.02 m, U = 12 m/s: 126 Hz.
    const n = 1 << 14;
    const step = 1e-4;
    const noise = ornsteinUhlenbeck(n, step, 0.002, 0.3, 'shedding');
    const signal = noise.map((x, i) => x + 0.5 * Math.sin(2 * Math.PI * 126 * i * step));
    const [peak] = spectralPeaks(welchSpectrum(signal, step));
    expect(peak).toBeDefined();
    expect(Math.abs(strouhal(peak!.frequency, 0.02, 12) - 0.21)).toBeLessThan(0.002);
  });

  it('finds no line in turbulence without one', () => {
    for (let seed = 0; seed < 10; seed++) {
      const signal = ornsteinUhlenbeck(1 << 14, 1e-4, 0.002, 0.3, `plain ${seed}`);
      expect(spectralPeaks(welchSpectrum(signal, 1e-4))).toEqual([]);
    }
  });

  it('takes no steep bend of a spectrum for a line', () => {
    for (let seed = 0; seed < 6; seed++) {
      const bent = (f: number): number => (1 + (f / 6) ** 2) ** (-5 / 6) * 0.5 ** ((f / 150) ** 4);
      const signal = withSpectrum(1 << 13, 1 / 2000, bent, `bent ${seed}`);
      expect(spectralPeaks(welchSpectrum(signal, 1 / 2000))).toEqual([]);
    }
  });
});

describe('slope', () => {
  const karman = (f: number): number => (1 + (f / 2) ** 2) ** (-5 / 6);

  it('sees -5/3 up to the end of a von Karman signal', () => {
    const signal = withSpectrum(1 << 13, 1 / 400, karman, 'inertial');
    const spectrum = welchSpectrum(signal, 1 / 400);
    const reading = readSlope(spectrum, 4, 200);
    expect(reading?.leaves).toBeUndefined();
    expect(Math.abs(reading!.slope + 5 / 3)).toBeLessThan(0.12);
    expect(reading!.decades).toBeGreaterThan(1);
    // Level: S -> f_e^(5/3) f^(-5/3) at high frequency, f_e = 2 Hz.
    expect(Math.abs(reading!.level / 2 ** (5 / 3) - 1)).toBeLessThan(0.25);
  });

  it.each([20, 40])('finds where the spectrum drops: half of the line at %d Hz', (half) => {
    const cut = (f: number): number => karman(f) * 0.5 ** ((f / half) ** 4);
    const spectrum = welchSpectrum(withSpectrum(1 << 13, 1 / 400, cut, `cut ${half}`), 1 / 400);
    const reading = readSlope(spectrum, 4, 200);
    expect(Math.abs(reading!.leaves! / half - 1)).toBeLessThan(0.15);
  });

  it('sees energy piling up at the end', () => {
    const raised = (f: number): number => karman(f) * (f > 100 ? (f / 100) ** 3 : 1);
    const spectrum = welchSpectrum(withSpectrum(1 << 13, 1 / 400, raised, 'pile'), 1 / 400);
    expect(readSlope(spectrum, 4, 80)!.pileUp).toBe(true);
  });
});
