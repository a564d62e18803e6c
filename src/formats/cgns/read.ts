import type { Dataset, ZoneRange } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { type BoundaryZone, readBoundaries } from './boundaries.js';
import { assembleCells, type CellBlock, sectionBlocks, structuredBlocks } from './cells.js';
import { damaged, hdf5Ready } from './hdf5.js';
import { faceLookup, readSections, type Section } from './sections.js';
import { type CgnsSnapshot, chooseSnapshot, listSnapshots } from './snapshots.js';
import { readSolutions } from './solutions.js';
import { type CgnsNode, type CgnsSession, childrenOf, openSession, readText, readTree } from './tree.js';
import { listZones, readCoordinates, type ZoneInfo } from './zones.js';

export type { CgnsSnapshot } from './snapshots.js';

export interface CgnsReadOptions {
  /** Position in the time series, from 0 (default: the last). */
  readonly snapshot?: number;
}

/** Runs a piece of work on open files and closes them whatever happens; failures become one sentence. */
export async function withSession<T>(path: string, use: (session: CgnsSession) => T): Promise<T> {
  await hdf5Ready();
  const session = openSession();
  try {
    return use(session);
  } catch (error) {
    throw damaged(path, '', error);
  } finally {
    session.close();
  }
}

interface ZoneCells {
  readonly zone: ZoneInfo;
  readonly blocks: readonly CellBlock[];
  readonly sections: readonly Section[];
}

function zoneCells(session: CgnsSession, zone: ZoneInfo, dimension: number): ZoneCells {
  if (zone.structured) return { zone, blocks: structuredBlocks(zone.sizes), sections: [] };
  const sections = readSections(session, zone.node, zone.points, zone.cells);
  return { zone, blocks: sectionBlocks(session, sections, dimension, zone.points), sections };
}

function notesOf(session: CgnsSession, bases: readonly CgnsNode[]): Map<string, string> {
  const notes = new Map<string, string>();
  for (const base of bases) {
    for (const node of childrenOf(base, 'Descriptor_t')) notes.set(node.name, readText(session, node));
  }
  return notes;
}

function read(session: CgnsSession, path: string, options: CgnsReadOptions): Dataset {
  const list = listZones(session, readTree(session, path));
  const choice = chooseSnapshot(session, list, path, options.snapshot);
  const remarks = [...list.remarks];
  const { points, pointType, remarks: about } = readCoordinates(session, list, choice.grids);
  remarks.push(...about);
  const parts = list.zones.map((zone) => zoneCells(session, zone, list.dimension));
  const counts = parts.map(({ blocks }) => blocks.reduce((sum, block) => sum + block.cells, 0));
  parts.forEach(({ zone }, z) => {
    if (counts[z] !== zone.cells) {
      remarks.push(
        `zone ${zone.name} declares ${zone.cells} cells, its sections hold ${counts[z]}; the sections were taken`,
      );
    }
  });
  if (counts.every((count) => count === 0)) {
    throw new InputError({ file: path, cause: `the zones hold no cells of dimension ${list.dimension}` });
  }
  const begins: number[] = [];
  counts.reduce((sum, count) => {
    begins.push(sum);
    return sum + count;
  }, 0);
  // Lengths of the fields are compared before the cells are built.
  const solutions = readSolutions(session, list.zones, choice.skip, begins, counts);
  const cells = assembleCells(
    path,
    parts.map(({ zone, blocks }) => ({ blocks, pointBase: zone.pointBegin })),
  );
  const zones: ZoneRange[] = list.zones.map((zone, z) => ({
    name: zone.name,
    pointBegin: zone.pointBegin,
    pointEnd: zone.pointBegin + zone.points,
    cellBegin: begins[z] as number,
    cellEnd: (begins[z] as number) + (counts[z] as number),
    ...(zone.structured ? { structure: { kind: 'curvilinear' as const, extent: extentOf(zone.sizes) } } : {}),
  }));
  const boundaryZones: BoundaryZone[] = parts.map(({ zone, sections }, z) => ({
    zone,
    lookup: zone.structured ? undefined : faceLookup(session, sections, 2, zone.points),
    cellBegin: zones[z]?.cellBegin as number,
    cellEnd: zones[z]?.cellEnd as number,
  }));
  const boundaries = list.dimension === 3 ? readBoundaries(session, boundaryZones, cells, remarks) : [];
  remarks.push(...solutions.remarks);
  const time = choice.snapshot?.time;
  if (choice.snapshot !== undefined && options.snapshot === undefined) {
    remarks.push(
      `the file holds a time series; its last state was read${time === undefined ? '' : ` (time ${time} s)`}`,
    );
  }
  return {
    file: path,
    format: 'cgns',
    points,
    pointType,
    cells,
    pointArrays: solutions.pointArrays,
    cellArrays: solutions.cellArrays,
    zones,
    boundaries,
    missingAxes: list.physical === 3 ? [] : list.physical === 2 ? ['z'] : ['y', 'z'],
    notes: notesOf(session, list.bases),
    remarks,
    ...(time === undefined ? {} : { time }),
  };
}

function extentOf(sizes: readonly number[]): [number, number, number, number, number, number] {
  return [0, (sizes[0] ?? 1) - 1, 0, (sizes[1] ?? 1) - 1, 0, (sizes[2] ?? 1) - 1];
}

/**
 * Reads a CGNS file (HDF5 storage): all zones of the bases with the highest cell dimension, merged, in SI units.
 * Fields are read from the file when asked for.
 *
 * @throws InputError for anything wrong in the file, MachineError when it cannot be read
 */
export async function readCgns(path: string, options: CgnsReadOptions = {}): Promise<Dataset> {
  return withSession(path, (session) => read(session, path, options));
}

/** The states of a time series in a CGNS file; empty when it holds none. Read one by `readCgns(path, {snapshot})`. */
export async function listCgnsSnapshots(path: string): Promise<CgnsSnapshot[]> {
  return withSession(path, (session) => listSnapshots(session, listZones(session, readTree(session, path))));
}
