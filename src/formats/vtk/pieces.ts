import type { CellTopology, DataArray, GridStructure, NumberArray } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { allocate, createNumbers, numberTypeOf } from './numbers.js';

/** One piece of a file: its own points, cells and arrays, numbered from 0. */
export interface Piece {
  readonly name: string;
  readonly pointCount: number;
  readonly cellCount: number;
  readonly points: () => Float64Array;
  readonly pointType: 'Float32' | 'Float64';
  readonly cells: () => CellTopology;
  readonly pointArrays: readonly DataArray[];
  readonly cellArrays: readonly DataArray[];
  readonly structure?: GridStructure;
}

/** Arrays that every piece has, each as the list of its parts; arrays that a piece lacks are left out and named. */
export function sharedArrays(
  lists: readonly (readonly DataArray[])[],
  file: string,
  remarks: string[],
): (readonly DataArray[])[] {
  const models = new Map(lists.flat().map((array) => [array.name, array]));
  const shared: DataArray[][] = [];
  for (const model of models.values()) {
    const parts = lists.flatMap((list) => list.find((entry) => entry.name === model.name) ?? []);
    if (parts.length < lists.length) {
      remarks.push(`array ${model.name} is not in every piece and was left out`);
      continue;
    }
    const different = parts.find((part) => part.components !== model.components || part.type !== model.type);
    if (different !== undefined) {
      throw new InputError({
        file,
        place: `array ${model.name}`,
        cause: 'its number type or number of components differs between pieces',
        remedy: 'write all pieces alike',
      });
    }
    shared.push(parts);
  }
  return shared;
}

/** Puts arrays of the same name one after the other. */
export function joinArrays(
  lists: readonly (readonly DataArray[])[],
  file: string,
  remarks: string[],
): readonly DataArray[] {
  if (lists.length === 1) return lists[0] as readonly DataArray[];
  return sharedArrays(lists, file, remarks).map((parts) => {
    const { name, components, type } = parts[0] as DataArray;
    const tuples = parts.reduce((sum, part) => sum + part.tuples, 0);
    const load = (): NumberArray => {
      const values = allocate(file, `array ${name}`, () => createNumbers(type, tuples * components));
      let at = 0;
      for (const part of parts) {
        const source = part.load();
        (values as Float64Array).set(source as Float64Array, at);
        at += source.length;
      }
      return values;
    };
    return { name, components, tuples, type, load };
  });
}

/** Cells of several pieces one after the other, points renumbered. */
export function joinCells(
  parts: readonly { readonly cells: CellTopology; readonly pointBegin: number }[],
): CellTopology {
  const [only] = parts;
  if (parts.length === 1 && only !== undefined) return only.cells;
  const cellCount = parts.reduce((sum, part) => sum + part.cells.types.length, 0);
  const connectivityLength = parts.reduce((sum, part) => sum + part.cells.connectivity.length, 0);
  const faceLength = parts.reduce((sum, part) => sum + (part.cells.polyhedronFaces?.length ?? 0), 0);
  const types = new Uint8Array(cellCount);
  const offsets = new Int32Array(cellCount + 1);
  const connectivity = new Int32Array(connectivityLength);
  const polyhedronFaces = new Int32Array(faceLength);
  const polyhedronOffsets = new Int32Array(cellCount + 1);
  let cell = 0;
  let at = 0;
  let faceAt = 0;
  for (const { cells, pointBegin } of parts) {
    const count = cells.types.length;
    types.set(cells.types, cell);
    for (let i = 0; i < count; i += 1) offsets[cell + i + 1] = at + (cells.offsets[i + 1] as number);
    for (let i = 0; i < cells.connectivity.length; i += 1) {
      connectivity[at + i] = (cells.connectivity[i] as number) + pointBegin;
    }
    const faces = cells.polyhedronFaces;
    const faceOffsets = cells.polyhedronOffsets;
    for (let i = 0; i < count; i += 1) {
      polyhedronOffsets[cell + i + 1] = faceAt + (faceOffsets?.[i + 1] ?? 0);
    }
    if (faces !== undefined) {
      copyFaces(faces, faceOffsets as Int32Array, polyhedronFaces, faceAt, (point) => point + pointBegin);
    }
    faceAt += faces?.length ?? 0;
    at += cells.connectivity.length;
    cell += count;
  }
  return faceLength === 0
    ? { types, offsets, connectivity }
    : { types, offsets, connectivity, polyhedronFaces, polyhedronOffsets };
}

/** Copies face streams to `to` from `base` on with other point numbers. */
function copyFaces(
  from: Int32Array,
  offsets: Int32Array,
  to: Int32Array,
  base: number,
  numberOf: (point: number) => number,
): void {
  to.set(from, base);
  for (let cell = 0; cell + 1 < offsets.length; cell += 1) {
    const end = offsets[cell + 1] as number;
    // Behind the number of faces stand, face by face, a count and that many points.
    let at = (offsets[cell] as number) + 1;
    while (at < end) {
      const count = from[at] as number;
      for (let i = at + 1; i <= at + count; i += 1) to[base + i] = numberOf(from[i] as number);
      at += count + 1;
    }
  }
}

function keptTuples(values: NumberArray, kept: Int32Array, components: number): NumberArray {
  const source = values as Float64Array;
  const out = createNumbers(numberTypeOf(values), kept.length * components) as Float64Array;
  for (let i = 0; i < kept.length; i += 1) {
    const from = (kept[i] as number) * components;
    for (let c = 0; c < components; c += 1) out[i * components + c] = source[from + c] as number;
  }
  return out;
}

function keepTuples(array: DataArray, kept: Int32Array): DataArray {
  return { ...array, tuples: kept.length, load: () => keptTuples(array.load(), kept, array.components) };
}

function keepCells(cells: CellTopology, kept: Int32Array): CellTopology {
  const slice = (data: Int32Array, from: Int32Array): [Int32Array, Int32Array] => {
    const offsets = new Int32Array(kept.length + 1);
    for (let i = 0; i < kept.length; i += 1) {
      const cell = kept[i] as number;
      offsets[i + 1] = (offsets[i] as number) + (from[cell + 1] as number) - (from[cell] as number);
    }
    const out = new Int32Array(offsets[kept.length] as number);
    for (let i = 0; i < kept.length; i += 1) {
      const cell = kept[i] as number;
      out.set(data.subarray(from[cell] as number, from[cell + 1] as number), offsets[i] as number);
    }
    return [out, offsets];
  };
  const [connectivity, offsets] = slice(cells.connectivity, cells.offsets);
  const types = Uint8Array.from(kept, (cell) => cells.types[cell] as number);
  if (cells.polyhedronFaces === undefined || cells.polyhedronOffsets === undefined)
    return { types, offsets, connectivity };
  const [polyhedronFaces, polyhedronOffsets] = slice(cells.polyhedronFaces, cells.polyhedronOffsets);
  return { types, offsets, connectivity, polyhedronFaces, polyhedronOffsets };
}

const duplicateCell = 1;
const hiddenCell = 32;

/** The cell array that marks ghosts, in its newer or older form. */
export function ghostArray(piece: Piece): DataArray | undefined {
  return piece.cellArrays.find((entry) => entry.name === 'vtkGhostType' || entry.name === 'vtkGhostLevels');
}

/** 1 for cells that belong to another piece or are hidden, 0 for all others. */
export function duplicateOrHidden(ghosts: DataArray): Uint8Array {
  const mask = ghosts.name === 'vtkGhostType' ? duplicateCell | hiddenCell : 255;
  return Uint8Array.from(ghosts.load() as Uint8Array, (flags) => ((Number(flags) & mask) === 0 ? 0 : 1));
}

function indicesOf(count: number, isKept: (index: number) => boolean): Int32Array {
  let kept = 0;
  for (let i = 0; i < count; i += 1) if (isKept(i)) kept += 1;
  const list = new Int32Array(kept);
  kept = 0;
  for (let i = 0; i < count; i += 1) {
    if (isKept(i)) {
      list[kept] = i;
      kept += 1;
    }
  }
  return list;
}

/** Points that remain: all but those that only dropped cells use. */
function keptPoints(pointCount: number, before: CellTopology, after: CellTopology): Int32Array {
  const dropped = new Uint8Array(pointCount);
  for (const point of before.connectivity) dropped[point] = 1;
  for (const point of after.connectivity) dropped[point] = 0;
  return indicesOf(pointCount, (point) => dropped[point] === 0);
}

function renumbered(cells: CellTopology, kept: Int32Array, pointCount: number): CellTopology {
  const numbers = new Int32Array(pointCount);
  for (let i = 0; i < kept.length; i += 1) numbers[kept[i] as number] = i;
  const connectivity = cells.connectivity.map((point) => numbers[point] as number);
  const { polyhedronFaces, polyhedronOffsets } = cells;
  if (polyhedronFaces === undefined || polyhedronOffsets === undefined) return { ...cells, connectivity };
  const faces = new Int32Array(polyhedronFaces.length);
  copyFaces(polyhedronFaces, polyhedronOffsets, faces, 0, (point) => numbers[point] as number);
  return { ...cells, connectivity, polyhedronFaces: faces };
}

/** Drops ghost and hidden cells, so that no cell is counted twice where pieces overlap. */
export function dropGhosts(piece: Piece, remarks: string[]): Piece {
  const ghosts = ghostArray(piece);
  if (ghosts === undefined) return piece;
  const isGhost = duplicateOrHidden(ghosts);
  const list = indicesOf(piece.cellCount, (cell) => isGhost[cell] === 0);
  if (list.length === piece.cellCount) return piece;
  remarks.push(`${piece.cellCount - list.length} ghost cells of ${piece.name} were left out`);
  const before = piece.cells();
  const after = keepCells(before, list);
  const points = keptPoints(piece.pointCount, before, after);
  const { structure: _, ...rest } = piece;
  const own = (arrays: readonly DataArray[]): DataArray[] =>
    arrays.filter((entry) => entry.name !== 'vtkGhostType' && entry.name !== 'vtkGhostLevels');
  const cells = renumbered(after, points, piece.pointCount);
  return {
    ...rest,
    pointCount: points.length,
    cellCount: list.length,
    points: () => keptTuples(piece.points(), points, 3) as Float64Array,
    cells: () => cells,
    pointArrays: own(piece.pointArrays).map((entry) => keepTuples(entry, points)),
    cellArrays: own(piece.cellArrays).map((entry) => keepTuples(entry, list)),
  };
}
