import type { CellTopology, DataArray, GridStructure, NumberArray } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { createNumbers } from './numbers.js';

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

/** Puts arrays of the same name one after the other; arrays that a piece lacks are left out and named. */
export function joinArrays(
  lists: readonly (readonly DataArray[])[],
  file: string,
  remarks: string[],
): readonly DataArray[] {
  const [first = []] = lists;
  if (lists.length === 1) return first;
  const joined: DataArray[] = [];
  for (const model of first) {
    const parts = lists.map((list) => list.find((entry) => entry.name === model.name));
    if (parts.some((part) => part === undefined)) {
      remarks.push(`array ${model.name} is not in every piece and was left out`);
      continue;
    }
    const known = parts as DataArray[];
    const different = known.find((part) => part.components !== model.components || part.type !== model.type);
    if (different !== undefined) {
      throw new InputError({
        file,
        place: `array ${model.name}`,
        cause: 'its number type or number of components differs between pieces',
        remedy: 'write all pieces alike',
      });
    }
    const tuples = known.reduce((sum, part) => sum + part.tuples, 0);
    const load = (): NumberArray => {
      const values = createNumbers(model.type, tuples * model.components);
      let at = 0;
      for (const part of known) {
        const source = part.load();
        (values as Float64Array).set(source as Float64Array, at);
        at += source.length;
      }
      return values;
    };
    joined.push({ name: model.name, components: model.components, tuples, type: model.type, load });
  }
  return joined;
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
    if (faces !== undefined) copyFaces(faces, faceOffsets as Int32Array, polyhedronFaces, faceAt, pointBegin);
    faceAt += faces?.length ?? 0;
    at += cells.connectivity.length;
    cell += count;
  }
  return faceLength === 0
    ? { types, offsets, connectivity }
    : { types, offsets, connectivity, polyhedronFaces, polyhedronOffsets };
}

function copyFaces(from: Int32Array, offsets: Int32Array, to: Int32Array, base: number, shift: number): void {
  to.set(from, base);
  for (let cell = 0; cell + 1 < offsets.length; cell += 1) {
    const end = offsets[cell + 1] as number;
    // Behind the number of faces stand, face by face, a count and that many points.
    let at = (offsets[cell] as number) + 1;
    while (at < end) {
      const count = from[at] as number;
      for (let i = at + 1; i <= at + count; i += 1) to[base + i] = (from[i] as number) + shift;
      at += count + 1;
    }
  }
}

function keepTuples(array: DataArray, kept: Int32Array): DataArray {
  const load = (): NumberArray => {
    const source = array.load() as Float64Array;
    const values = createNumbers(array.type, kept.length * array.components) as Float64Array;
    for (let i = 0; i < kept.length; i += 1) {
      for (let c = 0; c < array.components; c += 1) {
        values[i * array.components + c] = source[(kept[i] as number) * array.components + c] as number;
      }
    }
    return values;
  };
  return { ...array, tuples: kept.length, load };
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

/** Drops ghost and hidden cells, so that no cell is counted twice where pieces overlap. */
export function dropGhosts(piece: Piece, remarks: string[]): Piece {
  const ghosts = piece.cellArrays.find((entry) => entry.name === 'vtkGhostType' || entry.name === 'vtkGhostLevels');
  if (ghosts === undefined) return piece;
  const flags = ghosts.load() as Uint8Array;
  const mask = ghosts.name === 'vtkGhostType' ? duplicateCell | hiddenCell : 255;
  const kept: number[] = [];
  for (let i = 0; i < flags.length; i += 1) if ((Number(flags[i]) & mask) === 0) kept.push(i);
  const cellArrays = piece.cellArrays.filter((entry) => entry !== ghosts);
  if (kept.length === flags.length) return { ...piece, cellArrays };
  remarks.push(`${flags.length - kept.length} ghost cells of ${piece.name} were left out`);
  const list = Int32Array.from(kept);
  const { structure: _, ...rest } = piece;
  return {
    ...rest,
    cellCount: list.length,
    cells: () => keepCells(piece.cells(), list),
    cellArrays: cellArrays.map((entry) => keepTuples(entry, list)),
  };
}
