import { existsSync } from 'node:fs';
import { dirname, isAbsolute, join, resolve } from 'node:path';
import type { Dataset } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { openFile } from '../file-reader.js';
import { type FileContext, openContext } from './arrays.js';
import { assemble } from './assemble.js';
import { readFieldData } from './field-data.js';
import { childNamed, childrenNamed, type Element, type Head, readHead } from './head.js';
import { dropGhosts, type Piece } from './pieces.js';
import { structuredPiece } from './structured.js';
import { joinStructured } from './structured-pieces.js';
import { surfacePiece, unstructuredPiece } from './unstructured.js';

interface FileContent {
  readonly pieces: readonly Piece[];
  readonly notes: ReadonlyMap<string, string>;
  readonly remarks: readonly string[];
  readonly time?: number;
  /** The pieces are those of one grid as the file has them: they may overlap in ghost cells. */
  readonly isOneGrid: boolean;
}

/** A file that another refers to, with the name its pieces shall have. */
interface Part {
  readonly name: string;
  readonly source: string | undefined;
}

function partPath(file: string, source: string | undefined): string {
  if (source === undefined || source === '') {
    throw new InputError({ file, cause: 'a part has no file name' });
  }
  const path = isAbsolute(source) ? source : join(dirname(file), source);
  if (!existsSync(path)) {
    throw new InputError({ file, place: source, cause: 'the part does not exist', remedy: 'copy all parts beside it' });
  }
  return path;
}

function renamed(pieces: readonly Piece[], name: string): Piece[] {
  return pieces.map((piece) => ({ ...piece, name: pieces.length === 1 ? name : `${name}, ${piece.name}` }));
}

async function readParts(
  file: string,
  parts: readonly Part[],
  readPart: (path: string) => Promise<FileContent>,
  isOneGrid: boolean,
): Promise<FileContent> {
  const pieces: Piece[] = [];
  const notes = new Map<string, string>();
  const remarks: string[] = [];
  let time: number | undefined;
  for (const { name, source } of parts) {
    const content = await readPart(partPath(file, source));
    pieces.push(...renamed(content.pieces, name));
    remarks.push(...content.remarks.map((remark) => `${name}: ${remark}`));
    for (const [key, text] of content.notes) notes.set(key, text);
    time ??= content.time;
  }
  return { pieces, notes, remarks, isOneGrid, ...(time === undefined ? {} : { time }) };
}

/** Data sets of nested blocks in order, each named by its blocks. */
function leaves(element: Element, above: string): Part[] {
  return element.children.flatMap((child, index) => {
    const own = child.attributes.name ?? `block ${child.attributes.index ?? index}`;
    const name = above === '' ? own : `${above}/${own}`;
    if (child.name === 'DataSet') {
      return child.attributes.file === undefined ? [] : [{ name, source: child.attributes.file }];
    }
    return child.name === 'Block' || child.name === 'Piece' || child.name === 'Partitions' ? leaves(child, name) : [];
  });
}

/** True for the pieces without points that parallel writers leave behind. */
function isEmptyPiece(element: Element): boolean {
  const extent = element.attributes.Extent?.trim().split(/\s+/).map(Number);
  if (extent?.length !== 6) return false;
  return [0, 2, 4].some((side) => (extent[side + 1] as number) < (extent[side] as number));
}

async function readGrid(grid: Element, context: FileContext): Promise<FileContent> {
  const { notes, time, ...field } = await readFieldData(grid, context);
  const remarks = [...field.remarks];
  const isStructured = grid.name !== 'UnstructuredGrid' && grid.name !== 'PolyData';
  const all: Piece[] = [];
  let number = 0;
  for (const element of childrenNamed(grid, 'Piece')) {
    const name = `piece ${number++}`;
    if (isStructured && isEmptyPiece(element)) continue;
    let piece: Piece;
    if (grid.name === 'UnstructuredGrid') piece = await unstructuredPiece(element, context, name);
    else if (grid.name === 'PolyData') piece = await surfacePiece(element, context, name);
    else piece = await structuredPiece(grid, element, context, name);
    if (piece.pointCount > 0) all.push(piece);
  }
  return { pieces: all, notes, remarks, isOneGrid: true, ...(time === undefined ? {} : { time }) };
}

/** A file by itself: structured pieces put together where they tile a grid, ghost cells dropped. */
async function readWhole(file: string, trail: readonly string[]): Promise<FileContent> {
  const content = await readContent(file, trail);
  if (!content.isOneGrid) return content;
  const remarks = [...content.remarks];
  const { pieces } = content;
  const joined = pieces.length > 1 ? joinStructured(pieces, file, remarks) : undefined;
  if (joined !== undefined) return { ...content, pieces: [joined], remarks, isOneGrid: false };
  const kept = pieces.map((piece) => dropGhosts(piece, remarks)).filter((piece) => piece.pointCount > 0);
  return { ...content, pieces: kept, remarks, isOneGrid: false };
}

function firstOfType(head: Head, file: string): { readonly type: string; readonly element: Element } {
  const { type } = head.root.attributes;
  if (head.root.name !== 'VTKFile' || type === undefined) {
    throw new InputError({ file, cause: 'this XML file is no VTK file (root element VTKFile expected)' });
  }
  const element = childNamed(head.root, type);
  if (element === undefined) throw new InputError({ file, cause: `the ${type} element is missing` });
  return { type, element };
}

async function readContent(file: string, trail: readonly string[]): Promise<FileContent> {
  const path = resolve(file);
  if (trail.includes(path)) {
    throw new InputError({ file, cause: 'the file refers to itself, directly or by way of others' });
  }
  const reader = openFile(file);
  try {
    const head = readHead(reader);
    const { type, element } = firstOfType(head, file);
    const below = [...trail, path];
    switch (type) {
      case 'UnstructuredGrid':
      case 'PolyData':
      case 'ImageData':
      case 'RectilinearGrid':
      case 'StructuredGrid':
        return await readGrid(element, openContext(reader, head));
      case 'PUnstructuredGrid':
      case 'PPolyData':
      case 'PImageData':
      case 'PRectilinearGrid':
      case 'PStructuredGrid': {
        const parts = childrenNamed(element, 'Piece')
          .filter((piece) => !isEmptyPiece(piece))
          .map((piece, index) => ({ name: `piece ${index}`, source: piece.attributes.Source }));
        // Parts keep their ghost cells until all are there.
        return await readParts(file, parts, (part) => readContent(part, below), true);
      }
      case 'vtkMultiBlockDataSet':
      case 'vtkPartitionedDataSet':
      case 'vtkPartitionedDataSetCollection':
        return await readParts(file, leaves(element, ''), (part) => readWhole(part, below), false);
      case 'Collection': {
        const entry = readSeriesEntries(element, file).at(-1) as SeriesEntry;
        const parts = entry.files.map((source, index) => ({ name: `part ${index}`, source }));
        return { ...(await readParts(file, parts, (part) => readWhole(part, below), false)), time: entry.time };
      }
      default:
        throw new InputError({ file, cause: `VTK data sets of type ${type} are not read`, remedy: 'give a mesh file' });
    }
  } finally {
    reader.close();
  }
}

/** One time of a series: several parts where the collection has them. */
export interface SeriesEntry {
  readonly time: number;
  readonly files: readonly string[];
}

function readSeriesEntries(collection: Element, file: string): SeriesEntry[] {
  const byTime = new Map<number, string[]>();
  for (const set of childrenNamed(collection, 'DataSet')) {
    const time = Number(set.attributes.timestep ?? '0');
    if (!Number.isFinite(time) || set.attributes.file === undefined) {
      throw new InputError({ file, cause: 'a DataSet has no file or its timestep is no number' });
    }
    byTime.set(time, [...(byTime.get(time) ?? []), set.attributes.file]);
  }
  if (byTime.size === 0) throw new InputError({ file, cause: 'the collection names no data set' });
  return [...byTime].sort(([a], [b]) => a - b).map(([time, files]) => ({ time, files }));
}

/**
 * The times of a .pvd collection and their files, in order of time; paths start where `file` starts.
 *
 * @throws InputError when the file is no collection
 */
export function readSeries(file: string): SeriesEntry[] {
  const reader = openFile(file);
  try {
    const { type, element } = firstOfType(readHead(reader), file);
    if (type !== 'Collection') throw new InputError({ file, cause: 'this is no collection of times' });
    return readSeriesEntries(element, file).map(({ time, files }) => ({
      time,
      files: files.map((source) => partPath(file, source)),
    }));
  } finally {
    reader.close();
  }
}

/** Reads any VTK XML data set as one merged set of points and cells; pieces and blocks become zones. */
export async function readVtkXml(file: string, format: string): Promise<Dataset> {
  const { pieces, ...rest } = await readWhole(file, []);
  return assemble(pieces, { file, format, ...rest });
}
