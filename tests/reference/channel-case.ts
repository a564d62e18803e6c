import type { LocalScales } from '../../src/turbulence/scales.js';
import { localScales } from '../../src/turbulence/scales.js';
import { vonKarmanPao } from '../../src/turbulence/spectra.js';
import { brickMesh, type TestMesh } from '../turbulence/fields.js';
import type { ChannelProfile } from './channel-profiles.js';

export interface ChannelCase extends TestMesh {
  readonly scales: LocalScales;
  /** 6 x cells. */
  readonly covariance: Float64Array;
  readonly wallDistance: Float64Array;
  /** Number of the cell's layer across the channel. */
  readonly layer: Int32Array;
  readonly layers: number;
}

/**
 * A channel 2 pi x 2 x pi half heights with hyperbolic-tangent refinement, periodic in x and z, with the published
 * profiles interpolated linearly onto its cells (half height and u_tau are 1).
 */
export function channelCase(
  profile: ChannelProfile,
  counts: readonly [number, number, number],
  refinement: number,
  subgrid: 'model' | 'none' = 'model',
  warp = 0,
  wallLengthFactor = 1,
): ChannelCase {
  const stretch = (s: number): number => 0.5 + Math.tanh(refinement * (2 * s - 1)) / (2 * Math.tanh(refinement));
  const same = (s: number): number => s;
  const box = brickMesh(counts, ['x', 'z'], {
    lengths: [2 * Math.PI, 2, Math.PI],
    stretch: [same, stretch, same],
    warp,
  });
  const n = box.mesh.cellCount;
  const { rows, reynolds } = profile;
  const k = new Float64Array(n);
  const epsilon = new Float64Array(n);
  const covariance = new Float64Array(6 * n);
  const velocityGradient = new Float64Array(9 * n);
  const wallDistance = new Float64Array(n);
  const layer = new Int32Array(n);
  const heights: number[] = [];
  for (let i = 0; i < n; i++) {
    const y = box.geometry.cellCentroids[3 * i + 1]!;
    const side = y < 1 ? 1 : -1;
    const d = Math.min(y, 2 - y);
    wallDistance[i] = d;
    let r = 0;
    while (r < rows.length - 2 && rows[r + 1]![0] < d) r++;
    const t = Math.min(1, (d - rows[r]![0]) / (rows[r + 1]![0] - rows[r]![0]));
    const at = (c: number): number => (1 - t) * rows[r]![c]! + t * rows[r + 1]![c]!;
    covariance[6 * i] = at(2) ** 2;
    covariance[6 * i + 1] = -side * at(5);
    covariance[6 * i + 3] = at(3) ** 2;
    covariance[6 * i + 5] = at(4) ** 2;
    k[i] = 0.5 * (covariance[6 * i]! + covariance[6 * i + 3]! + covariance[6 * i + 5]!);
    epsilon[i] = at(7) * reynolds;
    velocityGradient[9 * i + 1] = side * at(6) * reynolds;
    let l = heights.findIndex((h) => Math.abs(h - y) < 1e-6);
    if (l < 0) l = heights.push(y) - 1;
    layer[i] = l;
  }
  const scales = localScales(
    { cells: n, k, epsilon, viscosity: 1 / reynolds, wallDistance, velocityGradient },
    { spectrum: vonKarmanPao, subgrid, wallLengthFactor },
  );
  return { ...box, scales, covariance, wallDistance, layer, layers: heights.length };
}
