import type { DataArray, NumberType } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { createNumbers, damaged } from './hdf5.js';
import { type CgnsNode, type CgnsSession, childOf, childrenOf, openSession, placeOf, readText } from './tree.js';
import { type Conversion, conversionOf, inherit } from './units.js';
import { readInterior, rindOf, type ZoneInfo } from './zones.js';

/** One array of one zone as it lies in the file. */
interface Part {
  readonly zone: ZoneInfo;
  readonly solution: CgnsNode;
  readonly node: CgnsNode;
  readonly sizes: readonly number[];
  readonly rind: readonly number[] | undefined;
  readonly conversion: Conversion;
}

export interface SolutionArrays {
  readonly pointArrays: DataArray[];
  readonly cellArrays: DataArray[];
  readonly remarks: string[];
}

/** Location of a FlowSolution_t or BC_t: the standard's default is Vertex. */
export function locationOf(session: CgnsSession, node: CgnsNode): string {
  return readText(session, childOf(node, 'GridLocation_t')) || 'Vertex';
}

/** Tells whether values belong to listed places only. */
function hasPointSet(node: CgnsNode): boolean {
  return node.children.some((child) => child.label === 'IndexArray_t' || child.label === 'IndexRange_t');
}

function product(sizes: readonly number[]): number {
  return sizes.reduce((all, n) => all * n, 1);
}

function makeArray(name: string, tuples: number, parts: readonly Part[], begins: readonly number[]): DataArray {
  const plain = parts.every(({ conversion }) => conversion.scale === 1 && conversion.offset === 0);
  const first = parts[0]?.node.numberType as NumberType;
  const type = plain && parts.every(({ node }) => node.numberType === first) ? first : 'Float64';
  return {
    name,
    components: 1,
    tuples,
    type,
    load: () => {
      const session = openSession();
      try {
        const result = createNumbers(type, tuples);
        parts.forEach((part, p) => {
          const { scale, offset } = part.conversion;
          const base = begins[p] as number;
          readInterior(session, part.node, part.sizes, part.rind, (values, begin) => {
            if (type !== 'Float64' || part.node.numberType === 'Float64') {
              (result as Float64Array).set(values as Float64Array, base + begin);
            }
            if (type === 'Float64' && (part.node.numberType !== 'Float64' || scale !== 1 || offset !== 0)) {
              for (let i = 0; i < values.length; i++) result[base + begin + i] = Number(values[i]) * scale + offset;
            }
          });
        });
        return result;
      } catch (error) {
        throw damaged(parts[0]?.node.file ?? '', parts[0] === undefined ? '' : placeOf(parts[0].node), error);
      } finally {
        session.close();
      }
    },
  };
}

/**
 * Arrays of all FlowSolution_t nodes at vertices and cell centres, merged over the zones and read when asked for.
 *
 * @param skip        solutions of other snapshots, by zone
 * @param cellBegins  number of the first cell of each zone
 * @param cellCounts  number of cells of each zone
 */
export function readSolutions(
  session: CgnsSession,
  zones: readonly ZoneInfo[],
  skip: ReadonlyMap<ZoneInfo, ReadonlySet<string>>,
  cellBegins: readonly number[],
  cellCounts: readonly number[],
): SolutionArrays {
  const remarks: string[] = [];
  const byPlace = { Vertex: new Map<string, Map<number, Part>>(), CellCenter: new Map<string, Map<number, Part>>() };
  const doubts = new Map<string, Set<string>>();
  const elsewhere = new Set<string>();
  const twice = new Map<string, string>();
  zones.forEach((zone, z) => {
    for (const solution of childrenOf(zone.node, 'FlowSolution_t')) {
      if (skip.get(zone)?.has(solution.name)) continue;
      const location = locationOf(session, solution);
      if ((location !== 'Vertex' && location !== 'CellCenter') || hasPointSet(solution)) {
        elsewhere.add(`${solution.name} (${location}${hasPointSet(solution) ? ', on listed places' : ''})`);
        continue;
      }
      const cells = zone.structured ? zone.sizes.map((n) => n - 1) : [cellCounts[z] as number];
      const sizes = location === 'Vertex' ? zone.sizes : cells;
      const context = inherit(session, zone.context, solution);
      const rind = rindOf(session, solution, zone.sizes.length);
      for (const node of childrenOf(solution, 'DataArray_t')) {
        if (node.data === undefined) continue;
        if (node.data.size === 1 && node.data.type !== 'UInt8') {
          throw new InputError({
            file: node.file,
            place: placeOf(node),
            cause: 'numbers were expected, the array holds text',
          });
        }
        const conversion = conversionOf(session, context, node);
        // Lengths are compared now, so that the error comes before work has begun.
        const full = sizes.map((n, axis) => n + (rind?.[2 * axis] ?? 0) + (rind?.[2 * axis + 1] ?? 0));
        if (node.data.count !== product(full)) {
          throw new InputError({
            file: node.file,
            place: placeOf(node),
            cause: `${product(full)} values at ${location} were expected, the array holds ${node.data.count}`,
            remedy: 'export the file again',
          });
        }
        // Marks and counters are whole numbers and have no unit.
        if (conversion.doubt !== undefined && node.data.type.startsWith('Float')) {
          const names = doubts.get(conversion.doubt) ?? new Set<string>();
          doubts.set(conversion.doubt, names.add(node.name));
        }
        const arrays = byPlace[location];
        const parts = arrays.get(node.name) ?? new Map<number, Part>();
        // The solution that was added last holds the newest state.
        const before = parts.get(z);
        if (before !== undefined) twice.set(node.name, `${solution.name}, not ${before.solution.name}`);
        parts.set(z, { zone, solution, node, sizes, rind, conversion });
        arrays.set(node.name, parts);
      }
    }
  });
  const last = zones[zones.length - 1] as ZoneInfo;
  const pointTotal = last.pointBegin + last.points;
  const cellTotal = (cellBegins[zones.length - 1] as number) + (cellCounts[zones.length - 1] as number);
  const merge = (arrays: Map<string, Map<number, Part>>, tuples: number, cells: boolean): DataArray[] => {
    const result: DataArray[] = [];
    for (const [name, parts] of arrays) {
      const missing = zones.filter((_, z) => !parts.has(z) && (!cells || (cellCounts[z] as number) > 0));
      if (missing.length > 0) {
        remarks.push(`${name} is missing in zone ${missing[0]?.name} and was left out`);
        continue;
      }
      const order = [...parts.keys()].sort((a, b) => a - b);
      const begins = order.map((z) => (cells ? (cellBegins[z] as number) : (zones[z] as ZoneInfo).pointBegin));
      result.push(
        makeArray(
          name,
          tuples,
          order.map((z) => parts.get(z) as Part),
          begins,
        ),
      );
    }
    return result;
  };
  const pointArrays = merge(byPlace.Vertex, pointTotal, false);
  const cellArrays = merge(byPlace.CellCenter, cellTotal, true);
  for (const [name, from] of twice) remarks.push(`${name} is in several solutions; it was taken from ${from}`);
  for (const name of elsewhere)
    remarks.push(`solution ${name} lies neither at points nor in all cells and was not read as fields`);
  const list = (doubt: string): string | undefined => {
    const names = doubts.get(doubt);
    return names === undefined ? undefined : [...names].join(', ');
  };
  const noUnit = list('no unit');
  if (noUnit !== undefined) remarks.push(`no unit is given for ${noUnit}; taken as SI`);
  const noReference = list('unknown reference');
  if (noReference !== undefined) {
    remarks.push(
      `${noReference} were made dimensionless by a reference that the file does not give; taken as they are`,
    );
  }
  const noDimension = list('unknown dimension');
  if (noDimension !== undefined) {
    remarks.push(`the dimension of ${noDimension} is not known and the file's units are not SI; taken as they are`);
  }
  return { pointArrays, cellArrays, remarks };
}
