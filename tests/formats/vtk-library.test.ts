import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { readDataset, writeDataset } from '../../src/formats/registry.js';
import { hasPythonModule, runPython } from '../helpers/python.js';
import { expectTruth, type Truth } from '../helpers/vtk-truth.js';

// Reference: files written by the VTK library itself.
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
      const { files } = truth[kind] as Truth;
      expect(files.length).toBe(49);
      for (const file of files) {
        expectTruth(await readDataset(join(folder, file)), truth[kind] as Truth, file);
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
});
