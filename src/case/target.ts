import { z } from 'zod';
import { axis, path, selections } from './parts.js';

const pair = z
  .tuple([z.string().min(1), z.string().min(1)])
  .refine(([low, high]) => low !== high, { error: 'a boundary is paired with itself' })
  .describe('names of two boundaries');

export const target = z.strictObject({
  file: path.describe('mesh that is to be started: .vtu .pvtu .vts .vtr .vti .cgns'),
  walls: selections.default([]).describe('boundary faces that are no-slip walls'),
  periodic: z
    .array(z.union([axis, pair]))
    .default([])
    .refine((list) => new Set(list.flat()).size === list.flat().length, { error: 'a direction is named twice' })
    .describe('periodic directions x, y, z (first against last plane), or pairs of boundary names'),
});
