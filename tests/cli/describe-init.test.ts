import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Command } from 'commander';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { readCase } from '../../src/case/read-case.js';
import { addDescribe } from '../../src/cli/describe.js';
import type { FileDescription } from '../../src/cli/describe-file.js';
import { addInit } from '../../src/cli/init.js';

let folder = '';
const at = (name: string): string => join(folder, name);

/** Two bricks side by side along x: 2 x 1 x 1 m, with k on the cells. */
const bricks = `<?xml version="1.0"?>
<VTKFile type="UnstructuredGrid" version="0.1" byte_order="LittleEndian"><UnstructuredGrid>
<Piece NumberOfPoints="12" NumberOfCells="2">
<CellData><DataArray type="Float64" Name="k" format="ascii">0.5 1.5</DataArray>
<DataArray type="Float64" Name="Velocity" NumberOfComponents="3" format="ascii">1 2 3 -4 5 6</DataArray></CellData>
<Points><DataArray type="Float64" NumberOfComponents="3" format="ascii">
0 0 0 1 0 0 2 0 0 0 1 0 1 1 0 2 1 0 0 0 1 1 0 1 2 0 1 0 1 1 1 1 1 2 1 1</DataArray></Points>
<Cells><DataArray type="Int32" Name="connectivity" format="ascii">0 1 4 3 6 7 10 9 1 2 5 4 7 8 11 10</DataArray>
<DataArray type="Int32" Name="offsets" format="ascii">8 16</DataArray>
<DataArray type="UInt8" Name="types" format="ascii">12 12</DataArray></Cells>
</Piece></UnstructuredGrid></VTKFile>
`;

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'eddygraft-cli-'));
  writeFileSync(at('bricks.vtu'), bricks);
  writeFileSync(at('profile.csv'), 'CoordinateY,VelocityX,tke,TurbulentDissipation\n0,1,0.1,2\n1,2,0.2,3\n');
  writeFileSync(at('bad.csv'), 'CoordinateY,VelocityX,TurbulentEnergyKinetic\n0,1,0.1\n1,nan,0.2\n');
  writeFileSync(
    at('section.csv'),
    'CoordinateX [mm],CoordinateY,CoordinateZ [mm],VelocityX,TurbulentDissipationRate\n0,0,500,1,1\n2000,0,500,1,1\n0,1000,500,1,1\n'.replace(
      'CoordinateY,',
      'CoordinateY [mm],',
    ),
  );
  writeFileSync(at('large.csv'), 'x,y,z,u\n0,0,0,1\n2000,1000,1000,2\n');
});
afterAll(() => {
  rmSync(folder, { recursive: true });
});

async function run(...argv: string[]): Promise<{ out: string; err: string }> {
  let out = '';
  let err = '';
  const stdout = vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    out += String(text);
    return true;
  });
  const stderr = vi.spyOn(process.stderr, 'write').mockImplementation((text) => {
    err += String(text);
    return true;
  });
  try {
    const program = new Command('eddygraft').exitOverride();
    addDescribe(program);
    addInit(program);
    await program.parseAsync(argv, { from: 'user' });
  } finally {
    stdout.mockRestore();
    stderr.mockRestore();
  }
  return { out, err };
}

describe('describe', () => {
  it('tells of a mesh and its arrays', async () => {
    const found = JSON.parse((await run('describe', at('bricks.vtu'), '--json')).out) as FileDescription;
    expect(found.cellTypes).toEqual({ hexahedron: 2 });
    expect(found.low).toEqual([0, 0, 0]);
    expect(found.high).toEqual([2, 1, 1]);
    expect(found.mesh).toMatchObject({ cells: 2, innerFaces: 1, boundaryFaces: 10, badVolumes: 0 });
    expect(found.mesh!.volume).toBeCloseTo(2, 14);
    expect(found.arrays).toContainEqual({
      place: 'cells',
      name: 'Velocity',
      components: 3,
      type: 'Float64',
      standard: 'Velocity',
      unit: 'm/s',
      min: -4,
      max: 6,
      notFinite: 0,
    });
    expect(found.suggestions).toHaveLength(1);
    expect(found.suggestions[0]).toMatchObject({ standard: 'TurbulentEnergyKinetic', inFile: 'k' });
    const without = JSON.parse((await run('describe', at('bricks.vtu'), '--json', '--no-mesh')).out) as FileDescription;
    expect(without.mesh).toBeUndefined();
  });

  it('takes a plane section of cells for what it is', async () => {
    writeFileSync(
      at('plane.vtu'),
      bricks
        .replace('0 1 4 3 6 7 10 9 1 2 5 4 7 8 11 10', '0 1 4 3 1 2 5 4')
        .replace('8 16', '4 8')
        .replace('12 12<', '9 9<'),
    );
    const found = JSON.parse((await run('describe', at('plane.vtu'), '--json')).out) as FileDescription;
    expect(found.cellTypes).toEqual({ quadrilateral: 2 });
    expect(found.mesh).toBeUndefined();
  });

  it('prints for people, and nothing with --quiet', async () => {
    const { out } = await run('describe', at('bricks.vtu'));
    expect(out).toContain('2 hexahedron');
    expect(out).toContain('perhaps meant');
    expect(await run('describe', at('bricks.vtu'), '--quiet')).toEqual({ out: '', err: '' });
  });

  it('counts values that are not finite and tells of missing axes', async () => {
    const { out, err } = await run('describe', at('bad.csv'), '--json');
    const found = JSON.parse(out) as FileDescription;
    expect(found.missingAxes).toEqual(['x', 'z']);
    expect(found.arrays[0]).toMatchObject({ name: 'VelocityX', notFinite: 1, min: 1, max: 1 });
    expect(err).toContain('not a number');
  });
});

describe('init', () => {
  it('writes a valid case with proposals in comments only', async () => {
    const path = at('profile.yaml');
    const { out, err } = await run('init', at('profile.csv'), at('bricks.vtu'), '-o', path);
    expect(out).toContain('eddygraft run');
    expect(err).toContain('tke as TurbulentEnergyKinetic');
    const text = readFileSync(path, 'utf8');
    expect(text).toContain('# TurbulentEnergyKinetic: tke');
    const found = await readCase(path);
    expect(found.precursor.files).toEqual([at('profile.csv')]);
    expect(found.precursor.rename).toEqual({});
    expect(found.output.file).toBe(at('bricks-start.vtu'));
    if (found.fluctuations === 'none') throw new Error('fluctuations are missing');
    expect(found.fluctuations.energy).toBe('precursor');
    expect(found.fluctuations.length).toBe('precursor');
  });

  it('becomes the case it proposes when the marks are taken away', async () => {
    const path = at('confirmed.yaml');
    await run('init', at('profile.csv'), at('bricks.vtu'), '-o', path);
    writeFileSync(
      path,
      readFileSync(path, 'utf8').replace('# TurbulentEnergyKinetic: tke', 'TurbulentEnergyKinetic: tke'),
    );
    expect((await readCase(path)).precursor.rename).toEqual({ TurbulentEnergyKinetic: 'tke' });
  });

  it('sees plane sections, units and missing turbulence', async () => {
    const section = at('section.yaml');
    await run('init', at('section.csv'), at('bricks.vtu'), '-o', section);
    const found = await readCase(section);
    expect(found.precursor.placement.extrude).toBe('z');
    expect(found.precursor.placement.scale).toBe(1);
    if (found.fluctuations === 'none') throw new Error('fluctuations are missing');
    expect(found.fluctuations.energy).toEqual({ intensity: 0.05 });
    expect(readFileSync(section, 'utf8')).toContain('epsilon-over-k: a factor of 11');
    const large = at('large.yaml');
    await run('init', at('large.csv'), at('bricks.vtu'), '-o', large);
    expect((await readCase(large)).precursor.placement.scale).toBe(0.001);
  });

  it('does not overwrite unless told, and writes nothing with --dry-run', async () => {
    const path = at('kept.yaml');
    writeFileSync(path, 'mine');
    await expect(run('init', at('profile.csv'), at('bricks.vtu'), '-o', path)).rejects.toThrow('exists already');
    expect(readFileSync(path, 'utf8')).toBe('mine');
    await run('init', at('profile.csv'), at('bricks.vtu'), '-o', path, '--overwrite');
    expect(readFileSync(path, 'utf8')).toContain('precursor:');
    const { out } = await run('init', at('profile.csv'), at('bricks.vtu'), '-o', at('dry.yaml'), '--dry-run');
    expect(out).toContain('precursor:');
    expect(existsSync(at('dry.yaml'))).toBe(false);
  });

  it('refuses a target without cells', async () => {
    await expect(run('init', at('bricks.vtu'), at('profile.csv'), '-o', at('no.yaml'))).rejects.toThrow('no cells');
  });
});
