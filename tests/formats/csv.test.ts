import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Dataset } from '../../src/basis/dataset.js';
import { InputError } from '../../src/basis/errors.js';
import { fieldsToArrays, recogniseFields } from '../../src/basis/quantities.js';
import { randomStream } from '../../src/basis/random.js';
import { csvFormat } from '../../src/formats/csv.js';

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'eddygraft-csv-'));
});
afterAll(() => {
  rmSync(folder, { recursive: true });
});

let count = 0;
function written(content: string | Uint8Array): string {
  const path = join(folder, `t${count++}.csv`);
  writeFileSync(path, content);
  return path;
}

async function read(content: string | Uint8Array): Promise<Dataset> {
  return csvFormat.read(written(content));
}

async function complaint(content: string | Uint8Array): Promise<string> {
  try {
    await read(content);
  } catch (error) {
    if (error instanceof InputError) return error.message;
    throw error;
  }
  return 'no error';
}

function values(dataset: Dataset, name: string): number[] {
  return [...(dataset.pointArrays.find((array) => array.name === name)!.load() as Float64Array)];
}

describe('layouts', () => {
  const rows = [
    ['1.5', '-2', '3e-3'],
    ['.5', '+2.25', '-1E2'],
  ];
  it.each([
    ['comma', ',', ','],
    ['comma and blanks', ' , ', ' ,'],
    ['semicolon', ';', ';'],
    ['tab', '\t', '\t'],
    ['stroke', '|', '|'],
    ['strokes in blanks', ' | ', '  |  '],
    ['blanks', '  ', ' \t '],
  ])('%s', async (_, between, betweenCells) => {
    for (const end of ['\n', '\r\n', '\r']) {
      for (const tail of ['', end, `${end}${end}`]) {
        const text = ['CoordinateX', 'CoordinateY', 'Pressure'].join(between);
        const body = rows.map((row) => row.join(betweenCells)).join(end);
        const found = await read(`${text}${end}${body}${tail}`);
        expect([...found.points]).toEqual([1.5, -2, 0, 0.5, 2.25, 0]);
        expect(values(found, 'Pressure')).toEqual([0.003, -100]);
        expect(found.missingAxes).toEqual(['z']);
      }
    }
  });

  it('takes decimal commas between semicolons, tabs and blanks', async () => {
    for (const between of [';', '\t', ' ']) {
      const found = await read(`CoordinateY${between}Pressure\n1,5${between}-2,25e1\n,5${between}7\n`);
      expect([...found.points]).toEqual([0, 1.5, 0, 0, 0.5, 0]);
      expect(values(found, 'Pressure')).toEqual([-22.5, 7]);
      expect(found.missingAxes).toEqual(['x', 'z']);
    }
    expect(await complaint('CoordinateY;Pressure\n1,5;2.5\n')).toContain('line 2: decimal points and decimal commas');
    expect(await complaint('CoordinateY;Pressure\n1.234,5;2\n')).toContain('"1.234,5" is not a number');
  });

  it('takes a byte-order mark, comments, quotes, blank lines, a last delimiter and any order', async () => {
    const text = `\uFEFF# made by: hand\n! another\n\n"Pressure", "CoordinateX [m]" ,"note, long","CoordinateZ [m]",
1,"2",5,3,
% in between
 // and this

4,5,"6",6,
`;
    const found = await read(text);
    expect([...found.points]).toEqual([2, 0, 3, 5, 0, 6]);
    expect(values(found, 'Pressure')).toEqual([1, 4]);
    expect(values(found, 'note, long')).toEqual([5, 6]);
    expect(found.notes.get('made by')).toBe('hand');
  });

  it('takes the names from the comment above the numbers', async () => {
    const found = await read('# table\n# CoordinateX CoordinateY [mm] k\n1 2 3\n4 5 6\n'.replace('X ', 'X [mm] '));
    expect([...found.points]).toEqual([0.001, 0.002, 0, 0.004, 0.005, 0]);
    expect(values(found, 'k')).toEqual([3, 6]);
    expect(found.remarks.join()).toContain('comment line above');
  });

  it('takes x, y, z and says so', async () => {
    const found = await read('x,y,z,Pressure\n1,2,3,4\n');
    expect([...found.points]).toEqual([1, 2, 3]);
    expect(found.remarks.join()).toContain('taken as CoordinateX');
    expect((await read('CoordinateX,y,Pressure\n1,2,3\n')).pointArrays.map(({ name }) => name)).toEqual([
      'y',
      'Pressure',
    ]);
  });

  it('leaves out columns of text', async () => {
    const found = await read('CoordinateX,region,Pressure\n1,inlet,2\n3,,4\n');
    expect(values(found, 'Pressure')).toEqual([2, 4]);
    expect(found.remarks.join()).toContain('region holds text');
  });

  it('converts units and tells what it cannot', async () => {
    const text = `CoordinateX [mm];CoordinateY [mm];VelocityX [cm/s];Pressure (kPa);Temperature [degC];TurbulentDissipation [m^2/s^3];Density [slug/ft3];ViscosityKinematic [m/s]
1000;2;300;1;20;4;5;6
`;
    const found = await read(text);
    expect([...found.points]).toEqual([1, 0.002, 0]);
    expect(values(found, 'VelocityX')).toEqual([3]);
    expect(values(found, 'Pressure')).toEqual([1000]);
    expect(values(found, 'Temperature')).toEqual([293.15]);
    expect(values(found, 'TurbulentDissipation')).toEqual([4]);
    expect(values(found, 'Density')).toEqual([5]);
    const remarks = found.remarks.join('\n');
    expect(remarks).toContain('CoordinateX converted from mm to m');
    expect(remarks).toContain('Unit [slug/ft3] of Density is not known');
    expect(remarks).toContain('ViscosityKinematic is not one of its kind');
    expect(await complaint('CoordinateX [mm],CoordinateY [m],Pressure\n1,2,3\n')).toContain('different units');
  });
});

describe('faults', () => {
  it.each([
    ['a word', 'CoordinateX,Pressure\n1,2\n3,abc\n', 'line 3, column 2 (Pressure): "abc" is not a number'],
    ['a number with a tail', 'CoordinateX,Pressure\n1,2\n3,4x\n', 'line 3, column 2 (Pressure): "4x" is not a number'],
    ['a bare exponent', 'CoordinateX,Pressure\n1,2\n3,4e\n', 'line 3, column 2 (Pressure): "4e" is not a number'],
    ['a sign alone', 'CoordinateX,Pressure\n1,2\n-,4\n', 'line 3, column 1 (CoordinateX): "-" is not a number'],
    ['hexadecimal', 'CoordinateX,Pressure\n1,0x10\n', 'line 2, column 2 (Pressure): "0x10" is not a number'],
    ['an empty cell', 'CoordinateX,Pressure,Density\n1,,2\n', 'line 2, column 2 (Pressure): the cell is empty'],
    ['an empty last cell', 'CoordinateX,Pressure,Density\n1,2,\n', 'line 2, column 3 (Density): the cell is empty'],
    ['a short row', 'CoordinateX,Pressure,Density\n1,2,3\n\n# x\n1,2\n', 'line 5: the row has 2 cells, the header 3'],
    ['a long row', 'CoordinateX,Pressure\n1,2\n1,2,3\n', 'line 3: the row has more cells than the header'],
    [
      'a short row of blanks',
      'CoordinateX Pressure Density\n1 2 3\n1 2\n',
      'line 3: the row has 2 cells, the header 3',
    ],
    ['a long row of blanks', 'CoordinateX Pressure\n1 2\n1 2 3\n', 'line 3: the row has more cells than the header'],
    ['an infinite coordinate', 'CoordinateX,Pressure\n1,2\ninf,2\n', 'point 1 (counted from 0), column CoordinateX'],
    ['no coordinate', 'Pressure,Density\n1,2\n', 'no column is a coordinate (found Pressure, Density)'],
    ['no header', '1,2\n3,4\n', 'line 1: numbers stand where the header is expected'],
    ['no rows', 'CoordinateX,Pressure\n', 'a header and no rows'],
    ['one column', 'CoordinateX\n1\n', 'only one column'],
    ['comments only', '# hello\n', 'no table'],
    ['nothing', '', 'the file is empty'],
    ['a doubled name', 'CoordinateX,Pressure,Pressure\n1,2,3\n', 'two columns are called Pressure'],
  ])('%s', async (_, text, part) => {
    expect(await complaint(text)).toContain(part);
  });

  it('refuses UTF-16', async () => {
    expect(await complaint(Buffer.from('\uFEFFCoordinateX,Pressure\n1,2\n', 'utf16le'))).toContain('UTF-16');
  });

  it('keeps what is not a number for the check of the fields', async () => {
    const found = await read('CoordinateX,Pressure,Density\n1,NaN,1\n2,-Infinity,1\n3,inf,1\n');
    expect(values(found, 'Pressure')).toEqual([Number.NaN, Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY]);
    expect(() => recogniseFields(found.pointArrays, { file: found.file })).toThrow('entry 0 (counted from 0)');
  });
});

describe('numbers', () => {
  function randomNumber(next: () => number): string {
    const digit = (): string => String(Math.floor(next() * 10));
    const digits = (most: number): string => Array.from({ length: 1 + Math.floor(next() * most) }, digits1).join('');
    function digits1(): string {
      return digit();
    }
    const kind = next();
    if (kind < 0.2) return String((next() - 0.5) * 10 ** Math.floor(next() * 40 - 20));
    if (kind < 0.25) return (next() * 10 ** (next() * 600 - 300)).toExponential();
    const sign = ['', '-', '+'][Math.floor(next() * 3)];
    const whole = digits(next() < 0.5 ? 4 : 20);
    const fraction = next() < 0.7 ? `.${next() < 0.1 ? '' : digits(next() < 0.5 ? 8 : 20)}` : '';
    const exponent =
      next() < 0.4 ? `${next() < 0.5 ? 'e' : 'E'}${['', '-', '+'][Math.floor(next() * 3)]}${digits(2)}` : '';
    return `${sign}${whole}${fraction}${exponent}`;
  }

  it('are the correctly rounded ones', async () => {
    // Outside: the conversion that ECMAScript prescribes, which rounds correctly.
    const next = randomStream(7, 'csv numbers');
    const texts = Array.from({ length: 60_000 }, () => randomNumber(next));
    const special = ['0', '-0', '9007199254740993', '4.9e-324', '1.7976931348623157e308', '123456789012345e22'];
    special.push('999999999999999e-22', '0.000000000000000000000001', '00000000000000000001.5', '1e23', '8.5e-23');
    texts.push(...special);
    const found = await read(`CoordinateX,v\n${texts.map((text) => `0,${text}`).join('\n')}\n`);
    const wrong = values(found, 'v').flatMap((value, at) =>
      Object.is(value, Number(texts[at])) ? [] : [`${texts[at]} read as ${value}`],
    );
    expect(wrong).toEqual([]);
  });

  it('takes exponents written with D', async () => {
    expect(values(await read('CoordinateX v\n0 1.5D-03\n0 -2d2\n'), 'v')).toEqual([0.0015, -200]);
  });

  it('does not depend on where blocks end', async () => {
    // Rows of uneven length over three blocks of 4 MiB.
    const rows: string[] = [];
    let bytes = 0;
    for (let row = 0; bytes < 10e6; row++) {
      const text = `${row}, ${'0'.repeat(row % 97)}${row * 0.25},${row % 3 === 0 ? '"7"' : 7}`;
      rows.push(text);
      bytes += text.length + 1;
    }
    const found = await read(`CoordinateX,a,b\n${rows.join('\n')}`);
    expect(found.points.length).toBe(rows.length * 3);
    const a = values(found, 'a');
    expect(a.every((value, row) => value === row * 0.25 && found.points[row * 3] === row)).toBe(true);
    expect(values(found, 'b').every((value) => value === 7)).toBe(true);
    rows[rows.length - 1] = '1,2';
    expect(await complaint(`CoordinateX,a,b\n${rows.join('\n')}`)).toContain(`line ${rows.length + 1}: `);
  });
});

describe('writing', () => {
  it('is undone by reading, vectors by components', async () => {
    const cloud = await read('CoordinateX,CoordinateY,smoke\n0.1,0.2,1\n1e-300,-3.25,2\n');
    const fields = new Map([
      ['Velocity', { components: 3, values: Float64Array.of(1 / 3, 2, 3, 4, 5e-17, 6) }],
      ['VelocityCovariance', { components: 6, values: Float64Array.from({ length: 12 }, (_, at) => at / 7) }],
    ]);
    const path = join(folder, 'out.csv');
    await csvFormat.write?.(path, {
      mesh: cloud,
      pointArrays: fieldsToArrays(fields),
      cellArrays: [],
      notes: new Map([['made with', 'this test']]),
    });
    const text = readFileSync(path, 'utf8');
    expect(text.split('\n')[1]).toContain(
      'CoordinateX,CoordinateY,smoke,VelocityX,VelocityY,VelocityZ,VelocityCovarianceXX',
    );
    const back = await csvFormat.read(path);
    expect([...back.points]).toEqual([...cloud.points]);
    expect(values(back, 'smoke')).toEqual([1, 2]);
    expect(back.notes.get('made with')).toBe('this test');
    const found = recogniseFields(back.pointArrays, { file: path }).fields;
    for (const [name, field] of fields) expect([...found.get(name)!.values]).toEqual([...field.values]);
  });

  it('puts cell values at the centroids', async () => {
    const tetrahedron: Dataset = {
      ...(await read('CoordinateX,CoordinateY,CoordinateZ,a\n0,0,0,1\n1,0,0,1\n0,1,0,1\n0,0,1,1\n')),
      cells: {
        types: Uint8Array.of(10),
        offsets: Int32Array.of(0, 4),
        connectivity: Int32Array.of(0, 1, 2, 3),
      },
    };
    const path = join(folder, 'cells.csv');
    const pressure = fieldsToArrays(new Map([['Pressure', { components: 1, values: Float64Array.of(5) }]]));
    await csvFormat.write?.(path, { mesh: tetrahedron, cellArrays: pressure, pointArrays: [], notes: new Map() });
    const back = await csvFormat.read(path);
    for (const coordinate of back.points) expect(coordinate).toBeCloseTo(0.25, 14);
    expect(values(back, 'Pressure')).toEqual([5]);
  });
});
