import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/basis/random.js';
import { buildKdTree, createKdSearch, nearestNeighbours } from '../../src/spatial/kd-tree.js';

const random = randomStream(3, 'k-d tree');

function bruteForce(points: Float64Array, x: number, y: number, z: number, wanted: number): number[] {
  return Array.from({ length: points.length / 3 }, (_, i) => {
    const d = [points[3 * i]! - x, points[3 * i + 1]! - y, points[3 * i + 2]! - z] as const;
    return { i, squared: d[0] * d[0] + d[1] * d[1] + d[2] * d[2] };
  })
    .sort((a, b) => a.squared - b.squared || a.i - b.i)
    .slice(0, wanted)
    .map(({ i }) => i);
}

describe('nearest neighbours', () => {
  it.each([
    [1, 8, 0],
    [5, 8, 0],
    [30, 1, 0],
    [1000, 8, 0],
    // Coordinates on a coarse grid: many points equally far and many at one place.
    [3000, 8, 12],
    [3000, 20, 4],
  ])('%i points, %i wanted, grid %i: as brute force, ties by the lower number', (count, wanted, grid) => {
    const points = Float64Array.from({ length: 3 * count }, () =>
      grid === 0 ? random() : Math.round(random() * grid) / grid,
    );
    const tree = buildKdTree(points);
    const search = createKdSearch();
    const index = new Int32Array(wanted);
    const squared = new Float64Array(wanted);
    for (let q = 0; q < 100; q += 1) {
      const [x, y, z] =
        q % 2 === 0
          ? [random() * 2 - 0.5, random() * 2 - 0.5, random() * 2 - 0.5]
          : ([...points.subarray(3 * (q % count), 3 * (q % count) + 3)] as [number, number, number]);
      const found = nearestNeighbours(tree, x, y, z, wanted, index, squared, search);
      expect([...index.subarray(0, found)]).toEqual(bruteForce(points, x, y, z, wanted));
    }
  });

  it('finds nothing in an empty cloud', () => {
    const tree = buildKdTree(new Float64Array(0));
    expect(nearestNeighbours(tree, 0, 0, 0, 1, new Int32Array(1), new Float64Array(1), createKdSearch())).toBe(0);
  });
});
