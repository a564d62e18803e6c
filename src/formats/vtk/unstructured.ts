import type { CellTopology, DataArray } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { toFloat64 } from '../../basis/number-arrays.js';
import { cellShape } from '../../mesh/cell-types.js';
import { type FileContext, readArray } from './arrays.js';
import { childNamed, childrenNamed, type Element } from './head.js';
import { allocate } from './numbers.js';
import type { Piece } from './pieces.js';

const mostCells = 2 ** 31 - 2;
const polyhedron = 42;
const polygon = 7;
const polygonSections = ['Verts', 'Lines', 'Strips', 'Polys'] as const;

export function countOf(element: Element, attribute: string, file: string, place: string): number {
  const text = element.attributes[attribute];
  const count = Number(text ?? '0');
  if (!Number.isInteger(count) || count < 0 || count > mostCells) {
    throw new InputError({ file, place, cause: `${attribute} '${text}' is no sensible number` });
  }
  return count;
}

/** The arrays of a section such as CellData, each with the number of tuples its section has. */
export async function sectionArrays(
  piece: Element,
  section: string,
  tuples: number,
  context: FileContext,
  place: string,
): Promise<DataArray[]> {
  const arrays: DataArray[] = [];
  const unnamed = { count: 0 };
  for (const element of childrenNamed(childNamed(piece, section), 'DataArray')) {
    if (element.attributes.type === 'String') continue;
    const array = await readArray(element, context, { place: `${place} ${section}`, tuples });
    if (array.name !== '') arrays.push(array);
    else arrays.push({ ...array, name: `unnamed${unnamed.count++}` });
  }
  return arrays;
}

const littleEndian = new Uint8Array(new Uint16Array([1]).buffer)[0] === 1;

/**
 * Whole numbers of any type as Int32: point numbers, offsets (-1 stands for none).
 *
 * @throws InputError for numbers below -1 or beyond 31 bits
 */
export function loadInt32(array: DataArray, file: string, place: string): Int32Array {
  const values = array.load();
  if (values instanceof Int32Array) return values;
  const out = allocate(file, `${place} array ${array.name}`, () => new Int32Array(values.length));
  const report = (entry: number): InputError =>
    new InputError({ file, place: `${place} array ${array.name}`, cause: `entry ${entry} is ${values[entry]}` });
  if (values instanceof BigInt64Array || values instanceof BigUint64Array) {
    // Two words a number: a big integer object for each would take ten times as long.
    const words = new Int32Array(values.buffer, values.byteOffset, 2 * values.length);
    const low = littleEndian ? 0 : 1;
    for (let i = 0; i < out.length; i += 1) {
      const value = words[2 * i + low] as number;
      if ((words[2 * i + 1 - low] as number) !== (value < 0 ? -1 : 0) || value < -1) throw report(i);
      out[i] = value;
    }
    return out;
  }
  for (let i = 0; i < out.length; i += 1) {
    const value = values[i] as number;
    if (value < -1 || value > mostCells || !Number.isInteger(value)) throw report(i);
    out[i] = value;
  }
  return out;
}

export function float64Points(array: DataArray): { load: () => Float64Array; type: 'Float32' | 'Float64' } {
  const load = (): Float64Array => {
    const values = array.load();
    return toFloat64(values);
  };
  return { load, type: array.type === 'Float32' ? 'Float32' : 'Float64' };
}

/** Cumulative ends -> starts with a leading 0, checked to grow and to end inside. */
function startsFromEnds(
  ends: Int32Array,
  count: number,
  length: number,
  report: (cause: string) => InputError,
): Int32Array {
  if (ends.length !== count) throw report(`${ends.length} offsets where ${count} are needed`);
  const starts = new Int32Array(count + 1);
  for (let i = 0; i < count; i += 1) {
    const end = ends[i] as number;
    if (end < (starts[i] as number) || end > length) {
      throw report(`offset ${i} is ${end}: offsets must grow and end within ${length}`);
    }
    starts[i + 1] = end;
  }
  return starts;
}

function checkPointNumbers(connectivity: Int32Array, pointCount: number, report: (cause: string) => InputError): void {
  for (let i = 0; i < connectivity.length; i += 1) {
    const point = connectivity[i] as number;
    if (point < 0 || point >= pointCount) {
      throw report(`entry ${i} names point ${point} and there are ${pointCount} points`);
    }
  }
}

interface PolyhedronFaces {
  readonly polyhedronFaces: Int32Array;
  readonly polyhedronOffsets: Int32Array;
}

/** Layout of older files: one stream and one cumulative end a cell, -1 for cells that are no polyhedra. */
function oldPolyhedra(
  faces: Int32Array,
  ends: Int32Array,
  types: Uint8Array,
  report: (cause: string) => InputError,
): PolyhedronFaces {
  if (ends.length !== types.length) throw report(`${ends.length} face offsets for ${types.length} cells`);
  const polyhedronOffsets = new Int32Array(types.length + 1);
  for (let cell = 0; cell < types.length; cell += 1) {
    const begin = polyhedronOffsets[cell] as number;
    const end = types[cell] === polyhedron ? (ends[cell] as number) : begin;
    if (end < begin || end > faces.length) throw report(`face offset of cell ${cell} is ${end}`);
    polyhedronOffsets[cell + 1] = end;
  }
  return { polyhedronFaces: faces, polyhedronOffsets };
}

/** Layout of newer files: faces listed once, polyhedra as lists of face numbers; turned into the stream. */
function newPolyhedra(
  facePoints: Int32Array,
  faceEnds: Int32Array,
  cellFaces: Int32Array,
  cellEnds: Int32Array,
  types: Uint8Array,
  report: (cause: string) => InputError,
): PolyhedronFaces {
  const faceStarts = startsFromEnds(faceEnds, faceEnds.length, facePoints.length, report);
  const cellStarts = startsFromEnds(cellEnds, types.length, cellFaces.length, report);
  const polyhedronOffsets = new Int32Array(types.length + 1);
  const sizeOf = (face: number): number => {
    if (face < 0 || face >= faceEnds.length) throw report(`face ${face} does not exist`);
    return (faceStarts[face + 1] as number) - (faceStarts[face] as number);
  };
  for (let cell = 0; cell < types.length; cell += 1) {
    let length = 0;
    if (types[cell] === polyhedron) {
      length = 1;
      for (let i = cellStarts[cell] as number; i < (cellStarts[cell + 1] as number); i += 1) {
        length += 1 + sizeOf(cellFaces[i] as number);
      }
    }
    polyhedronOffsets[cell + 1] = (polyhedronOffsets[cell] as number) + length;
  }
  const stream = new Int32Array(polyhedronOffsets[types.length] as number);
  for (let cell = 0; cell < types.length; cell += 1) {
    if (types[cell] !== polyhedron) continue;
    let at = polyhedronOffsets[cell] as number;
    const [begin, end] = [cellStarts[cell] as number, cellStarts[cell + 1] as number];
    stream[at++] = end - begin;
    for (let i = begin; i < end; i += 1) {
      const face = cellFaces[i] as number;
      stream[at++] = sizeOf(face);
      for (let j = faceStarts[face] as number; j < (faceStarts[face + 1] as number); j += 1) {
        stream[at++] = facePoints[j] as number;
      }
    }
  }
  return { polyhedronFaces: stream, polyhedronOffsets };
}

function checkFaceStream(faces: PolyhedronFaces, pointCount: number, report: (cause: string) => InputError): void {
  const { polyhedronFaces: stream, polyhedronOffsets: starts } = faces;
  for (let cell = 0; cell + 1 < starts.length; cell += 1) {
    const [begin, end] = [starts[cell] as number, starts[cell + 1] as number];
    if (end === begin) continue;
    let at = begin + 1;
    for (let face = 0; face < (stream[begin] as number); face += 1) {
      const count = at < end ? (stream[at] as number) : -1;
      if (count < 3 || at + count >= end) throw report(`the faces of cell ${cell} do not fit their offsets`);
      for (let i = at + 1; i <= at + count; i += 1) {
        const point = stream[i] as number;
        if (point < 0 || point >= pointCount) throw report(`a face of cell ${cell} names point ${point}`);
      }
      at += count + 1;
    }
    if (at !== end) throw report(`the faces of cell ${cell} do not fit their offsets`);
  }
}

function typesOf(numbers: Int32Array, report: (cause: string) => InputError): Uint8Array {
  const types = new Uint8Array(numbers.length);
  for (let cell = 0; cell < types.length; cell += 1) {
    const type = numbers[cell] as number;
    if (type < 0 || type > 255) throw report(`cell ${cell} has the type ${type}, which is none`);
    types[cell] = type;
  }
  return types;
}

/** Every cell must have the corners of its type. */
function checkSizes(types: Uint8Array, offsets: Int32Array, report: (cause: string) => InputError): void {
  const corners = Int32Array.from({ length: 256 }, (_, type) => cellShape(type)?.corners ?? 0);
  for (let cell = 0; cell < types.length; cell += 1) {
    const size = (offsets[cell + 1] as number) - (offsets[cell] as number);
    const type = types[cell] as number;
    if (size < (corners[type] as number)) throw report(`cell ${cell} of type ${type} has ${size} points`);
  }
}

async function unstructuredCells(
  piece: Element,
  cellCount: number,
  pointCount: number,
  context: FileContext,
  place: string,
): Promise<CellTopology> {
  const file = context.reader.path;
  const elements = childrenNamed(childNamed(piece, 'Cells'), 'DataArray');
  const find = (name: string): Element | undefined => elements.find((entry) => entry.attributes.Name === name);
  const read = async (name: string, tuples?: number): Promise<Int32Array | undefined> => {
    const element = find(name);
    if (element === undefined) return undefined;
    const wish = tuples === undefined ? { place: `${place} Cells` } : { place: `${place} Cells`, tuples };
    return loadInt32(await readArray(element, context, wish), file, place);
  };
  const report = (cause: string): InputError => new InputError({ file, place: `${place} Cells`, cause });
  const need = async (name: string, tuples?: number): Promise<Int32Array> => {
    const values = await read(name, tuples);
    if (values === undefined) throw report(`array ${name} is missing`);
    return values;
  };
  const types = typesOf(await need('types', cellCount), report);
  const ends = await need('offsets', cellCount);
  const connectivity = await need('connectivity');
  const offsets = startsFromEnds(ends, cellCount, connectivity.length, report);
  checkPointNumbers(connectivity, pointCount, report);
  checkSizes(types, offsets, report);
  if (!types.includes(polyhedron)) return { types, offsets, connectivity };
  const faces = await read('faces');
  const faceOffsets = await read('faceoffsets');
  const found =
    faces !== undefined && faceOffsets !== undefined && faces.length > 0
      ? oldPolyhedra(faces, faceOffsets, types, report)
      : newPolyhedra(
          await need('face_connectivity'),
          await need('face_offsets'),
          await need('polyhedron_to_faces'),
          await need('polyhedron_offsets'),
          types,
          report,
        );
  checkFaceStream(found, pointCount, report);
  return { types, offsets, connectivity, ...found };
}

export async function pointsOf(
  piece: Element,
  pointCount: number,
  context: FileContext,
  place: string,
): Promise<{ load: () => Float64Array; type: 'Float32' | 'Float64' }> {
  const [element] = childrenNamed(childNamed(piece, 'Points'), 'DataArray');
  if (element === undefined) {
    if (pointCount === 0) return { load: () => new Float64Array(0), type: 'Float64' };
    throw new InputError({ file: context.reader.path, place, cause: 'the piece has no Points array' });
  }
  const array = await readArray(element, context, { place: `${place} Points`, tuples: pointCount });
  if (array.components !== 3) {
    throw new InputError({
      file: context.reader.path,
      place,
      cause: `points have ${array.components} components, not 3`,
    });
  }
  return float64Points(array);
}

/** One Piece of an UnstructuredGrid. */
export async function unstructuredPiece(piece: Element, context: FileContext, name: string): Promise<Piece> {
  const file = context.reader.path;
  const pointCount = countOf(piece, 'NumberOfPoints', file, name);
  const cellCount = countOf(piece, 'NumberOfCells', file, name);
  const points = await pointsOf(piece, pointCount, context, name);
  const cells = await unstructuredCells(piece, cellCount, pointCount, context, name);
  return {
    name,
    pointCount,
    cellCount,
    points: points.load,
    pointType: points.type,
    cells: () => cells,
    pointArrays: await sectionArrays(piece, 'PointData', pointCount, context, name),
    cellArrays: await sectionArrays(piece, 'CellData', cellCount, context, name),
  };
}

const sectionCounts: Readonly<Record<string, string>> = {
  Verts: 'NumberOfVerts',
  Lines: 'NumberOfLines',
  Strips: 'NumberOfStrips',
  Polys: 'NumberOfPolys',
};
const sectionTypes: Readonly<Record<string, number>> = { Verts: 2, Lines: 4, Strips: 6, Polys: polygon };

/** One Piece of PolyData: vertices, lines, strips and polygons in the order of the format's cell data. */
export async function surfacePiece(piece: Element, context: FileContext, name: string): Promise<Piece> {
  const file = context.reader.path;
  const pointCount = countOf(piece, 'NumberOfPoints', file, name);
  const points = await pointsOf(piece, pointCount, context, name);
  const types: number[] = [];
  const offsets: number[] = [0];
  const connectivity: Int32Array[] = [];
  let base = 0;
  // The cell data of surfaces run over vertices, lines, polygons, strips.
  for (const section of ['Verts', 'Lines', 'Polys', 'Strips'] satisfies (typeof polygonSections)[number][]) {
    const count = countOf(piece, sectionCounts[section] as string, file, name);
    if (count === 0) continue;
    const elements = childrenNamed(childNamed(piece, section), 'DataArray');
    const report = (cause: string): InputError => new InputError({ file, place: `${name} ${section}`, cause });
    const read = async (wanted: string, tuples?: number): Promise<Int32Array> => {
      const element = elements.find((entry) => entry.attributes.Name === wanted);
      if (element === undefined) throw report(`array ${wanted} is missing`);
      const wish = tuples === undefined ? { place: `${name} ${section}` } : { place: `${name} ${section}`, tuples };
      return loadInt32(await readArray(element, context, wish), file, name);
    };
    const list = await read('connectivity');
    const starts = startsFromEnds(await read('offsets', count), count, list.length, report);
    checkPointNumbers(list, pointCount, report);
    for (let i = 0; i < count; i += 1) {
      const size = (starts[i + 1] as number) - (starts[i] as number);
      const type = section === 'Polys' && size === 3 ? 5 : (sectionTypes[section] as number);
      types.push(section === 'Polys' && size === 4 ? 9 : type);
      offsets.push(base + (starts[i + 1] as number));
    }
    connectivity.push(list);
    base += list.length;
  }
  const all = new Int32Array(base);
  let at = 0;
  for (const list of connectivity) {
    all.set(list, at);
    at += list.length;
  }
  const cells: CellTopology = { types: Uint8Array.from(types), offsets: Int32Array.from(offsets), connectivity: all };
  return {
    name,
    pointCount,
    cellCount: types.length,
    points: points.load,
    pointType: points.type,
    cells: () => cells,
    pointArrays: await sectionArrays(piece, 'PointData', pointCount, context, name),
    cellArrays: await sectionArrays(piece, 'CellData', types.length, context, name),
  };
}
