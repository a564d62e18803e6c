import { z } from 'zod';
import { direction, path } from './parts.js';
import { zone } from './zones.js';

const energy = z
  .union([
    z.literal('precursor').describe("the precursor's k"),
    z
      .strictObject({
        intensity: z.number().positive().describe('k = 3/2 (intensity x speed)^2'),
        speed: z.number().positive().optional().describe('m/s; the local mean speed by default'),
      })
      .describe('turbulence intensity'),
    z.strictObject({ constant: z.number().positive().describe('k, m2/s2') }).describe('one value everywhere'),
  ])
  .describe('precursor, {intensity} or {constant}');

const length = z
  .union([
    z.literal('precursor').describe("from the precursor's k and epsilon or omega"),
    z
      .strictObject({ constant: z.number().positive().describe('k^(3/2) / epsilon, m') })
      .describe('one value everywhere'),
  ])
  .describe('precursor or {constant}');

const spectrum = z
  .union([
    z.enum(['von-karman-pao', 'pope']),
    z.strictObject({ table: path.describe('CSV file: wave number 1/m, E m3/s2') }).describe('a measured spectrum'),
  ])
  .describe('von-karman-pao, pope or {table: file.csv}');

const stretch = z.strictObject({
  along: z
    .union([z.literal('stream'), direction])
    .default('stream')
    .describe('stream (the local mean velocity) or a direction x, y, z'),
  factor: z.number().positive().describe('length along that direction over the length across it'),
});

/** Settings of the superimposed turbulence. */
export const fluctuations = z.strictObject({
  seed: z.int().min(0).default(1).describe('the one seed of all random numbers'),
  energy: energy.default('precursor'),
  length: length.default('precursor'),
  stress: z
    .enum(['isotropic', 'eddy-viscosity', 'precursor'])
    .default('isotropic')
    .describe("shape of the Reynolds stress: equal, from the mean strain, or the precursor's covariances"),
  spectrum: spectrum.default('von-karman-pao'),
  shells: z.int().min(2).max(1000).default(40).describe('bands of wave number'),
  directions: z.int().min(3).max(10_000).default(16).describe('modes in each band'),
  subgrid: z
    .enum(['model', 'none'])
    .default('model')
    .describe('will a sub-grid model act on the run (model), or does it resolve its own dissipation (none)'),
  'wavelength-cells': z
    .number()
    .min(2)
    .max(100)
    .default(3)
    .describe('shortest wave laid on the mesh, in cells along it'),
  stretch: stretch.optional().describe('length scale longer in one direction'),
  zones: z.array(zone).default([]).describe('where to seed; everywhere by default'),
  calibrate: z
    .enum(['realisation', 'expectation', 'none'])
    .default('realisation')
    .describe(
      'the multiplier of the potential meets the wanted k in this realisation, in the mean of all, or is left out',
    ),
  control: z
    .enum(['modes', 'potential', 'projection'])
    .default('projection')
    .describe('grade of divergence control: classic modes, vector potential, or that and a discrete projection'),
  tolerance: z
    .number()
    .positive()
    .max(0.1)
    .default(1e-6)
    .describe('the projection ends when the divergence is down to this share of the start'),
});
