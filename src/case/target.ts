import { z } from 'zod';
import { path, selections } from './parts.js';

export const target = z.strictObject({
  file: path.describe('mesh that is to be started: .vtu .pvtu .vts .vtr .vti .cgns'),
  walls: selections.default([]).describe('boundary faces that are no-slip walls'),
  periodic: z
    .array(z.string().min(1))
    .default([])
    .refine((list) => new Set(list).size === list.length, { error: 'a direction is named twice' })
    .describe('periodic directions x, y, z, or names of boundaries'),
});
