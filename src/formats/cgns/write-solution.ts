import type { DataArray, NumberArray } from '../../basis/dataset.js';
import { componentSuffixes } from '../../basis/quantities.js';
import type { Hdf5File } from './hdf5.js';
import { exponentsOf } from './units.js';
import { type CgnsType, type CgnsValues, createNode, type NodeData, textData, wholeData } from './write-node.js';

/** Places of one zone that arrays are written for. */
export interface SolutionPlaces {
  /** Path of the zone's node in the file. */
  readonly zone: string;
  /** Values along each axis, fastest first. */
  readonly dimensions: readonly number[];
  readonly count: number;
  /** Place i is number `begin + i` of the data set, or number `order[i]`. */
  readonly begin: number;
  readonly order?: Int32Array;
}

/** The standard's names have at most 32 characters. */
export function shortName(name: string, taken: ReadonlySet<string>): string {
  const plain = name.replace(/[/\0]/g, '_').trim() || 'unnamed';
  let short = Buffer.byteLength(plain) <= 32 ? plain : Buffer.from(plain).subarray(0, 32).toString('latin1');
  for (let i = 2; taken.has(short); i++) short = `${plain.slice(0, 31 - String(i).length)}_${i}`;
  return short;
}

/** Names of an array's components: X Y Z, XX ... for vectors and tensors, numbers for others. */
export function componentNames(array: DataArray): string[] {
  const { name, components } = array;
  if (components === 1) return [name];
  if (components === 3 || components === 6) return componentSuffixes(components).map((suffix) => `${name}${suffix}`);
  if (components === 9)
    return ['XX', 'XY', 'XZ', 'YX', 'YY', 'YZ', 'ZX', 'ZY', 'ZZ'].map((suffix) => `${name}${suffix}`);
  return Array.from({ length: components }, (_, i) => `${name}_${i + 1}`);
}

function storedType(array: DataArray): CgnsType {
  if (array.type === 'Float32') return 'R4';
  if (array.type === 'Float64') return 'R8';
  return array.type === 'Int64' || array.type === 'UInt64' || array.type === 'UInt32' ? 'I8' : 'I4';
}

function component(values: NumberArray, array: DataArray, c: number, places: SolutionPlaces, type: CgnsType): NodeData {
  const { begin, order } = places;
  const n = array.components;
  return {
    type,
    dimensions: places.dimensions,
    fill: (out, from) => {
      for (let i = 0; i < out.length; i++) {
        const place = order === undefined ? begin + from + i : (order[from + i] as number);
        const value = values[place * n + c] as number | bigint;
        if (type === 'I8') (out as BigInt64Array)[i] = BigInt(value);
        else (out as Exclude<CgnsValues, BigInt64Array>)[i] = Number(value);
      }
    },
  };
}

/** Units of everything that is written here. */
export function writeSiUnits(file: Hdf5File, parent: string): void {
  createNode(file, parent, 'DataClass', 'DataClass_t', textData('Dimensional'));
  const names = ['Kilogram', 'Meter', 'Second', 'Kelvin', 'Radian'].map((name) => name.padEnd(32)).join('');
  const bytes = Int8Array.from(Buffer.from(names, 'latin1'));
  createNode(file, parent, 'DimensionalUnits', 'DimensionalUnits_t', wholeData('C1', [32, 5], bytes));
}

export function writeExponents(file: Hdf5File, parent: string, exponents: readonly number[]): void {
  createNode(file, parent, 'DimensionalExponents', 'DimensionalExponents_t', wholeData('R4', [5], exponents));
}

/**
 * Adds one FlowSolution_t to every zone, in SI units.
 *
 * @param name      free name in every zone
 * @param location  `CellCenter` or `Vertex`
 */
export function writeSolutions(
  file: Hdf5File,
  name: string,
  location: 'CellCenter' | 'Vertex',
  zones: readonly SolutionPlaces[],
  arrays: readonly DataArray[],
): void {
  const paths = zones.map(({ zone }) => {
    const path = createNode(file, zone, name, 'FlowSolution_t');
    createNode(file, path, 'GridLocation', 'GridLocation_t', textData(location));
    writeSiUnits(file, path);
    return path;
  });
  const taken = new Set<string>();
  for (const array of arrays) {
    const type = storedType(array);
    // One array in memory at a time.
    const values = array.load();
    componentNames(array).forEach((full, c) => {
      const short = shortName(full, taken);
      taken.add(short);
      const exponents = exponentsOf(full);
      zones.forEach((places, z) => {
        const node = createNode(
          file,
          paths[z] as string,
          short,
          'DataArray_t',
          component(values, array, c, places, type),
        );
        if (exponents !== undefined) writeExponents(file, node, exponents);
      });
    });
  }
}

/**
 * Keeps text notes as Descriptor_t nodes of the base.
 *
 * @param present  names and texts that the base has already; the same text is not written twice
 */
export function writeNotes(
  file: Hdf5File,
  base: string,
  notes: ReadonlyMap<string, string>,
  present: ReadonlyMap<string, string>,
): void {
  const taken = new Set(present.keys());
  for (const [name, text] of notes) {
    if (present.get(name) === text) continue;
    const short = shortName(name, taken);
    taken.add(short);
    createNode(file, base, short, 'Descriptor_t', textData(text));
  }
}
