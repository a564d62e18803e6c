import { z } from 'zod';
import { box, selections, vector } from './parts.js';

const fade = z.number().nonnegative().default(0).describe('distance over which the zone fades out at its edge, m');
const exclude = z.boolean().default(false).describe('true: no fluctuations inside, whatever the other zones say');

const boxZone = z.strictObject({ box, fade, exclude }).describe('inside a box along the axes');

const sphereZone = z
  .strictObject({
    sphere: z.strictObject({ centre: vector.describe('m'), radius: z.number().positive().describe('m') }),
    fade,
    exclude,
  })
  .describe('inside a sphere');

const cylinderZone = z
  .strictObject({
    cylinder: z.strictObject({
      from: vector.describe('centre of one end, m'),
      to: vector.describe('centre of the other end, m'),
      radius: z.number().positive().describe('m'),
    }),
    fade,
    exclude,
  })
  .describe('inside a cylinder');

const boundaryZone = z
  .strictObject({
    boundary: selections.min(1).describe('the boundary faces'),
    within: z.number().positive().describe('largest distance from them, m'),
    fade,
    exclude,
  })
  .describe('near boundary faces');

const fieldZone = z
  .strictObject({
    field: z.string().min(1).describe('standard name of a scalar field'),
    above: z.number().describe('the zone is where the field exceeds this, SI'),
    fade: z.number().nonnegative().default(0).describe('range of the field over which the zone fades out, SI'),
    exclude,
  })
  .describe('where a field exceeds a value');

/** Where fluctuations are laid: the union of the zones that seed, less those that exclude. */
export const zone = z
  .union([boxZone, sphereZone, cylinderZone, boundaryZone, fieldZone])
  .describe('{box}, {sphere}, {cylinder}, {boundary, within} or {field, above}, each with fade and exclude');

export type Zone = z.output<typeof zone>;
