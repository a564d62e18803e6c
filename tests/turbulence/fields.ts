import { buildMesh } from '../../src/mesh/build.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from '../../src/mesh/cell-mesh.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { matchPeriodic } from '../../src/mesh/periodic.js';
import type { FluctuationPlan } from '../../src/turbulence/plan.js';
import { synthesiseRange } from '../../src/turbulence/synthesis.js';
import { weighRange } from '../../src/turbulence/weights.js';
import { type Axis, type BoxOptions, hexBox } from '../helpers/meshes.js';

export interface TestMesh {
  readonly mesh: CellMesh;
  readonly geometry: MeshGeometry;
  readonly periodic: PeriodicPairs;
}

/** A box of bricks with periodic axes. */
export function brickMesh(
  counts: readonly [number, number, number],
  axes: readonly Axis[],
  options: BoxOptions = {},
): TestMesh {
  const mesh = buildMesh(hexBox(...counts, { periodic: axes, ...options }));
  const geometry = measureMesh(mesh);
  return { mesh, geometry, periodic: matchPeriodic(mesh, geometry, axes) };
}

export interface Synthesised {
  readonly potential: Float64Array;
  readonly velocity: Float64Array;
}

/** Weighs and superimposes all cells. */
export function synthesise(plan: FluctuationPlan): Synthesised {
  weighRange(plan, 0, plan.cells);
  return superimpose(plan);
}

export function superimpose(plan: FluctuationPlan): Synthesised {
  const out = { potential: new Float64Array(3 * plan.cells), velocity: new Float64Array(3 * plan.cells) };
  synthesiseRange(plan, 0, plan.cells, out);
  return out;
}

/** Volume means of u_i u_j (XX XY XZ YY YZ ZZ) over the cells that `take` accepts. */
export function covarianceOf(
  velocity: Float64Array,
  volumes: Float64Array,
  take: (cell: number) => boolean = () => true,
): Float64Array {
  const out = new Float64Array(6);
  let volume = 0;
  for (let i = 0; i < volumes.length; i++) {
    if (!take(i)) continue;
    volume += volumes[i]!;
    let c = 0;
    for (let p = 0; p < 3; p++)
      for (let q = p; q < 3; q++) out[c++]! += volumes[i]! * velocity[3 * i + p]! * velocity[3 * i + q]!;
  }
  return out.map((v) => v / volume);
}

export const energyOf = (covariance: Float64Array): number => 0.5 * (covariance[0]! + covariance[3]! + covariance[5]!);
