import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { readCase } from '../../src/case/read-case.js';

const sample = (path: string): string => fileURLToPath(new URL(`../../samples/${path}`, import.meta.url));

interface Profile {
  readonly y: Float64Array;
  readonly height: Float64Array;
  readonly u: Float64Array;
  readonly k: Float64Array;
  readonly epsilon: Float64Array;
}

describe('channel sample', () => {
  it('has a profile in balance that follows the law of the wall', async () => {
    const { solveChannel } = (await import(sample('channel/profile.mjs'))) as {
      solveChannel: (reynolds: number) => Profile;
    };
    const { y, u, k, epsilon } = solveChannel(395);
    for (let i = 1; i < y.length - 1; i++) {
      // Identity: in a channel the total shear stress falls linearly, (1 + nu_t) dU/dy = 1 - y / h.
      const nut = (j: number): number => (0.09 * k[j]! * k[j]!) / epsilon[j]!;
      const between = 0.5 * (y[i]! + y[i + 1]!);
      const slope = (u[i + 1]! - u[i]!) / (y[i + 1]! - y[i]!);
      const stress = (1 + 0.5 * (nut(i) + nut(i + 1))) * slope;
      expect(Math.abs(stress - (1 - between / 395))).toBeLessThan(0.01);
      // Law of the wall, von Karman constant 0.41 and constant 5.0 (Pope 2000, section 7.1.4), 0.3 < y / h left out.
      if (y[i]! > 40 && y[i]! < 118) expect(Math.abs(u[i]! - (Math.log(y[i]!) / 0.41 + 5))).toBeLessThan(0.6);
      if (y[i]! < 1) expect(u[i]! / y[i]!).toBeCloseTo(1, 1);
    }
  });
});

describe('louvre sample', () => {
  it('has a plane mesh without gaps, every cell the right way round', async () => {
    const { planeMesh } = (await import(sample('louvre/mesh.mjs'))) as {
      planeMesh: () => { points: number[]; cells: number[][] };
    };
    const { points, cells } = planeMesh();
    let area = 0;
    for (const corners of cells) {
      let twice = 0;
      corners.forEach((p, at) => {
        const q = corners[(at + 1) % corners.length]!;
        twice += points[2 * p]! * points[2 * q + 1]! - points[2 * q]! * points[2 * p + 1]!;
      });
      expect(twice).toBeGreaterThan(0);
      area += twice / 2;
    }
    // Bay less slat: 0.8 x 0.4 m less a bar of 64 x 16 mm with two half circles (as polygons of 96 sides: a little less).
    const slat = 0.064 * 0.016 + Math.PI * 0.008 ** 2;
    expect(Math.abs(area - (0.32 - slat))).toBeLessThan(0.01 * slat);
  });
});

it.each(['channel', 'louvre'])('the case of the %s sample is valid', async (name) => {
  const found = await readCase(sample(`${name}/case.yaml`));
  expect(found.output.file).toContain(`${name}-start.vtu`);
});
