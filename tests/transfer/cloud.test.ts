import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/basis/errors.js';
import { randomStream } from '../../src/basis/random.js';
import {
  type CloudField,
  type CloudOptions,
  cloudTransferRange,
  prepareCloudTransfer,
} from '../../src/transfer/cloud.js';

const random = randomStream(11, 'clouds');
const uniform = (n: number, sides: readonly number[] = [1, 1, 1]): Float64Array =>
  Float64Array.from({ length: 3 * n }, (_, i) => random() * (sides[i % 3] as number));

function transfer(points: Float64Array, fields: readonly CloudField[], targets: Float64Array, options: CloudOptions) {
  const n = targets.length / 3;
  const out = {
    fields: fields.map(({ components }) => new Float64Array(components * n)),
    outside: new Uint8Array(n),
    distance: new Float64Array(n),
  };
  cloudTransferRange(prepareCloudTransfer(points, options), fields, targets, 0, n, out);
  return out;
}

const linearAt = (p: Float64Array, i: number): number =>
  2 + 3 * (p[3 * i] as number) - 1000 * (p[3 * i + 1] as number) + 0.5 * (p[3 * i + 2] as number);
const sampled = (points: Float64Array, f = linearAt): CloudField => ({
  components: 1,
  values: Float64Array.from({ length: points.length / 3 }, (_, i) => f(points, i)),
});

function lattice(n: number): Float64Array {
  return Float64Array.from({ length: 3 * n ** 3 }, (_, at) => {
    const i = Math.floor(at / 3);
    return ([i % n, Math.floor(i / n) % n, Math.floor(i / n ** 2)][at % 3] as number) / (n - 1);
  });
}

describe('linear', () => {
  it.each([
    ['a random cloud', uniform(2000), {}],
    ['a lattice', lattice(12), {}],
    ['a boundary-layer cloud 1000:1', uniform(2000, [1, 1e-3, 1]), {}],
    ['a plane section', uniform(800), { constantAxes: [2] }],
    ['a profile', uniform(50), { constantAxes: [0, 2] }],
  ] as const)('reproduces a linear field inside %s to 1e-12 of its range', (_, points, options) => {
    const constant: readonly number[] = 'constantAxes' in options ? options.constantAxes : [];
    const f = (p: Float64Array, i: number): number =>
      [3, -1000, 0.5].reduce((sum, a, c) => sum + (constant.includes(c) ? 0 : a * (p[3 * i + c] as number)), 2);
    const side = Math.max(...points.filter((_value, i) => i % 3 === 1));
    const targets = uniform(3000, [1, side, 1]);
    const field = sampled(points, f);
    const out = transfer(points, [field], targets, { method: 'linear', ...options });
    const range = Math.max(...field.values) - Math.min(...field.values);
    let inside = 0;
    for (let i = 0; i < out.outside.length; i += 1) {
      if (out.outside[i] !== 0) continue;
      inside += 1;
      expect(Math.abs((out.fields[0]?.[i] as number) - f(targets, i)) / range).toBeLessThan(1e-12);
    }
    expect(inside).toBeGreaterThan(1500);
  });

  it('gives the same for a target whatever the range it is computed in', () => {
    const points = uniform(3000);
    const targets = uniform(2048);
    const fields = [sampled(points)];
    const whole = transfer(points, fields, targets, { method: 'linear' });
    const plan = prepareCloudTransfer(points, { method: 'linear' });
    const parts = { fields: [new Float64Array(2048)], outside: new Uint8Array(2048), distance: new Float64Array(2048) };
    for (const [begin, end] of [
      [1024, 2048],
      [0, 512],
      [512, 1024],
    ] as const)
      cloudTransferRange(plan, fields, targets, begin, end, parts);
    expect(parts.fields[0]).toEqual(whole.fields[0]);
  });

  it('interpolates in the logarithm where asked, and never below zero', () => {
    const points = Float64Array.of(0, 0, 0, 0, 1, 0);
    const values = Float64Array.of(1, 100);
    const targets = Float64Array.of(0, 0.5, 0, 0, 2, 0);
    const out = transfer(
      points,
      [
        { components: 1, values, logarithmic: true },
        { components: 1, values: Float64Array.of(3, 1), nonNegative: true },
      ],
      targets,
      { method: 'linear', constantAxes: [0, 2], outside: 'extrapolate' },
    );
    expect(out.fields[0]?.[0]).toBeCloseTo(10, 12);
    expect(out.fields[1]?.[1]).toBe(0);
    expect([...out.outside]).toEqual([0, 2]);
  });
});

describe('inverse distance', () => {
  it('is exact at coincident points and within the data elsewhere', () => {
    const points = uniform(500);
    const field = sampled(points);
    const out = transfer(points, [field], Float64Array.from([...points, ...uniform(100)]), {
      method: 'inverse-distance',
    });
    expect([...(out.fields[0] as Float64Array).subarray(0, 500)]).toEqual([...field.values]);
    const [low, high] = [Math.min(...field.values), Math.max(...field.values)];
    for (const value of (out.fields[0] as Float64Array).subarray(500)) {
      expect(value).toBeGreaterThanOrEqual(low);
      expect(value).toBeLessThanOrEqual(high);
    }
  });
});

describe('outside', () => {
  const points = lattice(4);
  const field = sampled(points);
  const targets = Float64Array.of(0.5, 0.5, 0.5, 0.5, 1.1, 0.5, 0.5, 9, 0.5);
  it('nearest takes the nearest point', () => {
    const out = transfer(points, [field], targets, { method: 'linear', outside: 'nearest' });
    expect([...out.outside]).toEqual([0, 1, 1]);
    expect(field.values).toContain(out.fields[0]?.[1]);
    expect(out.distance[0]).toBe(0);
    expect(out.distance[2]).toBeGreaterThan(8);
  });
  it('a number is written as it is', () => {
    const out = transfer(points, [field], targets, { method: 'linear', outside: -7 });
    expect([...out.outside]).toEqual([0, 3, 3]);
    expect(out.fields[0]?.[2]).toBe(-7);
  });
  it('extrapolation is linear near the cloud and limited to one cell beyond it', () => {
    const out = transfer(points, [field], targets, { method: 'linear', outside: 'extrapolate' });
    expect([...out.outside]).toEqual([0, 2, 2]);
    expect(out.fields[0]?.[1]).toBeCloseTo(linearAt(targets, 1), 9);
    expect(Math.abs((out.fields[0]?.[2] as number) - linearAt(targets, 1))).toBeLessThan(1000);
  });
  it('next to a wall the value lies between the wall and the cloud', () => {
    // Cloud centres from 0.1 on, walls at y = 0 given as points of value 0; the target is beyond the last centre in x.
    const own = lattice(4).map((v) => 0.1 + 0.8 * v);
    const walls = Float64Array.from({ length: 3 * 36 }, (_, at) => {
      const i = Math.floor(at / 3);
      return [0.1 + 0.16 * (i % 6), 0, 0.1 + 0.16 * Math.floor(i / 6)][at % 3] as number;
    });
    const all = Float64Array.from([...own, ...walls]);
    const values = Float64Array.from({ length: all.length / 3 }, (_, i) => (i < own.length / 3 ? 1 : 0));
    const at = Float64Array.of(0.99, 0.06, 0.5);
    const out = transfer(all, [{ components: 1, values }], at, { method: 'linear', own: own.length / 3 });
    expect(out.outside[0]).toBe(1);
    // 0 on the wall, 1 at y = 0.1, linear between.
    expect(out.fields[0]?.[0]).toBeCloseTo(0.6, 12);
  });
});

describe('clouds that cannot serve', () => {
  it.each([
    ['no points', new Float64Array(0), { method: 'nearest' }, /0 points/],
    ['three points in space', uniform(3), { method: 'linear' }, /3 points and linear needs 4/],
    ['fewer than the neighbours', uniform(5), { method: 'inverse-distance' }, /8 neighbours/],
    ['a plane', uniform(50, [1, 1, 0]), { method: 'linear' }, /in a plane.*extrude/],
    ['a line', Float64Array.from({ length: 30 }, (_, i) => Math.floor(i / 3)), { method: 'linear' }, /on a line/],
    ['one place', new Float64Array(30), { method: 'linear' }, /at one place/],
    ['a section on a line', uniform(50, [1, 0, 1]), { method: 'linear', constantAxes: [2] }, /on one line/],
    [
      'a profile with a place twice',
      Float64Array.of(0, 1, 0, 0, 1, 0),
      { method: 'linear', constantAxes: [0, 2] },
      /both lie at y = 1/,
    ],
  ] as const)('%s: one clear sentence', (_, points, options, message) => {
    expect(() => prepareCloudTransfer(points, options)).toThrow(InputError);
    expect(() => prepareCloudTransfer(points, options)).toThrow(message);
  });
});
