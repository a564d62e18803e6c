import type { NumberArray } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { createNumbers } from './hdf5.js';
import {
  type CgnsNode,
  type CgnsSession,
  childOf,
  childrenOf,
  placeOf,
  readIntegers,
  readIntegersOf,
  readNode,
  readNodePieces,
  readText,
} from './tree.js';
import { conversionOf, type DataContext, inherit, noContext } from './units.js';

/** A zone and where it lies in the merged data set. */
export interface ZoneInfo {
  readonly base: CgnsNode;
  readonly node: CgnsNode;
  /** Zone name, with the base's before it where several bases are read. */
  readonly name: string;
  readonly structured: boolean;
  /** Points along i, j, k of a structured zone; else the number of points. */
  readonly sizes: readonly number[];
  readonly points: number;
  /** Number of cells that the zone declares. */
  readonly cells: number;
  readonly context: DataContext;
  readonly pointBegin: number;
}

export interface ZoneList {
  readonly zones: readonly ZoneInfo[];
  readonly bases: readonly CgnsNode[];
  /** Dimension of the cells: 3 volumes, 2 surfaces. */
  readonly dimension: number;
  /** Number of coordinates. */
  readonly physical: number;
  readonly remarks: string[];
}

function zoneSizes(
  session: CgnsSession,
  zone: CgnsNode,
  dimension: number,
): { structured: boolean; sizes: number[]; cells: number } {
  const kind = readText(session, childOf(zone, 'ZoneType_t')) || 'Structured';
  if (kind !== 'Structured' && kind !== 'Unstructured') {
    throw new InputError({ file: zone.file, place: placeOf(zone), cause: `the zone type ${kind} is not known` });
  }
  const structured = kind === 'Structured';
  const axes = structured ? dimension : 1;
  const values = readIntegers(session, zone);
  if (values.length < 2 * axes) {
    throw new InputError({ file: zone.file, place: placeOf(zone), cause: `${3 * axes} sizes were expected` });
  }
  const sizes = values.slice(0, axes);
  const cells = values.slice(axes, 2 * axes).reduce((product, n) => product * n, 1);
  const points = sizes.reduce((product, n) => product * n, 1);
  const right = structured
    ? sizes.every((n, axis) => n >= 2 && values[axes + axis] === n - 1)
    : points >= 1 && cells >= 0;
  if (!right || points > 0x7fffffff || cells > 0x7fffffff) {
    throw new InputError({
      file: zone.file,
      place: placeOf(zone),
      cause: `sizes of ${values.join(', ')} are impossible or more than can be held`,
      remedy: 'export the file again',
    });
  }
  return { structured, sizes, cells };
}

/**
 * Zones of all bases whose cells have the highest dimension, in the order of the file.
 *
 * @throws InputError when there is no base or no zone
 */
export function listZones(session: CgnsSession, tree: CgnsNode): ZoneList {
  const all = childrenOf(tree, 'CGNSBase_t');
  if (all.length === 0) {
    throw new InputError({ file: tree.file, cause: 'the file holds no CGNS base', remedy: 'give a CGNS file' });
  }
  const sized = all.map((base) => {
    const [dimension, physical] = readIntegersOf(session, base, 2) as [number, number];
    if (dimension < 1 || dimension > 3 || physical < dimension || physical > 3) {
      throw new InputError({
        file: base.file,
        place: placeOf(base),
        cause: `cells of dimension ${dimension} in ${physical} dimensions are impossible`,
      });
    }
    return { base, dimension, physical, filled: childrenOf(base, 'Zone_t').length > 0 };
  });
  const filled = sized.filter((one) => one.filled);
  if (filled.length === 0) throw new InputError({ file: tree.file, cause: 'the file holds no zone' });
  const dimension = Math.max(...filled.map((one) => one.dimension));
  const chosen = filled.filter((one) => one.dimension === dimension);
  const remarks = filled
    .filter((one) => one.dimension < dimension)
    .map((one) => `base ${one.base.name} holds cells of dimension ${one.dimension} and was left out`);
  const zones: ZoneInfo[] = [];
  let pointBegin = 0;
  for (const { base } of chosen) {
    const context = inherit(session, noContext, base);
    for (const node of childrenOf(base, 'Zone_t')) {
      const { structured, sizes, cells } = zoneSizes(session, node, dimension);
      const points = sizes.reduce((product, n) => product * n, 1);
      const name = chosen.length > 1 ? `${base.name}/${node.name}` : node.name;
      zones.push({
        base,
        node,
        name,
        structured,
        sizes,
        points,
        cells,
        context: inherit(session, context, node),
        pointBegin,
      });
      pointBegin += points;
    }
  }
  if (pointBegin > 0x7fffffff) {
    throw new InputError({ file: tree.file, cause: `${pointBegin} points are more than can be held at once` });
  }
  return {
    zones,
    bases: chosen.map((one) => one.base),
    dimension,
    physical: Math.max(...chosen.map((one) => one.physical)),
    remarks,
  };
}

/** Rind planes of a node: two numbers an axis; undefined when there are none. */
export function rindOf(session: CgnsSession, node: CgnsNode, axes: number): number[] | undefined {
  const rind = childOf(node, 'Rind_t');
  if (rind === undefined) return undefined;
  const planes = readIntegersOf(session, rind, 2 * axes);
  if (planes.some((n) => n < 0))
    throw new InputError({ file: node.file, place: placeOf(rind), cause: 'negative rind' });
  return planes.some((n) => n > 0) ? planes : undefined;
}

/**
 * Reads the values of a DataArray_t without its rind planes, piece by piece.
 *
 * @param sizes  values along each axis without rind, fastest first
 * @throws InputError when the array has another length
 */
export function readInterior(
  session: CgnsSession,
  node: CgnsNode,
  sizes: readonly number[],
  rind: readonly number[] | undefined,
  use: (values: NumberArray, begin: number) => void,
): void {
  const full = sizes.map((n, axis) => n + (rind?.[2 * axis] ?? 0) + (rind?.[2 * axis + 1] ?? 0));
  const expected = full.reduce((product, n) => product * n, 1);
  if (node.data === undefined || node.data.count !== expected) {
    throw new InputError({
      file: node.file,
      place: placeOf(node),
      cause: `${expected} values were expected, the array holds ${node.data?.count ?? 0}`,
      remedy: 'export the file again',
    });
  }
  if (rind === undefined) {
    readNodePieces(session, node, use);
    return;
  }
  const whole = readNode(session, node);
  const inner = createNumbers(
    node.data.type,
    sizes.reduce((product, n) => product * n, 1),
  );
  const [nx, ny, nz] = [sizes[0] ?? 1, sizes[1] ?? 1, sizes[2] ?? 1];
  let to = 0;
  for (let k = 0; k < nz; k++) {
    for (let j = 0; j < ny; j++) {
      const row = (k + (rind[4] ?? 0)) * (full[1] ?? 1) + j + (rind[2] ?? 0);
      const from = row * (full[0] ?? 1) + (rind[0] ?? 0);
      (inner as Float64Array).set(whole.subarray(from, from + nx) as Float64Array, to);
      to += nx;
    }
  }
  use(inner, 0);
}

export interface Coordinates {
  readonly points: Float64Array;
  readonly pointType: 'Float32' | 'Float64';
  readonly remarks: string[];
}

function gridOf(zone: ZoneInfo, wanted: string | undefined): CgnsNode {
  const grids = childrenOf(zone.node, 'GridCoordinates_t');
  const grid = grids.find((node) => node.name === (wanted ?? 'GridCoordinates')) ?? (wanted ? undefined : grids[0]);
  if (grid === undefined) {
    throw new InputError({
      file: zone.node.file,
      place: placeOf(zone.node),
      cause: wanted === undefined ? 'the zone has no coordinates' : `the coordinates ${wanted} are missing`,
    });
  }
  return grid;
}

/**
 * Coordinates of all zones in metres, interleaved.
 *
 * @param grids  name of the GridCoordinates_t node by zone, where a snapshot has its own
 */
export function readCoordinates(
  session: CgnsSession,
  list: ZoneList,
  grids: ReadonlyMap<ZoneInfo, string>,
): Coordinates {
  const last = list.zones[list.zones.length - 1] as ZoneInfo;
  const total = last.pointBegin + last.points;
  let points: Float64Array | undefined;
  let [allSingle, unknown] = [true, false];
  const remarks: string[] = [];
  const nodes = list.zones.map((zone) => {
    const grid = gridOf(zone, grids.get(zone));
    return ['CoordinateX', 'CoordinateY', 'CoordinateZ'].slice(0, list.physical).map((name) => {
      const node = childOf(grid, 'DataArray_t', name);
      if (node === undefined) {
        const polar = grid.children.some((child) => /^Coordinate(R|Theta|Phi)$/.test(child.name));
        throw new InputError({
          file: grid.file,
          place: placeOf(grid),
          cause: polar ? 'the coordinates are not Cartesian' : `${name} is missing`,
          ...(polar ? { remedy: 'export Cartesian coordinates' } : {}),
        });
      }
      // Lengths are compared before memory is asked for, so that absurd sizes fail at once.
      const rind = rindOf(session, grid, zone.sizes.length);
      const full = zone.sizes.reduce((n, size, d) => n * (size + (rind?.[2 * d] ?? 0) + (rind?.[2 * d + 1] ?? 0)), 1);
      if (node.data?.count !== full || !node.data.type.startsWith('Float')) {
        throw new InputError({
          file: node.file,
          place: placeOf(node),
          cause: `${full} coordinates were expected, the array holds ${node.data?.count ?? 0} values of type ${node.data?.type ?? 'none'}`,
          remedy: 'export the file again',
        });
      }
      return { zone, node, rind, conversion: conversionOf(session, inherit(session, zone.context, grid), node) };
    });
  });
  points = new Float64Array(3 * total);
  for (const axes of nodes) {
    axes.forEach(({ zone, node, rind, conversion }, axis) => {
      const { scale, offset, doubt } = conversion;
      if (doubt !== undefined) unknown = true;
      if (node.numberType !== 'Float32' || scale !== 1 || offset !== 0) allSingle = false;
      readInterior(session, node, zone.sizes, rind, (values, begin) => {
        let to = 3 * (zone.pointBegin + begin) + axis;
        for (let i = 0; i < values.length; i++, to += 3) {
          const value = (values[i] as number) * scale + offset;
          if (!Number.isFinite(value)) {
            throw new InputError({
              file: node.file,
              place: placeOf(node),
              cause: `the coordinate of point ${begin + i + 1} is not a finite number`,
            });
          }
          (points as Float64Array)[to] = value;
        }
      });
    });
  }
  if (unknown) remarks.push('the coordinates carry no unit of length and were taken as metres');
  return { points, pointType: allSingle ? 'Float32' : 'Float64', remarks };
}
