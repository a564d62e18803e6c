import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { DataArray, Dataset, NumberArray, NumberType } from '../../src/basis/dataset.js';
import { InputError } from '../../src/basis/errors.js';
import { sharedFloat64 } from '../../src/basis/fields.js';
import { readDataset, writeDataset } from '../../src/formats/registry.js';
import { numberTypeOf } from '../../src/formats/vtk/numbers.js';

const fixtures = join(import.meta.dirname, 'vtk-fixtures');
const empty = { pointArrays: [], cellArrays: [], notes: new Map<string, string>() };
let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'eddygraft-vtk-write-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function arrayOf(name: string, values: NumberArray, components = 1): DataArray {
  return { name, components, tuples: values.length / components, type: numberTypeOf(values), load: () => values };
}

const mixed = (): Promise<Dataset> => readDataset(join(fixtures, 'raw-none-big-32.vtu'));

describe('writing VTK files', () => {
  it('carries every number type through, from shared memory too, compressed or not', async () => {
    const mesh = await mixed();
    const count = mesh.cells?.types.length as number;
    const shared = sharedFloat64(3 * count);
    shared.forEach((_, i) => {
      shared[i] = i / 3;
    });
    const values: Record<NumberType, NumberArray> = {
      Int8: Int8Array.from({ length: count }, (_, i) => -i),
      UInt8: Uint8Array.from({ length: count }, (_, i) => 255 - i),
      Int16: Int16Array.from({ length: count }, (_, i) => -1000 * i),
      UInt16: Uint16Array.from({ length: count }, (_, i) => 65535 - i),
      Int32: Int32Array.from({ length: count }, (_, i) => -100_000 * i),
      UInt32: Uint32Array.from({ length: count }, (_, i) => 2 ** 32 - 1 - i),
      Int64: BigInt64Array.from({ length: count }, (_, i) => -(2n ** 60n) - BigInt(i)),
      UInt64: BigUint64Array.from({ length: count }, (_, i) => 2n ** 64n - 1n - BigInt(i)),
      Float32: Float32Array.from({ length: count }, (_, i) => i / 7),
      Float64: shared,
    };
    for (const compress of [false, true]) {
      const path = join(folder, `types-${compress}.vtu`);
      const cellArrays = Object.entries(values).map(([type, array]) =>
        arrayOf(`a ${type}`, array, type === 'Float64' ? 3 : 1),
      );
      await writeDataset(path, { ...empty, mesh, cellArrays, compress });
      const back = await readDataset(path);
      for (const array of cellArrays) {
        const found = back.cellArrays.find((entry) => entry.name === array.name);
        expect(found?.type).toBe(array.type);
        expect(found?.components).toBe(array.components);
        expect(Array.from(found?.load() as ArrayLike<number | bigint>)).toEqual(
          Array.from(array.load() as ArrayLike<number | bigint>),
        );
      }
      expect(back.points).toEqual(mesh.points);
      expect(back.pointType).toBe(mesh.pointType);
      expect(back.cells).toEqual(mesh.cells);
    }
  });

  it('replaces arrays of the same name in their place and appends the others', async () => {
    const mesh = await mixed();
    const names = mesh.cellArrays.map((array) => array.name);
    const count = mesh.cells?.types.length as number;
    const path = join(folder, 'replaced.vtu');
    const added = [
      arrayOf('new', new Float64Array(count)),
      arrayOf(names[0] as string, new Float32Array(count).fill(3)),
    ];
    await writeDataset(path, { ...empty, mesh, cellArrays: added });
    const back = await readDataset(path);
    expect(back.cellArrays.map((array) => array.name)).toEqual([...names, 'new']);
    expect(back.cellArrays[0]?.load()).toEqual(new Float32Array(count).fill(3));
  });

  it('a cloud of points becomes vertices', async () => {
    const points = Float64Array.of(0, 0, 0, 1, 2, 3);
    const mesh: Dataset = {
      ...{ file: 'cloud.csv', format: 'csv', points, pointType: 'Float64', cellArrays: [], zones: [], boundaries: [] },
      ...{ missingAxes: [], notes: new Map(), remarks: [], pointArrays: [arrayOf('k', Float64Array.of(1, 2))] },
    };
    const path = join(folder, 'cloud.vtu');
    await writeDataset(path, { ...empty, mesh });
    const back = await readDataset(path);
    expect(back.points).toEqual(points);
    expect(Array.from(back.cells?.types ?? [])).toEqual([1, 1]);
    expect(back.pointArrays[0]?.load()).toEqual(Float64Array.of(1, 2));
  });

  it('a file may be written over the one it is read from', async () => {
    const path = join(folder, 'over.vtu');
    await writeDataset(path, { ...empty, mesh: await mixed() });
    const mesh = await readDataset(path);
    await writeDataset(path, { ...empty, mesh, notes: new Map([['again', 'yes']]) });
    const back = await readDataset(path);
    expect(back.notes.get('again')).toBe('yes');
    expect(back.cellArrays.map((array) => array.load())).toEqual(
      (await mixed()).cellArrays.map((array) => array.load()),
    );
  });

  it('what does not fit is refused and nothing is left behind', async () => {
    const mesh = await mixed();
    const place = mkdtempSync(join(folder, 'refused-'));
    const count = mesh.cells?.types.length as number;
    const liar: DataArray = { ...arrayOf('k', new Float64Array(count)), load: () => new Float32Array(count) };
    const tries: readonly (readonly [string, readonly DataArray[], RegExp])[] = [
      ['a.vtu', [arrayOf('k', new Float64Array(count + 1))], /array k: it has 8 entries where the mesh has 7 places/],
      ['b.vtu', [liar], /7 Float32 where 7 Float64 are announced/],
      ['c.vti', [], /is not an image; write a .vtu file instead/],
      ['d.vts', [], /is not one structured grid/],
      ['e.vtp', [], /'.vtp' are not written/],
    ];
    for (const [name, cellArrays, message] of tries) {
      const attempt = writeDataset(join(place, name), { ...empty, mesh, cellArrays });
      await expect(attempt).rejects.toThrow(InputError);
      await expect(attempt).rejects.toThrow(message);
    }
    expect(readdirSync(place)).toEqual([]);
  });
});

describe('forms of base64 that other writers use', () => {
  const values = Float64Array.from({ length: 4 }, (_, i) => i / 3);
  const data = Buffer.from(values.buffer);
  const header = Buffer.from(Uint32Array.of(data.length).buffer);
  const together = Buffer.concat([header, data]).toString('base64');
  const apart = header.toString('base64') + data.toString('base64');
  const lines = (together.match(/.{1,7}/g) as string[]).join('\n   ');
  it.each([
    ['header and data together', together],
    ['the header by itself', apart],
    ['broken into lines', lines],
  ])('%s', async (_, text) => {
    const path = join(folder, 'base64.vti');
    const extent = '0 4 0 1 0 1';
    writeFileSync(
      path,
      `<VTKFile type="ImageData" byte_order="LittleEndian"><ImageData WholeExtent="${extent}"><Piece Extent="${extent}">` +
        `<CellData><DataArray type="Float64" Name="k" format="binary">\n ${text} </DataArray></CellData></Piece></ImageData></VTKFile>`,
    );
    const found = await readDataset(path);
    expect(found.cellArrays[0]?.load()).toEqual(values);
  });
});
