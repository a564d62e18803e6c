import { describe, expect, it } from 'vitest';
import type { Dataset } from '../../src/basis/dataset.js';
import {
  circulationFluxes,
  faceKeyColumns,
  faceKeys,
  netFaceFluxes,
  type PotentialAt,
} from '../../src/divergence/circulation.js';
import { meshEdges, periodicEdgeClasses } from '../../src/divergence/edges.js';
import { buildMesh } from '../../src/mesh/build.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { matchPeriodic } from '../../src/mesh/periodic.js';
import { type Axis, bendChannel, hexBox, mixedBox, polyBox, prismBox, refinedBox, tetBox } from '../helpers/meshes.js';

function open(dataset: Dataset, axes: readonly Axis[] = []) {
  const mesh = buildMesh(dataset);
  const geometry = measureMesh(mesh);
  return { mesh, geometry, periodic: axes.length === 0 ? undefined : matchPeriodic(mesh, geometry, axes) };
}

const warp = { warp: 0.2, seed: 'warped' };
const kinds: readonly (readonly [string, () => ReturnType<typeof open>])[] = [
  ['bricks', () => open(hexBox(7, 6, 5))],
  ['warped hexahedra, periodic', () => open(hexBox(7, 6, 5, { ...warp, periodic: ['x', 'z'] }), ['x', 'z'])],
  ['warped tetrahedra', () => open(tetBox(5, 4, 4, warp))],
  ['warped prisms', () => open(prismBox(5, 5, 4, warp))],
  ['warped mixed cells', () => open(mixedBox(6, 4, 4, warp))],
  ['warped polyhedra', () => open(polyBox(5, 5, 4, warp))],
  ['local refinement', () => open(refinedBox(6, 5, 4))],
  ['a bend', () => open(bendChannel(12, 6, 4))],
];

function norm(values: Float64Array): number {
  return Math.sqrt(values.reduce((sum, v) => sum + v * v, 0));
}

const tau = 2 * Math.PI;

/** A potential of period 1 along all axes. */
const wavy: PotentialAt = ({ count, points }, out) => {
  for (let i = 0; i < count; i++) {
    const [x, y, z] = points.subarray(3 * i, 3 * i + 3) as unknown as [number, number, number];
    out[3 * i] = Math.sin(tau * y) * Math.cos(2 * tau * z);
    out[3 * i + 1] = Math.cos(tau * (x + z));
    out[3 * i + 2] = Math.sin(tau * (2 * x - y));
  }
};

/** Uniform velocity of the linear potential A = u x r / 2. */
const curl = [0.3, -1.2, 0.7] as const;
const linear: PotentialAt = ({ count, points }, out) => {
  for (let i = 0; i < count; i++) {
    const [x, y, z] = points.subarray(3 * i, 3 * i + 3) as unknown as [number, number, number];
    out[3 * i] = (curl[1] * z - curl[2] * y) / 2;
    out[3 * i + 1] = (curl[2] * x - curl[0] * z) / 2;
    out[3 * i + 2] = (curl[0] * y - curl[1] * x) / 2;
  }
};

describe.each(kinds)('circulation fluxes on %s', (_name, build) => {
  const { mesh, geometry, periodic } = build();

  it('finds edges once: faces less edges plus points less cells is 1 on a simple body (Euler)', () => {
    const edges = meshEdges(mesh);
    const used = new Set(mesh.facePoints).size;
    expect(used - edges.count + mesh.faceCount - mesh.cellCount).toBe(1);
    const seen = new Set<number>();
    for (let e = 0; e < edges.count; e++) seen.add(edges.points[2 * e]! * used * 4 + edges.points[2 * e + 1]!);
    expect(seen.size).toBe(edges.count);
  });

  it('sum to zero over every cell', () => {
    const { fluxes, periodicMismatch } = circulationFluxes(mesh, wavy, periodic);
    const rms = norm(fluxes) / Math.sqrt(fluxes.length);
    const net = netFaceFluxes(mesh, fluxes);
    expect(rms).toBeGreaterThan(0);
    for (const value of net) expect(Math.abs(value)).toBeLessThan(1e-13 * rms);
    expect(periodicMismatch).toBeLessThan(1e-13);
  });

  it('are area times velocity where the curl is uniform, warped faces included', () => {
    const { fluxes } = circulationFluxes(mesh, linear);
    for (let f = 0; f < mesh.faceCount; f++) {
      const s = geometry.faceAreas.subarray(3 * f, 3 * f + 3);
      const wanted = s[0]! * curl[0] + s[1]! * curl[1] + s[2]! * curl[2];
      expect(Math.abs(fluxes[f]! - wanted)).toBeLessThan(1e-14 + 1e-12 * Math.hypot(...s));
    }
  });
});

describe('face keys', () => {
  it('name cells and three points whose right-hand normal points from owner to neighbour', () => {
    const { mesh, geometry } = open(hexBox(3, 4, 2));
    const keys = faceKeys(mesh);
    expect(keys.length).toBe(faceKeyColumns * mesh.faceCount);
    const named = new Set<string>();
    for (let f = 0; f < mesh.faceCount; f++) {
      const [owner, neighbour, p, q, r] = keys.subarray(faceKeyColumns * f, faceKeyColumns * (f + 1)) as unknown as [
        number,
        number,
        number,
        number,
        number,
      ];
      named.add([p, q, r].sort((a, b) => a - b).join());
      const at = (i: number, c: number): number => mesh.points[3 * i + c]!;
      const e = [0, 1, 2].map((c) => at(q, c) - at(p, c));
      const g = [0, 1, 2].map((c) => at(r, c) - at(q, c));
      const normal = [e[1]! * g[2]! - e[2]! * g[1]!, e[2]! * g[0]! - e[0]! * g[2]!, e[0]! * g[1]! - e[1]! * g[0]!];
      const to =
        neighbour < 0 ? geometry.faceCentroids.subarray(3 * f) : geometry.cellCentroids.subarray(3 * neighbour);
      const along = [0, 1, 2].reduce((s, c) => s + normal[c]! * (to[c]! - geometry.cellCentroids[3 * owner + c]!), 0);
      expect(along).toBeGreaterThan(0);
      expect(neighbour < 0).toBe(f >= mesh.innerFaceCount);
    }
    expect(named.size).toBe(mesh.faceCount);
  });
});

describe('circulation across periods', () => {
  const { mesh, periodic } = open(hexBox(4, 5, 3, { warp: 0.2, periodic: ['x', 'y', 'z'] }), ['x', 'y', 'z']);

  it('gives mates the same flux, bit for bit', () => {
    const { fluxes } = circulationFluxes(mesh, wavy, periodic);
    const { lowFaces, highFaces } = periodic!;
    const most = Math.max(...fluxes.map(Math.abs));
    for (let i = 0; i < lowFaces.length; i++) {
      expect(Math.abs(fluxes[lowFaces[i]!]! + fluxes[highFaces[i]!]!)).toBeLessThan(1e-15 * most);
    }
  });

  it('joins four edges at the corners of the box, and reports a potential that is not periodic', () => {
    const edges = meshEdges(mesh);
    const { root } = periodicEdgeClasses(mesh, edges, periodic);
    // A periodic box of n cells has 3 n edges that differ.
    expect(new Set(root).size).toBe(3 * mesh.cellCount);
    expect(circulationFluxes(mesh, linear, periodic).periodicMismatch).toBeGreaterThan(0.1);
  });

  it('approaches the exact flux with the fourth power of the width', () => {
    // A = (0, 0, sin(x + 2 y + 3 z)): through a face of constant x the flux is the difference of two line integrals
    // along z, each (cos(.. + 3 z1) - cos(.. + 3 z2)) / 3.
    const slanted: PotentialAt = ({ count, points }, out) => {
      out.fill(0);
      for (let i = 0; i < count; i++)
        out[3 * i + 2] = Math.sin(points[3 * i]! + 2 * points[3 * i + 1]! + 3 * points[3 * i + 2]!);
    };
    const error = (n: number): number => {
      const box = open(hexBox(n, n, n));
      const { fluxes } = circulationFluxes(box.mesh, slanted);
      const h = 1 / n;
      let worst = 0;
      for (let f = 0; f < box.mesh.faceCount; f++) {
        const s = box.geometry.faceAreas[3 * f]!;
        if (Math.abs(s) < 0.5 * h * h) continue;
        const [x, y, z] = box.geometry.faceCentroids.subarray(3 * f, 3 * f + 3) as unknown as [number, number, number];
        const along = (at: number): number =>
          (Math.cos(x + 2 * at + 3 * (z - h / 2)) - Math.cos(x + 2 * at + 3 * (z + h / 2))) / 3;
        const wanted = along(y + h / 2) - along(y - h / 2);
        worst = Math.max(worst, Math.abs(fluxes[f]! * Math.sign(s) - wanted) / (h * h));
      }
      return worst;
    };
    const coarse = error(4);
    const fine = error(8);
    expect(coarse).toBeLessThan(1e-3);
    expect(coarse / fine).toBeGreaterThan(14);
    expect(coarse / fine).toBeLessThan(18);
  });
});
