import { spawnSync } from 'node:child_process';
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

const scipyThere = spawnSync('/usr/bin/python3', ['-c', 'import scipy.integrate']).status === 0;
if (!scipyThere) console.log('skipped: share of k against scipy (no scipy in /usr/bin/python3)');

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

  it.skipIf(!scipyThere)('agrees with adaptive quadrature of the dissipation-consistent spectrum by scipy', () => {
    const program = `
import json, numpy as np
from scipy.integrate import quad
from scipy.optimize import brentq
from scipy.special import gamma
peak = np.sqrt(np.pi) * gamma(5/6) / gamma(1/3)
def density(s, c, h, power):
    k = np.exp(s); x2 = (k * c / peak)**2
    return k**(1 + power) * x2**2 * (1 + x2)**(-17/6) * np.exp(-2.25 * (k * h)**(4/3))
def integral(c, h, power, end=12): return quad(density, -10, end, args=(c, h, power), limit=400)[0]
out = []
for reach, wave in [(20, 6), (89, 20), (146, 24), (2828, 20)]:
    h = 1 / reach
    c = brentq(lambda c: 2 * h**(4/3) * integral(c, h, 2) / integral(c, h, 0) - 1, 0.3, 2)
    out.append([reach, wave, c, integral(c, h, 0, np.log(wave)) / integral(c, h, 0)])
print(json.dumps(out))`;
    const run = spawnSync('/usr/bin/python3', ['-c', program], { encoding: 'utf8' });
    for (const [reach, wave, ratio, share] of JSON.parse(run.stdout) as [number, number, number, number][]) {
      expect(Math.abs(longitudinalLengthRatio(shareModel(), reach) - ratio)).toBeLessThan(0.01);
      expect(Math.abs(resolvedShare(shareModel(), wave, reach) - share)).toBeLessThan(2e-3);
    }
  });

  it('predicts the share that the measured spectrum of Comte-Bellot & Corrsin (1971) holds', () => {
    // Table 3 at tU0/M = 42, integrated by log splines with a k^2 tail: share below 1, 2, 4, 8 1/cm.
    const k = 1.5 * 22.2 ** 2;
    const length = k ** 1.5 / 4740;
    const eta = (0.15 ** 3 / 4740) ** 0.25;
    for (const [wave, share] of [
      [1, 0.383],
      [2, 0.611],
      [4, 0.803],
      [8, 0.938],
    ] as const) {
      expect(Math.abs(resolvedShare(shareModel(), wave * length, length / eta) - share)).toBeLessThan(0.045);
    }
  });
});
