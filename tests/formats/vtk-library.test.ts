import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { InputError } from '../../src/basis/errors.js';
import { readDataset, writeDataset } from '../../src/formats/registry.js';
import { hasPythonModule, runPython } from '../helpers/python.js';

// Reference: files written by the VTK library itself.
interface Truth {
  readonly files: readonly string[];
  readonly points: readonly (readonly number[])[];
  readonly cells: readonly { readonly type: number; readonly points: readonly number[] }[];
  readonly arrays: Readonly<Record<string, readonly number[]>>;
}

describe.skipIf(!hasPythonModule('vtk'))('files written by the VTK library', () => {
  let folder = '';
  let truth: Record<string, Truth> = {};
  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'eddygraft-vtk-'));
    runPython([join(import.meta.dirname, '..', 'helpers', 'vtk-generate.py'), folder]);
    truth = JSON.parse(readFileSync(join(folder, 'truth.json'), 'utf8')) as Record<string, Truth>;
  });
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  for (const kind of ['vtu', 'poly.vtu', 'vti', 'vtr', 'vts']) {
    it(`${kind} reads identically in every encoding`, async () => {
      const { files, points, cells, arrays } = truth[kind] as Truth;
      expect(files.length).toBe(49);
      for (const file of files) {
        const found = await readDataset(join(folder, file));
        const single = found.pointType === 'Float32';
        expect(Array.from(found.points, single ? Math.fround : Number), file).toEqual(
          points.flat().map(single ? Math.fround : Number),
        );
        expect(found.cells?.types.length, file).toBe(cells.length);
        cells.forEach((cell, i) => {
          // Voxels of axis-aligned grids are presented as hexahedra with the corners in that cell's order.
          const isAxisAligned = kind === 'vti' || kind === 'vtr';
          expect(found.cells?.types[i], file).toBe(isAxisAligned ? 12 : cell.type);
          const [begin, end] = [found.cells?.offsets[i], found.cells?.offsets[i + 1]];
          expect(Array.from(found.cells?.connectivity.subarray(begin, end) ?? []).sort(), file).toEqual(
            [...cell.points].sort(),
          );
          if (cell.type !== 42 && !isAxisAligned) {
            expect(Array.from(found.cells?.connectivity.subarray(begin, end) ?? []), file).toEqual(cell.points);
          }
        });
        const names = [
          ...found.pointArrays.map((array) => `point:${array.name}`),
          ...found.cellArrays.map((array) => `cell:${array.name}`),
        ];
        expect(names, file).toEqual(Object.keys(arrays));
        for (const [place, list] of [['point', found.pointArrays] as const, ['cell', found.cellArrays] as const]) {
          for (const array of list) {
            const values = Array.from(array.load() as ArrayLike<number | bigint>, Number);
            expect(values, `${file} ${array.name}`).toEqual(arrays[`${place}:${array.name}`]);
          }
        }
      }
    });

    it(`the VTK library opens what is written from ${kind} and finds the same`, async () => {
      const { files, arrays } = truth[kind] as Truth;
      const mesh = await readDataset(join(folder, files[0] as string));
      const added = Float64Array.from({ length: mesh.cells?.types.length ?? 0 }, (_, i) => i / 3);
      for (const compress of [false, true]) {
        const path = join(folder, `written-${compress}.${kind}`);
        const tuples = added.length;
        await writeDataset(path, {
          mesh,
          cellArrays: [{ name: 'IntegralLength', components: 1, tuples, type: 'Float64', load: () => added }],
          pointArrays: [],
          notes: new Map([['Provenance', 'a note with <marks> & more']]),
          compress,
        });
        const seen = JSON.parse(
          runPython([join(import.meta.dirname, '..', 'helpers', 'vtk-open.py'), path]),
        ) as Truth & { readonly notes: Record<string, string>; readonly same: boolean };
        expect(seen.points.flat().map(Math.fround)).toEqual(Array.from(mesh.points, Math.fround));
        expect(seen.cells.map((cell) => [...cell.points].sort())).toEqual(
          (truth[kind] as Truth).cells.map((cell) => [...cell.points].sort()),
        );
        expect(seen.arrays).toEqual({ ...arrays, 'cell:IntegralLength': Array.from(added) });
        expect(seen.notes.Provenance).toBe('a note with <marks> & more');
        const back = await readDataset(path);
        expect(back.notes.get('Provenance')).toBe('a note with <marks> & more');
        expect(back.cells?.polyhedronFaces).toEqual(mesh.cells?.polyhedronFaces);
      }
    });
  }

  it('a file cut off anywhere gives one clear error', async () => {
    for (const file of ['raw-none-little-64.vtu', 'base64-zlib-big-32.vtu', 'inline-lz4-little-64.poly.vtu']) {
      const whole = readFileSync(join(folder, file));
      const path = join(folder, `cut-${file}`);
      for (let cut = 0; cut < 60; cut += 1) {
        const length = Math.floor((whole.length * cut) / 60);
        writeFileSync(path, whole.subarray(0, length));
        try {
          const found = await readDataset(path);
          for (const array of [...found.pointArrays, ...found.cellArrays]) array.load();
          // Only the closing tags behind the last array may be missing without harm.
          expect(whole.length - length, `${file} cut at ${length}`).toBeLessThan(60);
        } catch (error) {
          expect(error, `${file} cut at ${length}: ${String(error)}`).toBeInstanceOf(InputError);
        }
      }
    }
  });
});
