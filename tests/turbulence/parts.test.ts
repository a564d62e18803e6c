import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/basis/random.js';
import { createModes } from '../../src/turbulence/modes.js';
import { multipliersOf, polarisationTable, polarisationWeights } from '../../src/turbulence/polarisation.js';
import { localScales, type ScaleInput } from '../../src/turbulence/scales.js';
import { vonKarmanPao } from '../../src/turbulence/spectra.js';
import { eddyViscosityCovariance, energyOfCovariance } from '../../src/turbulence/stress.js';
import { composeSymmetric, eigenSymmetric, extremeEigenvalues } from '../../src/turbulence/symmetric.js';
import { wallRamp, zoneWeight } from '../../src/turbulence/zones.js';

const options = { spectrum: vonKarmanPao, subgrid: 'model', wallLengthFactor: 1.5 } as const;
const scalesOf = (input: Omit<ScaleInput, 'cells'>) => localScales({ cells: 2, ...input }, options);

describe('scales from pairs', () => {
  const epsilon = 0.09 * 2 * 5;
  it.each([
    ['k and epsilon', { k: 2, epsilon }],
    ['k and omega of two-equation models', { k: 2, omega: 5 }],
    ['k and omega as epsilon / k', { k: 2, omega: 0.45, omegaMeans: 'epsilon-over-k' }],
    ['k and nu_t', { k: 2, eddyViscosity: 0.4 }],
    ['intensity and epsilon', { intensity: 0.1, speed: Math.sqrt(2 / 1.5) * 10, epsilon }],
  ] as const)('%s', (_, input) => {
    const s = scalesOf(input);
    expect(s.k[0]).toBeCloseTo(2, 12);
    expect(s.epsilon[0]).toBeCloseTo(epsilon, 12);
    expect(s.length[0]).toBeCloseTo(2 ** 1.5 / epsilon, 12);
    expect(s.integralScale[0]! / s.length[0]!).toBeCloseTo(0.3875, 2);
  });
  it('takes a length as L11', () => {
    expect(scalesOf({ k: 1, integralScale: 0.02 }).integralScale[1]).toBe(0.02);
  });
  it.each([
    ['no k', {}, /no k.*--intensity/],
    ['no length', { k: 1 }, /k with one of these three.*--length/],
    ['intensity without velocity', { intensity: 0.1, epsilon: 1 }, /VelocityX/],
    ['not a number', { k: Float64Array.of(1, Number.NaN), epsilon: 1 }, /cell 1 holds NaN/],
    ['omega that does not fit nu_t', { k: 1, omega: 5, eddyViscosity: 0.09 / 5 }, /omega: epsilon-over-k/],
    ['negative epsilon', { k: 1, epsilon: -1 }, /dissipation of -1/],
  ] as const)('refuses: %s', (_, input, message) => {
    expect(() => scalesOf(input)).toThrow(message);
  });
  it('keeps eddies smaller than the wall distance allows', () => {
    const wallDistance = Float64Array.of(0.01, 100);
    const s = scalesOf({ k: 1, epsilon: 1, wallDistance });
    expect(s.integralScale[0]).toBeCloseTo(1.5 * 0.01 * 0.3875, 3);
    expect(s.integralScale[1]! / 0.3875).toBeCloseTo(1, 2);
    expect(s.counts.limitedByWall).toBe(1);
  });
});

describe('tensors', () => {
  it('takes tensors apart and puts them together', () => {
    const t = Float64Array.of(1.2, -0.3, 0.2, 0.7, 0.1, 0.4);
    const values = new Float64Array(3);
    const vectors = new Float64Array(9);
    eigenSymmetric(t, 0, values, vectors);
    const back = new Float64Array(6);
    composeSymmetric(values, vectors, back, 0);
    for (let c = 0; c < 6; c++) expect(back[c]).toBeCloseTo(t[c]!, 12);
    const ends = new Float64Array(2);
    extremeEigenvalues(t, 0, ends);
    expect(ends[0]).toBeCloseTo(Math.min(...values), 12);
    expect(ends[1]).toBeCloseTo(Math.max(...values), 12);
  });
  it('closes with an eddy viscosity: pure shear', () => {
    // nu_t = 0.09 k^2 / eps = 0.09, dU/dy = 2: uv = -0.18, normal stresses 2 k / 3.
    const g = Float64Array.of(0, 2, 0, 0, 0, 0, 0, 0, 0);
    const c = eddyViscosityCovariance(Float64Array.of(1), Float64Array.of(1), g);
    expect(Array.from(c)).toEqual([2 / 3, -0.18, 0, 2 / 3, 0, 2 / 3].map((v) => expect.closeTo(v, 12)));
    expect(energyOfCovariance(c)[0]).toBeCloseTo(1, 12);
  });
});

describe('polarisation', () => {
  const n = 4000;
  const random = randomStream(1, 'polarisation-test');
  const directions = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) {
    // Even spiral on the sphere.
    const z = 1 - (2 * (i + 0.5)) / n;
    const phi = i * Math.PI * (3 - Math.sqrt(5)) + 0 * random();
    directions.set([Math.sqrt(1 - z * z) * Math.cos(phi), Math.sqrt(1 - z * z) * Math.sin(phi), z], 3 * i);
  }
  const shares = new Float64Array(n).fill(1 / n);
  it.each([
    ['isotropic', [1 / 3, 0, 0, 1 / 3, 0, 1 / 3]],
    ['near-wall channel', [0.7, -0.12, 0, 0.08, 0, 0.22]],
    ['nearly one component', [0.8, 0, 0, 0.02, 0, 0.18]],
  ] as const)('reaches a wanted tensor by Newton: %s', (_, wanted) => {
    const found = polarisationWeights(directions, shares, wanted);
    expect(found?.error).toBeLessThan(1e-10);
    const moment = new Float64Array(6);
    for (let i = 0; i < n; i++) {
      let c = 0;
      for (let p = 0; p < 3; p++)
        for (let q = p; q < 3; q++)
          moment[c++]! += (found!.weights[i]! * directions[3 * i + p]! * directions[3 * i + q]!) / n;
    }
    for (let c = 0; c < 6; c++) expect(moment[c]).toBeCloseTo(wanted[c]!, 8);
  });
  it.each([
    [0.34, 0.33, 0.33],
    [0.6, 0.3, 0.1],
    [0.1, 0.2, 0.7],
    [0.05, 0.9, 0.05],
    [0.02, 0.49, 0.49],
  ])('has a table that agrees with Newton on the sphere: %d %d %d', (a, b, c) => {
    const out = new Float64Array(3);
    multipliersOf(polarisationTable(), Float64Array.of(a, b, c), out);
    const moment = [0, 0, 0];
    let z = 0;
    for (let i = 0; i < n; i++) {
      const s = [0, 1, 2].map((k) => directions[3 * i + k]! ** 2);
      const w = Math.exp(out[0]! * s[0]! + out[1]! * s[1]! + out[2]! * s[2]!);
      z += w;
      for (let k = 0; k < 3; k++) moment[k]! += w * s[k]!;
    }
    [a, b, c].forEach((wanted, k) => {
      expect(Math.abs(moment[k]! / z - wanted)).toBeLessThan(0.002);
    });
  });
  it('finds no weights for what no velocity has', () => {
    expect(polarisationWeights(directions, shares, [1.2, 0, 0, -0.4, 0, 0.2])).toBeUndefined();
  });
});

describe('modes', () => {
  it.each([
    [0, 16],
    [1, 16],
    [2, 16],
    [2, 9],
    [3, 12],
  ])('are isotropic in every shell and on the lattice, %d periods, %d directions', (count, directions) => {
    const periods = (
      [
        [6, 0, 0],
        [0, 0, 3],
        [0, 4, 0],
      ] as const
    ).slice(0, count);
    const m = createModes({ seed: 9, shells: 20, directions, minimum: count === 2 ? 1.05 : 0.6, maximum: 60, periods });
    // Two periods: waves barely longer than the box all run along its long side, no weights make these isotropic.
    const free = count === 2 ? 3.2 : 0;
    expect(m.anisotropicShells).toBeLessThanOrEqual(m.waves.filter((w) => w < free).length);
    for (let s = 0; s < m.shells; s++) {
      const moment = new Float64Array(6);
      for (let d = 0; d < directions; d++) {
        const n = s * directions + d;
        const k = m.waveVectors.subarray(3 * n, 3 * n + 3);
        const a = m.polarisations.subarray(3 * n, 3 * n + 3);
        expect(Math.abs(k[0]! * a[0]! + k[1]! * a[1]! + k[2]! * a[2]!)).toBeLessThan(1e-12 * Math.hypot(...k));
        expect(Math.hypot(...k)).toBeGreaterThanOrEqual(m.edges[s]! * 0.999999);
        expect(Math.hypot(...k)).toBeLessThanOrEqual(m.edges[s + 1]! * 1.000001);
        for (const p of periods) {
          const turns = (k[0]! * p[0] + k[1]! * p[1] + k[2]! * p[2]) / (2 * Math.PI);
          expect(Math.abs(turns - Math.round(turns))).toBeLessThan(1e-9);
        }
        let c = 0;
        for (let p = 0; p < 3; p++)
          for (let q = p; q < 3; q++) moment[c++]! += (m.shares[n]! * a[p]! * a[q]!) / directions;
      }
      if (m.waves[s]! < free) continue;
      [1 / 3, 0, 0, 1 / 3, 0, 1 / 3].forEach((wanted, c) => {
        expect(moment[c]).toBeCloseTo(wanted, 9);
      });
    }
  });
  it('refuses nonsense', () => {
    expect(() => createModes({ seed: 1, shells: 0, directions: 16, minimum: 1, maximum: 2, periods: [] })).toThrow(
      /shells/,
    );
    const skew = [
      [1, 0, 0],
      [1, 1, 0],
    ] as const;
    expect(() => createModes({ seed: 1, shells: 4, directions: 9, minimum: 1, maximum: 2, periods: skew })).toThrow(
      /perpendicular/,
    );
  });
});

describe('zones', () => {
  const centres = Float64Array.of(0, 0, 0, 1.1, 0, 0, 3, 0, 0);
  it.each([
    ['box', { kind: 'box', low: [-1, -1, -1], high: [1, 1, 1], fade: 0.2 }],
    ['sphere', { kind: 'sphere', centre: [0, 0, 0], radius: 1, fade: 0.2 }],
    ['cylinder', { kind: 'cylinder', from: [0, 0, -1], to: [0, 0, 1], radius: 1, fade: 0.2 }],
    ['near', { kind: 'near', distance: Float64Array.of(0, 1.1, 3), within: 1, fade: 0.2 }],
    ['far', { kind: 'far', distance: Float64Array.of(2, 0.9, 0), beyond: 1, fade: 0.2 }],
    ['exceeds', { kind: 'exceeds', values: Float64Array.of(5, 3.9, 0), above: 4, fade: 0.2 }],
  ] as const)('fade smoothly: %s', (_, zone) => {
    const w = zoneWeight([zone], centres);
    expect(w[0]).toBe(1);
    expect(w[1]).toBeCloseTo(0.5, 9);
    expect(w[2]).toBe(0);
  });
  it('refuse to seed nothing', () => {
    expect(() => zoneWeight([{ kind: 'sphere', centre: [9, 9, 9], radius: 1, fade: 0 }], centres)).toThrow(/no cell/);
  });
  it('ramp to zero at a wall', () => {
    const r = wallRamp(Float64Array.of(0, 0.5, 2), Float64Array.of(1, 1, 1));
    expect(r[0]).toBe(0);
    expect(r[1]).toBeCloseTo(15 / 16 - 10 / 64 + 3 / 256, 12);
    expect(r[2]).toBe(1);
  });
});
