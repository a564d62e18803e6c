import type { Dataset } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import type { Field } from '../basis/fields.js';
import { findQuantity, recogniseFields } from '../basis/quantities.js';
import { readDataset } from '../formats/registry.js';
import { datasetCentroids } from '../mesh/centroids.js';
import { type Progress, timed } from './progress.js';

/** One set of places of a precursor and the fields known there. */
export interface PrecursorCloud {
  readonly place: 'points' | 'cells';
  /** 3 x n, metres. */
  readonly points: Float64Array;
  readonly fields: Map<string, Field>;
}

/** A precursor as the stages take it: everything under standard names, in SI. */
export interface Precursor {
  readonly file: string;
  readonly dataset: Dataset;
  /** The data set with its cells in the placed position; absent where placing has left only points. */
  readonly mesh?: Dataset;
  readonly clouds: readonly PrecursorCloud[];
  /** Values that hold everywhere. */
  readonly constants: Readonly<Record<string, number>>;
  /** Axes (0 x, 1 y, 2 z) along which fields are constant. */
  readonly constantAxes: readonly number[];
  readonly recognised: readonly { readonly standard: string; readonly inFile: string }[];
  readonly unrecognised: readonly string[];
  readonly assumptions: readonly string[];
}

export interface PrecursorOptions {
  readonly rename?: Readonly<Record<string, string>>;
  readonly constants?: Readonly<Record<string, number>>;
  readonly quantities?: readonly string[] | undefined;
  /** Axis along which a plane section is constant. */
  readonly extrude?: 'x' | 'y' | 'z' | undefined;
}

const axisNumber = { x: 0, y: 1, z: 2 } as const;

function checkConstants(constants: Readonly<Record<string, number>>, file: string): void {
  for (const [name, value] of Object.entries(constants)) {
    const known = findQuantity(name) ?? findQuantity(name.replace(/(XX|XY|XZ|YY|YZ|ZZ|X|Y|Z)$/, ''));
    if (known === undefined) {
      throw new InputError({ file, place: `constant ${name}`, cause: 'this is not the name of a quantity' });
    }
    if (known.nonNegative && known.components === 1 && value < 0) {
      throw new InputError({ file, place: `constant ${name}`, cause: `${value} is negative` });
    }
  }
}

/**
 * Gathers what a data set holds under standard names.
 *
 * @throws InputError when nothing is recognised
 */
export function gatherPrecursor(dataset: Dataset, options: PrecursorOptions): Precursor {
  const { file } = dataset;
  const constants = options.constants ?? {};
  checkConstants(constants, file);
  const missing = dataset.missingAxes.map((axis) => axisNumber[axis]);
  const extruded = options.extrude === undefined ? [] : [axisNumber[options.extrude]];
  const constantAxes = [...new Set([...missing, ...extruded])];
  const assumptions: string[] = [];
  for (const axis of constantAxes) assumptions.push(`The precursor is taken as constant along ${'xyz'[axis]}.`);

  const names = [...dataset.pointArrays, ...dataset.cellArrays].map((array) => array.name);
  for (const [standard, inFile] of Object.entries(options.rename ?? {})) {
    if (!names.includes(inFile)) {
      throw new InputError({
        file,
        place: `rename ${standard}`,
        cause: `there is no array named ${inFile}`,
        remedy: names.length === 0 ? 'the file has no arrays' : `the file has ${names.join(', ')}`,
      });
    }
  }
  const clouds: PrecursorCloud[] = [];
  const recognised: { standard: string; inFile: string }[] = [];
  const unrecognised: string[] = [];
  for (const [place, arrays] of [['cells', dataset.cellArrays] as const, ['points', dataset.pointArrays] as const]) {
    if (arrays.length === 0) continue;
    const own = Object.fromEntries(
      Object.entries(options.rename ?? {}).filter(([, inFile]) => arrays.some((array) => array.name === inFile)),
    );
    const found = recogniseFields(arrays, { file, rename: own });
    recognised.push(...found.recognised);
    unrecognised.push(...found.unrecognised);
    const fields = new Map(
      [...found.fields].filter(([name]) => {
        const wanted = options.quantities;
        if (wanted === undefined) return true;
        return wanted.some((entry) => entry === name || entry.replace(/(XX|XY|XZ|YY|YZ|ZZ|X|Y|Z)$/, '') === name);
      }),
    );
    // A quantity on cells is taken from there and not a second time from the points.
    if (place === 'points') for (const cloud of clouds) for (const name of cloud.fields.keys()) fields.delete(name);
    if (fields.size === 0) continue;
    const points = place === 'points' ? dataset.points : datasetCentroids(dataset);
    clouds.push({ place, points, fields });
  }
  if (clouds.length === 0) {
    throw new InputError({
      file,
      cause: names.length === 0 ? 'the file holds no fields' : `none of ${names.join(', ')} is a standard name`,
      remedy: 'map names with rename, for example --rename u=VelocityX',
    });
  }
  for (const wanted of options.quantities ?? []) {
    const base = wanted.replace(/(XX|XY|XZ|YY|YZ|ZZ|X|Y|Z)$/, '');
    if (!clouds.some((cloud) => cloud.fields.has(wanted) || cloud.fields.has(base))) {
      throw new InputError({ file, place: `quantity ${wanted}`, cause: 'the file does not hold it' });
    }
  }
  return { file, dataset, mesh: dataset, clouds, constants, constantAxes, recognised, unrecognised, assumptions };
}

/** Reads one precursor file. */
export async function loadPrecursor(
  file: string,
  options: PrecursorOptions,
  progress: Progress,
  timings: Map<string, number>,
): Promise<Precursor> {
  return timed(progress, timings, 'read precursor', 0, async () => gatherPrecursor(await readDataset(file), options));
}
