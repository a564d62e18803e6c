import { describe, expect, it } from 'vitest';
import { comparePrecursors } from '../../src/appraisal/comparison.js';
import { quantiles, weightedHistogram, weightedQuantile } from '../../src/appraisal/histogram.js';
import { worstRegions } from '../../src/appraisal/regions.js';
import { appraiseResolution, summariseResolution } from '../../src/appraisal/resolution.js';
import {
  appraiseWalls,
  frictionFromWallLaw,
  frictionVelocity,
  heightForYPlus,
  precursorDepth,
  skinFriction,
  wallVerdict,
} from '../../src/appraisal/walls.js';
import { InputError } from '../../src/basis/errors.js';
import { brickMesh, planes } from './brick.js';

const filled = (n: number, value: number): Float64Array => new Float64Array(n).fill(value);

describe('resolution', () => {
  // By hand: k = 1 m2/s2 and epsilon = 5 m2/s3 give L = 0.2 m. Cells of 20 mm: GridRatio 10, share 0.775 (marginal);
  // of 40 mm: 5, 0.645; of 100 mm: 2, 0.38 (too coarse); of 16.7 mm: 12, 0.80 (resolves).
  it.each([
    [0.02, 10, 0.775, 'marginal'],
    [0.1, 2, 0.38, 'too coarse'],
    [0.2 / 13, 13, 0.81, 'resolves'],
    [0.039, 5.13, 0.65, 'marginal'],
  ] as const)('of cells of %d m agrees with a hand calculation', (width, ratio, share, verdict) => {
    const input = { volumes: filled(4, width ** 3), k: filled(4, 1), epsilon: filled(4, 5) };
    const fields = appraiseResolution(input);
    const summary = summariseResolution(input, fields);
    expect(fields.integralLength[2]).toBeCloseTo(0.2, 12);
    expect(fields.gridRatio[1]).toBeCloseTo(ratio, 2);
    expect(Math.abs((fields.share[0] as number) - share)).toBeLessThan(0.006);
    expect(summary.verdict).toBe(verdict);
    // 80 % needs L / CellWidth = 11.97: 16.7 mm, whatever the mesh has.
    expect(Math.abs((fields.wantedWidth[0] as number) / (0.2 / 11.97) - 1)).toBeLessThan(0.005);
    expect(Math.abs(summary.impliedCells / ((4 * width ** 3) / (0.2 / 11.97) ** 3) - 1)).toBeLessThan(0.015);
    expect(summary.words).toContain('mm');
  });

  it('finds Taylor and Kolmogorov lengths of the grid turbulence of Comte-Bellot & Corrsin (1971)', () => {
    // tU0/M = 42: lambda = 4.84 mm, eta = 0.29 mm (their table 4; eta from epsilon and nu).
    const input = { volumes: filled(1, 1e-9), k: filled(1, 1.5 * 0.222 ** 2), epsilon: filled(1, 0.474), nu: 1.5e-5 };
    const fields = appraiseResolution(input);
    expect(Math.abs((fields.taylorLength![0] as number) / 4.84e-3 - 1)).toBeLessThan(0.02);
    expect(Math.abs((fields.kolmogorovLength![0] as number) / 0.29e-3 - 1)).toBeLessThan(0.01);
    const summary = summariseResolution(input, fields);
    expect(summary.meanWidthOverKolmogorov).toBeCloseTo(1e-3 / (fields.kolmogorovLength![0] as number), 9);
    // 1 mm is 3.4 eta: nearly everything is carried.
    expect(fields.share[0]).toBeGreaterThan(0.95);
  });

  it('leaves quiet cells out and keeps their width', () => {
    const input = {
      volumes: filled(3, 1e-6),
      k: Float64Array.from([1, 1e-5, 0]),
      epsilon: Float64Array.from([5, 5, 0]),
    };
    const fields = appraiseResolution(input);
    expect([...fields.quiet]).toEqual([0, 1, 1]);
    expect(fields.gridRatio[1]).toBeNaN();
    expect(fields.wantedWidth[2]).toBeCloseTo(0.01, 12);
    const summary = summariseResolution(input, fields);
    expect(summary.quietVolume).toBeCloseTo(2 / 3, 12);
    expect(summary.ratioFrom10 + summary.ratio5to10 + summary.ratioBelow5).toBeCloseTo(1, 12);
    const none = { volumes: filled(2, 1), k: filled(2, 0), epsilon: filled(2, 0) };
    expect(summariseResolution(none, appraiseResolution(none)).verdict).toBe('quiet');
  });

  it('takes the viscous sublayer for quiet, not for a place that asks for ever smaller cells', () => {
    // Channel of Re_tau 547 (Hoyas & Jimenez 2006), wall units over half height: y+ 5: k+ 1.94, eps+ .146, L+ 18.5, L / eta
    // 11.4; y+ 1 (k ~ y^2, eps+ .2): k+ .08, L+ .11; y+ 50: 3.53, .0467, L+ 142, L / eta 66.
    const input = {
      volumes: filled(3, 1000),
      k: Float64Array.from([0.08, 1.94, 3.53]),
      epsilon: Float64Array.from([0.2, 0.146, 0.0467]),
      nu: 1,
    };
    const fields = appraiseResolution(input);
    expect([...fields.quiet]).toEqual([1, 0, 0]);
    expect(fields.wantedWidth[0]).toBeCloseTo(10, 9);
    expect((fields.integralLength[2] as number) / (fields.kolmogorovLength![2] as number)).toBeCloseTo(66, 0);
    const { nu: _nu, ...inviscid } = input;
    expect([...appraiseResolution(inviscid).quiet]).toEqual([1, 0, 0]);
  });

  it('refuses negative and infinite input by cell', () => {
    const input = { volumes: filled(2, 1), k: Float64Array.from([1, -1]), epsilon: filled(2, 1) };
    expect(() => appraiseResolution(input)).toThrow(InputError);
    expect(() => appraiseResolution(input)).toThrow('cell 1');
    expect(() => appraiseResolution({ ...input, k: filled(2, 1), wantedShare: 1 })).toThrow('between 0 and 1');
  });

  it('names the coarse end of a graded mesh as the worst box', () => {
    const xs = [...planes(0, 0.6, 60), ...planes(0.6, 1.2, 8).slice(1)];
    const { geometry } = brickMesh(xs, planes(0, 0.2, 10), planes(0, 0.2, 10));
    const n = geometry.cellVolumes.length;
    const input = { volumes: geometry.cellVolumes, k: filled(n, 1), epsilon: filled(n, 5) };
    const fields = appraiseResolution(input);
    const regions = worstRegions(input, fields, geometry.cellCentroids, 3);
    expect(regions[0]!.low[0]).toBeGreaterThan(0.55);
    expect(regions[0]!.summary.meanWidth).toBeGreaterThan(0.02);
    expect(regions[0]!.deficitShare).toBeGreaterThanOrEqual(regions[1]!.deficitShare);
    const whole = worstRegions(input, fields, geometry.cellCentroids, 100);
    expect(whole.reduce((sum, r) => sum + r.deficitShare, 0)).toBeGreaterThan(0.9);
    expect(whole.every((r) => r.summary.verdict !== 'resolves')).toBe(true);
  });

  it('compares two precursors', () => {
    const one = { volumes: filled(2, 8e-6), k: filled(2, 1), epsilon: filled(2, 5) };
    const two = { volumes: filled(2, 8e-6), k: filled(2, 0.5), epsilon: filled(2, 5) };
    const both = [one, two].map((input) => {
      const fields = appraiseResolution(input);
      return { input, fields, summary: summariseResolution(input, fields) };
    });
    const comparison = comparePrecursors(both[0]!, both[1]!);
    // L goes with k^1.5: 0.354; cells with its inverse cube: 22.6.
    expect(comparison.lengthRatio).toBeCloseTo(0.5 ** 1.5, 9);
    expect(Math.abs(comparison.impliedCellsRatio / 0.5 ** -4.5 - 1)).toBeLessThan(1e-9);
    expect(comparison.smallerVolume).toBe(1);
    expect(comparison.words).toContain('22.6 times more cells');
  });
});

describe('histograms', () => {
  it('weigh, bin and count what lies outside', () => {
    const histogram = weightedHistogram(
      Float64Array.from([0.5, 1.5, 1.6, 9, -1, Number.NaN]),
      Float64Array.from([1, 2, 3, 4, 5, 5]),
      { bins: 2, range: [0, 2] },
    );
    expect([...histogram.shares]).toEqual([0.05, 0.25]);
    expect([histogram.above, histogram.below, histogram.missing]).toEqual([0.2, 0.25, 0.25]);
    const log = weightedHistogram(Float64Array.from([1, 10, 100]), undefined, { bins: 2, scale: 'log' });
    expect(log.edges[1]).toBeCloseTo(10, 9);
    expect(quantiles(Float64Array.from([3, 1, 2, 4]), [0.5, 1])).toEqual([2, 4]);
    expect(weightedQuantile(Float64Array.from([3, 1, 2]), Float64Array.from([1, 1, 8]), 0.5)).toBe(2);
  });
});

describe('walls', () => {
  it('take y+ from skin-friction correlations', () => {
    // Flat plate, U = 10 m/s, x = 1 m, nu = 1.5e-5: Re = 6.67e5, Cf = 0.026 Re^(-1/7) = 0.003824, u_tau = 0.4373 m/s;
    // y+ = 1 at 34.3 um.
    const coefficient = skinFriction.flatPlate(1e1 / 1.5e-5);
    expect(coefficient).toBeCloseTo(0.003824, 5);
    const friction = frictionVelocity(10, coefficient);
    expect(friction).toBeCloseTo(0.4373, 3);
    expect(heightForYPlus(1, 1.5e-5, friction)).toBeCloseTo(34.3e-6, 7);
    // Dean against the channel of Moser, Kim & Mansour 1999 (Re_m = 13764: Cf 0.00650): 3.6 to 4.3 % high.
    expect(skinFriction.channel(13764) / 0.0065).toBeGreaterThan(1.03);
    expect(skinFriction.channel(13764) / 0.0065).toBeLessThan(1.045);
    // Blasius at Re = 1e4: 0.0079.
    expect(skinFriction.pipe(1e4)).toBeCloseTo(0.0079, 4);
  });

  it.each([
    [1, 1.0],
    [5, 4.832],
    [30, 13.528],
    [100, 16.544],
    [300, 19.627],
  ])('recover u_tau from U+ at y+ = %d of the channel of Moser, Kim & Mansour (1999)', (yPlus, uPlus) => {
    // u_tau = 1, nu = 1: distance y+, speed U+. Spalding's formula itself is 3 % off the data around y+ = 30.
    expect(Math.abs(frictionFromWallLaw(uPlus, yPlus, 1) - 1)).toBeLessThan(0.035);
  });

  it('know y+ and spacings of a channel mesh', () => {
    // Re_tau 590: u_tau = 1, nu = 1/590, half height 1; first cell centre at y+ = 1.18, cells 59 along x, 29.5 along z.
    const ys = [0, 0.004, 0.01, 0.02, 0.05, 0.2, 1, 2];
    const { mesh, geometry } = brickMesh(planes(0, 1, 10), ys, planes(0, 0.5, 10));
    const nu = 1 / 590;
    const velocity = new Float64Array(3 * mesh.cellCount);
    for (let i = 0; i < mesh.cellCount; i++) velocity[3 * i] = (geometry.cellCentroids[3 * i + 1] as number) / nu;
    const faces: number[] = [];
    for (let f = mesh.innerFaceCount; f < mesh.faceCount; f++) {
      if (geometry.faceCentroids[3 * f + 1] === 0) faces.push(f);
    }
    const walls = appraiseWalls(mesh, geometry, Int32Array.from(faces), velocity, nu);
    expect(walls.yPlus.length).toBe(100);
    // A coarser precursor that has no values below y+ = 20 and is interpolated to zero from there: read at that depth,
    // u_tau comes out right (U+ = 12.03 at y+ = 20, same data), read in the first cell it is far too small.
    const coarse = velocity.slice();
    for (let i = 0; i < mesh.cellCount; i++) {
      const plus = (geometry.cellCentroids[3 * i + 1] as number) / nu;
      coarse[3 * i] = plus < 20 ? (plus * 12.03) / 20 : 2.44 * Math.log(plus) + 4.72;
    }
    const onWall = Int32Array.from(faces);
    expect(appraiseWalls(mesh, geometry, onWall, coarse, nu).frictionSpeed[7]).toBeLessThan(0.8);
    const depth = precursorDepth(
      geometry,
      onWall,
      Float64Array.from([0.5, 0, 0.2, 0.5, 20 * nu, 0.2, 0.5, 0.4, 0.2]),
      Float64Array.from([0, 0, 0, 12, 0, 0, 17, 0, 0]),
      [0, 2],
    );
    expect(depth).toBeCloseTo(20 * nu, 12);
    const read = appraiseWalls(mesh, geometry, onWall, coarse, nu, depth);
    expect(Math.abs((read.frictionSpeed[7] as number) - 1)).toBeLessThan(0.04);
    expect(Math.abs((read.yPlus[7] as number) / 1.18 - 1)).toBeLessThan(0.04);
    expect(Math.abs((walls.yPlus[7] as number) / 1.18 - 1)).toBeLessThan(0.01);
    expect(Math.abs((walls.alongPlus[7] as number) / 59 - 1)).toBeLessThan(0.01);
    expect(Math.abs((walls.acrossPlus[7] as number) / 29.5 - 1)).toBeLessThan(0.01);
    expect(wallVerdict(1.18, 59, 29.5)).toContain('wall-resolved');
    expect(wallVerdict(80, 400, 400)).toContain('wall model');
    const still = appraiseWalls(mesh, geometry, Int32Array.from(faces), new Float64Array(3 * mesh.cellCount), nu);
    expect(still.yPlus[0]).toBe(0);
  });
});
