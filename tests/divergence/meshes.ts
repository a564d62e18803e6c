import type { Dataset } from '../../src/basis/dataset.js';
import { boundaryCode, createFaceOperator, type FaceOperator } from '../../src/divergence/face-operator.js';
import { buildMesh } from '../../src/mesh/build.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from '../../src/mesh/cell-mesh.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { matchPeriodic } from '../../src/mesh/periodic.js';
import { type Axis, hexBox, mixedBox, polyBox, prismBox, tetBox } from '../helpers/meshes.js';

export interface Opened {
  readonly mesh: CellMesh;
  readonly geometry: MeshGeometry;
  readonly periodic: PeriodicPairs | undefined;
}

export function open(dataset: Dataset, axes: readonly Axis[] = []): Opened {
  const mesh = buildMesh(dataset);
  const geometry = measureMesh(mesh);
  return { mesh, geometry, periodic: axes.length === 0 ? undefined : matchPeriodic(mesh, geometry, axes, 'test') };
}

export const wallStretch = (s: number): number => 0.5 + Math.tanh(1.6 * (2 * s - 1)) / (2 * Math.tanh(1.6));
const same = (s: number): number => s;

/** Every kind of cell and boundary: name, mesh, treatment of the faces that are not periodic. */
export const kinds: readonly [string, () => Opened, 'wall' | 'free'][] = [
  ['hexahedra, periodic', () => open(hexBox(8, 8, 8, { periodic: ['x', 'y', 'z'] }), ['x', 'y', 'z']), 'wall'],
  [
    'warped wall-stretched hexahedra, periodic and walls',
    () => open(hexBox(8, 9, 8, { warp: 0.2, stretch: [same, wallStretch, same], periodic: ['x', 'z'] }), ['x', 'z']),
    'wall',
  ],
  ['warped hexahedra, free boundaries', () => open(hexBox(8, 8, 8, { warp: 0.2 })), 'free'],
  ['tetrahedra, walls', () => open(tetBox(5, 5, 5, { warp: 0.15 })), 'wall'],
  ['tetrahedra, periodic', () => open(tetBox(5, 5, 5, { periodic: ['x', 'y', 'z'] }), ['x', 'y', 'z']), 'wall'],
  ['prisms, free boundaries', () => open(prismBox(6, 6, 6, { warp: 0.15 })), 'free'],
  ['polyhedra, walls', () => open(polyBox(6, 6, 6)), 'wall'],
  ['warped polyhedra, free boundaries', () => open(polyBox(6, 6, 6, { warp: 0.15 })), 'free'],
  ['mixed cells, walls', () => open(mixedBox(8, 4, 4)), 'wall'],
];

export function operatorOf(
  { mesh, geometry, periodic }: Opened,
  boundary: 'wall' | 'free' | 'held',
  weights: 'distance' | 'equal' = 'distance',
): FaceOperator {
  const codes = new Uint8Array(mesh.faceCount - mesh.innerFaceCount).fill(boundaryCode[boundary]);
  return createFaceOperator(mesh, geometry, { periodic, boundary: codes, weights });
}

/** Velocity at the cell centres. */
export function sample(
  geometry: MeshGeometry,
  u: (x: number, y: number, z: number) => readonly [number, number, number],
): Float64Array {
  const out = new Float64Array(geometry.cellCentroids.length);
  const c = geometry.cellCentroids;
  for (let i = 0; i < c.length; i += 3) out.set(u(c[i]!, c[i + 1]!, c[i + 2]!), i);
  return out;
}

/** Volume-weighted inner product of two velocity fields. */
export function inner(a: Float64Array, b: Float64Array, volumes: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += volumes[Math.floor(i / 3)]! * a[i]! * b[i]!;
  return sum;
}

export function norm(values: Float64Array): number {
  return Math.sqrt(values.reduce((sum, v) => sum + v * v, 0));
}
