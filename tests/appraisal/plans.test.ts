import { describe, expect, it } from 'vitest';
import { homogeneousAxes, middleCells } from '../../src/appraisal/homogeneous.js';
import { monitorsCsv, planMonitors } from '../../src/appraisal/monitors.js';
import { courantRates, fluctuationRates, planRun } from '../../src/appraisal/run-plan.js';
import { brickMesh, planes } from './brick.js';

const filled = (n: number, value: number): Float64Array => new Float64Array(n).fill(value);

describe('run plan', () => {
  const { mesh, geometry } = brickMesh(planes(0, 2, 20), planes(0, 1, 20), planes(0, 0.5, 20));
  const n = mesh.cellCount;
  const velocity = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) velocity.set([8, 0, 2], 3 * i);

  it('counts Courant numbers as sum |u_i| / width_i on bricks', () => {
    const rates = courantRates(mesh, geometry, velocity);
    expect(rates[123]).toBeCloseTo(8 / 0.1 + 2 / 0.025, 9);
    const swing = fluctuationRates(geometry.widthTensors, filled(n, 1.5));
    expect(swing[5]).toBeCloseTo(Math.sqrt(1 / 0.01 + 1 / 0.0025 + 1 / 0.000625), 9);
  });

  it('agrees with a hand calculation', () => {
    // k = 0.24, u' = 0.4; epsilon = 1.2: L = 0.0980 m, k / epsilon = 0.2 s.
    const input = {
      rates: courantRates(mesh, geometry, velocity),
      centroids: geometry.cellCentroids,
      volumes: geometry.cellVolumes,
      velocity,
      k: filled(n, 0.24),
      epsilon: filled(n, 1.2),
    };
    const plan = planRun({ ...input, courantMax: 0.8, courantP99: 0.8, secondsPerStep: 0.5 });
    expect(plan.timeStep).toBeCloseTo(0.8 / 160, 12);
    expect(plan.bulkSpeed).toBeCloseTo(Math.hypot(8, 2), 9);
    // Along (8, 2): span of the cell centres 1.9 and 0.475.
    const span = (8 * 1.9 + 2 * 0.475) / Math.hypot(8, 2);
    expect(plan.flowThroughTime).toBeCloseTo(span / Math.hypot(8, 2), 9);
    expect(plan.turnoverTime).toBeCloseTo(0.2, 9);
    expect(plan.transient).toBeCloseTo(5 * 0.2, 9);
    const passing2 = 68 + 0.16;
    const integral = (0.43 * 0.24 ** 1.5) / 1.2 / Math.sqrt(passing2);
    expect(plan.integralTime).toBeCloseTo(integral, 9);
    // error^2 = 2 T_int / T (u' / U)^2 and 2 T_int / T.
    expect(plan.averagingForMean).toBeCloseTo((2 * integral * (0.16 / passing2)) / 1e-4, 9);
    expect(plan.averagingForVariance).toBeCloseTo((2 * integral) / 0.0025, 9);
    expect(plan.steps).toBe(Math.ceil((plan.transient + plan.averaging) / plan.timeStep));
    expect(plan.costHours).toBeCloseTo((plan.steps * 0.5) / 3600, 9);
    const gusty = planRun({ ...input, fluctuationRates: fluctuationRates(geometry.widthTensors, input.k) });
    expect(gusty.timeStep).toBeLessThan(plan.timeStep);
    expect(() => planRun({ ...input, meanError: 0 })).toThrow('above zero');
    expect(() => planRun({ ...input, rates: filled(n, 0) })).toThrow('zero everywhere');
  });
});

describe('monitor plan', () => {
  // A wake along x behind x = 0.5 in the middle of the duct, a wall at y = 0.
  const { mesh, geometry } = brickMesh(planes(0, 4, 80), planes(0, 1, 20), planes(0, 0.2, 4));
  const n = mesh.cellCount;
  const at = (i: number, a: number): number => geometry.cellCentroids[3 * i + a] as number;
  const k = Float64Array.from({ length: n }, (_, i) =>
    at(i, 0) < 0.5 ? 0.01 : 0.01 + Math.exp(-(((at(i, 1) - 0.5) / 0.1) ** 2) - (at(i, 0) - 0.5) / 3),
  );
  const velocity = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) velocity[3 * i] = 10;
  const input = {
    centroids: geometry.cellCentroids,
    velocity,
    k,
    epsilon: k.map((x) => x ** 1.5 / 0.1),
    cellWidth: geometry.cellVolumes.map(Math.cbrt),
    shearRate: Float64Array.from(
      { length: n },
      (_, i) => Math.abs(at(i, 1) - 0.5) * Math.exp(-(((at(i, 1) - 0.5) / 0.1) ** 2)),
    ),
    wallDistance: Float64Array.from({ length: n }, (_, i) => at(i, 1)),
    direction: [1, 0, 0] as const,
  };
  const monitors = planMonitors(input, {
    lines: [{ name: 'rake', from: [3, 0.2, 0.1], to: [3, 0.8, 0.1], count: 5 }],
    points: [{ name: 'hub, "old"', at: [1, 0.5, 0.1] }],
  });

  it('follows the wake, the shear layers and the wall', () => {
    const of = (kind: string): typeof monitors => monitors.filter((m) => m.kind === kind);
    expect(of('wake').length).toBeGreaterThanOrEqual(8);
    for (const m of of('wake')) {
      expect(Math.abs(m.position[1] - 0.5)).toBeLessThan(0.06);
      expect(m.position[0]).toBeGreaterThan(0.5);
    }
    expect(of('shear').length).toBe(8);
    for (const m of of('shear')) expect(Math.abs(Math.abs(m.position[1] - 0.5) - 0.075)).toBeLessThan(0.06);
    expect(of('wall').length).toBe(6);
    for (const m of of('wall')) expect(m.position[1]).toBeLessThan(0.1);
    for (const a of of('shear')) {
      for (const b of of('shear')) {
        if (a === b) continue;
        expect(Math.hypot(...a.position.map((x, i) => x - (b.position[i] as number)))).toBeGreaterThanOrEqual(
          0.2 - 1e-9,
        );
      }
    }
  });

  it('stays in the middle of a direction along which nothing varies', () => {
    expect(homogeneousAxes(geometry, k)).toEqual([2]);
    const eligible = middleCells(geometry, [2]);
    // Four layers: the two that touch the middle.
    expect(eligible.reduce((sum, x) => sum + x, 0)).toBe(n / 2);
    for (const m of planMonitors({ ...input, eligible })) expect(Math.abs(m.position[2] - 0.1)).toBeLessThan(0.026);
  });

  it('says what each probe can see', () => {
    const m = monitors.find((probe) => probe.kind === 'point')!;
    // CellWidth 0.05 m: pi / 0.05 = 62.83 rad/m; 10 / 0.1 = 100 Hz; half of 1 / (2 f_c): 2.5 ms.
    expect(m.cutoffWaveNumber).toBeCloseTo(62.83, 2);
    expect(m.cutoffFrequency).toBeCloseTo(100, 9);
    expect(m.samplingInterval).toBeCloseTo(2.5e-3, 9);
    expect(m.taylorHolds).toBe(true);
    expect(monitors.filter((probe) => probe.kind === 'line').map((probe) => probe.name)).toEqual([
      'rake-01',
      'rake-02',
      'rake-03',
      'rake-04',
      'rake-05',
    ]);
  });

  it('writes them as CSV', () => {
    const lines = monitorsCsv(monitors).trimEnd().split('\n');
    expect(lines.length).toBe(monitors.length + 1);
    expect(lines[0]).toMatch(/^Monitor,Kind,CoordinateX,/);
    expect(lines[lines.length - 1]).toMatch(/^"hub, ""old""",point,1,0.5,0.1,10,/);
  });

  it('refuses a line of one probe', () => {
    expect(() => planMonitors(input, { lines: [{ name: 'x', from: [0, 0, 0], to: [1, 0, 0], count: 1 }] })).toThrow(
      'two',
    );
  });
});
