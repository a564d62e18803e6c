import { copyFileSync, mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { DataArray, Dataset } from '../../src/basis/dataset.js';
import { listCgnsSnapshots, readCgns as read } from '../../src/formats/cgns.js';
import { buildMesh } from '../../src/mesh/build.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { matchPeriodicPatches } from '../../src/mesh/periodic.js';
import { makeShapes, temporaryFolder, unpackShapes } from '../helpers/cgns-files.js';
import { cubes, group, numbers, text, writeTree } from '../helpers/cgns-tree.js';
import { hasPythonModule, runPython } from '../helpers/python.js';

const folder = temporaryFolder();
const fixtures = join(folder.path, 'fixtures');
const fresh = join(folder.path, 'fresh');
mkdirSync(fixtures);
mkdirSync(fresh);
const library = makeShapes(fresh);
if (!library) console.log('skipped: files made by the reference library (no libcgns or no C compiler)');

beforeAll(() => unpackShapes(fixtures));
afterAll(folder.remove);

const values = (arrays: readonly DataArray[], name: string): number[] => {
  const array = arrays.find((one) => one.name === name);
  if (array === undefined) throw new Error(`no array ${name}`);
  return Array.from(array.load(), Number);
};
const volumes = (dataset: Dataset): number[] => Array.from(measureMesh(buildMesh(dataset)).cellVolumes);
const patch = (dataset: Dataset, name: string) => {
  const found = dataset.boundaries.find((one) => one.name === name);
  if (found === undefined) throw new Error(`no boundary ${name}`);
  return { kind: found.kind, faces: found.offsets.length - 1 };
};
const close = (found: readonly number[], wanted: readonly number[]): void => {
  expect(found.length).toBe(wanted.length);
  found.forEach((value, i) => {
    expect(value).toBeCloseTo(wanted[i] ?? Number.NaN, 12);
  });
};

describe.each([
  ['committed', fixtures, true],
  ['written now by the reference library', fresh, library],
] as const)('files %s', (_, from, there) => {
  const open = (name: string): Promise<Dataset> => read(join(from, `${name}.cgns`));

  it.skipIf(!there).each(['sections', 'mixed', 'polyhedra', 'parents', 'links', 'linked-zone'])(
    'reads the same four cells from %s',
    async (name) => {
      const dataset = await open(name);
      const types = Array.from(dataset.cells?.types ?? []);
      expect(types).toEqual(/poly|parents/.test(name) ? [42, 42, 42, 42] : [12, 13, 14, 10]);
      // Volumes of the cube, half a cube, and what a pyramid and a tetrahedron share of the other half.
      close(volumes(dataset), [1, 1 / 2, 1 / 3, 1 / 6]);
      expect(values(dataset.cellArrays, 'Pressure')).toEqual([10, 11, 12, 13]);
      if (name !== 'links')
        expect(values(dataset.pointArrays, 'Density')).toEqual([1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12]);
      expect(patch(dataset, 'in')).toEqual({ kind: 'inflow', faces: 1 });
      expect(patch(dataset, 'floor')).toEqual({ kind: 'wall', faces: 2 });
      expect(patch(dataset, 'out')).toEqual({ kind: 'outflow', faces: 2 });
      const mesh = buildMesh(dataset);
      const geometry = measureMesh(mesh);
      for (const one of mesh.patches) {
        const area = Array.from(one.faces, (f) => Math.hypot(...geometry.faceAreas.subarray(3 * f, 3 * f + 3)));
        expect(area.reduce((a, b) => a + b, 0)).toBeCloseTo(one.name === 'floor' ? 2 : 1, 12);
      }
      expect(dataset.remarks.filter((remark) => !/several solutions/.test(remark))).toEqual([]);
    },
  );

  it.skipIf(!there)('reads structured zones in millimetres, joins them, keeps rind cells out', async () => {
    const dataset = await open('structured');
    expect(
      dataset.zones.map(({ name, pointBegin, pointEnd, cellBegin, cellEnd }) => [
        name,
        pointBegin,
        pointEnd,
        cellBegin,
        cellEnd,
      ]),
    ).toEqual([
      ['left', 0, 27, 0, 8],
      ['right', 27, 63, 8, 20],
    ]);
    expect(dataset.zones[1]?.structure).toEqual({ kind: 'curvilinear', extent: [0, 3, 0, 2, 0, 2] });
    const mesh = buildMesh(dataset);
    expect(volumes(dataset).reduce((a, b) => a + b, 0)).toBeCloseTo(2, 12);
    // 5 x 2 x 2 cells as one mesh: the faces between the zones are inner ones.
    expect(mesh.innerFaceCount).toBe(4 * 4 + 5 * 2 + 5 * 2);
    const wanted = [...Array(8).keys(), ...Array.from({ length: 12 }, (__, i) => 100 + i)];
    // g / (mm s2) is Pa.
    close(values(dataset.cellArrays, 'Pressure'), wanted);
    close(
      values(dataset.cellArrays, 'Temperature'),
      wanted.map((value) => value + 273.15),
    );
    close(
      values(dataset.pointArrays, 'VelocityX'),
      Array.from({ length: 63 }, (__, p) => Math.fround(dataset.points[3 * p]! * 1000) / 1000),
    );
    expect(Object.fromEntries(dataset.boundaries.map(({ name }) => [name, patch(dataset, name)]))).toEqual({
      hull: { kind: 'wall', faces: 20 },
      in: { kind: 'inflow', faces: 4 },
      out: { kind: 'outflow', faces: 4 },
      front: { kind: 'periodic', faces: 10 },
      back: { kind: 'periodic', faces: 10 },
    });
    const pairs = matchPeriodicPatches(mesh, measureMesh(mesh), [['front', 'back']]);
    expect(pairs.lowFaces.length).toBe(10);
    close(pairs.periods[0] ?? [], [0, 0, 1]);
    expect(dataset.notes.get('About')).toBe('written for a test');
  });

  // Places of VTK's points beyond the corners: means of these corners (class documentation of the VTK cells).
  const mids: Readonly<Record<number, readonly (readonly number[])[]>> = {
    24: [
      [0, 1],
      [1, 2],
      [2, 0],
      [0, 3],
      [1, 3],
      [2, 3],
    ],
    25: [
      [0, 1],
      [1, 2],
      [2, 3],
      [3, 0],
      [4, 5],
      [5, 6],
      [6, 7],
      [7, 4],
      [0, 4],
      [1, 5],
      [2, 6],
      [3, 7],
    ],
    26: [
      [0, 1],
      [1, 2],
      [2, 0],
      [3, 4],
      [4, 5],
      [5, 3],
      [0, 3],
      [1, 4],
      [2, 5],
    ],
    27: [
      [0, 1],
      [1, 2],
      [2, 3],
      [3, 0],
      [0, 4],
      [1, 4],
      [2, 4],
      [3, 4],
    ],
    29: [
      [0, 1],
      [1, 2],
      [2, 3],
      [3, 0],
      [4, 5],
      [5, 6],
      [6, 7],
      [7, 4],
      [0, 4],
      [1, 5],
      [2, 6],
      [3, 7],
      [0, 4, 7, 3],
      [1, 2, 6, 5],
      [0, 1, 5, 4],
      [3, 7, 6, 2],
      [0, 1, 2, 3],
      [4, 5, 6, 7],
      [0, 1, 2, 3, 4, 5, 6, 7],
    ],
    32: [
      [0, 1],
      [1, 2],
      [2, 0],
      [3, 4],
      [4, 5],
      [5, 3],
      [0, 3],
      [1, 4],
      [2, 5],
      [0, 1, 4, 3],
      [1, 2, 5, 4],
      [2, 0, 3, 5],
    ],
  };

  it.skipIf(!there)('puts the points of quadratic cells where VTK has them', async () => {
    const dataset = await open('quadratic');
    const cells = dataset.cells!;
    expect(Array.from(cells.types)).toEqual([24, 27, 27, 26, 32, 25, 29]);
    close(volumes(dataset), [1 / 6, 1 / 3, 1 / 3, 1 / 2, 1 / 2, 1, 1]);
    cells.types.forEach((type, c) => {
      const points = cells.connectivity.subarray(cells.offsets[c], cells.offsets[c + 1]);
      const at = (p: number): number[] => Array.from(dataset.points.subarray(3 * points[p]!, 3 * points[p]! + 3));
      const corners = { 24: 4, 25: 8, 26: 6, 27: 5, 29: 8, 32: 6 }[type]!;
      expect(points.length).toBe(corners + mids[type]!.length);
      mids[type]!.forEach((mean, m) => {
        close(
          at(corners + m),
          [0, 1, 2].map((a) => mean.reduce((sum, p) => sum + at(p)[a]!, 0) / mean.length),
        );
      });
    });
  });

  it.skipIf(!there)('lists and reads the states of a series, in SI', async () => {
    const path = join(from, 'series.cgns');
    expect(await listCgnsSnapshots(path)).toEqual([
      { index: 0, time: 0.5, solutions: ['State1'] },
      { index: 1, time: 1, solutions: ['State2'] },
      { index: 2, time: 1.5, solutions: ['State3'] },
    ]);
    const last = await read(path);
    expect(last.time).toBe(1.5);
    expect(last.pointType).toBe('Float32');
    // Reference 20 ft/s and 3 ft/s offset, international foot.
    close(
      values(last.cellArrays, 'VelocityX'),
      [2.25, 2.75].map((u) => (20 * u + 3) * 0.3048),
    );
    expect(last.cellArrays.find(({ name }) => name === 'Marker')?.type).toBe('Int32');
    const first = await read(path, { snapshot: 0 });
    close(
      values(first.cellArrays, 'VelocityX'),
      [0.25, 0.75].map((u) => (20 * u + 3) * 0.3048),
    );
    expect(first.time).toBe(0.5);
    expect(last.remarks.join('\n')).toMatch(/taken as metres/);
    expect(last.remarks.join('\n')).toMatch(/last state was read \(time 1.5 s\)/);
    await expect(read(path, { snapshot: 3 })).rejects.toThrow(/no snapshot 3, the file holds 3/);
  });

  it.skipIf(!there)('reads a plane with two coordinates', async () => {
    const dataset = await open('plane');
    expect(Array.from(dataset.cells?.types ?? [])).toEqual([9, 5]);
    expect(dataset.missingAxes).toEqual(['z']);
    expect(values(dataset.cellArrays, 'Pressure')).toEqual([1, 2]);
  });

  it.skipIf(!there)('refuses links that lead nowhere or in a circle', async () => {
    await expect(open('broken-link')).rejects.toThrow(/link leads to nowhere.cgns, and there is no such file/);
    await expect(open('circle')).rejects.toThrow(/runs in a circle/);
  });
});

describe('layouts', () => {
  let count = 0;
  const write = async (nodes: Parameters<typeof writeTree>[1]): Promise<string> => {
    const path = join(folder.path, `layout-${count++}.cgns`);
    await writeTree(path, nodes);
    return path;
  };

  it.each(
    (['polyhedra', 'mixed', 'hexahedra'] as const).flatMap((kind) =>
      (['I4', 'I8'] as const).flatMap((index) =>
        (['R4', 'R8'] as const).flatMap((real) =>
          [false, true].map((interleaved) => ({ kind, index, real, interleaved })),
        ),
      ),
    ),
  )('reads $kind with $index, $real, counts between: $interleaved', async (options) => {
    const dataset = await read(await write(cubes(options)));
    close(volumes(dataset), [1, 1]);
    expect(buildMesh(dataset).innerFaceCount).toBe(1);
    expect(values(dataset.cellArrays, 'Pressure')).toEqual([3, 4]);
    expect(dataset.pointType).toBe(options.real === 'R4' ? 'Float32' : 'Float64');
    expect(dataset.remarks.join('\n')).toMatch(/no unit is given for Pressure; taken as SI/);
  });

  it('takes boundaries from surface sections where no condition is stated', async () => {
    const surface = numbers(
      'lid',
      'Elements_t',
      'I4',
      [7, 0],
      [2],
      [
        numbers('ElementRange', 'IndexRange_t', 'I4', [3, 4]),
        numbers('ElementConnectivity', 'DataArray_t', 'I4', [4, 5, 11, 10, 5, 6, 12, 11]),
      ],
    );
    const dataset = await read(await write(cubes({ kind: 'hexahedra', more: [surface] })));
    expect(patch(dataset, 'lid')).toEqual({ kind: 'other', faces: 2 });
  });

  it('reads old element lists, family types, and drops boundaries that name no face', async () => {
    const condition = (name: string, type: string, ...children: Parameters<typeof group>[2][number][]) =>
      text(name, 'BC_t', type, children);
    const nodes = cubes({
      more: [
        group('ZoneBC', 'ZoneBC_t', [
          condition('old', 'BCWall', numbers('ElementList', 'IndexArray_t', 'I4', [1], [1, 1])),
          condition(
            'lost',
            'BCWall',
            text('GridLocation', 'GridLocation_t', 'FaceCenter'),
            numbers('PointList', 'IndexArray_t', 'I4', [99], [1, 1]),
          ),
          condition(
            'side',
            'FamilySpecified',
            text('FamilyName', 'FamilyName_t', 'mirror'),
            numbers('PointList', 'IndexArray_t', 'I4', [1, 2, 3, 7, 8, 9], [1, 6]),
          ),
        ]),
      ],
    });
    const base = nodes[0]!;
    const family = group('mirror', 'Family_t', [text('FamBC', 'FamilyBC_t', 'BCSymmetryPlane')]);
    const dataset = await read(await write([{ ...base, children: [...(base.children ?? []), family] }]));
    expect(patch(dataset, 'old')).toEqual({ kind: 'wall', faces: 1 });
    // All points with y = 0: two faces, not the inner one.
    expect(patch(dataset, 'mirror')).toEqual({ kind: 'symmetry', faces: 2 });
    expect(dataset.boundaries.map(({ name }) => name)).not.toContain('lost');
    expect(dataset.remarks.join('\n')).toMatch(/boundary lost was left out: element 99 is no face/);
  });

  it('says when a reference is unknown and leaves numbers without dimension alone', async () => {
    const context = (name: string, dataClass: string) =>
      numbers(name, 'DataArray_t', 'R8', [5, 6], [2], [text('DataClass', 'DataClass_t', dataClass)]);
    const field = [context('Density', 'NormalizedByUnknownDimensional'), context('Mach', 'NondimensionalParameter')];
    const dataset = await read(await write(cubes({ field })));
    expect(dataset.remarks.join('\n')).toMatch(
      /Density were made dimensionless by a reference that the file does not give/,
    );
    expect(dataset.remarks.join('\n')).not.toMatch(/Mach/);
  });

  it.skipIf(!hasPythonModule('h5py'))('reads big-endian numbers and compressed arrays', async () => {
    const path = await write(cubes());
    runPython([
      '-c',
      `import h5py, numpy, sys
f = h5py.File(sys.argv[1], 'a')
for place in ['Base/Zone/Fields/Pressure', 'Base/Zone/GridCoordinates/CoordinateX', 'Base/Zone/faces/ElementConnectivity']:
    g = f[place]
    v = g[' data'][...]
    del g[' data']
    g.create_dataset(' data', data=v.astype(v.dtype.newbyteorder('>')), compression='gzip', shuffle=True)`,
      path,
    ]);
    const dataset = await read(path);
    close(volumes(dataset), [1, 1]);
    expect(values(dataset.cellArrays, 'Pressure')).toEqual([3, 4]);
  });

  it('reads the same while other files are read, and after the file was moved in between', async () => {
    const paths = await Promise.all([write(cubes()), write(cubes({ kind: 'mixed' })), write(cubes({ index: 'I8' }))]);
    const sets = await Promise.all([...paths, ...paths].map((path) => read(path)));
    for (const set of sets) expect(values(set.cellArrays, 'Pressure')).toEqual([3, 4]);
    // Nothing is held open: the file can be replaced.
    copyFileSync(paths[1]!, paths[0]!);
    expect(Array.from((await read(paths[0]!)).cells?.types ?? [])).toEqual([12, 12]);
  });
});
