import { z } from 'zod';

export const transfer = z.strictObject({
  method: z
    .enum(['linear', 'inverse-distance', 'nearest', 'conservative'])
    .default('linear')
    .describe('how fields get to the target cells'),
  neighbours: z.int().min(1).default(8).describe('points used by inverse-distance'),
  power: z.number().positive().default(2).describe('exponent of inverse-distance'),
  outside: z
    .union([z.enum(['nearest', 'extrapolate', 'fail']), z.number()])
    .default('nearest')
    .describe(
      'value of target cells outside the precursor: nearest, extrapolate (at most one cell), fail, or a number',
    ),
  quantities: z
    .array(z.string().min(1))
    .optional()
    .describe('what to transfer: standard names or names in the file; all recognised ones by default'),
  logarithmic: z.boolean().default(true).describe('interpolate epsilon and omega in log space'),
  'wall-points': z
    .boolean()
    .default(true)
    .describe('enter no-slip walls into the precursor as points of zero velocity and zero k'),
  limited: z.boolean().default(true).describe('limit gradients so that no new extrema arise'),
});
