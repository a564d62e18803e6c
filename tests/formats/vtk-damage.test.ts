import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Dataset } from '../../src/basis/dataset.js';
import { InputError } from '../../src/basis/errors.js';
import { randomStream } from '../../src/basis/random.js';
import { readDataset } from '../../src/formats/registry.js';
import { expectTruth, type Truth } from '../helpers/vtk-truth.js';

// Fixtures: files of vtk-generate.py, written by the VTK library 9.1.
const fixtures = join(import.meta.dirname, 'vtk-fixtures');
const files = readdirSync(fixtures).filter((name) => name !== 'truth.json');
const truths = JSON.parse(readFileSync(join(fixtures, 'truth.json'), 'utf8')) as Record<string, Truth>;

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'eddygraft-vtk-damage-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

async function readAll(path: string): Promise<Dataset> {
  const found = await readDataset(path);
  expect(found.points.length).toBeGreaterThan(0);
  expect(found.cells?.types.length).not.toBe(0);
  for (const array of [...found.pointArrays, ...found.cellArrays]) array.load();
  return found;
}

async function complaintAbout(path: string): Promise<string> {
  try {
    await readAll(path);
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    return error.message;
  }
  return '';
}

function written(name: string, content: string | Uint8Array): string {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
}

describe('files of the VTK library kept here', () => {
  for (const [kind, truth] of Object.entries(truths)) {
    it(`${kind} reads identically`, async () => {
      expect(truth.files.length).toBeGreaterThan(0);
      for (const file of truth.files) expectTruth(await readDataset(join(fixtures, file)), truth, file);
    });
  }
});

describe('damaged files', () => {
  it('a file cut off anywhere gives one clear error', async () => {
    for (const file of files) {
      const whole = readFileSync(join(fixtures, file));
      const closing = whole.lastIndexOf('</VTKFile>') + '</VTKFile>'.length;
      for (let cut = 0; cut < 120; cut++) {
        const length = Math.floor((closing * cut) / 120);
        const path = written(`cut-${file}`, whole.subarray(0, length));
        expect(await complaintAbout(path), `${file} cut at ${length}`).toContain(path);
      }
      const path = written(`cut-${file}`, whole.subarray(0, closing - 1));
      expect(await complaintAbout(path), `${file} without its last character`).toContain(path);
    }
  });

  it('a file with other bytes is read or gives one clear error, never anything else', async () => {
    const random = randomStream(7, 'vtk/damage');
    let refused = 0;
    let tried = 0;
    for (const file of files) {
      const whole = readFileSync(join(fixtures, file));
      for (let round = 0; round < 150; round++) {
        const bytes = Uint8Array.from(whole);
        const places = 1 + Math.floor(random() * 3);
        for (let i = 0; i < places; i++) bytes[Math.floor(random() * bytes.length)] = Math.floor(random() * 256);
        const complaint = await complaintAbout(written(`bytes-${file}`, bytes));
        tried++;
        if (complaint !== '') refused++;
      }
    }
    expect(tried).toBe(150 * files.length);
    expect(refused).toBeGreaterThan(tried / 4);
  });

  it('numbers in the tags that are absurd are refused quickly', async () => {
    const random = randomStream(8, 'vtk/tags');
    const absurd = [
      '-1',
      '1e30',
      '99999999999',
      '4294967295',
      '2147483647',
      '',
      'x',
      '0',
      '7',
      '1000000000000000000000',
    ];
    const begin = performance.now();
    for (const file of files) {
      const text = readFileSync(join(fixtures, file), 'latin1');
      const numbers = [...text.slice(0, text.indexOf('<AppendedData') >>> 0).matchAll(/="(\d+)"/g)];
      for (let round = 0; round < 60; round++) {
        const { index } = numbers[Math.floor(random() * numbers.length)] as RegExpExecArray;
        const value = absurd[Math.floor(random() * absurd.length)] as string;
        const changed = text.slice(0, index) + text.slice(index).replace(/="\d+"/, `="${value}"`);
        await complaintAbout(written(`tags-${file}`, Buffer.from(changed, 'latin1')));
      }
    }
    expect(performance.now() - begin).toBeLessThan(20_000);
  });
});

const tetrahedron = (changes: Readonly<Record<string, string>> = {}): string => {
  const parts: Record<string, string> = {
    root: 'type="UnstructuredGrid" version="1.0" byte_order="LittleEndian" header_type="UInt64"',
    piece: 'NumberOfPoints="4" NumberOfCells="1"',
    points: '<DataArray type="Float64" NumberOfComponents="3" format="ascii">0 0 0 1 0 0 0 1 0 0 0 1</DataArray>',
    connectivity: '<DataArray type="Int64" Name="connectivity" format="ascii">0 1 2 3</DataArray>',
    offsets: '<DataArray type="Int64" Name="offsets" format="ascii">4</DataArray>',
    types: '<DataArray type="UInt8" Name="types" format="ascii">10</DataArray>',
    cellData: '<DataArray type="Float32" Name="k" format="ascii">1.5</DataArray>',
    before: '',
    ...changes,
  };
  return (
    `<?xml version="1.0"?>\n${parts.before}<VTKFile ${parts.root}>\n<UnstructuredGrid>\n<Piece ${parts.piece}>\n` +
    `<CellData>${parts.cellData}</CellData>\n<Points>${parts.points}</Points>\n` +
    `<Cells>${parts.connectivity}${parts.offsets}${parts.types}</Cells>\n</Piece>\n</UnstructuredGrid>\n</VTKFile>\n`
  );
};

describe('contradictory files', () => {
  it('the undamaged one reads', async () => {
    const found = await readAll(written('plain.vtu', tetrahedron()));
    expect(Array.from(found.cells?.connectivity ?? [])).toEqual([0, 1, 2, 3]);
    expect(found.cellArrays[0]?.load()).toEqual(Float32Array.of(1.5));
  });

  const array = (name: string, type: string, text: string): string =>
    `<DataArray type="${type}" Name="${name}" format="ascii">${text}</DataArray>`;
  const cases: readonly (readonly [string, Readonly<Record<string, string>>, RegExp])[] = [
    ['a point that is not there', { connectivity: array('connectivity', 'Int64', '0 1 2 4') }, /names point 4/],
    ['a negative point', { connectivity: array('connectivity', 'Int32', '0 1 2 -1') }, /names point -1/],
    ['offsets that fall', { offsets: array('offsets', 'Int32', '5') }, /offset 0 is 5/],
    ['too few corners', { types: array('types', 'UInt8', '12') }, /type 12 has 4 points/],
    ['a type that is none', { types: array('types', 'Int32', '300') }, /type 300/],
    ['no connectivity', { connectivity: '' }, /array connectivity is missing/],
    ['no points', { points: '' }, /no Points array/],
    ['too few values', { cellData: array('k', 'Float32', '') }, /k.*1 numbers are needed/],
    ['too many values', { cellData: array('k', 'Float32', '1 2') }, /k.*more than 1/],
    ['a word for a number', { cellData: array('k', 'Float32', 'abc') }, /'abc' is no number/],
    ['a number too large for its type', { cellData: array('k', 'UInt8', '256') }, /'256' does not fit the type UInt8/],
    ['an unknown number type', { cellData: array('k', 'Float16', '1') }, /number type 'Float16'/],
    [
      'a coordinate that is infinite',
      {
        points: array('p', 'Float64', '0 0 0 1 0 0 0 1 0 0 0 1')
          .replace('Name', 'NumberOfComponents="3" Name')
          .replace('0 1<', '0 inf<'),
      },
      /not a finite number/,
    ],
    ['an absurd number of points', { piece: 'NumberOfPoints="2000000000" NumberOfCells="1"' }, /numbers are needed/],
    ['an unknown compressor', { root: 'type="UnstructuredGrid" compressor="none"' }, /compressor 'none'/],
    ['an unknown byte order', { root: 'type="UnstructuredGrid" byte_order="Middle"' }, /byte order 'Middle'/],
    ['a document type', { before: '<!DOCTYPE x [<!ENTITY a "b">]>' }, /document type definitions/],
    ['an entity', { cellData: array('&a;', 'Float32', '1') }, /XML fault/],
    ['another data set', { root: 'type="ImageData"' }, /ImageData element is missing/],
  ];
  it.each(cases)('%s', async (_, changes, message) => {
    const path = written('wrong.vtu', tetrahedron(changes));
    const complaint = await complaintAbout(path);
    expect(complaint).toContain(path);
    expect(complaint).toMatch(message);
  });

  it('no points at all', async () => {
    const path = written('none.vtu', '<VTKFile type="UnstructuredGrid"><UnstructuredGrid/></VTKFile>');
    expect(await complaintAbout(path)).toMatch(/holds no points/);
  });

  it('a collection that names itself', async () => {
    const path = written(
      'circle.vtm',
      '<VTKFile type="vtkMultiBlockDataSet"><vtkMultiBlockDataSet><DataSet index="0" file="circle.vtm"/>' +
        '<DataSet index="1" file="circle.vtm"/></vtkMultiBlockDataSet></VTKFile>',
    );
    expect(await complaintAbout(path)).toMatch(/refers to itself/);
  });

  it('a part that is missing', async () => {
    const path = written(
      'parts.pvtu',
      '<VTKFile type="PUnstructuredGrid"><PUnstructuredGrid><Piece Source="absent.vtu"/></PUnstructuredGrid></VTKFile>',
    );
    expect(await complaintAbout(path)).toMatch(/absent.vtu: the part does not exist/);
  });

  it('a file that is missing or a folder', async () => {
    expect(await complaintAbout(join(folder, 'absent.vtu'))).toMatch(/there is no such file/);
    expect(await complaintAbout(folder)).toMatch(/this is a folder/);
  });
});

it('polyhedra in the newer layout read like the older one', async () => {
  // Reference: a cube and a tetrahedron on top, once by streams of faces, once by lists of faces, written by hand.
  const points = '0 0 0 1 0 0 1 1 0 0 1 0 0 0 1 1 0 1 1 1 1 0 1 1 0.5 0.5 2';
  const file = (faces: string): string =>
    '<VTKFile type="UnstructuredGrid" version="2.3" byte_order="LittleEndian"><UnstructuredGrid>' +
    '<Piece NumberOfPoints="9" NumberOfCells="3"><Points><DataArray type="Float32" NumberOfComponents="3" format="ascii">' +
    `${points}</DataArray></Points><Cells>` +
    '<DataArray type="Int64" Name="connectivity" format="ascii">0 1 2 3 4 5 6 7 4 5 6 8 4 5 6 8</DataArray>' +
    '<DataArray type="Int64" Name="offsets" format="ascii">8 12 16</DataArray>' +
    `<DataArray type="UInt8" Name="types" format="ascii">42 10 42</DataArray>${faces}</Cells></Piece></UnstructuredGrid></VTKFile>`;
  const ints = (name: string, text: string): string =>
    `<DataArray type="Int64" Name="${name}" format="ascii">${text}</DataArray>`;
  const cube = [
    [0, 3, 2, 1],
    [4, 5, 6, 7],
    [0, 1, 5, 4],
    [1, 2, 6, 5],
    [2, 3, 7, 6],
    [3, 0, 4, 7],
  ];
  const top = [
    [4, 5, 8],
    [5, 6, 8],
    [6, 4, 8],
    [4, 6, 5],
  ];
  const stream = (list: readonly (readonly number[])[]): number[] => [
    list.length,
    ...list.flatMap((face) => [face.length, ...face]),
  ];
  const old = file(ints('faces', [...stream(cube), ...stream(top)].join(' ')) + ints('faceoffsets', '31 -1 48'));
  const faces = [...cube, ...top];
  let end = 0;
  const ends = faces.map((face) => (end += face.length));
  const recent = file(
    ints('face_connectivity', faces.flat().join(' ')) +
      ints('face_offsets', ends.join(' ')) +
      ints('polyhedron_to_faces', faces.map((_, i) => i).join(' ')) +
      ints('polyhedron_offsets', '6 6 10'),
  );
  const [a, b] = [await readAll(written('old.vtu', old)), await readAll(written('recent.vtu', recent))];
  expect(Array.from(a.cells?.polyhedronOffsets ?? [])).toEqual([0, 31, 31, 48]);
  expect(b.cells).toEqual(a.cells);
});
