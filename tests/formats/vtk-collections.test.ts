import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Dataset } from '../../src/basis/dataset.js';
import { findFormat, readDataset, writeDataset } from '../../src/formats/registry.js';
import { readSeries } from '../../src/formats/vtk/read.js';
import { hasPythonModule, runPython } from '../helpers/python.js';

const numbersOf = (dataset: Dataset, place: 'pointArrays' | 'cellArrays', name: string): number[] => {
  const array = dataset[place].find((entry) => entry.name === name);
  if (array === undefined) throw new Error(`no array ${name}`);
  return Array.from(array.load() as ArrayLike<number | bigint>, Number);
};

// Reference: files written by the VTK library, whose contents follow from the script.
describe.skipIf(!hasPythonModule('vtk'))('files of several pieces, parts and blocks', () => {
  let folder = '';
  const read = (name: string): Promise<Dataset> => readDataset(join(folder, name));
  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'eddygraft-vtk-collections-'));
    runPython([join(import.meta.dirname, '..', 'helpers', 'vtk-collections.py'), folder]);
  });
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  it('parts of a grid count no ghost cell twice and drop the points that only ghosts use', async () => {
    const grid = await read('parts.pvtu');
    expect(numbersOf(grid, 'cellArrays', 'middle')).toEqual([0.5, 1.5, 2.5, 3.5, 4.5]);
    expect(grid.cellArrays.map((array) => array.name)).toEqual(['middle']);
    expect(grid.remarks).toEqual(['1 ghost cells of piece 0 were left out', '1 ghost cells of piece 1 were left out']);
    // 4 planes of points for 3 cells, 3 planes for 2.
    expect(grid.points.length / 3).toBe(28);
    expect(grid.zones.map(({ name, cellBegin, cellEnd }) => [name, cellBegin, cellEnd])).toEqual([
      ['piece 0', 0, 3],
      ['piece 1', 3, 5],
    ]);
    const x = numbersOf(grid, 'pointArrays', 'x');
    const { cells } = grid;
    for (let cell = 0; cell < 5; cell++) {
      const corners = Array.from(cells?.connectivity.subarray(8 * cell, 8 * cell + 8) ?? []);
      const mean = corners.reduce((sum, point) => sum + (grid.points[3 * point] as number), 0) / 8;
      expect(mean).toBeCloseTo(cell + 0.5, 12);
      for (const point of corners) expect(x[point]).toBe(grid.points[3 * point]);
    }
  });

  it('hidden cells are left out', async () => {
    const grid = await read('hidden.vtu');
    expect(numbersOf(grid, 'cellArrays', 'middle')).toEqual([0.5, 2.5]);
    expect(grid.points.length / 3).toBe(16);
  });

  it('several pieces of one unstructured file follow one another', async () => {
    const grid = await read('several.vtu');
    // The library writes this grid, which it cannot split, once a piece.
    const once = [0.5, 1.5, 2.5, 3.5, 4.5];
    expect(numbersOf(grid, 'cellArrays', 'middle')).toEqual([...once, ...once, ...once]);
    expect(grid.zones.map((zone) => zone.pointEnd)).toEqual([24, 48, 72]);
    expect(Array.from(grid.cells?.connectivity.subarray(40, 48) ?? [])).toEqual([24, 25, 26, 27, 28, 29, 30, 31]);
  });

  it('several pieces of an image are the image', async () => {
    const [several, single] = [await read('several.vti'), await read('single.vti')];
    expect(several.zones).toEqual(single.zones);
    expect(several.points).toEqual(single.points);
    expect(several.cells).toEqual(single.cells);
    expect(numbersOf(several, 'pointArrays', 'RTData')).toEqual(numbersOf(single, 'pointArrays', 'RTData'));
  });

  for (const suffix of ['vti', 'vtr', 'vts']) {
    it(`structured parts are put together, overlapping or not (.p${suffix})`, async () => {
      const whole = await read(`whole.${suffix}`);
      for (const kind of ['tiles', 'overlap']) {
        const joined = await read(`${kind}.p${suffix}`);
        expect(joined.zones[0]?.structure, kind).toEqual(whole.zones[0]?.structure);
        expect(joined.points, kind).toEqual(whole.points);
        expect(joined.pointType, kind).toEqual(whole.pointType);
        expect(joined.cells, kind).toEqual(whole.cells);
        expect(joined.cellArrays.map((array) => array.name)).toEqual(['id']);
        expect(numbersOf(joined, 'cellArrays', 'id'), kind).toEqual(numbersOf(whole, 'cellArrays', 'id'));
        for (const { name } of whole.pointArrays) {
          expect(numbersOf(joined, 'pointArrays', name), kind).toEqual(numbersOf(whole, 'pointArrays', name));
        }
        const path = join(folder, `copy-${kind}.${suffix}`);
        await writeDataset(path, { mesh: joined, pointArrays: [], cellArrays: [], notes: new Map() });
        expect((await readDataset(path)).points).toEqual(whole.points);
      }
    });
  }

  it('a surface has its vertices, lines, polygons and strips in the order of its cell data', async () => {
    const surface = await read('surface.vtp');
    expect(Array.from(surface.cells?.types ?? [])).toEqual([2, 2, 4, 4, 5, 9, 7, 6]);
    expect(Array.from(surface.cells?.offsets ?? [])).toEqual([0, 1, 3, 5, 8, 11, 15, 20, 25]);
    expect(Array.from(surface.cells?.connectivity.subarray(8, 15) ?? [])).toEqual([0, 1, 2, 3, 4, 5, 6]);
    expect(numbersOf(surface, 'cellArrays', 'id')).toEqual([0, 10, 20, 30, 40, 50, 60, 70]);
  });

  it('blocks become zones with their names, structured ones with their structure', async () => {
    const blocks = await read('blocks.vtm');
    expect(blocks.zones.map((zone) => zone.name)).toEqual(['inlet', 'body/duct', 'body/bend']);
    expect(blocks.zones.map((zone) => zone.structure?.kind)).toEqual([undefined, undefined, 'curvilinear']);
    expect(blocks.zones.map((zone) => zone.cellEnd)).toEqual([3, 5, 35]);
    const middle = numbersOf(blocks, 'cellArrays', 'middle');
    expect(middle.slice(0, 7)).toEqual([0.5, 1.5, 2.5, 10.5, 11.5, 0, -1]);
    expect(blocks.remarks).toEqual(['array id is not in every piece and was left out']);
    const last = blocks.cells?.connectivity.subarray(-8) ?? [];
    expect(Math.min(...last)).toBeGreaterThanOrEqual(blocks.zones[2]?.pointBegin as number);
    expect(Math.max(...last)).toBe(blocks.points.length / 3 - 1);
  });

  it('a series lists its times in order and reads the last', async () => {
    const path = join(folder, 'series.pvd');
    expect(readSeries(path)).toEqual([
      { time: 0.25, files: [join(folder, 'hidden.vtu')] },
      { time: 0.5, files: [join(folder, 'part1.vtu'), join(folder, 'several.vtu')] },
    ]);
    const last = await readDataset(path);
    expect(last.time).toBe(0.5);
    expect(last.cells?.types.length).toBe(2 + 3 * 5);
  });

  it('text and time of the field data come along and are carried through', async () => {
    for (const mode of ['ascii', 'binary', 'appended']) {
      const grid = await read(`notes-${mode}.vtu`);
      expect(Object.fromEntries(grid.notes), mode).toEqual({
        Provenance: 'first\nsecond <&>',
        empty: '',
        letters: '\u00e9\u03bb',
      });
      expect(grid.time, mode).toBe(2.5);
      expect(grid.remarks).toEqual(['field data residuals are neither text nor a time and were left out']);
    }
    const mesh = await read('notes-ascii.vtu');
    const path = join(folder, 'carried.vtu');
    const notes = new Map([['letters', 'new']]);
    await writeDataset(path, { mesh, pointArrays: [], cellArrays: [], notes });
    const copy = await readDataset(path);
    expect(Object.fromEntries(copy.notes)).toEqual({ Provenance: 'first\nsecond <&>', empty: '', letters: 'new' });
    expect(copy.time).toBe(2.5);
    const seen = JSON.parse(runPython([join(import.meta.dirname, '..', 'helpers', 'vtk-open.py'), path])) as {
      readonly notes: unknown;
    };
    expect(seen.notes).toEqual({ Provenance: 'first\nsecond <&>', empty: '', letters: 'new' });
  });

  it('formats are found by content, whatever the extension', async () => {
    expect((await findFormat(join(folder, 'parts.pvtu'))).id).toBe('pvtu');
    expect((await findFormat(join(folder, 'surface.vtp'))).id).toBe('vtp');
  });
});
