import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/basis/errors.js';
import { expandBatch } from '../../src/case/batch.js';
import { parseCase } from '../../src/case/read-case.js';
import { fluctuationDefaults, transferDefaults } from '../../src/case/schema.js';

const least = `precursor: {file: coarse.vtu}
target: {file: fine.vtu}
output: {file: start.vtu}
`;

const full = `title: louvre bay, medium mesh
precursor:
  file: louvre-precursor.vtu
  snapshot: last
  rename: {VelocityX: u}
  constants: {ViscosityKinematic: 1.5e-5}
  placement: {scale: 0.001, rotate: {axis: [0, 0, 1], degrees: 90}, translate: [0, 0, 0], mirror: [], extrude: z}
target:
  file: louvre-les.vtu
  walls: [{plane: y, at: [0, 2]}, slat, {box: [[0, 0, 0], [1, 1, 1]]}, {surface: slat.vtp}]
  periodic: [z]
transfer:
  method: linear
  outside: nearest
fluctuations:
  seed: 20261201
  energy: {intensity: 0.05}
  length: {constant: 0.01}
  stress: isotropic
  spectrum: {table: spectrum.csv}
  shells: 40
  directions: 16
  subgrid: model
  wavelength-cells: 3
  zones:
    - {box: [[0, 0, 0], [1, 1, 1]], fade: 0.1}
    - {sphere: {centre: [0, 0, 0], radius: 1}}
    - {cylinder: {from: [0, 0, 0], to: [0, 0, 1], radius: 1}, exclude: true}
    - {boundary: [slat], within: 0.2, fade: 0.05}
    - {field: TurbulentEnergyKinetic, above: 0.01}
  control: projection
  tolerance: 1.0e-6
checks: {divergence: 1.0e-3, energy: 0.05}
output: {file: louvre-start.vtu, report: louvre-start.html}
`;

function complaint(text: string): string {
  try {
    parseCase(text, 'cases/a.yaml');
  } catch (error) {
    if (error instanceof InputError) return error.message;
    throw error;
  }
  return 'no error';
}

describe('parseCase', () => {
  it('takes the example of every section', () => {
    const found = parseCase(full, 'cases/louvre.yaml');
    expect(found.precursor.files).toEqual(['cases/louvre-precursor.vtu']);
    expect(found.precursor.placement.scale).toBe(0.001);
    expect(found.target.walls[3]).toEqual({ surface: 'cases/slat.vtp' });
    expect(found.fluctuations).not.toBe('none');
    if (found.fluctuations === 'none') return;
    expect(found.fluctuations.spectrum).toEqual({ table: 'cases/spectrum.csv' });
    expect(found.fluctuations.zones).toHaveLength(5);
    expect(found.fluctuations.tolerance).toBe(1e-6);
    expect(found.output.report).toBe('cases/louvre-start.html');
  });

  it('fills in defaults', () => {
    const found = parseCase(least, 'here/a.yaml');
    expect(found.title).toBe('a');
    expect(found.precursor.snapshot).toBe('last');
    expect(found.precursor.omega).toBe('two-equation');
    expect(found.transfer).toEqual(transferDefaults);
    expect(found.fluctuations).toEqual(fluctuationDefaults);
    expect(found.checks).toEqual({ divergence: 1e-3, energy: 0.05 });
    expect(found.output.manifest).toBe('here/start.json');
    expect(found.output.report).toBe('here/start.html');
  });

  it('takes a section of comments for an empty one, but no empty value', () => {
    const text = `${least}fluctuations:\n  # shells: 3\ntransfer:\n`;
    expect(parseCase(text, 'a').fluctuations).toEqual(fluctuationDefaults);
    expect(complaint(`${least}transfer:\n  method:\n`)).toContain('line 5, transfer.method: nothing (an empty value)');
  });

  it('keeps absolute paths and leaves the report out on request', () => {
    const found = parseCase(
      least.replace('start.vtu}', 'start.vtu, report: none}').replace('fine.vtu', '/m/f.vtu'),
      'a',
    );
    expect(found.target.file).toBe('/m/f.vtu');
    expect(found.output.report).toBeUndefined();
    expect(parseCase(`${least}fluctuations: none\n`, 'a').fluctuations).toBe('none');
  });

  it.each([
    [
      'misspelt section',
      `${least}fluctuation: {}\n`,
      'line 4: unknown key fluctuation; the nearest known key is fluctuations',
    ],
    [
      'misspelt key',
      `${least}transfer:\n  methd: linear\n`,
      'line 5, transfer: unknown key methd; the nearest known key is method',
    ],
    [
      'misspelt required key',
      least.replace('target: {file', 'target: {fil'),
      'line 2, target: unknown key fil; the nearest known key is file',
    ],
    [
      'key of one of several forms',
      `${least}fluctuations:\n  energy: {intensty: 0.1}\n`,
      'line 5, fluctuations.energy: unknown key intensty; the nearest known key is intensity',
    ],
    [
      'key inside fluctuations, which has two forms',
      `${least}fluctuations:\n  shells: 10\n  wavelength-cell: 4\n`,
      'line 6, fluctuations: unknown key wavelength-cell; the nearest known key is wavelength-cells',
    ],
    [
      'value',
      `${least}transfer: {method: lineal}\n`,
      'line 4, transfer.method: lineal is not known here; write linear,',
    ],
    ['kind', `${least}fluctuations: {seed: often}\n`, 'line 4, fluctuations.seed: often stands here; write a number'],
    ['fraction', `${least}fluctuations: {seed: 1.5}\n`, 'fluctuations.seed: 1.5 stands here; write a whole number'],
    ['bound', `${least}fluctuations: {shells: 1}\n`, 'fluctuations.shells: 1 stands here; write at least 2'],
    [
      'sign',
      `${least}fluctuations: {length: {constant: 0}}\n`,
      'fluctuations.length.constant: 0 stands here; write more than 0',
    ],
    ['missing section', 'precursor: {file: a.vtu}\ntarget: {file: b.vtu}\n', 'output: this key is missing'],
    [
      'form of a selection',
      least.replace('fine.vtu', 'fine.vtu, walls: [{plane: q, at: 0}]'),
      'target.walls[0].plane: q is not known here; write x, y or z',
    ],
    [
      'no list',
      least.replace('fine.vtu', 'fine.vtu, walls: all'),
      'line 2, target.walls: all stands here; write a list',
    ],
    [
      'zone without its form',
      `${least}fluctuations: {zones: [{fade: 1}]}\n`,
      'fluctuations.zones[0]: a section of keys is not a form',
    ],
    [
      'zone',
      `${least}fluctuations: {zones: [{sphere: {centre: [0, 0], radius: 1}}]}\n`,
      'fluctuations.zones[0].sphere.centre',
    ],
    ['box', `${least}fluctuations: {zones: [{box: [[1, 0, 0], [0, 1, 1]]}]}\n`, 'every coordinate of the first corner'],
    [
      'quantity',
      least.replace('coarse.vtu', 'coarse.vtu, rename: {VelocitX: u}'),
      'line 1, precursor.rename: VelocitX is not a standard quantity',
    ],
    ['repeated key', `${least}title: a\ntitle: b\n`, 'line 5: Map keys must be unique'],
    ['broken text', `${least}title: [a\n`, 'line '],
    ['second document', `${least}---\ntitle: b\n`, 'a second document begins'],
    ['nothing', '', 'the file is empty'],
    ['only text', 'hello\n', 'hello stands here; write a section of keys'],
    ['overwritten input', least.replace('start.vtu', 'fine.vtu'), 'output.file: fine.vtu is an input of this case'],
    [
      'two outputs in one',
      least.replace('start.vtu', 'start.vtu, report: start.vtu'),
      'output.report: start.vtu is output.file already',
    ],
    ['too many modes', `${least}fluctuations: {shells: 1000, directions: 10000}\n`, 'more than a million'],
  ])('explains: %s', (_, text, part) => {
    expect(complaint(text)).toContain('cases/a.yaml');
    expect(complaint(text)).toContain(part);
  });

  it('survives a text made to explode', () => {
    const bomb = ['a: &a [x, x, x, x, x, x, x, x, x]'];
    for (let i = 1; i < 9; i++) {
      const before = String.fromCharCode(96 + i);
      const name = String.fromCharCode(97 + i);
      bomb.push(`${name}: &${name} [${Array(9).fill(`*${before}`).join(', ')}]`);
    }
    expect(complaint(bomb.join('\n'))).toMatch(/alias/i);
  });
});

describe('expandBatch', () => {
  it('makes the matrix of targets and snapshots', () => {
    const text = `precursor: {file: a.pvd}
target: {file: fine.vtu, periodic: [z]}
targets: [coarse.vtu, {file: fine.vtu, walls: [all]}]
snapshots: [mean, 0.5]
output: {file: "{target}-{snapshot}.vtu"}
`;
    const members = expandBatch(parseCase(text, 'c/case.yaml'));
    expect(members.map((member) => member.case.output.file)).toEqual([
      'c/coarse-mean.vtu',
      'c/coarse-0.5.vtu',
      'c/fine-mean.vtu',
      'c/fine-0.5.vtu',
    ]);
    expect(members[0]!.case.target.periodic).toEqual(['z']);
    expect(members[3]!.case.target.walls).toEqual(['all']);
    expect(members[3]!.case.precursor.snapshot).toBe(0.5);
    expect(members[3]!.case.output.manifest).toBe('c/fine-0.5.json');
    expect(() => expandBatch(parseCase(text.replace('-{snapshot}', ''), 'c/case.yaml'))).toThrow('would write');
    expect(expandBatch(parseCase(least, 'case.yaml'))).toHaveLength(1);
  });
});
