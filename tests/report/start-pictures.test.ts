import { expect, it } from 'vitest';
import { slabProfiles, startPictures } from '../../src/report/start-pictures.js';
import { brickMesh, planes } from '../appraisal/brick.js';

const { mesh, geometry } = brickMesh(planes(0, 2, 16), planes(0, 1, 8), planes(0, 0.5, 4));
const n = mesh.cellCount;
const y = Float64Array.from({ length: n }, (_, i) => geometry.cellCentroids[3 * i + 1] as number);

it('averages over slabs', () => {
  // u' = (sqrt(2) y, 0, 0) with alternating sign holds k = y^2 exactly; the wanted k is y^2.
  const fluctuation = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) fluctuation[3 * i] = Math.SQRT2 * (y[i] as number) * (i % 2 === 0 ? 1 : -1);
  const covariance = new Float64Array(6 * n);
  const profile = slabProfiles(
    geometry.cellCentroids,
    geometry.cellVolumes,
    'y',
    y.map((v) => v * v),
    fluctuation,
    covariance,
  );
  const [k, xx, xy] = profile.curves;
  expect(k!.x.length).toBe(8);
  for (let s = 0; s < 8; s++) {
    expect(k!.x[s]).toBeCloseTo((s + 0.5) / 8, 12);
    expect(k!.recovered[s]).toBeCloseTo(k!.wanted[s] as number, 12);
    expect(xx!.recovered[s]).toBeCloseTo(2 * ((s + 0.5) / 8) ** 2, 12);
    expect(xy!.recovered[s]).toBe(0);
  }
});

it('pictures what is there and nothing else', () => {
  const velocity = new Float64Array(3 * n).fill(1);
  const whole = startPictures({
    mesh,
    centroids: geometry.cellCentroids,
    wallFaces: new Int32Array(0),
    k: y,
    mean: velocity,
    velocity,
    fluctuation: velocity,
    gridRatio: y,
    share: y,
  });
  expect(whole.before.map((p) => p.quantity)).toEqual(['VelocityMagnitude', 'TurbulentEnergyKinetic']);
  expect(whole.pictures.length).toBe(6);
  expect(whole.before[0]!.values[0]).toBeCloseTo(Math.sqrt(3), 6);
  expect(startPictures({ mesh, centroids: geometry.cellCentroids, wallFaces: new Int32Array(0) }).before).toEqual([]);
});
