import { describe, expect, it } from 'vitest';
import type { DataArray, NumberArray, NumberType } from '../../src/basis/dataset.js';
import { InputError } from '../../src/basis/errors.js';
import {
  fieldsToArrays,
  findQuantity,
  lengthPower,
  recogniseFields,
  unitOf,
  velocityPower,
} from '../../src/basis/quantities.js';

function array(name: string, values: NumberArray | number[], components = 1, type: NumberType = 'Float64'): DataArray {
  const stored = Array.isArray(values) ? Float64Array.from(values) : values;
  return { name, components, tuples: stored.length / components, type, load: () => stored };
}

const file = 'field.vtu';

function failure(action: () => unknown): string {
  try {
    action();
  } catch (error) {
    if (error instanceof InputError) return error.message;
    throw error;
  }
  return 'no error';
}

describe('recogniseFields', () => {
  it('gathers components and ignores capitals', () => {
    const { fields, unrecognised, recognised } = recogniseFields(
      [array('velocityx', [1, 2]), array('VelocityY', [3, 4]), array('VELOCITYZ', [5, 6]), array('u', [7, 8])],
      { file },
    );
    expect([...fields.get('Velocity')!.values]).toEqual([1, 3, 5, 2, 4, 6]);
    expect(unrecognised).toEqual(['u']);
    expect(recognised[0]).toEqual({ standard: 'VelocityX', inFile: 'velocityx' });
  });

  it('never takes a textbook symbol for a quantity', () => {
    expect(
      recogniseFields([array('k', [1]), array('epsilon', [1]), array('U', [1, 0, 0], 3)], { file }).fields.size,
    ).toBe(0);
  });

  it('lies on shared memory', () => {
    const { fields } = recogniseFields([array('Velocity', [1, 2, 3], 3)], { file });
    expect(fields.get('Velocity')!.values.buffer).toBeInstanceOf(SharedArrayBuffer);
  });

  it('turns the sign of the standard stress and divides by density', () => {
    // SIDS: ReynoldsStress is -rho <u'u'>, so 0.5 rho (u'u' + v'v' + w'w') is minus half its trace.
    const stress = ['XX', 'XY', 'XZ', 'YY', 'YZ', 'ZZ'].map((suffix, at) =>
      array(`ReynoldsStress${suffix}`, [-(at + 1) * 1.2]),
    );
    const { fields, remarks } = recogniseFields([...stress, array('Density', [1.2])], { file });
    const found = fields.get('VelocityCovariance')!;
    expect(found.components).toBe(6);
    [1, 2, 3, 4, 5, 6].forEach((value, at) => {
      expect(found.values[at]).toBeCloseTo(value, 14);
    });
    expect(fields.has('ReynoldsStress')).toBe(false);
    expect(remarks.join()).toContain('-ReynoldsStress / Density');
    expect(failure(() => recogniseFields(stress, { file }))).toContain('Density is missing');
    const constant = recogniseFields(stress, { file, density: 2.4 }).fields.get('VelocityCovariance')!;
    expect(constant.values[5]).toBeCloseTo(3, 14);
    const only = recogniseFields([...stress, array('Density', [1.2])], { file, quantities: ['VelocityCovariance'] });
    expect([...only.fields.keys()]).toEqual(['VelocityCovariance']);
  });

  it('reads nine-component tensors row by row and refuses six', () => {
    const { fields } = recogniseFields([array('VelocityCovariance', [1, 2, 3, 2, 5, 6, 3, 6, 9], 9)], { file });
    expect([...fields.get('VelocityCovariance')!.values]).toEqual([1, 2, 3, 5, 6, 9]);
    expect(failure(() => recogniseFields([array('VelocityCovariance', [1, 2, 3, 4, 5, 6], 6)], { file }))).toContain(
      'write six scalars VelocityCovarianceXX',
    );
  });

  it('takes missing velocity components and shear stresses as zero and says so', () => {
    const normal = ['XX', 'YY', 'ZZ'].map((suffix) => array(`VelocityCovariance${suffix}`, [1]));
    const { fields, remarks } = recogniseFields([array('VelocityX', [2]), ...normal], { file });
    expect([...fields.get('Velocity')!.values]).toEqual([2, 0, 0]);
    expect([...fields.get('VelocityCovariance')!.values]).toEqual([1, 0, 0, 1, 0, 1]);
    expect(remarks.join(' ')).toContain('VelocityY, VelocityZ');
    expect(failure(() => recogniseFields(normal.slice(0, 2), { file }))).toContain('VelocityCovarianceZZ');
  });

  it('converts integers, 64-bit ones included', () => {
    const { fields } = recogniseFields(
      [
        array('Pressure', BigInt64Array.of(5n, -7n), 1, 'Int64'),
        array('Temperature', Int16Array.of(300, 301), 1, 'Int16'),
      ],
      { file },
    );
    expect([...fields.get('Pressure')!.values]).toEqual([5, -7]);
    expect([...fields.get('Temperature')!.values]).toEqual([300, 301]);
  });

  it.each([
    [Number.NaN, 'entry 2 (counted from 0): the value is not a number'],
    [Number.POSITIVE_INFINITY, 'entry 2 (counted from 0): the value is infinite'],
    [Number.NEGATIVE_INFINITY, 'entry 2 (counted from 0): the value is minus infinite'],
  ])('names the first bad value: %s', (value, text) => {
    expect(failure(() => recogniseFields([array('Pressure', [0, 1, value, Number.NaN])], { file }))).toContain(text);
    const vector = [0, 0, 0, 1, 1, 1, 2, value, 2];
    expect(failure(() => recogniseFields([array('Velocity', vector, 3)], { file }))).toContain('entry 2, component 1');
  });

  it('leaves a bad array alone when it is not wanted', () => {
    const arrays = [array('Pressure', [Number.NaN]), array('Temperature', [1])];
    expect([...recogniseFields(arrays, { file, quantities: ['Temperature'] }).fields.keys()]).toEqual(['Temperature']);
  });

  it('renames, plainly and by component, and takes other arrays on request', () => {
    const arrays = [array('u', [1]), array('v', [2]), array('R', [1, 0, 0, 0, 1, 0, 0, 0, 1], 9), array('smoke', [4])];
    const { fields } = recogniseFields(arrays, {
      file,
      rename: { VelocityX: 'u', VelocityY: 'v', VelocityCovariance: 'R' },
      quantities: ['Velocity', 'VelocityCovariance', 'smoke'],
    });
    expect([...fields.get('Velocity')!.values]).toEqual([1, 2, 0]);
    expect([...fields.get('VelocityCovariance')!.values]).toEqual([1, 0, 0, 1, 0, 1]);
    expect([...fields.get('smoke')!.values]).toEqual([4]);
  });

  it('explains what cannot be', () => {
    const arrays = [array('u', [1]), array('Pressure', [1, 2])];
    const rename = (names: Record<string, string>) => failure(() => recogniseFields(arrays, { file, rename: names }));
    expect(rename({ Presure: 'u' })).toContain('the nearest is Pressure');
    expect(rename({ VelocityX: 'uu' })).toContain('the nearest name in it is u');
    expect(rename({ VelocityX: 'u', VelocityY: 'u' })).toContain('already taken as VelocityX');
    expect(rename({ VelocityX: 'u' })).toContain('it has 2 entries while u has 1');
    expect(
      failure(() => recogniseFields([array('WallDistance', [1]), array('TurbulentDistance', [1])], { file })),
    ).toContain('both mean WallDistance');
    expect(failure(() => recogniseFields([array('Velocity', [1, 2], 2)], { file }))).toContain('2 components');
    expect(failure(() => recogniseFields(arrays, { file, quantities: ['Presure'] }))).toContain('Pressure');
    const short: DataArray = { ...array('Pressure', [1, 2]), tuples: 3 };
    expect(failure(() => recogniseFields([short], { file }))).toContain('it holds 2 numbers, 3 were announced');
  });
});

describe('fieldsToArrays', () => {
  it('is undone by recogniseFields', () => {
    const fields = new Map([
      ['Velocity', { components: 3, values: Float64Array.of(1, 2, 3, 4, 5, 6) }],
      ['VelocityCovariance', { components: 6, values: Float64Array.from({ length: 12 }, (_, at) => at) }],
      ['TurbulentEnergyKinetic', { components: 1, values: Float64Array.of(0.5, 0.25) }],
    ]);
    const arrays = fieldsToArrays(fields);
    expect(arrays.map((entry) => entry.name)).toEqual([
      'Velocity',
      ...['XX', 'XY', 'XZ', 'YY', 'YZ', 'ZZ'].map((suffix) => `VelocityCovariance${suffix}`),
      'TurbulentEnergyKinetic',
    ]);
    const back = recogniseFields(arrays, { file }).fields;
    for (const [name, field] of fields) expect([...back.get(name)!.values]).toEqual([...field.values]);
    expect(fieldsToArrays(fields, 'Float32')[0]!.load()).toBeInstanceOf(Float32Array);
  });
});

describe('the table', () => {
  it('knows dimensions, units and powers', () => {
    // k ~ U^2, epsilon ~ U^3 / L, omega ~ U / L, nu_t ~ U L; nu and rho belong to the fluid.
    const powers = (name: string) => [velocityPower(findQuantity(name)!), lengthPower(findQuantity(name)!)];
    expect(powers('TurbulentEnergyKinetic')).toEqual([2, 0]);
    expect(powers('TurbulentDissipation')).toEqual([3, -1]);
    expect(powers('TurbulentDissipationRate')).toEqual([1, -1]);
    expect(powers('ViscosityEddyKinematic')).toEqual([1, 1]);
    expect(powers('ViscosityEddy')).toEqual([1, 1]);
    expect(powers('ViscosityKinematic')).toEqual([0, 0]);
    expect(powers('Pressure')).toEqual([2, 0]);
    expect(powers('WallDistance')).toEqual([0, 1]);
    expect(unitOf('VelocityX')).toBe('m/s');
    expect(unitOf('VelocityCovarianceXY')).toBe('m2/s2');
    expect(unitOf('TurbulentDistance')).toBe('m');
    expect(unitOf('Viscosity')).toBeUndefined();
  });
});
