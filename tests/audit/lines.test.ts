import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import { lineFigures } from '../../src/audit/line-figures.js';
import { findLines } from '../../src/audit/lines.js';
import { zoneFigures } from '../../src/audit/zone-figures.js';
import { buildMesh } from '../../src/mesh/build.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { matchPeriodic } from '../../src/mesh/periodic.js';
import { type Axis, type BoxOptions, hexBox, tetBox } from '../helpers/meshes.js';

const turn = 2 * Math.PI;
const same = (s: number): number => s;

function box(counts: readonly [number, number, number], axes: readonly Axis[], options: BoxOptions = {}) {
  const mesh = buildMesh(hexBox(...counts, { periodic: axes, ...options }));
  const geometry = measureMesh(mesh);
  return { mesh, geometry, periodic: matchPeriodic(mesh, geometry, axes, 'test') };
}

function sample(centroids: Float64Array, u: (x: number, y: number, z: number) => readonly number[]): Float64Array {
  const out = new Float64Array(centroids.length);
  for (let i = 0; i < out.length; i += 3) out.set(u(centroids[i]!, centroids[i + 1]!, centroids[i + 2]!), i);
  return out;
}

describe('lines of cells', () => {
  it('run once through every cell of a wall-refined box, along both periods', () => {
    const { mesh, geometry, periodic } = box([12, 9, 10], ['x', 'z'], {
      lengths: [3, 2, 1],
      stretch: [same, (s) => s * s, same],
    });
    const x = findLines(mesh, geometry, periodic, 0)!;
    expect([x.samples, x.cells.length, x.spacing]).toEqual([12, 1080, 0.25]);
    expect(new Set(x.cells).size).toBe(1080);
    for (let i = 0; i + 1 < 12; i++) {
      const [a, b] = [x.cells[i]!, x.cells[i + 1]!];
      const step = geometry.cellCentroids[3 * b]! - geometry.cellCentroids[3 * a]!;
      expect(((step + 3) % 3) - 0.25).toBeCloseTo(0, 12);
    }
    const z = findLines(mesh, geometry, periodic, 1)!;
    expect([z.samples, z.direction[2]]).toEqual([10, 1]);
  });

  it('are not found where centres are unevenly spaced, out of line, or too few', () => {
    const stretched = box([12, 8, 8], ['x'], { stretch: [(s) => s + 0.1 * Math.sin(turn * s), same, same] });
    expect(findLines(stretched.mesh, stretched.geometry, stretched.periodic, 0)).toBeUndefined();
    const few = box([6, 8, 8], ['x']);
    expect(findLines(few.mesh, few.geometry, few.periodic, 0)).toBeUndefined();
    const mesh = buildMesh(tetBox(8, 8, 8, { periodic: ['x'] }));
    const geometry = measureMesh(mesh);
    expect(findLines(mesh, geometry, matchPeriodic(mesh, geometry, ['x'], 'test'), 0)).toBeUndefined();
    expect(lineFigures(few.mesh, few.geometry, few.periodic, new Float64Array(3 * 6 * 64))).toEqual([]);
  });
});

describe('spectra and correlation lengths', () => {
  const { mesh, geometry, periodic } = box([32, 4, 16], ['x', 'z'], { lengths: [turn, 1, 2 * turn] });

  it('of cosines: the variance stands at their wave number, the correlation is integrated to its first zero', () => {
    const u = sample(geometry.cellCentroids, (x, y, z) => [
      2 * Math.cos(3 * x),
      Math.cos(5 * x + y),
      Math.cos(5 * x) + Math.sin(z / 2),
    ]);
    const [x, z] = lineFigures(mesh, geometry, periodic, u);
    // One-sided, wave-number step 1 along x: variance 2 at 3; (1/2 + 1/2) / 2 at 5.
    x!.waveNumber.forEach((k, m) => {
      expect(k).toBeCloseTo(m + 1, 12);
      expect(x!.longitudinalSpectrum[m]).toBeCloseTo(m === 2 ? 2 : 0, 12);
      expect(x!.transverseSpectrum[m]).toBeCloseTo(m === 4 ? 0.5 : 0, 12);
    });
    expect(x!.waveNumber.at(-1)).toBeCloseTo(Math.PI / x!.spacing, 12);
    // Integral of cos 3r to pi / 6; the trapezoidal rule errs by (3 h)^2 / 12 of it at most.
    expect(Math.abs(x!.longitudinalLength! - 1 / 3)).toBeLessThan(((3 * x!.spacing) ** 2 / 12 / 3) * 1.5);
    // Step 1/2 along z: sin(z/2), of variance 1/2, is the first wave; the components across do not vary along z.
    expect(z!.longitudinalSpectrum[0]).toBeCloseTo(1, 12);
    expect(Math.max(...z!.transverseSpectrum)).toBeLessThan(1e-20);
  });

  it('of noise: the sum over wave numbers and the line means make up the variance (Parseval)', () => {
    const draw = seedrandom('noise');
    const u = Float64Array.from({ length: 3 * mesh.cellCount }, () => 2 * draw() - 1);
    const [x] = lineFigures(mesh, geometry, periodic, u);
    const lines = findLines(mesh, geometry, periodic, 0)!;
    let variance = 0;
    for (let first = 0; first < lines.cells.length; first += 32) {
      const values = Array.from(lines.cells.subarray(first, first + 32), (c) => u[3 * c]!);
      const mean = values.reduce((s, v) => s + v, 0) / 32;
      variance += values.reduce((s, v) => s + (v - mean) ** 2, 0) / lines.cells.length;
    }
    expect(x!.longitudinalSpectrum.reduce((s, v) => s + v, 0)).toBeCloseTo(variance, 12);
    expect(x!.lines).toBe(x!.linesFound);
  });

  it('of a spectrum whose correlation is exp(-r / L): the length is L', () => {
    // Random phases with power L / (1 + (k L)^2), the spectrum of the exponential correlation, over many lines.
    const long = box([128, 8, 8], ['x'], { lengths: [40, 1, 1] });
    const draw = seedrandom('phases');
    const L = 1.5;
    const u = new Float64Array(3 * long.mesh.cellCount);
    const lines = findLines(long.mesh, long.geometry, long.periodic, 0)!;
    for (let first = 0; first < lines.cells.length; first += 128) {
      for (let m = 0; m < 64; m++) {
        const k = (turn * m) / 40;
        const amplitude = Math.sqrt(((m === 0 ? 1 : 2) * L) / (1 + (k * L) ** 2));
        const phase = turn * draw();
        for (let i = 0; i < 128; i++) {
          u[3 * lines.cells[first + i]!]! += Math.SQRT2 * amplitude * Math.cos((turn * m * i) / 128 + phase);
        }
      }
    }
    const [x] = lineFigures(long.mesh, long.geometry, long.periodic, u);
    expect(Math.abs(x!.longitudinalLength! / L - 1)).toBeLessThan(0.1);
    expect(x!.transverseLength).toBeNull();
  });
});

describe('zones', () => {
  it('are measured each with its own cells and volumes', () => {
    const [first, second, none] = zoneFigures(
      { names: ['a', 'b', 'empty'], zoneOf: Int32Array.of(0, 0, 1, -1) },
      {
        volumes: Float64Array.of(1, 3, 2, 9),
        fluctuation: Float64Array.of(1, 0, 2, -1, 0, 0, 0, 3, 1, 9, 9, 9),
        resolvable: Float64Array.of(1, 2, 2.5, 9),
        scaledDivergence: Float64Array.of(2, 0, 0.5, 9),
      },
    );
    expect(none).toBeUndefined();
    expect(first).toEqual({
      name: 'a',
      cells: 2,
      volume: 4,
      energy: { wanted: null, resolvable: 1.75, recovered: 1, modelled: null },
      energyRatio: 1 / 1.75,
      covariance: [1, 0, 0.5, 0, 0, 1],
      scaledDivergence: 1,
    });
    expect(second!.energy.recovered).toBe(5);
    expect(second!.covariance).toEqual([0, 0, 0, 9, 3, 1]);
    expect(second!.energyRatio).toBe(2);
  });
});
