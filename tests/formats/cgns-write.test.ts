import { existsSync, mkdirSync, readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { DataArray, Dataset, WriteRequest } from '../../src/basis/dataset.js';
import { readCgns, readCgnsFaceArrays, writeCgns } from '../../src/formats/cgns.js';
import { readDataset, writeDataset } from '../../src/formats/registry.js';
import { buildMesh } from '../../src/mesh/build.js';
import { datasetCentroids } from '../../src/mesh/centroids.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { structuredCells, structuredPoints } from '../../src/mesh/structured.js';
import { checkErrors, differences, hasTool, temporaryFolder, unpackShapes } from '../helpers/cgns-files.js';
import { cubes, writeTree } from '../helpers/cgns-tree.js';
import {
  brickPolyhedra,
  hexBox,
  makeArray,
  makeDataset,
  mixedBox,
  polyBox,
  prismBox,
  quadSheet,
  refinedBox,
  tetBox,
} from '../helpers/meshes.js';
import { hasPythonModule, runPython } from '../helpers/python.js';

const folder = temporaryFolder();
const tools = hasTool('cgnscheck') && hasTool('cgnsdiff');
if (!tools) console.log('skipped: cgnscheck and cgnsdiff (cgns-convert is not installed)');
beforeAll(() => unpackShapes(folder.path));
afterAll(folder.remove);

const values = (arrays: readonly DataArray[], name: string): number[] => {
  const array = arrays.find((one) => one.name === name);
  if (array === undefined) throw new Error(`no array ${name} among ${arrays.map((one) => one.name).join()}`);
  return Array.from(array.load(), Number);
};

/** Fields that tell a cell by its centre, so that any order of cells can be checked. */
function startOf(mesh: Dataset): WriteRequest {
  const centres = datasetCentroids(mesh);
  const cells = centres.length / 3;
  const heights = Float64Array.from({ length: mesh.points.length / 3 }, (_, p) => 2 + mesh.points[3 * p + 2]!);
  const codes = Uint8Array.from({ length: cells }, (_, c) => c % 4);
  return {
    mesh,
    cellArrays: [
      makeArray('Velocity', 3, centres),
      makeArray(
        'VelocityCovariance',
        6,
        Float64Array.from({ length: 6 * cells }, (_, i) => i % 6),
      ),
      { name: 'Outside', components: 1, tuples: cells, type: 'UInt8', load: () => codes },
    ],
    pointArrays: [makeArray('Density', 1, heights)],
    notes: new Map([
      ['Provenance', 'seed 7'],
      ['a note with a name of more than thirty-two characters', 'long'],
    ]),
  };
}

function checkFields(back: Dataset): void {
  const centres = datasetCentroids(back);
  ['X', 'Y', 'Z'].forEach((axis, a) => {
    values(back.cellArrays, `Velocity${axis}`).forEach((value, c) => {
      expect(value).toBeCloseTo(centres[3 * c + a]!, 6);
    });
  });
  ['XX', 'XY', 'XZ', 'YY', 'YZ', 'ZZ'].forEach((suffix, k) => {
    expect(new Set(values(back.cellArrays, `VelocityCovariance${suffix}`))).toEqual(new Set([k]));
  });
  expect(back.cellArrays.find(({ name }) => name === 'Outside')?.type).toBe('Int32');
  values(back.pointArrays, 'Density').forEach((value, p) => {
    expect(value).toBeCloseTo(2 + back.points[3 * p + 2]!, 6);
  });
  expect(back.notes.get('Provenance')).toBe('seed 7');
  expect(back.remarks.filter((remark) => !/several solutions|time series|series/.test(remark))).toEqual([]);
}

const sorted = (dataset: Dataset): number[] =>
  Array.from(measureMesh(buildMesh(dataset)).cellVolumes).sort((a, b) => a - b);

function sameVolumes(a: Dataset, b: Dataset): void {
  const [first, second] = [sorted(a), sorted(b)];
  expect(first.length).toBe(second.length);
  first.forEach((volume, c) => {
    expect(volume).toBeCloseTo(second[c]!, 12);
  });
}

const name = (x: number, _y: number, z: number): string | undefined =>
  x < 1e-9 ? 'inlet' : z < 1e-9 ? 'floor of the bay with a rather long name' : undefined;
const options = {
  warp: 0.15,
  name,
  kinds: { inlet: 'inflow', 'floor of the bay with a rather long name': 'wall' },
} as const;

describe('new files', () => {
  const meshes: Readonly<Record<string, () => Dataset>> = {
    hexahedra: () => hexBox(3, 2, 2, options),
    tetrahedra: () => tetBox(2, 2, 2, options),
    prisms: () => prismBox(2, 2, 2, options),
    mixed: () => mixedBox(4, 2, 2, options),
    bricks: () => brickPolyhedra(2, 2, 2, options),
    polyhedra: () => polyBox(2, 2, 2, options),
    refined: () => refinedBox(2, 2, 2),
  };

  it.each(Object.keys(meshes))('keeps %s with their fields and boundaries', async (kind) => {
    const mesh = meshes[kind]!();
    const path = join(folder.path, `new-${kind}.cgns`);
    await writeCgns(path, startOf(mesh));
    const back = await readCgns(path);
    sameVolumes(mesh, back);
    checkFields(back);
    expect(buildMesh(back).innerFaceCount).toBe(buildMesh(mesh).innerFaceCount);
    expect(back.boundaries.map((patch) => [patch.name, patch.kind, patch.offsets.length - 1]).sort()).toEqual(
      mesh.boundaries.map((patch) => [patch.name.slice(0, 32), patch.kind, patch.offsets.length - 1]).sort(),
    );
    if (tools) expect(checkErrors(path)).toEqual([]);
    expect(readdirSync(folder.path).filter((file) => file.endsWith('.part'))).toEqual([]);
  });

  it('keeps structured zones structured, in several zones', async () => {
    const structure = (origin: number, cells: number) =>
      ({ kind: 'image', extent: [0, cells, 0, 2, 0, 3], origin: [origin, 0, 0], spacing: [0.5, 0.5, 0.25] }) as const;
    const parts = [structure(0, 2), structure(1, 3)];
    const points = parts.flatMap((part) => Array.from(structuredPoints(part)));
    const topologies = [structuredCells(parts[0]!), structuredCells(parts[1]!, 36)];
    const [a, b] = topologies as [(typeof topologies)[0], (typeof topologies)[0]];
    const mesh = makeDataset(
      points,
      {
        types: Uint8Array.from([...a.types, ...b.types]),
        offsets: Int32Array.from([...a.offsets, ...Array.from(b.offsets.slice(1), (n) => n + a.connectivity.length)]),
        connectivity: Int32Array.from([...a.connectivity, ...b.connectivity]),
      },
      {
        zones: [
          { name: 'one', pointBegin: 0, pointEnd: 36, cellBegin: 0, cellEnd: 12, structure: parts[0]! },
          { name: 'two', pointBegin: 36, pointEnd: 84, cellBegin: 12, cellEnd: 30, structure: parts[1]! },
        ],
      },
    );
    const path = join(folder.path, 'boxes.cgns');
    await writeCgns(path, startOf(mesh));
    const back = await readCgns(path);
    expect(back.zones.map((zone) => [zone.name, zone.structure?.extent])).toEqual([
      ['one', [0, 2, 0, 2, 0, 3]],
      ['two', [0, 3, 0, 2, 0, 3]],
    ]);
    expect(Array.from(back.points)).toEqual(points);
    expect(Array.from(back.cells!.types)).toEqual(new Array(30).fill(12));
    checkFields(back);
    sameVolumes(mesh, back);
    if (tools) expect(checkErrors(path)).toEqual([]);
  });

  it('keeps surfaces', async () => {
    const mesh = quadSheet(3, 2);
    const path = join(folder.path, 'sheet.cgns');
    await writeCgns(path, startOf(mesh));
    const back = await readCgns(path);
    expect(Array.from(back.cells!.connectivity)).toEqual(Array.from(mesh.cells!.connectivity));
    checkFields(back);
    if (tools) expect(checkErrors(path)).toEqual([]);
  });

  it('keeps quadratic cells with all their points', async () => {
    const source = await readCgns(join(folder.path, 'quadratic.cgns'));
    const path = join(folder.path, 'new-quadratic.cgns');
    await writeCgns(path, { ...startOf(source), mesh: { ...source, format: 'vtu' } });
    const back = await readCgns(path);
    expect(Array.from(back.cells!.types)).toEqual(Array.from(source.cells!.types));
    expect(Array.from(back.cells!.connectivity)).toEqual(Array.from(source.cells!.connectivity));
    if (tools) expect(checkErrors(path)).toEqual([]);
  });

  it('carries a VTK file over and back', async () => {
    const mesh = mixedBox(4, 2, 2, { warp: 0.1 });
    const [vtu, cgns] = [join(folder.path, 'there.vtu'), join(folder.path, 'there.cgns')];
    await writeDataset(vtu, startOf(mesh));
    const none = { cellArrays: [], pointArrays: [], notes: new Map<string, string>() };
    await writeDataset(cgns, { mesh: await readDataset(vtu), ...none });
    const back = await readDataset(cgns);
    checkFields(back);
    sameVolumes(mesh, back);
  });

  // Plane faces: VTK splits warped ones otherwise.
  const flat: Readonly<Record<string, () => Dataset>> = {
    hexahedra: () => hexBox(3, 2, 2),
    mixed: () => mixedBox(4, 2, 2),
    bricks: () => brickPolyhedra(2, 2, 2),
    polyhedra: () => polyBox(2, 2, 2),
  };

  it.skipIf(!hasPythonModule('vtk')).each([...Object.keys(flat), 'boxes'])(
    '%s are read alike by the CGNS reader of VTK',
    async (file) => {
      const path = join(folder.path, file === 'boxes' ? 'boxes.cgns' : `flat-${file}.cgns`);
      if (file !== 'boxes') await writeCgns(path, startOf(flat[file]!()));
      const back = await readCgns(path);
      const [cells, volume, first, moment] = runPython([
        '-c',
        `import sys, vtk
from vtk.util.numpy_support import vtk_to_numpy as n
r = vtk.vtkCGNSReader(); r.SetFileName(sys.argv[1]); r.UpdateInformation(); r.EnableAllBases(); r.EnableAllCellArrays(); r.DisableAllPointArrays(); r.Update()
it = r.GetOutput().NewIterator(); count = 0; total = 0.0; first = 0.0; moment = 0.0
it.InitTraversal()
while not it.IsDoneWithTraversal():
    g = it.GetCurrentDataObject()
    s = vtk.vtkCellSizeFilter(); s.SetInputData(g); s.Update()
    d = s.GetOutput().GetCellData(); v = n(d.GetArray('Volume'))
    a = d.GetArray('Velocity') or d.GetArray('VelocityX')
    u = n(a); u = u[:, 0] if u.ndim > 1 else u
    count += len(v); total += abs(v).sum(); first += u.sum(); moment += (abs(v) * u).sum()
    it.GoToNextItem()
print(count, total, first, moment)`,
        path,
      ])
        .trim()
        .split(' ')
        .map(Number);
      const mesh = buildMesh(back);
      const sizes = measureMesh(mesh).cellVolumes;
      const velocity = values(back.cellArrays, 'VelocityX');
      expect(cells).toBe(sizes.length);
      const sum = (list: ArrayLike<number>): number => Array.from(list).reduce((total, value) => total + value, 0);
      expect(volume).toBeCloseTo(sum(sizes), 9);
      expect(first).toBeCloseTo(sum(velocity), 9);
      expect(moment).toBeCloseTo(sum(sizes.map((v, c) => v * velocity[c]!)), 9);
    },
  );

  it('refuses point clouds', async () => {
    const path = join(folder.path, 'cloud.cgns');
    await expect(writeCgns(path, { ...startOf(hexBox(1, 1, 1)), mesh: makeDataset([0, 0, 0]) })).rejects.toThrow(
      /needs a mesh/,
    );
    expect(existsSync(path)).toBe(false);
  });

  it.skipIf(!hasPythonModule('h5py'))('holds what h5py reads, large arrays in chunks', async () => {
    const box = {
      kind: 'image',
      extent: [0, 110, 0, 100, 0, 100],
      origin: [0, 0, 0],
      spacing: [0.01, 0.01, 0.02],
    } as const;
    const mesh = makeDataset(structuredPoints(box), structuredCells(box));
    const path = join(folder.path, 'chunks.cgns');
    await writeCgns(path, { ...startOf(mesh), pointArrays: [] });
    const out = runPython([
      '-c',
      `import h5py, numpy, sys
f = h5py.File(sys.argv[1], 'r')
z = f['Base/zone']
u = z['FlowSolution/VelocityX/ data']
c = z['HEXA_8/ElementConnectivity/ data'][...].reshape(-1, 8)
x = z['GridCoordinates/CoordinateX/ data'][...]
print(u.dtype, u.shape, u.chunks is not None, c.dtype, numpy.abs(x[c - 1].mean(axis=1) - u[...]).max() < 1e-12)
print(z.attrs['label'], z.attrs['type'], f['CGNSLibraryVersion/ data'][0] == numpy.float32(3.4))
print(bytes(z['FlowSolution/DimensionalUnits/ data'][1]).decode().strip(), z['FlowSolution/VelocityX/DimensionalExponents/ data'][...])`,
      path,
    ]).split('\n');
    expect(out[0]).toBe('float64 (1100000,) True int32 True');
    expect(out[1]).toBe("b'Zone_t' b'I4' True");
    expect(out[2]).toBe('Meter [ 0.  1. -1.  0.  0.]');
    const back = await readCgns(path);
    expect(Array.from(back.cells!.connectivity.subarray(-8))).toEqual(
      Array.from(mesh.cells!.connectivity.subarray(-8)),
    );
    expect(Buffer.compare(Buffer.from(back.points.buffer), Buffer.from(mesh.points.buffer))).toBe(0);
  });
});

describe('copies', () => {
  const sources = ['sections', 'mixed', 'polyhedra', 'quadratic', 'series', 'structured', 'links', 'plane'];

  it.each(sources)('adds to %s and changes nothing', async (source) => {
    const from = join(folder.path, `${source}.cgns`);
    const to = join(folder.path, `${source}-start.cgns`);
    const mesh = await readCgns(from);
    await writeCgns(to, startOf(mesh));
    const back = await readCgns(to);
    checkFields({ ...back, remarks: [] });
    expect(Array.from(back.points)).toEqual(Array.from(mesh.points));
    expect(back.boundaries).toEqual(mesh.boundaries);
    if (!tools) return;
    expect(checkErrors(to)).toEqual([]);
    const lines = differences(from, to);
    expect(lines.length).toBeGreaterThan(2);
    for (const line of lines) {
      expect(line).toMatch(/^> \/Base\/([^/]+\/Start(Point)?Fields|Provenance|a note with a name of more than .*)$/);
    }
  });

  it('adds a second start beside the first, and reads the newest', async () => {
    const once = join(folder.path, 'once.cgns');
    await writeTree(once, cubes());
    const mesh = await readCgns(once);
    await writeCgns(once, startOf(mesh));
    const second = startOf(await readCgns(once));
    await writeCgns(once, { ...second, cellArrays: [makeArray('Velocity', 3, new Float64Array(6).fill(9))] });
    const back = await readCgns(once);
    expect(values(back.cellArrays, 'VelocityX')).toEqual([9, 9]);
    expect(back.remarks.join('\n')).toMatch(
      /VelocityX is in several solutions; it was taken from StartFields_2, not StartFields/,
    );
  });

  it('follows links from another folder', async () => {
    const deep = join(folder.path, 'a', 'b');
    mkdirSync(deep, { recursive: true });
    for (const source of ['links', 'linked-zone']) {
      const mesh = await readCgns(join(folder.path, `${source}.cgns`));
      const before = readFileSync(join(folder.path, 'sections.cgns'));
      const to = join(deep, `${source}.cgns`);
      await writeCgns(to, startOf(mesh));
      const back = await readCgns(to);
      checkFields({ ...back, remarks: [] });
      expect(back.boundaries).toEqual(mesh.boundaries);
      expect(values(back.cellArrays, 'Pressure')).toEqual([10, 11, 12, 13]);
      if (tools) expect(checkErrors(to)).toEqual([]);
      // The file that is linked to stays as it is.
      expect(readFileSync(join(folder.path, 'sections.cgns')).equals(before)).toBe(true);
    }
  });

  it('keeps nodes that are not understood when it has to copy one by one', async () => {
    const own = join(folder.path, 'own');
    mkdirSync(own, { recursive: true });
    const strange = {
      name: 'Odd',
      label: 'UserDefinedData_t',
      children: [
        { name: 'Deep', label: 'UserDefinedData_t', type: 'R4', dimensions: [2, 3], values: [1, 2, 3, 4, 5, 6] },
      ],
    } as const;
    const link = { name: 'Away', label: '', link: { file: '../sections.cgns', path: '/Base/Zone/GridCoordinates' } };
    await writeTree(join(own, 'odd.cgns'), cubes({ more: [strange, link] }));
    const to = join(folder.path, 'odd-start.cgns');
    await writeCgns(to, startOf(await readCgns(join(own, 'odd.cgns'))));
    if (tools) {
      expect(
        differences(join(own, 'odd.cgns'), to).filter((line) => !/Start(Point)?Fields|Provenance|a note/.test(line)),
      ).toEqual([]);
    }
    checkFields({ ...(await readCgns(to)), remarks: [] });
  });

  it('refuses when the file has changed since it was read', async () => {
    const path = join(folder.path, 'changing.cgns');
    await writeTree(path, cubes());
    const mesh = await readCgns(path);
    await writeCgns(path, startOf(hexBox(2, 2, 2)));
    await expect(writeCgns(join(folder.path, 'late.cgns'), startOf(mesh))).rejects.toThrow(
      /has changed since it was read/,
    );
  });
});

describe('values on faces', () => {
  it.each(['copy', 'new'])('keeps fluxes with the direction of the polygons: %s', async (way) => {
    const source = await readCgns(join(folder.path, 'polyhedra.cgns'));
    const mesh = buildMesh(source);
    const geometry = measureMesh(mesh);
    const velocity = [0.3, -0.2, 0.5];
    const flux = (area: ArrayLike<number>): number => velocity.reduce((sum, u, a) => sum + u * area[a]!, 0);
    const fluxes = Float64Array.from({ length: mesh.faceCount }, (_, f) =>
      flux(geometry.faceAreas.subarray(3 * f, 3 * f + 3)),
    );
    const path = join(folder.path, `faces-${way}.cgns`);
    const request = startOf(way === 'copy' ? source : { ...source, format: 'vtu' });
    await writeCgns(path, request, {
      mesh,
      arrays: [{ name: 'VolumeFlux', values: fluxes, signed: true, exponents: [0, 3, -1, 0, 0] }],
    });
    const back = await readCgns(path);
    const [array] = await readCgnsFaceArrays(path);
    expect(array?.name).toBe('VolumeFlux');
    expect(array?.values.length).toBe(way === 'copy' ? 18 : mesh.faceCount);
    array?.values.forEach((value, f) => {
      const points = array.facePoints.subarray(array.faceOffsets[f], array.faceOffsets[f + 1]);
      const at = (p: number): Float64Array => back.points.subarray(3 * points[p]!, 3 * points[p]! + 3);
      // Area vector as the sum of triangles from the first point.
      const area = [0, 0, 0];
      for (let k = 1; k + 1 < points.length; k++) {
        const [u, v] = [k, k + 1].map((p) => [0, 1, 2].map((a) => at(p)[a]! - at(0)[a]!)) as [number[], number[]];
        for (let a = 0; a < 3; a++)
          area[a]! += 0.5 * (u[(a + 1) % 3]! * v[(a + 2) % 3]! - u[(a + 2) % 3]! * v[(a + 1) % 3]!);
      }
      expect(value).toBeCloseTo(flux(area), 12);
    });
    if (tools) expect(checkErrors(path)).toEqual([]);
  });
});
