import { z } from 'zod';
import { path, selections } from './parts.js';

export const projection = z.strictObject({
  mean: z.boolean().default(false).describe('project the transferred mean velocity too (reported apart)'),
  weights: z
    .enum(['distance', 'equal'])
    .default('distance')
    .describe('face value between two cells: by distance, or one half each'),
  'hold-flux': selections.default([]).describe('boundary faces whose flux the projection may not change'),
  iterations: z.int().min(1).default(1000).describe('most steps of the solver'),
});

const limit = (otherwise: number) => z.union([z.number().positive(), z.literal('none')]).default(otherwise);

export const checks = z.strictObject({
  divergence: limit(1e-3).describe('largest scaled rms divergence after control, or none'),
  energy: limit(0.05).describe('largest relative difference of recovered and wanted energy, or none'),
});

export const audit = z.strictObject({
  'time-step': z.number().positive().optional().describe('Courant numbers are given for it too, s'),
});

export const output = z.strictObject({
  file: path.describe('start file; {target} and {snapshot} stand for their names in a batch'),
  report: path.optional().describe('page for people; the name of the start file with .html by default, or none'),
  manifest: path.optional().describe('the name of the start file with .json by default'),
  'face-fluxes': path.optional().describe('.npy file for the circulation flux through every face, m3/s'),
  'number-type': z.enum(['Float64', 'Float32']).default('Float64').describe('how the added arrays are stored'),
  compress: z.boolean().default(false).describe('zlib, in formats that can'),
});
