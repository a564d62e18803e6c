import { describe, expect, it } from 'vitest';
import { lengthCurve, lengthRatioAt, limitByWall, shearedLengthRatio } from '../../src/turbulence/length.js';
import { integrate } from '../../src/turbulence/quadrature.js';
import {
  pope,
  shapeIntegral,
  spectralEnergy,
  tabulatedSpectrum,
  vonKarmanAlpha,
  vonKarmanPao,
} from '../../src/turbulence/spectra.js';

/** Integral over all wave numbers in logarithms. */
const overWaves = (f: (x: number) => number, low = -9, high = 16): number =>
  integrate((l) => Math.exp(l) * f(Math.exp(l)), low, high, 80);

describe('von Karman (1948)', () => {
  it('has the constants of the closed form', () => {
    expect(vonKarmanAlpha).toBeCloseTo(1.452762112, 8);
    expect(vonKarmanPao.waveTimesLength).toBeCloseTo(0.7468342, 6);
    expect(vonKarmanPao.lengthRatio).toBeCloseTo(0.3875, 4);
  });
  it('holds the energy it is given, and L11', () => {
    const k = overWaves(vonKarmanPao.large);
    expect(k).toBeCloseTo(1, 4);
    // L11 = pi / (2 u'^2) int E / kappa, with k = 1 and kappa_e = 1.
    const length = ((3 * Math.PI) / 4) * overWaves((x) => vonKarmanPao.large(x) / x);
    expect(length).toBeCloseTo(vonKarmanPao.waveTimesLength, 5);
  });
  it('has one-dimensional spectra in the ratio 4/3 in the inertial range and equal total energy', () => {
    const e11 = (k1: number) =>
      integrate((l) => vonKarmanPao.large(Math.exp(l)) * (1 - k1 ** 2 * Math.exp(-2 * l)), Math.log(k1), 20, 60);
    const e22 = (k1: number) =>
      0.5 * integrate((l) => vonKarmanPao.large(Math.exp(l)) * (1 + k1 ** 2 * Math.exp(-2 * l)), Math.log(k1), 20, 60);
    expect(e22(300) / e11(300)).toBeCloseTo(4 / 3, 3);
    expect(e22(1e-4) / e11(1e-4)).toBeCloseTo(0.5, 4);
    expect(integrate((l) => Math.exp(l) * e11(Math.exp(l)), -14, 14, 60)).toBeCloseTo(2 / 3, 3);
  });
  it('follows the closed form of its one-dimensional spectrum', () => {
    // E11 = (2 u'^2 L11 / pi) (1 + (k1 / kappa_e)^2)^(-5/6), u'^2 = 2/3.
    const k1 = 2.3;
    const found = integrate(
      (l) => vonKarmanPao.large(Math.exp(l)) * (1 - k1 ** 2 * Math.exp(-2 * l)),
      Math.log(k1),
      20,
      60,
    );
    const closed = ((4 / 3) * vonKarmanPao.waveTimesLength) / Math.PI / (1 + k1 * k1) ** (5 / 6);
    expect(found).toBeCloseTo(closed, 5);
  });
});

describe('Pao (1965)', () => {
  it('dissipates what it transfers: 2 nu int kappa^2 E = eps for E = C eps^(2/3) kappa^(-5/3) exp(...)', () => {
    // nu = eps = 1, so eta = 1.
    const d = 2 * overWaves((y) => y ** 2 * 1.5 * y ** (-5 / 3) * Math.exp(vonKarmanPao.lnViscous(y)), -25, 5);
    expect(d).toBeCloseTo(1, 4);
  });
});

describe('Pope (2000), section 6.5', () => {
  it('has L11 / L = 0.43 at high Reynolds number', () => {
    expect(pope.lengthRatio).toBeCloseTo(0.43, 2);
  });
  it('rises at low Reynolds number: R_lambda 82 gives 0.57 with the rounded constants', () => {
    // R_lambda = sqrt(20 Re / 3), Re = k^2 / (eps nu).
    const ratio = lengthRatioAt(lengthCurve(pope), (3 / 20) * 82 ** 2);
    expect(ratio).toBeGreaterThan(0.47);
    expect(ratio).toBeLessThan(0.62);
  });
  it('peaks in dissipation at kappa eta = 0.26 for R_lambda = 600 (table 6.2)', () => {
    const re = (3 / 20) * 600 ** 2;
    const waveEta = re ** -0.75;
    let best = 0;
    let at = 0;
    for (let y = 0.05; y < 1; y += 0.001) {
      const d = y * y * pope.large(y / waveEta) * Math.exp(pope.lnViscous(y));
      if (d > best) {
        best = d;
        at = y;
      }
    }
    expect(at).toBeGreaterThan(0.25);
    expect(at).toBeLessThan(0.275);
  });
});

describe.each([vonKarmanPao, pope])('$name', (spectrum) => {
  it.each([1e-4, 0.01, 0.1])('keeps k with a viscous end at kappa_e eta = %d', (waveEta) => {
    const k = overWaves((x) => spectralEnergy(spectrum, 2, 1, waveEta, x), -8, Math.log(60 / waveEta));
    expect(k).toBeCloseTo(2, 3);
  });
  it('dissipates the local epsilon with the length found', () => {
    const curve = lengthCurve(spectrum);
    for (const reynolds of [30, 770, 2e4]) {
      const ratio = lengthRatioAt(curve, reynolds);
      // k = eps = 1: nu = 1 / Re, L = 1.
      const nu = 1 / reynolds;
      const eta = nu ** 0.75;
      const wave = spectrum.waveTimesLength / ratio;
      const d2 = shapeIntegral(spectrum, wave * eta, 2) / shapeIntegral(spectrum, wave * eta);
      expect(2 * nu * wave ** 2 * d2).toBeCloseTo(1, 2);
    }
  });
});

describe('length rules', () => {
  it('gives 0.39 without shear at high Reynolds number', () => {
    expect(lengthCurve(vonKarmanPao).limit).toBeCloseTo(0.3875, 2);
  });
  it('shortens by shear, never lengthens', () => {
    expect(shearedLengthRatio(0.39, 0, 'none')).toBeCloseTo(0.39, 12);
    expect(shearedLengthRatio(0.39, 3.3, 'none')).toBeCloseTo(0.26, 12);
    expect(shearedLengthRatio(0.39, 99, 'none')).toBeCloseTo(0.26, 12);
    expect(shearedLengthRatio(0.5, 3.3, 'model')).toBeCloseTo(0.39, 12);
    expect(shearedLengthRatio(0.3, 3.3, 'model')).toBeCloseTo(0.3, 12);
  });
  it('limits by the wall smoothly', () => {
    expect(limitByWall(1, 100)).toBeCloseTo(1, 10);
    expect(limitByWall(100, 1)).toBe(1);
    expect(limitByWall(8.001, 1)).toBeCloseTo(1, 6);
    expect(limitByWall(1, 0)).toBe(0);
  });
});

describe('table', () => {
  it('goes through its rows and refuses what is no spectrum', () => {
    const k = [1, 2, 4, 8, 16];
    const e = [3, 5, 4, 1, 0.2];
    const table = tabulatedSpectrum(k, e);
    for (let i = 1; i < 5; i++) expect(table.large(k[i]!) / table.large(1)).toBeCloseTo(e[i]! / 3, 10);
    expect(table.large(0.5) / table.large(1)).toBeCloseTo(0.25, 10);
    expect(() => tabulatedSpectrum([1, 2, 2, 3], [1, 1, 1, 1], 'a.csv')).toThrow(/a\.csv, spectrum row 3/);
    expect(() => tabulatedSpectrum([1, 2], [1, 1])).toThrow(/too short/);
  });
});
