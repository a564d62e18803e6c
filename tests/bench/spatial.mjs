// k-d tree, tetrahedralisation and linear interpolation against scipy, interleaved in one run: ratios and targets.
// usage: node tests/bench/spatial.mjs
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { pathToFileURL } from 'node:url';

const script = `
import sys, time, json, numpy as np
from scipy.spatial import cKDTree, Delaunay
from scipy.interpolate import LinearNDInterpolator
kind, folder = sys.argv[1], sys.argv[2]
points = np.fromfile(folder + '/points').reshape(-1, 3)
start = time.perf_counter()
if kind == 'tree':
    queries = np.fromfile(folder + '/queries').reshape(-1, 3)
    start = time.perf_counter()
    cKDTree(points).query(queries, k=8, workers=2)
elif kind == 'delaunay':
    Delaunay(points)
else:
    queries = np.fromfile(folder + '/queries').reshape(-1, 3)
    start = time.perf_counter()
    LinearNDInterpolator(points, points[:, 0])(queries)
print(time.perf_counter() - start)
`;

export async function bench() {
  const e = await import('../../dist/index.js');
  const { hilbertOrder } = await import('../../dist/spatial/hilbert.js');
  const folder = mkdtempSync(join(tmpdir(), 'eddygraft-bench-'));
  const scipy = (kind, points, queries) => {
    writeFileSync(join(folder, 'points'), new Uint8Array(points.buffer));
    if (queries !== undefined) writeFileSync(join(folder, 'queries'), new Uint8Array(queries.buffer));
    const result = spawnSync('/usr/bin/python3', ['-c', script, kind, folder], { encoding: 'utf8' });
    if (result.status !== 0) throw new Error(result.stderr);
    return Number(result.stdout);
  };
  const own = (work) => {
    const begin = performance.now();
    work();
    return (performance.now() - begin) / 1000;
  };
  const random = (n) => Float64Array.from({ length: 3 * n }, Math.random);
  const say = (what, theirs, ours, target) =>
    console.log(
      `${what}: scipy ${theirs.toFixed(2)} s, here ${ours.toFixed(2)} s, ratio ${(theirs / ours).toFixed(1)} (target ${target})`,
    );
  try {
    e.tetrahedralise(random(20000));
    {
      const [points, queries] = [random(1e6), random(1e6)];
      const theirs = scipy('tree', points, queries);
      const ours = own(() => {
        const tree = e.buildKdTree(points);
        const search = e.createKdSearch();
        const [index, squared] = [new Int32Array(8), new Float64Array(8)];
        for (const q of hilbertOrder(queries)) {
          e.nearestNeighbours(tree, queries[3 * q], queries[3 * q + 1], queries[3 * q + 2], 8, index, squared, search);
        }
      });
      say(
        '1 M points: tree and 8 nearest of 1 M queries, ONE thread against two of scipy',
        theirs,
        ours,
        '4 with two workers',
      );
    }
    for (const n of [100_000, 300_000]) {
      const points = random(n);
      say(
        `Delaunay of ${n} random points`,
        scipy('delaunay', points),
        own(() => e.tetrahedralise(points)),
        6,
      );
    }
    const side = 46;
    const lattice = Float64Array.from({ length: 3 * side ** 3 }, (_, at) => {
      const i = Math.floor(at / 3);
      return [i % side, Math.floor(i / side) % side, Math.floor(i / side ** 2)][at % 3] / 10;
    });
    const cloud = random(side ** 3);
    const onLattice = own(() => e.tetrahedralise(lattice));
    const onCloud = own(() => e.tetrahedralise(cloud));
    console.log(
      `lattice ${side}^3: ${onLattice.toFixed(2)} s, random ${onCloud.toFixed(2)} s: ${(onCloud / onLattice).toFixed(2)} of its speed (target 0.5)`,
    );
    {
      const [points, queries] = [random(200_000), random(1e6)];
      const theirs = scipy('linear', points, queries);
      const values = points.filter((_, i) => i % 3 === 0);
      const ours = own(() => {
        const out = { fields: [new Float64Array(1e6)], outside: new Uint8Array(1e6), distance: new Float64Array(1e6) };
        const sorted = new Float64Array(3e6);
        hilbertOrder(queries).forEach((q, i) => {
          sorted.set(queries.subarray(3 * q, 3 * q + 3), 3 * i);
        });
        const plan = e.prepareCloudTransfer(points, { method: 'linear' });
        e.cloudTransferRange(plan, [{ components: 1, values }], sorted, 0, 1e6, out);
      });
      say('linear, 200 k points, 1 M queries, one thread', theirs, ours, 6);
    }
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

if (process.argv[1] !== undefined && import.meta.url === pathToFileURL(resolve(process.argv[1])).href) await bench();
