import { expect, it } from 'vitest';
import type { DataArray } from '../../src/basis/dataset.js';
import { suggestRenames } from '../../src/basis/quantities.js';

function named(name: string, components = 1): DataArray {
  return { name, components, tuples: 0, type: 'Float64', load: () => new Float64Array(0) };
}

it('proposes what looks like a standard quantity and nothing else', () => {
  const arrays = [named('U', 3), named('k'), named('Velocity_X'), named('mean_p [Pa]'), named('nu_t'), named('smoke')];
  expect(suggestRenames(arrays).map(({ standard, inFile }) => [standard, inFile])).toEqual([
    ['Velocity', 'U'],
    ['TurbulentEnergyKinetic', 'k'],
    ['VelocityX', 'Velocity_X'],
    ['Pressure', 'mean_p [Pa]'],
    ['ViscosityEddyKinematic', 'nu_t'],
  ]);
});

it('proposes nothing that the file holds already, and nothing twice', () => {
  const arrays = [named('TurbulentEnergyKinetic'), named('k'), named('eps'), named('epsilon')];
  expect(suggestRenames(arrays).map(({ inFile }) => inFile)).toEqual(['eps']);
});
