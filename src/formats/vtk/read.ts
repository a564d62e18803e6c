import { existsSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import type { Dataset, ZoneRange } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { openFile } from '../file-reader.js';
import { type FileContext, openContext, readArray } from './arrays.js';
import { childNamed, childrenNamed, type Element, type Head, readHead } from './head.js';
import { dropGhosts, joinArrays, joinCells, type Piece } from './pieces.js';
import { structuredPiece } from './structured.js';
import { surfacePiece, unstructuredPiece } from './unstructured.js';

interface FileContent {
  readonly pieces: Piece[];
  readonly notes: Map<string, string>;
  readonly remarks: string[];
  readonly time?: number;
}

const deepest = 16;

function textOf(codes: ArrayLike<number | bigint>): string {
  const bytes: number[] = [];
  for (let i = 0; i < codes.length; i += 1) {
    const code = Number(codes[i]);
    if (code === 0) break;
    bytes.push(code);
  }
  return Buffer.from(bytes).toString('utf8');
}

/** Field data: strings are kept as notes, `TimeValue` is the physical time. */
async function readFieldData(grid: Element, context: FileContext, content: FileContent): Promise<number | undefined> {
  let time: number | undefined;
  for (const element of childrenNamed(childNamed(grid, 'FieldData'), 'DataArray')) {
    const name = element.attributes.Name ?? '';
    const isText = element.attributes.type === 'String';
    if (!isText && name !== 'TimeValue') continue;
    // Strings are stored as the codes of their characters with a zero behind each.
    const plain = isText ? { ...element, attributes: { ...element.attributes, type: 'UInt8' } } : element;
    const array = await readArray(plain, context, { place: 'FieldData' });
    if (isText) content.notes.set(name, textOf(array.load() as Uint8Array));
    else time = Number(array.load()[0]);
  }
  return time;
}

function partPath(file: string, source: string | undefined): string {
  if (source === undefined || source === '') {
    throw new InputError({ file, cause: 'a part has no file name' });
  }
  const path = resolve(dirname(file), source);
  if (!existsSync(path)) {
    throw new InputError({ file, place: source, cause: 'the part does not exist', remedy: 'copy all parts beside it' });
  }
  return path;
}

async function readParts(file: string, sources: readonly (string | undefined)[], depth: number): Promise<FileContent> {
  const all: FileContent = { pieces: [], notes: new Map(), remarks: [] };
  let time: number | undefined;
  for (const source of sources) {
    const part = await readContent(partPath(file, source), depth + 1);
    all.pieces.push(...part.pieces);
    all.remarks.push(...part.remarks);
    for (const [name, text] of part.notes) all.notes.set(name, text);
    time ??= part.time;
  }
  return time === undefined ? all : { ...all, time };
}

function leaves(element: Element): Element[] {
  return element.children.flatMap((child) => {
    if (child.name === 'DataSet') return child.attributes.file === undefined ? [] : [child];
    return child.name === 'Block' || child.name === 'Piece' || child.name === 'Partitions' ? leaves(child) : [];
  });
}

async function readGrid(grid: Element, context: FileContext, content: FileContent): Promise<void> {
  const pieces = childrenNamed(grid, 'Piece');
  for (let i = 0; i < pieces.length; i += 1) {
    const element = pieces[i] as Element;
    const name = `piece ${i}`;
    let piece: Piece;
    if (grid.name === 'UnstructuredGrid') piece = await unstructuredPiece(element, context, name);
    else if (grid.name === 'PolyData') piece = await surfacePiece(element, context, name);
    else piece = await structuredPiece(grid, element, context, name);
    const kept = dropGhosts(piece, content.remarks);
    if (kept.pointCount > 0) content.pieces.push(kept);
  }
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

async function readContent(file: string, depth: number): Promise<FileContent> {
  if (depth > deepest) throw new InputError({ file, cause: 'files refer to each other in a circle' });
  const reader = openFile(file);
  try {
    const head = readHead(reader);
    const { type, element } = firstOfType(head, file);
    switch (type) {
      case 'UnstructuredGrid':
      case 'PolyData':
      case 'ImageData':
      case 'RectilinearGrid':
      case 'StructuredGrid': {
        const content: FileContent = { pieces: [], notes: new Map(), remarks: [] };
        const context = openContext(reader, head);
        const time = await readFieldData(element, context, content);
        await readGrid(element, context, content);
        return time === undefined ? content : { ...content, time };
      }
      case 'PUnstructuredGrid':
      case 'PPolyData':
      case 'PImageData':
      case 'PRectilinearGrid':
      case 'PStructuredGrid':
        return await readParts(
          file,
          childrenNamed(element, 'Piece').map((piece) => piece.attributes.Source),
          depth,
        );
      case 'vtkMultiBlockDataSet':
      case 'vtkPartitionedDataSet':
      case 'vtkPartitionedDataSetCollection': {
        const sets = leaves(element);
        const content = await readParts(
          file,
          sets.map((set) => set.attributes.file),
          depth,
        );
        return content;
      }
      case 'Collection': {
        const last = readSeriesEntries(element, file).at(-1);
        return await readParts(file, last?.files ?? [], depth);
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
 * The times of a .pvd collection and their files, in order of time; paths made absolute.
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
  const content = await readContent(resolve(file), 0);
  const { pieces, notes, remarks, time } = content;
  if (pieces.length === 0) {
    throw new InputError({ file, cause: 'the file holds no points', remedy: 'write the data set with its mesh' });
  }
  const zones: ZoneRange[] = [];
  let pointBegin = 0;
  let cellBegin = 0;
  pieces.forEach((piece, index) => {
    zones.push({
      name: pieces.length === 1 ? 'mesh' : `part ${index}`,
      pointBegin,
      pointEnd: pointBegin + piece.pointCount,
      cellBegin,
      cellEnd: cellBegin + piece.cellCount,
      ...(piece.structure === undefined ? {} : { structure: piece.structure }),
    });
    pointBegin += piece.pointCount;
    cellBegin += piece.cellCount;
  });
  const points = new Float64Array(3 * pointBegin);
  const [only] = pieces;
  const all = pieces.length === 1 && only !== undefined ? only.points() : points;
  if (pieces.length > 1) {
    pieces.forEach((piece, index) => {
      points.set(piece.points(), 3 * (zones[index] as ZoneRange).pointBegin);
    });
  }
  checkFinite(all, file);
  const cells = joinCells(
    pieces.map((piece, index) => ({ cells: piece.cells(), pointBegin: (zones[index] as ZoneRange).pointBegin })),
  );
  const pointArrays = joinArrays(
    pieces.map((piece) => piece.pointArrays),
    file,
    remarks,
  );
  const cellArrays = joinArrays(
    pieces.map((piece) => piece.cellArrays),
    file,
    remarks,
  );
  return {
    file,
    format,
    points: all,
    pointType: pieces.every((piece) => piece.pointType === 'Float32') ? 'Float32' : 'Float64',
    ...(cells.types.length === 0 ? {} : { cells }),
    pointArrays,
    cellArrays,
    zones,
    boundaries: [],
    missingAxes: [],
    notes,
    remarks,
    ...(time === undefined ? {} : { time }),
  };
}

function checkFinite(points: Float64Array, file: string): void {
  for (let i = 0; i < points.length; i += 1) {
    const value = points[i] as number;
    if (value - value !== 0) {
      throw new InputError({
        file,
        place: `point ${Math.floor(i / 3)} (counted from 0)`,
        cause: 'a coordinate is not a finite number',
      });
    }
  }
}
