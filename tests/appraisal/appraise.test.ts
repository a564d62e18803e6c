import { describe, expect, it } from 'vitest';
import { appraiseTarget } from '../../src/appraisal/appraise.js';
import { brickMesh, planes } from './brick.js';

// Invented channel, half height 1 m, nu = 1e-6 m2/s, u_tau = 0.05 m/s, so Re_tau = 50000. In the core k = 0.004 m2/s2 and
// epsilon = 0.0004 m2/s3. By hand: L = 0.004^1.5 / 0.0004 = 0.632 m, eta = (1e-18 / 4e-4)^(1/4) = 0.2236 mm, Taylor
// length sqrt(10 x 1e-6 x 0.004 / 0.0004) = 0.01 m.
const ys = planes(0, 2, 32);
const { mesh, geometry } = brickMesh(planes(0, 6, 48), ys, planes(0, 3, 24));
const n = mesh.cellCount;
const filled = (value: number): Float64Array => new Float64Array(n).fill(value);
const velocity = new Float64Array(3 * n);
for (let i = 0; i < n; i++) {
  // Log law: U = 0.05 (ln(y+) / 0.4 + 5.5), y+ = 50000 d.
  const y = geometry.cellCentroids[3 * i + 1] as number;
  velocity[3 * i] = 0.05 * (Math.log(50000 * Math.min(y, 2 - y)) / 0.4 + 5.5);
}
const walls: number[] = [];
for (let f = mesh.innerFaceCount; f < mesh.faceCount; f++) {
  const y = geometry.faceCentroids[3 * f + 1] as number;
  if (y === 0 || y === 2) walls.push(f);
}

describe('appraisal of a channel', () => {
  const appraisal = appraiseTarget(
    {
      mesh,
      geometry,
      k: filled(0.004),
      epsilon: filled(0.0004),
      nu: 1e-6,
      velocity,
      wallFaces: Int32Array.from(walls),
      zones: {
        names: ['lower', 'upper'],
        of: Int32Array.from({ length: n }, (_, i) => ((geometry.cellCentroids[3 * i + 1] as number) < 1 ? 0 : 1)),
      },
      second: { k: filled(0.002), epsilon: filled(0.0004), nu: 1e-6 },
    },
    { plan: { secondsPerStep: 2 } },
  );

  it('gives the verdict of a hand calculation', () => {
    // Cells 0.125 x 0.0625 x 0.125 m: CellWidth 0.0992 m, GridRatio 6.37: marginal by the common limits. Without a
    // viscous end 0.69 of k is carried (published table: 0.645 at 5, 0.739 at 8); with L / eta = 2828 scipy's quad and
    // brentq give 0.7255 for the dissipation-consistent spectrum.
    expect(appraisal.summary.meanGridRatio).toBeCloseTo(0.6325 / 0.0992, 1);
    expect(appraisal.summary.ratio5to10).toBe(1);
    expect(appraisal.summary.verdict).toBe('marginal');
    expect(Math.abs(appraisal.summary.meanShare - 0.7255)).toBeLessThan(0.001);
    expect(appraisal.summary.meanWidthOverKolmogorov).toBeCloseTo(0.09921 / 2.236e-4, 0);
    expect(appraisal.summary.meanWidthOverTaylor).toBeCloseTo(9.92, 2);
    expect(appraisal.zones.map((zone) => zone.summary.cells)).toEqual([n / 2, n / 2]);
    expect(appraisal.regions.length).toBe(6);
  });

  it('finds the wall spacings', () => {
    // First centre at 0.03125 m: y+ = 1562; along and across 6250. Spalding's law is the log law there.
    expect(Math.abs(appraisal.wall!.yPlus[0] / 1562.5 - 1)).toBeLessThan(0.005);
    expect(Math.abs(appraisal.wall!.along[0] / 6250 - 1)).toBeLessThan(0.005);
    expect(Math.abs(appraisal.wall!.across[1] / 6250 - 1)).toBeLessThan(0.005);
    expect(appraisal.wall!.words).toContain('needs a wall model');
    expect(appraisal.wallDistance![0]).toBeCloseTo(0.03125, 9);
  });

  it('plans time step, length and probes', () => {
    // Largest: centreline U = 0.05 (ln(48438) / 0.4 + 5.5) = 1.6236 m/s over 0.125 m plus 3 sqrt(2k/3) sqrt(8^2 + 16^2 + 8^2)
    // = 3 x 0.05164 x 19.6 = 3.036: 16.02 1/s; 99th percentile next to it, so 0.5 of it decides.
    expect(Math.abs(appraisal.plan!.timeStep / (0.5 / 16.02) - 1)).toBeLessThan(0.01);
    expect(appraisal.plan!.turnoverTime).toBeCloseTo(10, 9);
    expect(appraisal.plan!.costHours).toBeCloseTo((appraisal.plan!.steps * 2) / 3600, 9);
    expect(new Set(appraisal.monitors!.map((m) => m.kind))).toEqual(new Set(['wake', 'shear', 'wall']));
  });

  it('compares two precursors on one scale', () => {
    expect(appraisal.second!.comparison.lengthRatio).toBeCloseTo(0.5 ** 1.5, 9);
    expect([...appraisal.second!.gridRatioHistogram.edges]).toEqual([...appraisal.gridRatioHistogram.edges]);
    expect(appraisal.second!.summary.verdict).toBe('too coarse');
  });

  it('does without velocity, walls and viscosity', () => {
    const bare = appraiseTarget({ mesh, geometry, k: filled(0.004), epsilon: filled(0.0004) });
    expect(bare.plan).toBeUndefined();
    expect(bare.wall).toBeUndefined();
    expect(bare.summary.meanShare).toBeCloseTo(0.69, 1);
  });
});
