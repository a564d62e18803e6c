import { z } from 'zod';

/** Three numbers x y z. */
export const vector = z.tuple([z.number(), z.number(), z.number()]).describe('three numbers x, y, z');

export const axis = z.enum(['x', 'y', 'z']);

/** A path, relative to the case file unless absolute. */
export const path = z.string().min(1);

export const box = z
  .tuple([vector, vector])
  .refine(([low, high]) => low.every((value, at) => value < high[at]!), {
    error: 'every coordinate of the first corner must be less than that of the second',
  })
  .describe('two corners of a box along the axes, low and high, m');

export const direction = vector.refine((value) => value.some((entry) => entry !== 0), {
  error: 'a direction may not be zero',
});

const plane = z
  .strictObject({
    plane: axis.describe('axis that is normal to the faces'),
    at: z.union([z.number(), z.array(z.number()).min(1)]).describe('coordinate or coordinates along that axis, m'),
  })
  .describe('faces that lie on planes normal to an axis');

const boxSelection = z.strictObject({ box }).describe('faces whose centre is inside a box');

const surface = z
  .strictObject({ surface: path.describe('.vtp file') })
  .describe('faces that lie on the surface in a file');

/** One selection of boundary faces. */
export const selection = z
  .union([z.string().min(1).describe('name of a boundary, or `all`'), plane, boxSelection, surface])
  .describe('a boundary name, all, {plane, at}, {box} or {surface}');

/** Boundary faces: those that any entry of the list selects; `all` means every face that is not periodic. */
export const selections = z.array(selection);

export type FaceSelection = z.output<typeof selection>;
