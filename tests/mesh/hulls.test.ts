import { spawnSync } from 'node:child_process';
import { describe, expect, it } from 'vitest';
import type { Dataset } from '../../src/basis/dataset.js';
import { buildMesh } from '../../src/mesh/build.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { hexBox, mixedBox, polyBox, tetBox } from '../helpers/meshes.js';

const python = '/usr/bin/python3';
const withScipy = spawnSync(python, ['-c', 'import scipy.spatial']).status === 0;
if (!withScipy) console.log('skipped: volumes against scipy.spatial.ConvexHull (python3 with scipy not found)');

const script = `
import json, sys
import numpy as np
from scipy.spatial import ConvexHull, Delaunay
out = []
for points in json.load(sys.stdin):
    p = np.array(points)
    tets = p[Delaunay(p).simplices]
    v = np.abs(np.einsum('ij,ij->i', tets[:,1]-tets[:,0], np.cross(tets[:,2]-tets[:,0], tets[:,3]-tets[:,0]))) / 6
    c = (v[:,None] * tets.mean(axis=1)).sum(axis=0) / v.sum()
    out.append([ConvexHull(p).volume, *c])
json.dump(out, sys.stdout)
`;

// Maps that keep plane faces plane: shear and stretching.
const sheared = { map: (x: number, y: number, z: number) => [x + 0.4 * y, y - 0.2 * z, 3 * z] as const };
const convexMeshes: readonly [string, Dataset][] = [
  ['hexahedra', hexBox(3, 2, 2, sheared)],
  ['tetrahedra, moved vertices', tetBox(2, 2, 2, { warp: 0.3 })],
  ['mixed', mixedBox(4, 2, 2, sheared)],
  ['honeycomb', polyBox(3, 3, 2, sheared)],
];

describe.skipIf(!withScipy)('volumes and centroids against scipy (convex hull; Delaunay tetrahedra of it)', () => {
  it.each(convexMeshes)('%s', (_name, dataset) => {
    const mesh = buildMesh(dataset);
    const geometry = measureMesh(mesh);
    const cells: number[][][] = [];
    for (let c = 0; c < mesh.cellCount; c++) {
      const used = new Set<number>();
      for (let j = mesh.cellFaceOffsets[c]!; j < mesh.cellFaceOffsets[c + 1]!; j++) {
        const f = mesh.cellFaces[j]!;
        for (const p of mesh.facePoints.subarray(mesh.faceOffsets[f]!, mesh.faceOffsets[f + 1]!)) used.add(p);
      }
      cells.push([...used].map((p) => [...mesh.points.subarray(3 * p, 3 * p + 3)]));
    }
    const answer = spawnSync(python, ['-c', script], { input: JSON.stringify(cells), encoding: 'utf8' });
    const hulls = JSON.parse(answer.stdout) as [number, number, number, number][];
    expect(hulls.length).toBe(mesh.cellCount);
    hulls.forEach(([volume, ...centroid], c) => {
      expect(Math.abs(geometry.cellVolumes[c]! / volume - 1)).toBeLessThan(1e-11);
      centroid.forEach((v, a) => {
        expect(geometry.cellCentroids[3 * c + a]!).toBeCloseTo(v, 11);
      });
    });
  });
});
