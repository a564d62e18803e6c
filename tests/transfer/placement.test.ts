import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/basis/errors.js';
import type { Field } from '../../src/basis/fields.js';
import { randomStream } from '../../src/basis/random.js';
import { type Placement, placeCloud, rotationMatrix } from '../../src/transfer/placement.js';
import { addSnapshot, finishMean, startMean } from '../../src/transfer/snapshots.js';

const random = randomStream(5, 'placement');
const numbers = (n: number): Float64Array => Float64Array.from({ length: n }, random);
const none: Placement = { scale: 1, translate: [0, 0, 0], mirror: [], tile: [] };
const cloud = {
  points: numbers(30),
  fields: new Map<string, Field>([
    ['Velocity', { components: 3, values: numbers(30) }],
    ['VelocityCovariance', { components: 6, values: numbers(60) }],
    ['TurbulentEnergyKinetic', { components: 1, values: numbers(10) }],
    ['TurbulentDissipation', { components: 1, values: numbers(10) }],
    ['ViscosityKinematic', { components: 1, values: numbers(10) }],
  ]),
};
const close = (a: Float64Array | undefined, b: Float64Array | undefined): void => {
  expect(a?.length).toBe(b?.length);
  a?.forEach((value, i) => {
    expect(value).toBeCloseTo(b?.[i] as number, 12);
  });
};

describe('placement', () => {
  it('a quarter turn about z takes x to y, vectors and tensors with it', () => {
    const { points, fields } = placeCloud(cloud, {
      ...none,
      rotate: { axis: [0, 0, 1], degrees: 90, about: [0, 0, 0] },
    });
    expect([...points.subarray(0, 3)]).toEqual([-(cloud.points[1] as number), cloud.points[0], cloud.points[2]]);
    const u = cloud.fields.get('Velocity')?.values as Float64Array;
    expect([...(fields.get('Velocity')?.values.subarray(0, 3) ?? [])]).toEqual([-(u[1] as number), u[0], u[2]]);
    const r = cloud.fields.get('VelocityCovariance')?.values as Float64Array;
    // XX' = YY, XY' = -XY, XZ' = -YZ, YY' = XX, YZ' = XZ, ZZ' = ZZ.
    const expected = [r[3], -(r[1] as number), -(r[4] as number), r[0], r[2], r[5]];
    expect([...(fields.get('VelocityCovariance')?.values.subarray(0, 6) ?? [])]).toEqual(expected);
    expect(fields.get('TurbulentEnergyKinetic')).toBe(cloud.fields.get('TurbulentEnergyKinetic'));
  });

  it('a turn and its reverse about any axis and point are nothing', () => {
    const turn = { axis: [1, -2, 0.5], degrees: 37, about: [0.3, -1, 2] } as const;
    const back = placeCloud(cloud, { ...none, rotate: [turn, { ...turn, degrees: -37 }] });
    close(back.points, cloud.points);
    for (const [name, { values }] of cloud.fields) close(back.fields.get(name)?.values, values);
  });

  it('rotation matrices are orthogonal with determinant 1', () => {
    const m = rotationMatrix([1, 2, 3], 71);
    for (let r = 0; r < 3; r += 1) {
      for (let c = 0; c < 3; c += 1) {
        const product = [0, 1, 2].reduce((sum, k) => sum + (m[3 * r + k] as number) * (m[3 * c + k] as number), 0);
        expect(product).toBeCloseTo(r === c ? 1 : 0, 14);
      }
    }
  });

  it('a mirrored half model equals the full one', () => {
    const f = (x: number, y: number, z: number): number[] => [Math.cos(x) * y, Math.sin(x), x * x + z];
    const covariance = (x: number): number[] => [1 + x * x, x, x * x * x, 2, 3, 4];
    const half = numbers(60);
    const whole = Float64Array.from([...half, ...half.map((v, i) => (i % 3 === 0 ? -v : v))]);
    const of = (points: Float64Array, g: (x: number, y: number, z: number) => number[]): Float64Array =>
      Float64Array.from({ length: points.length / 3 }, (_, i) => i).reduce<number[]>((list, i) => {
        list.push(...g(points[3 * i] as number, points[3 * i + 1] as number, points[3 * i + 2] as number));
        return list;
      }, []) as unknown as Float64Array;
    const make = (points: Float64Array) => ({
      points,
      fields: new Map<string, Field>([
        [
          'Velocity',
          {
            components: 3,
            values: Float64Array.from(
              of(points, (x, y, z) => [Math.sin(x), f(x, y, z)[0] as number, f(x, y, z)[2] as number]),
            ),
          },
        ],
        ['VelocityCovariance', { components: 6, values: Float64Array.from(of(points, covariance)) }],
      ]),
    });
    const mirrored = placeCloud(make(half), { ...none, mirror: [{ plane: 'x', at: 0 }] });
    const full = make(whole);
    close(mirrored.points, full.points);
    close(mirrored.fields.get('Velocity')?.values, full.fields.get('Velocity')?.values);
    // Normal components and YZ are even in x, XY and XZ odd.
    close(mirrored.fields.get('VelocityCovariance')?.values, full.fields.get('VelocityCovariance')?.values);
  });

  it('tiles and sectors make copies; a whole circle of sectors closes', () => {
    const tiled = placeCloud(cloud, { ...none, tile: [{ translate: [2, 0, 0], times: 2 }] });
    expect(tiled.points.length).toBe(3 * cloud.points.length);
    expect(tiled.points[60]).toBeCloseTo((cloud.points[0] as number) + 4, 14);
    const sector = { axis: [0, 0, 1], about: [1, 1, 0], degrees: 60, times: 5 } as const;
    const round = placeCloud(cloud, { ...none, sector });
    expect(round.points.length).toBe(6 * cloud.points.length);
    const u = round.fields.get('Velocity')?.values as Float64Array;
    const sum = [0, 1, 2, 3, 4, 5].reduce((total, n) => total + (u[30 * n] as number), 0);
    expect(sum).toBeCloseTo(0, 12);
  });

  it('a velocity scale of 2 makes k 4 times, epsilon 8 times, and leaves viscosity', () => {
    const { fields } = placeCloud(cloud, none, 2);
    const ratio = (name: string): number =>
      (fields.get(name)?.values[3] as number) / (cloud.fields.get(name)?.values[3] as number);
    expect(ratio('Velocity')).toBeCloseTo(2, 14);
    expect(ratio('TurbulentEnergyKinetic')).toBeCloseTo(4, 14);
    expect(ratio('VelocityCovariance')).toBeCloseTo(4, 14);
    expect(ratio('TurbulentDissipation')).toBeCloseTo(8, 14);
    expect(ratio('ViscosityKinematic')).toBe(1);
  });
});

describe('mean of snapshots', () => {
  const snapshot = (u: readonly number[], k: number): Map<string, Field> =>
    new Map([
      ['Velocity', { components: 3, values: Float64Array.from(u) }],
      ['TurbulentEnergyKinetic', { components: 1, values: Float64Array.of(k) }],
    ]);
  it('adds the resolved covariances to the modelled ones (two snapshots by hand)', () => {
    const mean = startMean();
    addSnapshot(mean, snapshot([1, 0, 2], 0.3), 'a');
    addSnapshot(mean, snapshot([3, 2, 2], 0.5), 'b');
    const fields = finishMean(mean);
    expect([...(fields.get('Velocity')?.values ?? [])]).toEqual([2, 1, 2]);
    // Deviations are +-1 in u and v: uu = vv = uv = 1, k = 0.4 + 1, isotropic modelled part 2/3 x 0.4.
    const expected = [1 + 0.8 / 3, 1, 0, 1 + 0.8 / 3, 0, 0.8 / 3];
    close(fields.get('VelocityCovariance')?.values, Float64Array.from(expected));
    expect(fields.get('TurbulentEnergyKinetic')?.values[0]).toBeCloseTo(1.4, 14);
  });
  it('refuses snapshots of different meshes', () => {
    const mean = startMean();
    addSnapshot(mean, snapshot([1, 0, 2], 0.3), 'a');
    expect(() => addSnapshot(mean, snapshot([1, 0, 2, 1, 1, 1], 0.3), 'b.vtu')).toThrow(InputError);
  });
});
