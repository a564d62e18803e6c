import FFT from 'fft.js';
import { describe, expect, it } from 'vitest';
import { lengthCurve, lengthRatioAt } from '../../src/turbulence/length.js';
import { prepareFluctuations } from '../../src/turbulence/prepare.js';
import { integrate } from '../../src/turbulence/quadrature.js';
import { localScales } from '../../src/turbulence/scales.js';
import { pope, type Spectrum, spectralEnergy, tabulatedSpectrum, vonKarmanPao } from '../../src/turbulence/spectra.js';
import { brickMesh, synthesise } from '../turbulence/fields.js';

// Comte-Bellot & Corrsin 1971, J. Fluid Mech. 48:273-337, table 3 (station t U0 / M = 42): kappa 1/cm, E cm3/s2;
// table 4: u', epsilon. nu = 0.15 cm2/s (from memory). Rows below kappa = 0.2 are blank in the table.
const waves = [0.2, 0.25, 0.3, 0.4, 0.5, 0.7, 1, 1.5, 2, 2.5, 3, 4, 6, 8, 10, 12.5, 15, 17.5, 20];
const energies = [129, 230, 322, 435, 457, 380, 270, 168, 120, 89, 70.3, 47, 24.7, 12.6, 7.42, 3.96, 2.33, 1.34, 0.8];
const station = { u: 22.2, epsilon: 4740, nu: 0.15, length: 2.4 };
const k = 1.5 * station.u ** 2;
/** Usual simulation box: 9 x 2 pi cm. */
const boxLength = 9 * 2 * Math.PI;

describe('Comte-Bellot & Corrsin 1971: the model spectrum from k, epsilon and nu alone', () => {
  const reynolds = k ** 2 / (station.epsilon * station.nu);
  const eta = (station.nu ** 3 / station.epsilon) ** 0.25;
  const errorOf = (spectrum: Spectrum, ratio: number): number => {
    const wave = spectrum.waveTimesLength / ((ratio * k ** 1.5) / station.epsilon);
    let square = 0;
    let rows = 0;
    for (let i = 0; i < waves.length; i++) {
      if (waves[i]! > (32 * 2 * Math.PI) / boxLength) continue;
      square += Math.log10(spectralEnergy(spectrum, k, wave, eta, waves[i]!) / energies[i]!) ** 2;
      rows++;
    }
    return Math.sqrt(square / rows);
  };
  it('has L11 / L = 0.50 by dissipation consistency (measured 0.57)', () => {
    expect(lengthRatioAt(lengthCurve(vonKarmanPao), reynolds)).toBeCloseTo(0.5, 1);
  });
  it('lies within 0.06 rms of log10 E of the table up to pi / Delta of a 64^3 box, the usual 0.43 L does not', () => {
    expect(errorOf(vonKarmanPao, lengthRatioAt(lengthCurve(vonKarmanPao), reynolds))).toBeLessThan(0.06);
    expect(errorOf(vonKarmanPao, 0.43)).toBeGreaterThan(0.06);
  });
  it("stays within 0.12 with Pope's spectrum", () => {
    expect(errorOf(pope, lengthRatioAt(lengthCurve(pope), reynolds))).toBeLessThan(0.12);
  });
});

/** Energy in bins of one lattice unit about whole wave numbers, from the Fourier transform of cell values. */
function binnedEnergy(velocity: Float64Array, n: number): Float64Array {
  const fft = new FFT(n);
  const bins = new Float64Array(n);
  const size = n ** 3;
  for (let a = 0; a < 3; a++) {
    let data = new Float64Array(2 * size);
    for (let i = 0; i < size; i++) data[2 * i] = velocity[3 * i + a]!;
    const line = fft.createComplexArray() as number[];
    const out = fft.createComplexArray() as number[];
    for (let axis = 0; axis < 3; axis++) {
      const next = new Float64Array(2 * size);
      const stride = n ** axis;
      for (let start = 0; start < size; start++) {
        if (Math.floor(start / stride) % n !== 0) continue;
        for (let i = 0; i < n; i++) {
          line[2 * i] = data[2 * (start + i * stride)]!;
          line[2 * i + 1] = data[2 * (start + i * stride) + 1]!;
        }
        fft.transform(out, line);
        for (let i = 0; i < 2 * n; i++) next[2 * (start + (i >> 1) * stride) + (i & 1)] = out[i]!;
      }
      data = next;
    }
    const signed = (m: number): number => (m < n / 2 ? m : m - n);
    for (let i = 0; i < size; i++) {
      const m = Math.hypot(signed(i % n), signed(Math.floor(i / n) % n), signed(Math.floor(i / (n * n))));
      const bin = Math.round(m);
      if (bin < n) bins[bin]! += (0.5 * (data[2 * i]! ** 2 + data[2 * i + 1]! ** 2)) / size ** 2;
    }
  }
  return bins;
}

describe('Comte-Bellot & Corrsin 1971: the table laid into a periodic box (32^3, two seeds)', () => {
  it("recovers E(kappa) within 10 % a shell and u' within 2 %", () => {
    const n = 32;
    const box = brickMesh([n, n, n], ['x', 'y', 'z'], { lengths: [boxLength, boxLength, boxLength] });
    const spectrum = tabulatedSpectrum(waves, energies);
    const raw = (x: number): number => spectrum.large(x);
    const scales = localScales({ cells: box.mesh.cellCount, k }, { spectrum, subgrid: 'model', wallLengthFactor: 1.5 });
    const bins = new Float64Array(n);
    const seeds = 2;
    let wanted = 0;
    for (let seed = 1; seed <= seeds; seed++) {
      const plan = prepareFluctuations({
        ...box,
        scales,
        options: { seed, shells: 40, directions: 16, wavelengthCells: 2, spectrum, grade: 'potential' },
      });
      const { velocity } = synthesise(plan);
      wanted = plan.wanted[0]!;
      binnedEnergy(velocity, n).forEach((e, i) => {
        bins[i]! += e / seeds;
      });
    }
    const unit = (2 * Math.PI) / boxLength;
    let total = 0;
    for (let bin = 0; bin < n; bin++) total += bins[bin]!;
    // The cut-off takes the last tenth of the waves; energy above it is kept on those below.
    const kept =
      wanted / (k * integrate((l) => Math.exp(l) * raw(Math.exp(l)), -8, Math.log(unit * (n / 2 - 0.5)), 60));
    for (let bin = 1; bin < n / 2 - 1; bin++) {
      const low = bin === 1 ? -8 : Math.log((bin - 0.5) * unit);
      const share = integrate((l) => Math.exp(l) * raw(Math.exp(l)), low, Math.log((bin + 0.5) * unit), 8);
      expect(Math.abs(bins[bin]! / (k * share * kept) - 1)).toBeLessThan(0.1);
    }
    expect(Math.abs(Math.sqrt(total / wanted) - 1)).toBeLessThan(0.02);
  });
});
