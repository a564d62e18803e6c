import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/basis/random.js';
import { inSphere, orientation } from '../../src/spatial/predicates.js';
import {
  ghost,
  locateTetrahedron,
  type Tetrahedralisation,
  tetrahedralise,
} from '../../src/spatial/tetrahedralisation.js';

function solid(points: Float64Array): Tetrahedralisation {
  const found = tetrahedralise(points);
  if (typeof found === 'string') throw new Error(found);
  return found;
}

function lattice(ni: number, nj: number, nk: number, step: number): Float64Array {
  const points: number[] = [];
  for (let k = 0; k < nk; k += 1)
    for (let j = 0; j < nj; j += 1) for (let i = 0; i < ni; i += 1) points.push(i * step, j * step, k * step);
  return Float64Array.from(points);
}

const random = randomStream(7, 'clouds');
const uniform = (n: number, sx = 1, sy = 1, sz = 1): Float64Array =>
  Float64Array.from({ length: 3 * n }, (_, i) => random() * ([sx, sy, sz][i % 3] as number));

const clouds: Record<string, { points: Float64Array; hull?: number }> = {
  random: { points: uniform(400) },
  'lattice of unit steps': { points: lattice(6, 6, 6, 1), hull: 125 },
  'lattice of steps 0.1': { points: lattice(7, 5, 4, 0.1), hull: 0.6 * 0.4 * 0.3 },
  'boundary-layer cloud 1000:1': { points: uniform(300, 1, 1e-3, 1) },
  'co-planar layers': { points: Float64Array.from(uniform(300), (v, i) => (i % 3 === 1 ? Math.round(v * 3) : v)) },
  duplicates: { points: Float64Array.from([...uniform(100), ...lattice(3, 3, 3, 0.5), ...lattice(3, 3, 3, 0.5)]) },
  'points on a sphere': {
    points: Float64Array.from({ length: 200 }, (_, i) => i).reduce((list, i) => {
      const [h, a] = [2 * random() - 1, 6.283185307179586 * random()];
      const r = Math.sqrt(1 - h * h);
      list.set([r * Math.cos(a), r * Math.sin(a), h], 3 * i);
      return list;
    }, new Float64Array(600)),
  },
  clustered: { points: Float64Array.from([...uniform(100), ...uniform(100, 1e-9, 1e-9, 1e-9)]) },
};

describe('Delaunay tetrahedralisation', () => {
  for (const [name, { points, hull }] of Object.entries(clouds)) {
    it(`${name}: every sphere is empty, faces match, Euler's relation holds`, () => {
      const t = solid(points);
      const n = points.length / 3;
      let finite = 0;
      let volume = 0;
      for (let i = 0; i < t.count; i += 1) {
        const v = t.vertices.subarray(4 * i, 4 * i + 4);
        for (let f = 0; f < 4; f += 1) {
          const other = t.neighbours[4 * i + f] as number;
          if (!t.neighbours.subarray(4 * other, 4 * other + 4).includes(i))
            throw new Error(`faces of ${i} do not match`);
        }
        if (v[3] === ghost) continue;
        finite += 1;
        const [a, b, c, d] = v as unknown as [number, number, number, number];
        const six = orientation(points, a, b, c, d);
        if (!(six > 0)) throw new Error(`tetrahedron ${i} has the volume ${six / 6}`);
        volume += six / 6;
        for (let e = 0; e < n; e += 1) {
          if (inSphere(points, a, b, c, d, e) > 0) throw new Error(`point ${e} lies in the sphere of tetrahedron ${i}`);
        }
      }
      // Closed three-dimensional complex with the vertex at infinity: V - E + F - T = 0 with F = 2 T.
      const edges = new Set<string>();
      const used = new Set<number>();
      for (let i = 0; i < t.count; i += 1) {
        for (let p = 0; p < 4; p += 1) {
          used.add(t.vertices[4 * i + p] as number);
          for (let q = p + 1; q < 4; q += 1) {
            const pair = [t.vertices[4 * i + p] as number, t.vertices[4 * i + q] as number].sort((x, y) => x - y);
            edges.add(pair.join());
          }
        }
      }
      expect(used.size - edges.size + t.count).toBe(0);
      expect(used.size - 1).toBe(t.distinct);
      expect(finite).toBeGreaterThan(0);
      if (hull !== undefined) expect(volume / hull).toBeCloseTo(1, 12);
    });
  }

  it('locates every place, or says that it lies outside', () => {
    const points = uniform(2000);
    const t = solid(points);
    let from = 0;
    for (let q = 0; q < 500; q += 1) {
      const [x, y, z] = [random() * 1.2 - 0.1, random() * 1.2 - 0.1, random() * 1.2 - 0.1];
      from = locateTetrahedron(t, x, y, z, from);
      const [a, b, c, d] = t.vertices.subarray(4 * from, 4 * from + 4) as unknown as [number, number, number, number];
      const p = Float64Array.from([...points, x, y, z]);
      const e = points.length / 3;
      if (d === ghost) {
        expect(orientation(p, a, b, c, e)).toBeGreaterThan(0);
      } else {
        expect(orientation(p, a, b, c, e)).toBeGreaterThanOrEqual(0);
        expect(orientation(p, a, b, e, d)).toBeGreaterThanOrEqual(0);
        expect(orientation(p, a, e, c, d)).toBeGreaterThanOrEqual(0);
        expect(orientation(p, e, b, c, d)).toBeGreaterThanOrEqual(0);
      }
    }
  });

  it('names flat clouds', () => {
    expect(tetrahedralise(Float64Array.of(1, 2, 3, 1, 2, 3))).toBe('one point');
    expect(tetrahedralise(Float64Array.of(0, 0, 0, 1, 2, 3, 2, 4, 6))).toBe('on a line');
    expect(tetrahedralise(lattice(4, 4, 1, 0.1))).toBe('in a plane');
  });

  it('keeps the volume of a large lattice', () => {
    const t = solid(lattice(24, 24, 24, 0.1));
    let volume = 0;
    for (let i = 0; i < t.count; i += 1) {
      const [a, b, c, d] = t.vertices.subarray(4 * i, 4 * i + 4) as unknown as [number, number, number, number];
      if (d !== ghost) volume += orientation(t.points, a, b, c, d) / 6;
    }
    expect(volume / 2.3 ** 3).toBeCloseTo(1, 11);
  });
});
