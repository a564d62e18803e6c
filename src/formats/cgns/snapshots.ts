import { InputError } from '../../basis/errors.js';
import { type CgnsNode, type CgnsSession, childOf, childrenOf, placeOf, readNode } from './tree.js';
import { conversionOf, inherit, noContext } from './units.js';
import type { ZoneInfo, ZoneList } from './zones.js';

/** One state of a time series. */
export interface CgnsSnapshot {
  /** Position in the series, from 0. */
  readonly index: number;
  /** Seconds; undefined where the file gives only iterations. */
  readonly time?: number;
  readonly iteration?: number;
  /** Names of the flow solutions that hold it (over all zones, each once). */
  readonly solutions: readonly string[];
}

/** What belongs to the chosen snapshot in each zone. */
export interface SnapshotChoice {
  readonly snapshot: CgnsSnapshot | undefined;
  readonly skip: ReadonlyMap<ZoneInfo, ReadonlySet<string>>;
  readonly grids: ReadonlyMap<ZoneInfo, string>;
}

/** Names of 32 characters each from a C1 array. */
function pointers(session: CgnsSession, node: CgnsNode): string[] {
  if (node.data?.size !== 1) {
    throw new InputError({
      file: node.file,
      place: placeOf(node),
      cause: 'names were expected, the node holds numbers',
    });
  }
  const values = readNode(session, node);
  const text = Buffer.from(values.buffer, values.byteOffset, values.byteLength).toString('latin1');
  const width = node.dimensions?.[0] ?? 32;
  const names: string[] = [];
  for (let at = 0; at < text.length; at += width) names.push(text.slice(at, at + width).replace(/[\0 ]+$/, ''));
  return names;
}

function solutionPointers(session: CgnsSession, zone: ZoneInfo): string[][] {
  const iterative = childOf(zone.node, 'ZoneIterativeData_t');
  if (iterative === undefined) return [];
  return childrenOf(iterative, 'DataArray_t')
    .filter((node) => /^FlowSolution\w*Pointers$/.test(node.name))
    .map((node) => pointers(session, node));
}

function gridPointers(session: CgnsSession, zone: ZoneInfo): string[] {
  const iterative = childOf(zone.node, 'ZoneIterativeData_t');
  const node = iterative === undefined ? undefined : childOf(iterative, 'DataArray_t', 'GridCoordinatesPointers');
  return node === undefined ? [] : pointers(session, node);
}

/** The states that BaseIterativeData_t and ZoneIterativeData_t name, in the order of the file. */
export function listSnapshots(session: CgnsSession, list: ZoneList): CgnsSnapshot[] {
  const base = list.bases.find((one) => childOf(one, 'BaseIterativeData_t') !== undefined);
  const lists = list.zones.flatMap((zone) => solutionPointers(session, zone));
  const count = Math.max(0, ...lists.map((names) => names.length));
  if (base === undefined || count === 0) return [];
  const iterative = childOf(base, 'BaseIterativeData_t') as CgnsNode;
  const times = childOf(iterative, 'DataArray_t', 'TimeValues');
  const iterations = childOf(iterative, 'DataArray_t', 'IterationValues');
  const context = inherit(session, inherit(session, noContext, base), iterative);
  const scale = times === undefined ? undefined : conversionOf(session, context, times);
  const timeValues = times === undefined ? [] : Array.from(readNode(session, times), Number);
  const iterationValues = iterations === undefined ? [] : Array.from(readNode(session, iterations), Number);
  return Array.from({ length: count }, (_, index) => {
    const time = timeValues[index];
    const iteration = iterationValues[index];
    const solutions = new Set(
      lists.map((names) => names[index] ?? '').filter((name) => name !== '' && name !== 'Null'),
    );
    return {
      index,
      solutions: [...solutions],
      ...(time === undefined || scale === undefined ? {} : { time: time * scale.scale + scale.offset }),
      ...(iteration === undefined ? {} : { iteration }),
    };
  });
}

/**
 * Chooses one snapshot (the last by default) and tells which solutions belong to the others.
 *
 * @throws InputError when there is no such snapshot
 */
export function chooseSnapshot(session: CgnsSession, list: ZoneList, file: string, index?: number): SnapshotChoice {
  const snapshots = listSnapshots(session, list);
  const chosen = index ?? snapshots.length - 1;
  const snapshot = snapshots[chosen];
  if (index !== undefined && snapshot === undefined) {
    throw new InputError({ file, cause: `there is no snapshot ${index}, the file holds ${snapshots.length}` });
  }
  const skip = new Map<ZoneInfo, ReadonlySet<string>>();
  const grids = new Map<ZoneInfo, string>();
  if (snapshot !== undefined) {
    for (const zone of list.zones) {
      const lists = solutionPointers(session, zone);
      const others = new Set(lists.flat());
      for (const names of lists) others.delete(names[chosen] ?? '');
      skip.set(zone, others);
      const grid = gridPointers(session, zone)[chosen];
      if (grid !== undefined && grid !== '' && grid !== 'Null') grids.set(zone, grid);
    }
  }
  return { snapshot, skip, grids };
}
