import type { DataArray, Dataset } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { holdsBigIntegers } from '../basis/number-arrays.js';
import { recogniseFields, standardNameOf, suggestRenames, unitOf } from '../basis/quantities.js';
import { buildMesh } from '../mesh/build.js';
import { isVolumeType } from '../mesh/cell-faces.js';
import { cellShape } from '../mesh/cell-types.js';
import { measureMesh } from '../mesh/geometry.js';

export interface ArrayDescription {
  readonly place: 'points' | 'cells';
  readonly name: string;
  readonly components: number;
  readonly type: string;
  /** Standard name and its unit, where recognised. */
  readonly standard?: string;
  readonly unit?: string;
  /** Over all components; null when there is no finite value. */
  readonly min: number | null;
  readonly max: number | null;
  readonly notFinite: number;
}

export interface MeshDescription {
  readonly cells: number;
  readonly innerFaces: number;
  readonly boundaryFaces: number;
  readonly volume: number;
  readonly smallestVolume: number;
  readonly largestVolume: number;
  /** Cells whose volume is zero or negative. */
  readonly badVolumes: number;
}

/** The JSON document of `describe`. */
export interface FileDescription {
  readonly file: string;
  readonly format: string;
  readonly points: number;
  readonly cells: number;
  /** Number of cells by shape. */
  readonly cellTypes: Readonly<Record<string, number>>;
  readonly low: readonly number[];
  readonly high: readonly number[];
  readonly missingAxes: readonly string[];
  readonly time?: number;
  readonly zones: readonly { readonly name: string; readonly points: number; readonly cells: number }[];
  readonly boundaries: readonly { readonly name: string; readonly kind: string; readonly faces: number }[];
  readonly arrays: readonly ArrayDescription[];
  readonly mesh?: MeshDescription;
  readonly suggestions: readonly { readonly standard: string; readonly inFile: string; readonly reason: string }[];
  readonly notes: Readonly<Record<string, string>>;
  readonly remarks: readonly string[];
}

function rangeOf(array: DataArray): { min: number | null; max: number | null; notFinite: number } {
  const values = array.load();
  let min = Number.POSITIVE_INFINITY;
  let max = Number.NEGATIVE_INFINITY;
  let notFinite = 0;
  const big = holdsBigIntegers(values);
  for (let at = 0; at < values.length; at++) {
    const value = big ? Number(values[at]) : (values[at] as number);
    if (value - value !== 0) {
      notFinite++;
      continue;
    }
    if (value < min) min = value;
    if (value > max) max = value;
  }
  return min > max ? { min: null, max: null, notFinite } : { min, max, notFinite };
}

function describeArray(array: DataArray, place: 'points' | 'cells'): ArrayDescription {
  const standard = standardNameOf(array.name);
  const unit = standard === undefined ? undefined : unitOf(standard);
  return {
    place,
    name: array.name,
    components: array.components,
    type: array.type,
    ...(standard === undefined ? {} : { standard }),
    ...(unit === undefined ? {} : { unit }),
    ...rangeOf(array),
  };
}

/** Lowest and highest coordinates of the points. */
export function extentOf(points: Float64Array): { low: number[]; high: number[] } {
  const low = [Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY];
  const high = [Number.NEGATIVE_INFINITY, Number.NEGATIVE_INFINITY, Number.NEGATIVE_INFINITY];
  for (let at = 0; at < points.length; at++) {
    const axis = at % 3;
    const value = points[at]!;
    if (value < low[axis]!) low[axis] = value;
    if (value > high[axis]!) high[axis] = value;
  }
  return { low, high };
}

function countTypes(dataset: Dataset): Record<string, number> {
  const counts = new Map<number, number>();
  for (const type of dataset.cells?.types ?? []) counts.set(type, (counts.get(type) ?? 0) + 1);
  const names: Record<string, number> = {};
  for (const [type, count] of [...counts].sort(([a], [b]) => a - b)) {
    names[cellShape(type)?.name ?? `cell type ${type}`] = count;
  }
  return names;
}

/** Undefined for point clouds, surfaces and plane sections. */
function describeMesh(dataset: Dataset): MeshDescription | undefined {
  if (dataset.cells?.types.some(isVolumeType) !== true) return undefined;
  const mesh = buildMesh(dataset);
  const { cellVolumes } = measureMesh(mesh);
  let volume = 0;
  let smallestVolume = Number.POSITIVE_INFINITY;
  let largestVolume = Number.NEGATIVE_INFINITY;
  let badVolumes = 0;
  for (const value of cellVolumes) {
    volume += value;
    if (value < smallestVolume) smallestVolume = value;
    if (value > largestVolume) largestVolume = value;
    if (!(value > 0)) badVolumes++;
  }
  const { cellCount: cells, innerFaceCount: innerFaces, faceCount } = mesh;
  const boundaryFaces = faceCount - innerFaces;
  return { cells, innerFaces, boundaryFaces, volume, smallestVolume, largestVolume, badVolumes };
}

/** Why the fields could not be taken as they are, in the words that a run would use. */
function troubles(dataset: Dataset): string[] {
  const found: string[] = [];
  for (const arrays of [dataset.pointArrays, dataset.cellArrays]) {
    try {
      found.push(...recogniseFields(arrays, { file: dataset.file }).remarks);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      found.push(error.message);
    }
  }
  return found;
}

/**
 * Everything that `describe` tells of a data set.
 *
 * @param measure  build the faces of the cells and measure them (seconds for a million cells)
 */
export function describeDataset(dataset: Dataset, measure: boolean): FileDescription {
  const mesh = measure ? describeMesh(dataset) : undefined;
  return {
    file: dataset.file,
    format: dataset.format,
    points: dataset.points.length / 3,
    cells: dataset.cells?.types.length ?? 0,
    cellTypes: countTypes(dataset),
    ...extentOf(dataset.points),
    missingAxes: dataset.missingAxes,
    ...(dataset.time === undefined ? {} : { time: dataset.time }),
    zones: dataset.zones.map((zone) => ({
      name: zone.name,
      points: zone.pointEnd - zone.pointBegin,
      cells: zone.cellEnd - zone.cellBegin,
    })),
    boundaries: dataset.boundaries.map((patch) => ({
      name: patch.name,
      kind: patch.kind,
      faces: patch.offsets.length - 1,
    })),
    arrays: [
      ...dataset.pointArrays.map((array) => describeArray(array, 'points')),
      ...dataset.cellArrays.map((array) => describeArray(array, 'cells')),
    ],
    ...(mesh === undefined ? {} : { mesh }),
    suggestions: suggestRenames([...dataset.cellArrays, ...dataset.pointArrays]),
    notes: Object.fromEntries(dataset.notes),
    remarks: [...dataset.remarks, ...troubles(dataset)],
  };
}
