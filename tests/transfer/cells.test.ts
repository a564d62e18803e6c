import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import type { Dataset } from '../../src/basis/dataset.js';
import { buildMesh } from '../../src/mesh/build.js';
import { buildCellLocator, locateCell, windingOfCell } from '../../src/mesh/cell-locator.js';
import type { CellMesh, MeshGeometry } from '../../src/mesh/cell-mesh.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { cellLinearRange, prepareCellLinear } from '../../src/transfer/cell-linear.js';
import { pointLinearRange, preparePointLinear } from '../../src/transfer/cell-linear-points.js';
import type { SourceField } from '../../src/transfer/cell-linear-slopes.js';
import { type ConservativeOptions, conservativeRange, prepareConservative } from '../../src/transfer/conservative.js';
import { bodiesOf } from '../../src/transfer/conservative-cells.js';
import { addOverlap } from '../../src/transfer/conservative-overlap.js';
import {
  bendChannel,
  brickPolyhedra,
  hexBox,
  mixedBox,
  polyBox,
  prismBox,
  refinedBox,
  stepChannel,
  tetBox,
  voxelBox,
} from '../helpers/meshes.js';

interface Measured {
  readonly mesh: CellMesh;
  readonly geometry: MeshGeometry;
}

function measured(dataset: Dataset): Measured {
  const mesh = buildMesh(dataset);
  return { mesh, geometry: measureMesh(mesh) };
}

/** Cell values of a function by its value at the centroid. */
function sampled(m: Measured, components: number, f: (x: number, y: number, z: number) => number[]): SourceField {
  const values = new Float64Array(components * m.mesh.cellCount);
  const c = m.geometry.cellCentroids;
  for (let i = 0; i < m.mesh.cellCount; i++) values.set(f(c[3 * i]!, c[3 * i + 1]!, c[3 * i + 2]!), components * i);
  return { components, values };
}

function linear(source: Measured, fields: SourceField[], targets: Float64Array, options = {}) {
  const n = targets.length / 3;
  const out = {
    fields: fields.map((f) => new Float64Array(f.components * n)),
    outside: new Uint8Array(n),
    distance: new Float64Array(n),
  };
  // The plan travels to workers: nothing in it may be lost on the way.
  const plan = structuredClone(prepareCellLinear(source.mesh, source.geometry, fields, options));
  cellLinearRange(plan, targets, 0, n, out);
  return out;
}

function remap(source: Measured, target: Measured, fields: SourceField[], options: ConservativeOptions = {}) {
  const n = target.mesh.cellCount;
  const out = {
    fields: fields.map((f) => new Float64Array(f.components * n)),
    outside: new Uint8Array(n),
    distance: new Float64Array(n),
    covered: new Float64Array(n),
  };
  conservativeRange(structuredClone(prepareConservative(source, target, fields, options)), 0, n, out);
  return out;
}

const integral = (m: Measured, values: Float64Array): number => {
  // Compensated, so that the sum itself adds no error to what is measured.
  let s = 0;
  let lost = 0;
  for (let c = 0; c < m.mesh.cellCount; c++) {
    const v = values[c]! * m.geometry.cellVolumes[c]! - lost;
    const t = s + v;
    lost = t - s - v;
    s = t;
  }
  return s;
};

const randomPlaces = (n: number, seed: string, low = 0, high = 1): Float64Array => {
  const draw = seedrandom(seed);
  return Float64Array.from({ length: 3 * n }, () => low + (high - low) * draw());
};

const lattices: readonly [string, Dataset][] = [
  ['hexahedra', hexBox(5, 4, 3)],
  ['warped hexahedra', hexBox(5, 4, 3, { warp: 0.3, seed: 'a' })],
  ['warped tetrahedra', tetBox(3, 3, 3, { warp: 0.3, seed: 'b' })],
  ['warped prisms', prismBox(4, 3, 3, { warp: 0.3, seed: 'c' })],
  ['warped mixed', mixedBox(8, 3, 3, { warp: 0.3, seed: 'd' })],
  ['warped honeycomb', polyBox(4, 4, 3, { warp: 0.3, seed: 'e' })],
  ['refined 2:1', refinedBox(4, 2, 2, { warp: 0.3, seed: 'f' })],
];

describe('the cell that contains a place', () => {
  it.each(lattices)('%s: exactly one, also on corners, edges and faces', (_name, dataset) => {
    const { mesh, geometry } = measured(dataset);
    const locator = buildCellLocator(mesh);
    const places = [...randomPlaces(300, 'places')];
    // Places in general position, then vertices, face centres and edge middles away from the boundary.
    for (let f = 0; f < mesh.innerFaceCount; f += 3) {
      places.push(...geometry.faceCentroids.subarray(3 * f, 3 * f + 3));
      const p = 3 * mesh.facePoints[mesh.faceOffsets[f]!]!;
      const q = 3 * mesh.facePoints[mesh.faceOffsets[f]! + 1]!;
      const corner = [0, 1, 2].map((a) => mesh.points[p + a]!);
      if (corner.every((v) => v > 1e-9 && v < 1 - 1e-9)) places.push(...corner);
      const middle = [0, 1, 2].map((a) => 0.5 * (mesh.points[p + a]! + mesh.points[q + a]!));
      if (middle.every((v) => v > 1e-9 && v < 1 - 1e-9)) places.push(...middle);
    }
    for (let i = 0; i < places.length; i += 3) {
      const [x, y, z] = [places[i]!, places[i + 1]!, places[i + 2]!];
      let holders = 0;
      for (let c = 0; c < mesh.cellCount; c++) {
        holders += windingOfCell(locator.mesh, c, x, y, z);
      }
      expect(holders).toBe(1);
      expect(windingOfCell(locator.mesh, locateCell(locator, x, y, z), x, y, z)).toBe(1);
    }
    for (let c = 0; c < mesh.cellCount; c++) {
      const g = geometry.cellCentroids;
      expect(locateCell(locator, g[3 * c]!, g[3 * c + 1]!, g[3 * c + 2]!)).toBe(c);
    }
    expect(locateCell(locator, 0.5, 0.5, 1.0001)).toBe(-1);
    expect(locateCell(locator, -1e-9, 0.5, 0.5)).toBe(-1);
  });
});

describe('linear transfer from cells', () => {
  it.each(lattices)('%s: reproduces a linear vector field', (_name, dataset) => {
    const source = measured(dataset);
    const f = (x: number, y: number, z: number): number[] => [1 + 2 * x - y, 3 * y - z, x + y + z];
    const targets = randomPlaces(400, 'targets');
    for (const limited of [true, false]) {
      const out = linear(source, [sampled(source, 3, f)], targets, { limited });
      expect(Math.max(...out.outside)).toBe(0);
      for (let i = 0; i < 400; i++)
        f(targets[3 * i]!, targets[3 * i + 1]!, targets[3 * i + 2]!).forEach((v, k) => {
          expect(out.fields[0]![3 * i + k]!).toBeCloseTo(v, 11);
        });
    }
  });

  it('limited slopes give no new extrema inside and none below zero for quantities that may not; unlimited ones do', () => {
    const source = measured(hexBox(9, 9, 9, { warp: 0.2 }));
    const step = { ...sampled(source, 1, (x, y) => [x + 0.3 * y > 0.6 ? 1 : 0]), nonNegative: true };
    const targets = randomPlaces(4000, 'targets', 0.12, 0.88);
    const limited = linear(source, [step], targets).fields[0]!;
    expect(Math.min(...limited)).toBeGreaterThanOrEqual(0);
    expect(Math.max(...limited)).toBeLessThanOrEqual(1 + 1e-12);
    const free = linear(source, [step], targets, { limited: false }).fields[0]!;
    expect(Math.max(...free)).toBeGreaterThan(1.01);
    const whole = linear(source, [step], randomPlaces(4000, 'all')).fields[0]!;
    expect(Math.min(...whole)).toBeGreaterThanOrEqual(0);
  });

  const smooth = (x: number, y: number, z: number): number =>
    Math.sin(2 * Math.PI * x) * Math.cos(Math.PI * y) + Math.exp(-z) * x;
  it.each([
    ['hexahedra', 10, (n: number) => hexBox(n, n, n)],
    ['tetrahedra', 6, (n: number) => tetBox(n, n, n, { warp: 0.15 })],
    ['honeycomb', 6, (n: number) => polyBox(n, n, n)],
  ] as const)('%s: second order over refinements', (_name, start, build) => {
    const targets = randomPlaces(3000, 'order');
    const errors = (limited: boolean): number[] =>
      [start, 2 * start, 4 * start].map((n) => {
        const source = measured(build(n));
        const out = linear(source, [sampled(source, 1, (...p) => [smooth(...p)])], targets, { limited }).fields[0]!;
        let s = 0;
        for (let i = 0; i < 3000; i++)
          s += (out[i]! - smooth(targets[3 * i]!, targets[3 * i + 1]!, targets[3 * i + 2]!)) ** 2;
        return Math.sqrt(s / 3000);
      });
    const free = errors(false);
    expect(Math.abs(Math.log2(free[0]! / free[1]!) - 2)).toBeLessThan(0.2);
    expect(Math.abs(Math.log2(free[1]! / free[2]!) - 2)).toBeLessThan(0.2);
    // Limiting flattens extrema: a part of the error that falls faster than the second order.
    const limited = errors(true);
    expect(Math.log2(limited[0]! / limited[1]!)).toBeGreaterThan(1.8);
    expect(Math.abs(Math.log2(limited[1]! / limited[2]!) - 2)).toBeLessThan(0.25);
  });

  it('treats places outside as asked: nearest boundary point, one cell of extrapolation, a number', () => {
    const source = measured(hexBox(4, 4, 4));
    const field = sampled(source, 1, (x, y) => [10 * x + y]);
    const targets = Float64Array.of(1.1, 0.4, 0.4, 3, 0.4, 0.4, 0.3, 0.3, 0.3);
    const near = linear(source, [field], targets);
    expect([...near.outside]).toEqual([1, 1, 0]);
    expect(near.fields[0]![0]!).toBeCloseTo(10.4, 12);
    expect(near.distance[1]!).toBeCloseTo(2, 14);
    const far = linear(source, [field], targets, { outside: 'extrapolate' });
    expect([...far.outside]).toEqual([2, 2, 0]);
    expect(far.fields[0]![0]!).toBeCloseTo(11.4, 12);
    // At most one cell width (0.25) beyond the boundary.
    expect(far.fields[0]![1]!).toBeCloseTo(12.9, 12);
    const constant = linear(source, [field], targets, { outside: -7 });
    expect([...constant.outside]).toEqual([3, 3, 0]);
    expect(constant.fields[0]![0]!).toBe(-7);
  });
});

describe('linear transfer from points', () => {
  const transferred = (
    dataset: Dataset,
    f: (x: number, y: number, z: number) => number,
    targets: Float64Array,
    outside: 'nearest' | 'extrapolate' | number = 'nearest',
  ) => {
    const { mesh, geometry } = measured(dataset);
    const values = Float64Array.from({ length: dataset.points.length / 3 }, (_, p) =>
      f(dataset.points[3 * p]!, dataset.points[3 * p + 1]!, dataset.points[3 * p + 2]!),
    );
    const n = targets.length / 3;
    const out = { fields: [new Float64Array(n)], outside: new Uint8Array(n), distance: new Float64Array(n) };
    const plan = structuredClone(preparePointLinear(dataset, mesh, geometry, [{ components: 1, values }], { outside }));
    pointLinearRange(plan, targets, 0, n, out);
    return { ...out, values: out.fields[0]! };
  };
  const f = (x: number, y: number, z: number): number => 1 + 2 * x - 3 * y + 4 * z;

  it.each([...lattices, ['voxels', voxelBox(4, 3, 3)] as const])('%s: reproduces a linear field', (_name, dataset) => {
    const targets = randomPlaces(500, 'points');
    const out = transferred(dataset, f, targets);
    for (let i = 0; i < 500; i++) {
      expect(out.outside[i]).toBe(0);
      expect(out.values[i]!).toBeCloseTo(f(targets[3 * i]!, targets[3 * i + 1]!, targets[3 * i + 2]!), 12);
    }
  });

  it.each([
    ['hexahedra: x y z is trilinear', hexBox(3, 4, 2), (x: number, y: number, z: number) => x * y * z],
    ['wedges: x z is linear times linear', prismBox(3, 4, 2), (x: number, _y: number, z: number) => x * z],
  ])('%s and exact', (_name, dataset, product) => {
    const targets = randomPlaces(500, 'products');
    const out = transferred(dataset, product, targets);
    for (let i = 0; i < 500; i++)
      expect(out.values[i]!).toBeCloseTo(product(targets[3 * i]!, targets[3 * i + 1]!, targets[3 * i + 2]!), 13);
  });

  it('gives the values of the points at the points, and no new extrema', () => {
    // In a cell that its corners' mean does not see whole, tetrahedra overlap: moderate warps only.
    const moderate = [...lattices.slice(0, -1).map(([, dataset]) => dataset), refinedBox(4, 2, 2, { warp: 0.2 })];
    for (const dataset of moderate) {
      const rough = (x: number, y: number, z: number): number => Math.sin(40 * x + 30 * y * y + 20 * z);
      const at = transferred(dataset, rough, dataset.points);
      const used = new Set(buildMesh(dataset).facePoints);
      at.values.forEach((v, p) => {
        if (!used.has(p)) return;
        expect(v).toBeCloseTo(rough(dataset.points[3 * p]!, dataset.points[3 * p + 1]!, dataset.points[3 * p + 2]!), 9);
      });
    }
    const random = transferred(mixedBox(8, 3, 3), (x) => (x > 0.5 ? 1 : 0), randomPlaces(2000, 'random'));
    expect(Math.min(...random.values)).toBeGreaterThanOrEqual(-1e-13);
    expect(Math.max(...random.values)).toBeLessThanOrEqual(1 + 1e-13);
  });

  it('second order over refinements, and outside as asked', () => {
    const smooth = (x: number, y: number, z: number): number => Math.sin(4 * x) * Math.cos(3 * y) * Math.exp(z);
    const targets = randomPlaces(1500, 'refine');
    const errors = [4, 8, 16].map((n) => {
      const out = transferred(polyBox(n, n, n), smooth, targets).values;
      let s = 0;
      out.forEach((v, i) => {
        s += (v - smooth(targets[3 * i]!, targets[3 * i + 1]!, targets[3 * i + 2]!)) ** 2;
      });
      return Math.sqrt(s);
    });
    expect(Math.abs(Math.log2(errors[0]! / errors[1]!) - 2)).toBeLessThan(0.2);
    expect(Math.abs(Math.log2(errors[1]! / errors[2]!) - 2)).toBeLessThan(0.2);
    const places = Float64Array.of(1.1, 0.4, 0.4, 3, 0.4, 0.4);
    expect(transferred(hexBox(4, 4, 4), f, places).values[0]!).toBeCloseTo(f(1, 0.4, 0.4), 12);
    const on = transferred(hexBox(4, 4, 4), f, places, 'extrapolate');
    expect(on.values[0]!).toBeCloseTo(f(1.1, 0.4, 0.4), 12);
    expect(on.values[1]!).toBeCloseTo(f(1.25, 0.4, 0.4), 12);
    expect([...on.outside]).toEqual([2, 2]);
    expect(transferred(hexBox(4, 4, 4), f, places, 5).values[1]!).toBe(5);
  });
});

describe('overlaps', () => {
  it('of two cubes and of a cube with a tetrahedron equal the closed form', () => {
    const cube = measured(hexBox(1, 1, 1));
    const moved = measured(hexBox(1, 1, 1, { origin: [0.25, 0.5, -0.2] }));
    const sum = new Float64Array(4);
    const at = (a: Measured, b: Measured): Float64Array => {
      sum.fill(0);
      addOverlap(bodiesOf(a.mesh, a.geometry), 0, bodiesOf(b.mesh, b.geometry), 0, 0, 0, 0, sum);
      return sum;
    };
    expect(at(cube, moved)[0]!).toBeCloseTo(0.75 * 0.5 * 0.8, 15);
    [0.625, 0.75, 0.4].forEach((c, a) => {
      expect(sum[1 + a]! / sum[0]!).toBeCloseTo(c, 14);
    });
    // x + y + z <= 1.5 in the unit cube: 1.5^3/6 - 3 * 0.5^3/6 = 1/2.
    const corner = measured({
      ...tetBox(1, 1, 1),
      points: Float64Array.of(0, 0, 0, 1.5, 0, 0, 0, 1.5, 0, 0, 0, 1.5),
      cells: { types: Uint8Array.of(10), offsets: Int32Array.of(0, 4), connectivity: Int32Array.of(0, 1, 2, 3) },
    });
    expect(at(cube, corner)[0]!).toBeCloseTo(0.5, 15);
    expect(at(corner, cube)[0]!).toBeCloseTo(0.5, 15);
  });
});

describe('conservative transfer', () => {
  const pairs: readonly [string, Dataset, Dataset][] = [
    ['hexahedra to hexahedra', hexBox(5, 5, 5), hexBox(7, 4, 6)],
    ['hexahedra to warped hexahedra', hexBox(4, 4, 4), hexBox(5, 3, 5, { warp: 0.3 })],
    [
      'warped to warped hexahedra',
      hexBox(3, 3, 3, { warp: 0.3, seed: 'p' }),
      hexBox(4, 3, 4, { warp: 0.3, seed: 'q' }),
    ],
    ['hexahedra to tetrahedra', hexBox(5, 4, 5), tetBox(3, 3, 4, { warp: 0.2 })],
    ['tetrahedra to hexahedra', tetBox(3, 3, 3, { warp: 0.2 }), hexBox(4, 5, 4)],
    ['tetrahedra to polyhedra', tetBox(3, 2, 3, { warp: 0.2 }), polyBox(4, 4, 3)],
    ['warped polyhedra to mixed', polyBox(3, 3, 2, { warp: 0.3 }), mixedBox(4, 3, 3, { warp: 0.2 })],
    ['polyhedra to warped refined', brickPolyhedra(4, 3, 3), refinedBox(4, 2, 2, { warp: 0.2 })],
  ];
  const bump = (x: number, y: number, z: number): number[] => [
    Math.exp(-8 * ((x - 0.4) ** 2 + (y - 0.3) ** 2)) + z,
    Math.sin(9 * x) * y,
  ];

  it.each(pairs)('%s: keeps integrals to 1e-12 and covers every cell, with and without slopes', (_name, a, b) => {
    const source = measured(a);
    const target = measured(b);
    const both = sampled(source, 2, bump);
    for (const order of [1, 2] as const) {
      const out = remap(source, target, [both], { order });
      for (const covered of out.covered) expect(covered).toBeCloseTo(1, 11);
      for (let k = 0; k < 2; k++) {
        const before = integral(
          source,
          both.values.filter((_, i) => i % 2 === k),
        );
        const after = integral(
          target,
          out.fields[0]!.filter((_, i) => i % 2 === k),
        );
        expect(Math.abs(after / before - 1)).toBeLessThan(1e-12);
      }
    }
    // With slopes a linear field is exact: the mean over a cell is the value at its centroid.
    const f = (x: number, y: number, z: number): number[] => [1 + 2 * x - 3 * y + z];
    const out = remap(source, target, [sampled(source, 1, f)]).fields[0]!;
    const c = target.geometry.cellCentroids;
    out.forEach((v, i) => {
      expect(v).toBeCloseTo(f(c[3 * i]!, c[3 * i + 1]!, c[3 * i + 2]!)[0]!, 10);
    });
  });

  it('keeps the integral over a part: a target that reaches beyond the source is flagged with its covered share', () => {
    const source = measured(hexBox(4, 4, 4));
    const target = measured(hexBox(3, 2, 2, { lengths: [1.5, 1, 1], origin: [0.2, 0, 0] }));
    const field = sampled(source, 1, (x, y) => [1 + x * y]);
    const out = remap(source, target, [field]);
    let kept = 0;
    for (let i = 0; i < target.mesh.cellCount; i++) {
      const x = target.geometry.cellCentroids[3 * i]!;
      const share = Math.min(1, Math.max(0, (1 - (x - 0.25)) / 0.5));
      expect(out.covered[i]!).toBeCloseTo(share, 12);
      expect(out.outside[i]).toBe(share === 0 ? 1 : share < 1 ? 2 : 0);
      kept += out.covered[i]! * target.geometry.cellVolumes[i]! * out.fields[0]![i]!;
    }
    // The source over x > 0.2, cells of 0.25: the first column loses four fifths.
    const half = measured(hexBox(1, 1, 1, { origin: [0.2, 0, 0], lengths: [0.8, 1, 1] }));
    const whole = remap(source, half, [field]);
    expect(kept).toBeCloseTo(0.8 * whole.fields[0]![0]!, 13);
  });

  it('curved channel: cells at the curved walls are partly covered, the rest whole', () => {
    const source = measured(bendChannel(6, 4, 2));
    const target = measured(bendChannel(15, 6, 3));
    const out = remap(source, target, [sampled(source, 1, (x) => [1 + x])]);
    const total = integral(target, out.covered);
    expect(Math.min(...out.covered)).toBeGreaterThan(0.8);
    expect(Math.max(...out.covered)).toBeLessThan(1 + 1e-12);
    expect(total).toBeLessThan(integral(target, new Float64Array(target.mesh.cellCount).fill(1)));
    expect([...out.outside].some((o) => o === 2)).toBe(true);
    expect([...out.outside].some((o) => o === 0)).toBe(true);
  });

  it('there and back changes a field by the order of the method only: about 4 times less with half the cells', () => {
    const change = [8, 16].map((n) => {
      const coarse = measured(hexBox(n, n, 4));
      const fine = measured(hexBox(Math.round(1.6 * n), Math.round(1.4 * n), 6));
      const field = sampled(coarse, 1, (x, y) => [Math.sin(2 * Math.PI * x) * Math.cos(2 * Math.PI * y)]);
      const up = remap(coarse, fine, [field]);
      const back = remap(fine, coarse, [{ components: 1, values: up.fields[0]! }]).fields[0]!;
      expect(Math.abs(integral(coarse, back) - integral(coarse, field.values))).toBeLessThan(1e-13);
      return Math.sqrt(back.reduce((s, v, i) => s + (v - field.values[i]!) ** 2, 0) / back.length);
    });
    expect(change[0]! / change[1]!).toBeGreaterThan(3.2);
  });

  it('second order with slopes, first without', () => {
    const f = (x: number, y: number): number => Math.sin(2 * Math.PI * x) * Math.cos(2 * Math.PI * y);
    const settings = [{ order: 1 }, { order: 2, limited: false }, { order: 2 }] as const;
    const orders = settings.map((options) => {
      const errors = [16, 32, 64].map((n) => {
        const source = measured(hexBox(n, n, 1));
        const target = measured(hexBox(Math.round(1.3 * n), Math.round(1.7 * n), 2));
        // Cell means of the product of sines in closed form.
        const values = new Float64Array(source.mesh.cellCount);
        const s = Math.sin(Math.PI / n) / (Math.PI / n);
        for (let c = 0; c < values.length; c++) {
          const g = source.geometry.cellCentroids;
          values[c] = s * s * f(g[3 * c]!, g[3 * c + 1]!);
        }
        const out = remap(source, target, [{ components: 1, values }], options).fields[0]!;
        const sx = Math.sin(Math.PI / Math.round(1.3 * n)) / (Math.PI / Math.round(1.3 * n));
        const sy = Math.sin(Math.PI / Math.round(1.7 * n)) / (Math.PI / Math.round(1.7 * n));
        let e = 0;
        for (let c = 0; c < out.length; c++) {
          const g = target.geometry.cellCentroids;
          e += (out[c]! - sx * sy * f(g[3 * c]!, g[3 * c + 1]!)) ** 2;
        }
        return Math.sqrt(e / out.length);
      });
      return errors.slice(1).map((e, i) => Math.log2(errors[i]! / e));
    });
    for (const v of orders[0]!) expect(Math.abs(v - 1)).toBeLessThan(0.2);
    // Inside, means of central slopes converge with the third order; the rim with one-sided slopes leaves 2.4.
    for (const v of orders[1]!) expect(v).toBeGreaterThan(1.8);
    for (const v of orders[2]!) expect(v).toBeGreaterThan(1.8);
  });

  it('gives the same bits for any division into ranges', () => {
    const source = measured(tetBox(3, 3, 3, { warp: 0.2 }));
    const target = measured(stepChannel(4, 3));
    const fields = [sampled(source, 2, bump)];
    const plan = prepareConservative(source, target, fields);
    const n = target.mesh.cellCount;
    const room = () => ({
      fields: [new Float64Array(2 * n)],
      outside: new Uint8Array(n),
      distance: new Float64Array(n),
      covered: new Float64Array(n),
    });
    const one = room();
    conservativeRange(plan, 0, n, one);
    const many = room();
    for (let b = n - 1; b >= 0; b -= 7) conservativeRange(plan, Math.max(0, b - 6), b + 1, many);
    expect(many).toEqual(one);
  });
});
