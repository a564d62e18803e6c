import { z } from 'zod';
import { standardNames } from '../basis/quantities.js';
import { axis, direction, path, vector } from './parts.js';

const standardName = z.enum([...new Set(standardNames)] as [string, ...string[]]);

const turn = z.strictObject({
  axis: direction.describe('direction of the axis'),
  degrees: z.number().describe('angle, right-hand rule'),
  about: vector.default([0, 0, 0]).describe('a point on the axis, m'),
});

const mirror = z.strictObject({
  plane: axis.describe('axis that is normal to the mirror plane'),
  at: z.number().default(0).describe('coordinate of the plane, m'),
});

const tile = z.strictObject({
  translate: direction.describe('one period, m'),
  times: z.int().min(1).describe('number of copies added'),
});

const sector = z.strictObject({
  axis: direction.describe('direction of the axis of rotation'),
  about: vector.default([0, 0, 0]).describe('a point on the axis, m'),
  degrees: z.number().describe('angle of one sector'),
  times: z.int().min(1).describe('number of copies added'),
});

export const placement = z.strictObject({
  scale: z.number().positive().default(1).describe('factor on coordinates, applied first (0.001 for millimetres)'),
  rotate: z
    .union([turn, z.array(turn)])
    .optional()
    .describe('one turn or a list of them, in their order; velocities and stresses turn with it'),
  translate: vector.default([0, 0, 0]).describe('displacement after the turns, m'),
  mirror: z.array(mirror).default([]).describe('planes in which a half model is doubled, in the placed position'),
  extrude: axis.optional().describe('a plane section is constant along this axis of the placed position'),
  tile: z.array(tile).default([]).describe('periodic copies'),
  sector: sector.optional().describe('copies of a sector around an axis'),
});

/** `first`, `last`, `mean` or a time. */
export const snapshot = z
  .union([z.enum(['first', 'last', 'mean']), z.number()])
  .describe('first, last, mean (resolved covariances added to the modelled ones) or the nearest to a time, s');

export const precursor = z.strictObject({
  file: z
    .union([path, z.array(path).min(1)])
    .describe('result file: .vtu .pvtu .vts .vtr .vti .vtm .pvd .cgns .csv; a list of numbered files is a series'),
  snapshot: snapshot.default('last'),
  rename: z
    .partialRecord(standardName, z.string().min(1))
    .default({})
    .describe('standard name: name in the file; nothing is guessed'),
  constants: z
    .partialRecord(standardName, z.number())
    .default({})
    .describe('values of quantities that the file does not hold, SI'),
  omega: z
    .enum(['two-equation', 'epsilon-over-k'])
    .default('two-equation')
    .describe('meaning of TurbulentDissipationRate: epsilon / (0.09 k), or epsilon / k'),
  'velocity-scale': z
    .number()
    .positive()
    .default(1)
    .describe('factor on velocities; k, epsilon, omega, stresses and pressure follow by dimension'),
  placement: placement.prefault({}).describe('from the coordinates of the file to those of the target'),
});
