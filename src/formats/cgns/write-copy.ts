import { chmodSync, constants, copyFileSync, statSync } from 'node:fs';
import { dirname, isAbsolute, relative, resolve } from 'node:path';
import type { WriteRequest } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { createHdf5, damaged, type Hdf5File, openHdf5, readPieces, writeHdf5 } from './hdf5.js';
import { type RaggedSection, readSections } from './sections.js';
import { type CgnsNode, type CgnsSession, childrenOf, openSession, readText, readTree } from './tree.js';
import { type FaceFields, writeFaceFields } from './write-faces.js';
import { type CgnsType, type CgnsValues, createLink, createNode, createRoot } from './write-node.js';
import { type SolutionPlaces, shortName, writeNotes, writeSolutions } from './write-solution.js';
import { listZones, type ZoneInfo } from './zones.js';

/** Names of what is added to a zone. */
const CELLS = 'StartFields';
const POINTS = 'StartPointFields';

const typeOf: Readonly<Record<string, CgnsType>> = {
  Int8: 'C1',
  UInt8: 'C1',
  Int32: 'I4',
  UInt32: 'I4',
  Int64: 'I8',
  UInt64: 'I8',
  Float32: 'R4',
  Float64: 'R8',
};

/** Some node on the way to the zones is a link, or a link leads to a place relative to a folder that changes. */
function needsNewTree(tree: CgnsNode, zones: readonly ZoneInfo[], from: string, to: string): boolean {
  if (zones.some(({ base, node }) => base.link !== undefined || node.link !== undefined)) return true;
  if (dirname(resolve(from)) === dirname(resolve(to))) return false;
  const moved = (node: CgnsNode): boolean =>
    node.link === undefined ? node.children.some(moved) : node.link.file !== '' && !isAbsolute(node.link.file);
  return moved(tree);
}

interface Copy {
  readonly session: CgnsSession;
  readonly out: Hdf5File;
  /** Final path of the written file, from which relative links start. */
  readonly to: string;
  /** The file that is copied; nodes of others are linked to. */
  readonly source: string;
}

function copyData(copy: Copy, parent: string, node: CgnsNode): string {
  const { data } = node;
  if (data === undefined) return createNode(copy.out, parent, node.name, node.label);
  const file = copy.session.open(node.file);
  const type = typeOf[data.type];
  if (type === undefined)
    throw new InputError({ file: node.file, place: node.path, cause: `${data.type} is no type of CGNS` });
  // Pieces of reading and writing differ in size: what was read ahead waits here.
  const dimensions = [...data.shape].reverse();
  let held: CgnsValues | undefined;
  if (data.count <= 1 << 22) {
    return createNode(copy.out, parent, node.name, node.label, {
      type,
      dimensions,
      fill: (out, begin) => {
        if (held === undefined) {
          readPieces(file, `${node.path}/ data`, data, (values, at) => {
            held ??= new (values.constructor as new (n: number) => CgnsValues)(data.count);
            (held as Float64Array).set(values as Float64Array, at);
          });
        }
        if (held !== undefined) (out as Float64Array).set(held.subarray(begin, begin + out.length) as Float64Array);
      },
    });
  }
  return copyLarge(copy, parent, node, type, dimensions);
}

/** Rows of the slowest axis are read as they are asked for. */
function copyLarge(copy: Copy, parent: string, node: CgnsNode, type: CgnsType, dimensions: readonly number[]): string {
  const file = copy.session.open(node.file);
  const data = node.data as NonNullable<CgnsNode['data']>;
  const row = data.count / (data.shape[0] as number);
  return createNode(copy.out, parent, node.name, node.label, {
    type,
    dimensions,
    fill: (out, begin) => {
      const count = out.length / row;
      readPieces(
        file,
        `${node.path}/ data`,
        data,
        (values, at) => (out as Float64Array).set(values as Float64Array, at),
        { begin: begin / row, count },
      );
    },
  });
}

function copyNode(copy: Copy, parent: string, node: CgnsNode, onWay: ReadonlySet<CgnsNode>, source: string): void {
  const foreign = node.file !== copy.source;
  if (!onWay.has(node) && (node.link !== undefined || foreign)) {
    // Links inside the file stay; others start at the new folder. Nodes of a linked zone are linked one by one.
    const inside = node.link !== undefined && node.link.file === '' && source === copy.source;
    const target = inside ? '' : relative(dirname(resolve(copy.to)), resolve(node.file));
    const absolute = node.link !== undefined && isAbsolute(node.link.file);
    const linked = inside ? (node.link as { path: string }).path : node.path;
    createLink(copy.out, parent, node.name, { file: absolute ? node.file : target, path: linked });
    return;
  }
  const path = copyData(copy, parent, node);
  for (const child of node.children) copyNode(copy, path, child, onWay, node.file);
}

function copyTree(
  session: CgnsSession,
  tree: CgnsNode,
  zones: readonly ZoneInfo[],
  temporary: string,
  to: string,
): void {
  const onWay = new Set(zones.flatMap(({ base, node }) => [base, node]));
  const out = createHdf5(temporary);
  writeHdf5(out, () => {
    createRoot(out);
    const copy: Copy = { session, out, to, source: tree.file };
    for (const child of tree.children) {
      if (child.label !== 'CGNSLibraryVersion_t') copyNode(copy, '/', child, onWay, tree.file);
    }
  });
}

function freeName(wanted: string, zones: readonly ZoneInfo[]): string {
  return shortName(wanted, new Set(zones.flatMap(({ node }) => node.children.map((child) => child.name))));
}

/**
 * Copies the CGNS file of the request's mesh and adds the fields as new flow solutions, one a zone; nothing that was
 * there is changed.
 *
 * @param temporary  where the copy is written
 * @param to         final path, from which relative links start
 * @throws InputError when the file has changed since it was read, MachineError when it cannot be written
 */
export function writeCopy(temporary: string, to: string, request: WriteRequest, faces?: FaceFields): void {
  const { mesh } = request;
  const session = openSession();
  let base: string;
  let present: Map<string, string>;
  let cellPlaces: SolutionPlaces[];
  let pointPlaces: SolutionPlaces[];
  let zones: readonly ZoneInfo[];
  let faceSections: Parameters<typeof writeFaceFields>[1];
  try {
    const tree = readTree(session, mesh.file);
    const list = listZones(session, tree);
    zones = list.zones;
    if (
      zones.length !== mesh.zones.length ||
      zones.some(
        (zone, z) => zone.pointBegin + zone.points !== mesh.zones[z]?.pointEnd || zone.name !== mesh.zones[z]?.name,
      )
    ) {
      throw new InputError({ file: mesh.file, cause: 'the file has changed since it was read', remedy: 'start again' });
    }
    const pathOf = (zone: ZoneInfo): string => `/${zone.base.name}/${zone.node.name}`;
    cellPlaces = zones.map((zone, z) => {
      const { cellBegin, cellEnd } = mesh.zones[z] as (typeof mesh.zones)[number];
      const dimensions = zone.structured ? zone.sizes.map((n) => n - 1) : [cellEnd - cellBegin];
      return { zone: pathOf(zone), dimensions, count: cellEnd - cellBegin, begin: cellBegin };
    });
    pointPlaces = zones.map((zone) => ({
      zone: pathOf(zone),
      dimensions: zone.sizes,
      count: zone.points,
      begin: zone.pointBegin,
    }));
    base = `/${(zones[0] as ZoneInfo).base.name}`;
    present = new Map(
      childrenOf((zones[0] as ZoneInfo).base, 'Descriptor_t').map((node) => [node.name, readText(session, node)]),
    );
    for (const child of (zones[0] as ZoneInfo).base.children) if (!present.has(child.name)) present.set(child.name, '');
    faceSections =
      faces === undefined
        ? []
        : zones.flatMap((zone) =>
            zone.structured
              ? []
              : readSections(session, zone.node, zone.points, zone.cells)
                  .filter((section): section is RaggedSection => section.kind === 'polygons')
                  .map((section) => ({ zone: pathOf(zone), pointBegin: zone.pointBegin, section })),
          );
    if (needsNewTree(tree, zones, mesh.file, to)) copyTree(session, tree, zones, temporary, to);
    else {
      copyFileSync(mesh.file, temporary, constants.COPYFILE_FICLONE);
      chmodSync(temporary, statSync(temporary).mode | 0o600);
    }
  } catch (error) {
    throw damaged(mesh.file, '', error);
  } finally {
    session.close();
  }
  const out = openHdf5(temporary, 'append');
  writeHdf5(out, () => {
    const cells = request.cellArrays.filter((array) => array.tuples > 0);
    const points = request.pointArrays.filter((array) => array.tuples > 0);
    const filled = cellPlaces.filter(({ count }) => count > 0);
    if (cells.length > 0) writeSolutions(out, freeName(CELLS, zones), 'CellCenter', filled, cells);
    if (points.length > 0) writeSolutions(out, freeName(POINTS, zones), 'Vertex', pointPlaces, points);
    if (faces !== undefined) writeFaceFields(out, faceSections, mesh, faces, (name) => freeName(name, zones));
    writeNotes(out, base, request.notes, present);
  });
}
