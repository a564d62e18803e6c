import { existsSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { boxCase, caseText, eddygraft, makeArray, profileText, writeBox } from './cases.js';

// What is wrong is said in one sentence on standard error, with exit code 2; nothing is written.
let folder = '';
beforeAll(async () => {
  folder = await boxCase(6);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function refuses(message: RegExp, ...args: string[]): void {
  const before = readdirSync(join(folder, 'out'));
  const { code, out, err } = eddygraft(folder, ...args);
  expect(err).toMatch(message);
  expect(code, err).toBe(2);
  expect(out).toBe('');
  expect(err.trim().split('\n').length, err).toBe(1);
  expect(err).not.toMatch(/\bat .*\.js:\d+/);
  expect(readdirSync(join(folder, 'out'))).toEqual(before);
}

function withCase(text: string): string {
  writeFileSync(join(folder, 'changed.yaml'), text);
  return 'changed.yaml';
}

function withProfile(text: string): string {
  writeFileSync(join(folder, 'changed.csv'), text);
  return withCase(caseText.replace('profile.csv', 'changed.csv'));
}

describe('a case file', () => {
  it.each([
    ['an unknown key names the nearest', caseText.replace('shells:', 'shels:'), /line 4.*shels.*shells/],
    ['a wrong type names line and key', caseText.replace('shells: 12', 'shells: many'), /line 4.*shells/],
    ['broken YAML names the line', `${caseText}  x: [`, /line \d+/],
    ['a missing precursor file', caseText.replace('profile.csv', 'nothing.csv'), /nothing\.csv/],
    ['walls that take no face', caseText.replace('at: [0, 1]', 'at: [0.3]'), /box\.vtu.*no .*face/],
    ['walls of an unknown name', caseText.replace('[{ plane: y, at: [0, 1] }]', '[roof]'), /roof/],
    ['an output that is not written', caseText.replace('start.vtu', 'start.xyz'), /\.xyz.*\.vtu/],
    ['a structured output of another mesh', caseText.replace('start.vtu', 'start.vti'), /\.vti.*\.vtu/],
    ['a batch given to run', `${caseText}snapshots: [first, last]\n`, /batch/],
  ])('%s', (_, text, message) => refuses(message, 'run', withCase(text)));
});

describe('a precursor', () => {
  const without = (column: number): string =>
    profileText()
      .split('\n')
      .map((line) =>
        line
          .split(',')
          .filter((_, i) => i !== column)
          .join(),
      )
      .join('\n');
  it.each([
    ['no k: the pair and the option are named', without(2), /no k.*--intensity|TurbulentEnergyKinetic.*--intensity/],
    ['no length: the pair and the option are named', without(3), /TurbulentDissipation.*--length/],
    [
      'not a number: line and column',
      profileText((row, i) => (i === 3 ? [row[0] as string, 'fast', ...row.slice(2)] : row)),
      /line 5.*fast/,
    ],
    [
      'NaN: the first entry',
      profileText((row, i) => (i === 7 ? [...row.slice(0, 2), 'nan', row[3] as string] : row)),
      /TurbulentEnergyKinetic.*(7|line 9)/,
    ],
    ['infinite', profileText((row, i) => (i === 2 ? [...row.slice(0, 3), 'inf'] : row)), /TurbulentDissipation/],
    ['a row too short', profileText((row, i) => (i === 4 ? row.slice(0, 2) : row)), /line 6/],
    ['one row', `${profileText().split('\n').slice(0, 2).join('\n')}\n`, /1 point.*2/],
    ['no rows', `${profileText().split('\n')[0]}\n`, /changed\.csv/],
    ['an empty file', '', /changed\.csv.*empty/],
    [
      'names that nothing recognises',
      profileText()
        .replace('TurbulentEnergyKinetic', 'k')
        .replace('VelocityX', 'u')
        .replace('TurbulentDissipation', 'e'),
      /u.*k.*e.*rename/,
    ],
  ])('%s', (_, text, message) => refuses(message, 'run', withProfile(text)));
});

describe('a target', () => {
  it('truncated', () => {
    const whole = readFileSync(join(folder, 'box.vtu'));
    writeFileSync(join(folder, 'cut.vtu'), whole.subarray(0, whole.length - 3000));
    refuses(/cut\.vtu.*(truncated|ends)/, 'run', withCase(caseText.replace('box.vtu', 'cut.vtu')));
  });
  it('without cells', () => {
    refuses(/profile\.csv.*no cells/, 'run', withCase(caseText.replace('file: box.vtu', 'file: profile.csv')));
  });
  it('that is no data file', () => {
    writeFileSync(join(folder, 'noise.vtu'), 'no data at all');
    refuses(/noise\.vtu/, 'run', withCase(caseText.replace('box.vtu', 'noise.vtu')));
  });
  it('fields of a wrong kind on it', async () => {
    const n = 216;
    await writeBox(join(folder, 'scalar.vtu'), 6, [makeArray('Velocity', 1, new Float64Array(n).fill(1))]);
    refuses(
      /Velocity.*component/,
      'fluctuate',
      'scalar.vtu',
      '-o',
      'out/f.vtu',
      '--intensity',
      '0.1',
      '--length',
      '0.1',
    );
  });
});

describe('options', () => {
  it.each([
    ['an unknown option', ['run', 'case.yaml', '--sed', '3'], /--sed/],
    ['a number that is none', ['run', 'case.yaml', '--seed', 'x'], /'x'/],
    [
      'too few points for the method',
      ['transfer', 'few.csv', 'box.vtu', '-o', 'out/t.vtu', '--method', 'inverse-distance'],
      /3 points.*8/,
    ],
    [
      'conservative without cells',
      ['transfer', 'profile.csv', 'box.vtu', '-o', 'out/t.vtu', '--method', 'conservative'],
      /profile\.csv.*conservative/,
    ],
    [
      'a rename to nothing',
      ['transfer', 'profile.csv', 'box.vtu', '-o', 'out/t.vtu', '--rename', 'u=VelocityX'],
      /named u/,
    ],
    [
      'cells outside where that is refused',
      ['transfer', 'few4.csv', 'box.vtu', '-o', 'out/t.vtu', '--outside', 'fail'],
      /outside the precursor/,
    ],
    ['a memory limit that is too low', ['run', 'case.yaml', '--memory', '1MB'], /GiB.*--memory/],
    ['audit of a file without velocity', ['audit', 'box.vtu'], /Velocity.*--rename/],
  ])('%s', (_, args, message) => {
    writeFileSync(join(folder, 'few.csv'), 'CoordinateX,CoordinateY,CoordinateZ,Pressure\n0,0,0,1\n1,0,0,1\n0,1,0,1\n');
    writeFileSync(
      join(folder, 'few4.csv'),
      'CoordinateX,CoordinateY,CoordinateZ,Pressure\n0,0,0,1\n1,0,0,1\n0,1,0,1\n0,0,1,2\n',
    );
    const { code, err } = eddygraft(folder, ...args);
    expect(err).toMatch(message);
    expect(code, err).toBe(2);
    expect(existsSync(join(folder, 'out', 't.vtu'))).toBe(false);
  });
});
