import { expect } from 'vitest';
import type { Dataset } from '../../src/basis/dataset.js';

/** What the VTK library says a file holds (vtk-generate.py). */
export interface Truth {
  readonly files: readonly string[];
  readonly points: readonly (readonly number[])[];
  readonly cells: readonly { readonly type: number; readonly points: readonly number[] }[];
  readonly arrays: Readonly<Record<string, readonly number[]>>;
}

const polyhedron = 42;
const byNumber = (a: number, b: number): number => a - b;

/** Points, cells and arrays must be the library's, to the last bit. */
export function expectTruth(found: Dataset, truth: Truth, file: string): void {
  const { points, cells, arrays } = truth;
  const round = found.pointType === 'Float32' ? Math.fround : Number;
  expect(Array.from(found.points, round), file).toEqual(points.flat().map(round));
  expect(found.cells?.types.length, file).toBe(cells.length);
  // The library calls cells of images and rectilinear grids voxels; here they are hexahedra of the same corners.
  const kind = found.zones[0]?.structure?.kind;
  const isAxisAligned = kind === 'image' || kind === 'rectilinear';
  cells.forEach((cell, i) => {
    expect(found.cells?.types[i], file).toBe(isAxisAligned ? 12 : cell.type);
    const [begin, end] = [found.cells?.offsets[i], found.cells?.offsets[i + 1]];
    const corners = Array.from(found.cells?.connectivity.subarray(begin, end) ?? []);
    if (cell.type === polyhedron) {
      expect(corners.sort(byNumber), file).toEqual([...cell.points].sort(byNumber));
    } else if (isAxisAligned) {
      const [a, b, c, d, e, f, g, h] = cell.points;
      expect(corners, file).toEqual([a, b, d, c, e, f, h, g]);
    } else {
      expect(corners, file).toEqual(cell.points);
    }
  });
  const named = [
    ...found.pointArrays.map((array) => ({ place: `point:${array.name}`, array })),
    ...found.cellArrays.map((array) => ({ place: `cell:${array.name}`, array })),
  ];
  expect(
    named.map(({ place }) => place),
    file,
  ).toEqual(Object.keys(arrays));
  for (const { place, array } of named) {
    expect(Array.from(array.load() as ArrayLike<number | bigint>, Number), `${file} ${place}`).toEqual(arrays[place]);
  }
}
