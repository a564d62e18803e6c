import { fileURLToPath } from 'node:url';
import { expect, it } from 'vitest';
import { appraiseTarget } from '../../src/appraisal/appraise.js';
import { brickMesh, planes } from './brick.js';

interface Profile {
  readonly y: Float64Array;
  readonly u: Float64Array;
  readonly k: Float64Array;
  readonly epsilon: Float64Array;
}

it('judges the channel sample as a hand calculation does', async () => {
  const path = fileURLToPath(new URL('../../samples/channel/profile.mjs', import.meta.url));
  const { solveChannel } = (await import(path)) as { solveChannel: (reynolds: number) => Profile };
  // The sample in wall units: half height 395, cells 59.25 along, 42.3 across, 48 layers stretched by tanh 2.2. A fifth of its length.
  const { y, u, k, epsilon } = solveChannel(395);
  const levels = Array.from({ length: 49 }, (_, j) => 395 * (1 + Math.tanh(2.2 * ((2 * j) / 48 - 1)) / Math.tanh(2.2)));
  const { mesh, geometry } = brickMesh(planes(0, 474, 8), levels, planes(0, 1185 / 4, 7));
  const at = (values: Float64Array, height: number): number => {
    const depth = Math.min(height, 790 - height);
    let i = 0;
    while (i < y.length - 2 && (y[i + 1] as number) < depth) i++;
    const part = Math.min(1, Math.max(0, (depth - (y[i] as number)) / ((y[i + 1] as number) - (y[i] as number))));
    return (values[i] as number) + part * ((values[i + 1] as number) - (values[i] as number));
  };
  const heights = Float64Array.from({ length: mesh.cellCount }, (_, i) => geometry.cellCentroids[3 * i + 1] as number);
  const velocity = new Float64Array(3 * mesh.cellCount);
  heights.forEach((height, i) => {
    velocity[3 * i] = at(u, height);
  });
  const walls: number[] = [];
  for (let f = mesh.innerFaceCount; f < mesh.faceCount; f++) {
    const height = geometry.faceCentroids[3 * f + 1] as number;
    if (height < 1e-6 || height > 790 - 1e-6) walls.push(f);
  }
  const appraisal = appraiseTarget({
    mesh,
    geometry,
    k: heights.map((height) => at(k, height)),
    epsilon: heights.map((height) => at(epsilon, height)),
    nu: 1,
    velocity,
    wallFaces: Int32Array.from(walls),
  });
  // Centreline by hand from the profile: L = k^(3/2) / epsilon over the cube root of 59.25 x 36.8 x 42.3 (layer 24: 395 tanh(2.2 / 24) / tanh 2.2).
  const layer = (395 * Math.tanh(2.2 / 24)) / Math.tanh(2.2);
  const centre = heights.findIndex((height) => Math.abs(height - 395) < layer);
  const expected = at(k, heights[centre] as number) ** 1.5 / at(epsilon, heights[centre] as number);
  expect(appraisal.fields.cellWidth[centre]).toBeCloseTo(Math.cbrt(59.25 * layer * (1185 / 28)), 6);
  expect(appraisal.fields.gridRatio[centre]).toBeCloseTo(expected / Math.cbrt(59.25 * layer * (1185 / 28)), 6);
  expect(appraisal.fields.gridRatio[centre]).toBeGreaterThan(10);
  // First centre: half of 395 (1 - tanh(2.2 x 23 / 24) / tanh 2.2) = 1.95: y+ 0.97; u_tau is 1 in these units.
  expect(appraisal.wall!.yPlus[0]).toBeCloseTo(0.973, 1);
  expect(Math.abs(appraisal.wall!.along[0] / 59.25 - 1)).toBeLessThan(0.05);
  expect(Math.abs(appraisal.wall!.across[0] / 42.3 - 1)).toBeLessThan(0.05);
  expect(appraisal.summary.verdict).toBe('resolves');
  expect(appraisal.summary.meanShare).toBeGreaterThan(0.85);
});
