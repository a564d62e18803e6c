import { describe, expect, it } from 'vitest';
import {
  longitudinalLengthRatio,
  resolvedShare,
  shareModel,
  vonKarmanShare,
  waveForShare,
} from '../../src/appraisal/share.js';
import { incompleteBeta, logGamma } from '../../src/appraisal/special-functions.js';

// Share of k below kappa_c = pi / Delta, independently integrated from the published spectra:
// [ratio, von Karman on L11 / Delta, Pope on L / Delta, von Karman on L / Delta with Kolmogorov constant 1.5].
const published: readonly (readonly [number, number, number, number])[] = [
  [1, 0.464, 0.167, 0.15],
  [2, 0.652, 0.385, 0.379],
  [3, 0.733, 0.512, 0.51],
  [5, 0.81, 0.646, 0.645],
  [8, 0.861, 0.739, 0.739],
  [10, 0.88, 0.775, 0.775],
  [12, 0.894, 0.8, 0.8],
  [16, 0.912, 0.835, 0.835],
  [20, 0.924, 0.858, 0.858],
  [32, 0.945, 0.896, 0.896],
];

describe('special functions', () => {
  it('agree with closed forms', () => {
    expect(logGamma(0.5)).toBeCloseTo(Math.log(Math.sqrt(Math.PI)), 12);
    expect(logGamma(6)).toBeCloseTo(Math.log(120), 12);
    // I_x(2, 3) = x^2 (6 - 8 x + 3 x^2); I_x(1/2, 1/2) = (2 / pi) asin sqrt(x).
    for (const x of [0.05, 0.3, 0.5, 0.8, 0.99]) {
      expect(incompleteBeta(x, 2, 3)).toBeCloseTo(x * x * (6 - 8 * x + 3 * x * x), 12);
      expect(incompleteBeta(x, 0.5, 0.5)).toBeCloseTo((2 / Math.PI) * Math.asin(Math.sqrt(x)), 12);
    }
  });
});

describe('share of k below the cut-off', () => {
  it.each(published)('at L / Delta = %d', (ratio, onL11, pope, onL) => {
    expect(Math.abs(vonKarmanShare(Math.PI * ratio) - onL11)).toBeLessThan(6e-4);
    expect(Math.abs(resolvedShare(shareModel('pope'), Math.PI * ratio) - pope)).toBeLessThan(1.1e-3);
    expect(Math.abs(resolvedShare(shareModel('von-karman-pao'), Math.PI * ratio) - onL)).toBeLessThan(1.1e-3);
  });

  it('needs L / Delta of 12 for 80 % and 34 for 90 %', () => {
    expect(waveForShare(shareModel(), 0.8) / Math.PI).toBeCloseTo(11.97, 1);
    expect(Math.abs(waveForShare(shareModel('pope'), 0.9) / Math.PI - 34)).toBeLessThan(0.3);
  });

  it('inverts itself with and without a viscous end', () => {
    for (const spectrum of ['von-karman-pao', 'pope'] as const) {
      const model = shareModel(spectrum);
      for (const reach of [20, 150, 3000, Number.POSITIVE_INFINITY]) {
        for (const share of [0.1, 0.5, 0.8, 0.95]) {
          expect(resolvedShare(model, waveForShare(model, share, reach), reach)).toBeCloseTo(share, 9);
        }
      }
    }
  });

  it('takes the length of the grid turbulence of Comte-Bellot & Corrsin (1971) from its dissipation', () => {
    // tU0/M = 42: u' = 0.222 m/s, epsilon = 0.474 m2/s3, nu = 1.5e-5 m2/s (their table 4).
    const k = 1.5 * 0.222 ** 2;
    const length = k ** 1.5 / 0.474;
    const eta = (1.5e-5 ** 3 / 0.474) ** 0.25;
    expect(Math.abs(longitudinalLengthRatio(shareModel(), length / eta) - 0.5)).toBeLessThan(0.03);
    expect(longitudinalLengthRatio(shareModel(), 1e5)).toBeCloseTo(0.39, 1);
  });

  it('reaches 1 at the Kolmogorov length where the viscosity is known', () => {
    for (const reach of [100, 1000]) {
      expect(resolvedShare(shareModel(), Math.PI * reach, reach)).toBeGreaterThan(0.9999);
      expect(resolvedShare(shareModel('pope'), Math.PI * reach, reach)).toBeGreaterThan(0.9999);
      expect(resolvedShare(shareModel(), Math.PI * reach)).toBeLessThan(0.999);
    }
  });
});
