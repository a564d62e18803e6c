import { expect, it } from 'vitest';
import { randomStream } from '../../src/basis/random.js';

it('repeats for one seed and label and differs for others', () => {
  const draw = (seed: number, label: string) => {
    const next = randomStream(seed, label);
    return Array.from({ length: 5 }, next);
  };
  expect(draw(1, 'phases')).toEqual(draw(1, 'phases'));
  expect(draw(1, 'phases')).not.toEqual(draw(1, 'directions'));
  expect(draw(1, 'phases')).not.toEqual(draw(2, 'phases'));
  expect(() => randomStream(1.5, 'phases')).toThrow(RangeError);
});

it('is uniform and streams are uncorrelated', () => {
  // Uniform on [0, 1): mean 1/2, variance 1/12, fourth central moment 1/80; bounds are five standard errors.
  const n = 40_000;
  const a = randomStream(20261201, 'modes/0');
  const b = randomStream(20261201, 'modes/1');
  let mean = 0;
  let variance = 0;
  let product = 0;
  for (let i = 0; i < n; i++) {
    const x = a() - 0.5;
    const y = b() - 0.5;
    mean += x / n;
    variance += (x * x) / n;
    product += (x * y) / n;
  }
  expect(Math.abs(mean)).toBeLessThan(5 * Math.sqrt(1 / 12 / n));
  expect(Math.abs(variance - 1 / 12)).toBeLessThan(5 * Math.sqrt((1 / 80 - 1 / 144) / n));
  expect(Math.abs(product)).toBeLessThan(5 * Math.sqrt(1 / 144 / n));
});
