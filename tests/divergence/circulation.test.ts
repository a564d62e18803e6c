import { describe, expect, it } from 'vitest';
import { circulationFluxes, netFluxes, type PotentialOnEdges } from '../../src/divergence/circulation.js';
import { findEdges } from '../../src/divergence/edges.js';
import { hexBox, refinedBox } from '../helpers/meshes.js';
import { kinds, open } from './meshes.js';

const turn = 2 * Math.PI;

function pointwise(a: (x: number, y: number, z: number) => readonly [number, number, number]): PotentialOnEdges {
  return ({ points }, out) => {
    for (let i = 0; i < points.length; i += 3) out.set(a(points[i]!, points[i + 1]!, points[i + 2]!), i);
  };
}

const rms = (values: Float64Array): number => Math.sqrt(values.reduce((s, v) => s + v * v, 0) / values.length);

// Period 1 along every axis.
const waves = pointwise((x, y, z) => [
  Math.sin(turn * (y + 2 * z)) + 0.3 * Math.cos(turn * (x - y)),
  Math.cos(turn * (x + z)) - 0.5 * Math.sin(turn * 2 * z),
  Math.sin(turn * (x + y + z)) + Math.cos(turn * (2 * x - y)),
]);

const meshes = [
  ...kinds.map(([name, make]) => [name, make] as const),
  ['hexahedra refined in part, hanging nodes', () => open(refinedBox(4, 4, 4))] as const,
];

describe.each(meshes)('%s', (_, make) => {
  const opened = make();
  const { mesh, geometry, periodic } = opened;

  it('has the edges of a ball: points - edges + faces - cells = 1 (Euler and Poincare)', () => {
    const used = new Set(mesh.facePoints).size;
    expect(used - findEdges(mesh).count + mesh.faceCount - mesh.cellCount).toBe(1);
  });

  it('sums to zero over every closed cell', () => {
    const fluxes = circulationFluxes(mesh, waves);
    expect(rms(fluxes)).toBeGreaterThan(1e-4);
    for (const net of netFluxes(mesh, fluxes)) expect(Math.abs(net)).toBeLessThan(1e-12 * rms(fluxes));
  });

  it('is the exact flux of a uniform field, warped faces included: A = w x r / 2', () => {
    const w = [0.7, -1.1, 2] as const;
    const fluxes = circulationFluxes(
      mesh,
      pointwise((x, y, z) => [(w[1] * z - w[2] * y) / 2, (w[2] * x - w[0] * z) / 2, (w[0] * y - w[1] * x) / 2]),
    );
    fluxes.forEach((flux, f) => {
      const s = geometry.faceAreas.subarray(3 * f, 3 * f + 3);
      expect(Math.abs(flux - (w[0] * s[0]! + w[1] * s[1]! + w[2] * s[2]!))).toBeLessThan(1e-14);
    });
  });

  it.skipIf(periodic === undefined)('is the same on both faces of a period', () => {
    const fluxes = circulationFluxes(mesh, waves);
    periodic!.lowFaces.forEach((low, i) => {
      // Both are outward.
      expect(Math.abs(fluxes[low]! + fluxes[periodic!.highFaces[i]!]!)).toBeLessThan(1e-13 * rms(fluxes) + 1e-16);
    });
  });
});

describe('accuracy', () => {
  it('is of fourth order: fluxes in closed form through faces normal to x, A = (0, 0, sin x sin y cos z)', () => {
    const error = (n: number): number => {
      const { mesh, geometry } = open(hexBox(n, n, n));
      const a = (x: number, y: number): number => Math.sin(turn * x) * Math.sin(turn * y + 0.3);
      // The potential depends on z besides, so that the quadrature has work to do.
      const fluxes = circulationFluxes(
        mesh,
        pointwise((x, y, z) => [0, 0, a(x, y) * Math.cos(turn * z)]),
      );
      let squares = 0;
      let area = 0;
      for (let f = 0; f < mesh.faceCount; f++) {
        if (Math.abs(geometry.faceAreas[3 * f]!) < 1e-12) continue;
        const [x, y, z] = geometry.faceCentroids.subarray(3 * f, 3 * f + 3) as unknown as [number, number, number];
        const h = 1 / n;
        const along = (Math.sin(turn * (z + h / 2)) - Math.sin(turn * (z - h / 2))) / turn;
        const exact = (a(x, y + h / 2) - a(x, y - h / 2)) * along * Math.sign(geometry.faceAreas[3 * f]!);
        squares += ((fluxes[f]! - exact) / h ** 2) ** 2;
        area++;
      }
      return Math.sqrt(squares / area);
    };
    const ratio = error(8) / error(16);
    expect(ratio).toBeGreaterThan(14);
    expect(ratio).toBeLessThan(18);
  });

  it('finds 3 n (n + 1)^2 edges in n^3 bricks', () => {
    expect(findEdges(open(hexBox(5, 5, 5)).mesh).count).toBe(3 * 5 * 36);
  });
});
