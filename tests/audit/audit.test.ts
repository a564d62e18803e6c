import { describe, expect, it } from 'vitest';
import { auditField, courantRates } from '../../src/audit/audit.js';
import { divergenceFigures, scaledDivergence } from '../../src/audit/divergence-figures.js';
import { buildMesh } from '../../src/mesh/build.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { type BoxOptions, hexBox } from '../helpers/meshes.js';

const turn = 2 * Math.PI;
const same = (s: number): number => s;
const noDivergence = { scaledRms: 0, scaledP99: 0, scaledMax: 0, where: [0, 0, 0] as const };

function box(counts: readonly [number, number, number], options: BoxOptions) {
  const mesh = buildMesh(hexBox(...counts, options));
  return { mesh, geometry: measureMesh(mesh) };
}

function sample(centroids: Float64Array, u: (x: number, y: number, z: number) => readonly number[]): Float64Array {
  const out = new Float64Array(centroids.length);
  for (let i = 0; i < out.length; i += 3) out.set(u(centroids[i]!, centroids[i + 1]!, centroids[i + 2]!), i);
  return out;
}

describe('moments of fields in closed form', () => {
  const { mesh, geometry } = box([10, 12, 14], { lengths: [turn, turn, turn] });
  const audit = (u: (x: number, y: number, z: number) => readonly number[], mean = 0) => {
    const fluctuation = sample(geometry.cellCentroids, u);
    return auditField({
      mesh,
      geometry,
      velocity: fluctuation.map((v, i) => v + (i % 3 === 0 ? mean : 0)),
      ...(mean === 0 ? { fluctuation } : {}),
      divergenceAfter: noDivergence,
    });
  };

  it('Taylor-Green vortices: k = 1/8, covariances 1/8 1/8 0, skewness 0, flatness (3/8)^3 64', () => {
    const figures = audit((x, y, z) => [
      Math.sin(x) * Math.cos(y) * Math.cos(z),
      -Math.cos(x) * Math.sin(y) * Math.cos(z),
      0,
    ]);
    expect(figures.volume).toBeCloseTo(turn ** 3, 9);
    expect(figures.energy.recovered).toBeCloseTo(1 / 8, 12);
    [1 / 8, 0, 0, 1 / 8, 0, 0].forEach((v, i) => {
      expect(figures.covariance[i]).toBeCloseTo(v, 12);
    });
    expect(figures.skewness[0]).toBeCloseTo(0, 12);
    expect(figures.flatness[0]).toBeCloseTo(3.375, 12);
    expect(figures.flatness[2]).toBe(0);
    expect(figures.fluctuationRms).toBeCloseTo(Math.sqrt(1 / 12), 12);
  });

  it('a sine has skewness 0 and flatness 1.5; the volume mean is not part of the fluctuation', () => {
    const figures = audit((_x, _y, z) => [Math.sin(z), 2 * Math.sin(z + 0.3), Math.sin(z) + Math.cos(2 * z)], 7);
    expect(figures.covariance[0]).toBeCloseTo(0.5, 12);
    expect(figures.covariance[1]).toBeCloseTo(Math.cos(0.3), 12);
    expect(figures.skewness[0]).toBeCloseTo(0, 11);
    expect(figures.flatness[0]).toBeCloseTo(1.5, 11);
    expect(figures.flatness[1]).toBeCloseTo(1.5, 11);
    // <(sin z + cos 2z)^3> = 3 <sin^2 cos 2z> = -3/4; the variance is 1.
    expect(figures.skewness[2]).toBeCloseTo(-0.75, 11);
    expect(figures.velocityMax).toBeGreaterThan(7.9);
  });

  it('on a stretched mesh moments are weighted by volume: u = y in [0, 1] has mean square 1/3', () => {
    const bent = box([2, 40, 2], { stretch: [same, (s) => s * s, same] });
    const velocity = sample(bent.geometry.cellCentroids, (_x, y) => [y, 0, 0]);
    const figures = auditField({ ...bent, velocity, fluctuation: velocity, divergenceAfter: noDivergence });
    // The midpoint rule errs by the mean of h^2 / 12.
    expect(Math.abs(figures.covariance[0] - 1 / 3)).toBeLessThan(0.05 ** 2 / 12);
    expect(Math.abs(figures.covariance[0] - 1 / 3)).toBeGreaterThan(1e-7);
  });
});

describe('Courant numbers', () => {
  const { mesh, geometry } = box([4, 5, 6], { lengths: [2, 1, 3] });
  const [dx, dy, dz] = [0.5, 0.2, 0.5];
  const velocity = sample(geometry.cellCentroids, () => [3, -1.5, 0.25]);
  const rate = 3 / dx + 1.5 / dy + 0.25 / dz;

  it('of a brick are dt (|u|/dx + |v|/dy + |w|/dz)', () => {
    for (const found of courantRates(mesh, geometry, velocity)) expect(found).toBeCloseTo(rate, 12);
    const figures = auditField({ mesh, geometry, velocity, divergenceAfter: noDivergence, timeStep: 0.02 });
    expect(figures.timeStepForCourantOne).toBeCloseTo(1 / rate, 12);
    for (const found of [figures.courant?.mean, figures.courant?.p99, figures.courant?.max]) {
      expect(found).toBeCloseTo(0.02 * rate, 12);
    }
    expect(figures.velocityMax).toBeCloseTo(Math.hypot(3, 1.5, 0.25), 12);
    // Less its mean, a uniform flow fluctuates not at all.
    expect(figures.energy.recovered).toBeLessThan(1e-25);
  });
});

describe('flux through boundaries', () => {
  it('is area times velocity, outward, and its balance is the divergence inside', () => {
    const named = box([4, 4, 4], {
      lengths: [1, 2, 3],
      name: (x) => (x < 1e-9 ? 'in' : x > 1 - 1e-9 ? 'out' : undefined),
    });
    const velocity = sample(named.geometry.cellCentroids, (x) => [1 + x, 0, 0]);
    const { boundaries } = auditField({ ...named, velocity, fluctuation: velocity, divergenceAfter: noDivergence });
    const of = (name: string) => boundaries.find((b) => b.name === name)!;
    expect(of('in').area).toBeCloseTo(6, 12);
    expect(of('in').netFlux).toBeCloseTo(-6 * 1.125, 12);
    expect(of('out').netFlux).toBeCloseTo(6 * 1.875, 12);
  });
});

describe('energies and places', () => {
  it('are volume means and counts of what is handed over', () => {
    const { mesh, geometry } = box([2, 1, 1], { stretch: [(s) => s * s, same, same] });
    const figures = auditField({
      mesh,
      geometry,
      velocity: new Float64Array(6),
      wanted: Float64Array.of(4, 8),
      resolvable: Float64Array.of(1, 5),
      modelled: Float64Array.of(3, 3),
      outside: Uint8Array.of(0, 2),
      divergenceAfter: noDivergence,
      projectionLoss: 0.25,
    });
    // Volumes are 1/4 and 3/4.
    expect(figures.energy).toEqual({ wanted: 7, resolvable: 4, recovered: 0, modelled: 3 });
    expect(figures.outside).toEqual({ inside: 1, nearest: 0, extrapolated: 1, constant: 0 });
    expect(figures.timeStepForCourantOne).toBeNull();
    expect(figures.projectionLoss).toBe(0.25);
  });
});

describe('divergence figures', () => {
  it('of a known net flux: |div| CellWidth / u_rms, weighted by volume', () => {
    const n = 1000;
    const volumes = Float64Array.from({ length: n }, (_, c) => (c % 2 === 0 ? 1 : 8));
    // Scaled values 0.01, 0.02, ... 10: net = value V / CellWidth u_rms with u_rms 2.
    const net = volumes.map((v, c) => (((c % 3 === 0 ? -1 : 1) * (c + 1) * 0.01 * v) / Math.cbrt(v)) * 2);
    const centroids = Float64Array.from({ length: 3 * n }, (_, i) => i);
    scaledDivergence(net, volumes, 2).forEach((v, c) => {
      expect(v).toBeCloseTo((c + 1) * 0.01, 12);
    });
    const figures = divergenceFigures(net, volumes, centroids, 2);
    let sum = 0;
    let volume = 0;
    volumes.forEach((v, c) => {
      sum += v * ((c + 1) * 0.01) ** 2;
      volume += v;
    });
    expect(figures.scaledRms).toBeCloseTo(Math.sqrt(sum / volume), 12);
    expect(figures.scaledMax).toBeCloseTo(10, 12);
    expect(figures.where).toEqual([2997, 2998, 2999]);
    // One bin of the histogram is 16 / 4096 of a decade, 0.9 %.
    expect(Math.abs(figures.scaledP99 / 9.9 - 1)).toBeLessThan(0.012);
    expect(divergenceFigures(net, volumes, centroids, 0).scaledMax).toBe(0);
  });
});
