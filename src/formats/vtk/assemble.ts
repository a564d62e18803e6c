import type { CellTopology, Dataset, ZoneRange } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { allocate } from './numbers.js';
import { joinArrays, joinCells, type Piece } from './pieces.js';

const mostEntries = 2 ** 31 - 2;

function zonesOf(pieces: readonly Piece[]): ZoneRange[] {
  const zones: ZoneRange[] = [];
  const names = new Set<string>();
  let pointBegin = 0;
  let cellBegin = 0;
  for (const { name: wanted, pointCount, cellCount, structure } of pieces) {
    let name = pieces.length === 1 ? 'mesh' : wanted;
    for (let copy = 2; names.has(name); copy += 1) name = `${wanted} (${copy})`;
    names.add(name);
    zones.push({
      name,
      pointBegin,
      pointEnd: pointBegin + pointCount,
      cellBegin,
      cellEnd: cellBegin + cellCount,
      ...(structure === undefined ? {} : { structure }),
    });
    pointBegin += pointCount;
    cellBegin += cellCount;
  }
  return zones;
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

function joinedPoints(pieces: readonly Piece[], zones: readonly ZoneRange[]): Float64Array {
  const [only] = pieces;
  if (pieces.length === 1 && only !== undefined) return only.points();
  const points = new Float64Array(3 * (zones.at(-1) as ZoneRange).pointEnd);
  pieces.forEach((piece, index) => {
    points.set(piece.points(), 3 * (zones[index] as ZoneRange).pointBegin);
  });
  return points;
}

/** A value that is made when it is first asked for. */
function lazy<T>(make: () => T): () => T {
  let made: { readonly value: T } | undefined;
  return () => {
    made ??= { value: make() };
    return made.value;
  };
}

/** What belongs to a data set besides its pieces. */
export interface Surroundings {
  readonly file: string;
  readonly format: string;
  readonly notes: ReadonlyMap<string, string>;
  readonly remarks: readonly string[];
  readonly time?: number;
}

/**
 * One merged set of points and cells; pieces become zones. Points and cells of image and rectilinear grids are
 * computed, and cells of all structured grids, when first asked for.
 *
 * @throws InputError when there are no points, too many, or one is not finite
 */
export function assemble(pieces: readonly Piece[], surroundings: Surroundings): Dataset {
  const { file, notes, time } = surroundings;
  if (pieces.length === 0) {
    throw new InputError({ file, cause: 'the file holds no points', remedy: 'write the data set with its mesh' });
  }
  const zones = zonesOf(pieces);
  const { pointEnd, cellEnd } = zones.at(-1) as ZoneRange;
  if (pointEnd > mostEntries || cellEnd > mostEntries) {
    throw new InputError({ file, cause: `${pointEnd} points and ${cellEnd} cells are more than 31 bits can number` });
  }
  const points = lazy(() => {
    const all = allocate(file, 'points', () => joinedPoints(pieces, zones));
    checkFinite(all, file);
    return all;
  });
  const cells = lazy<CellTopology>(() =>
    allocate(file, 'cells', () =>
      joinCells(
        pieces.map((piece, index) => ({ cells: piece.cells(), pointBegin: (zones[index] as ZoneRange).pointBegin })),
      ),
    ),
  );
  // Stored coordinates are read at once: a damaged file is to be refused on opening.
  if (pieces.some(({ structure }) => structure === undefined || structure.kind === 'curvilinear')) points();
  if (pieces.every(({ structure }) => structure === undefined)) cells();
  const remarks = [...surroundings.remarks];
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
  const dataset = {
    file,
    format: surroundings.format,
    get points() {
      return points();
    },
    pointType: pieces.every((piece) => piece.pointType === 'Float32') ? ('Float32' as const) : ('Float64' as const),
    pointArrays,
    cellArrays,
    zones,
    boundaries: [],
    missingAxes: [],
    notes,
    remarks,
    ...(time === undefined ? {} : { time }),
  };
  if (cellEnd === 0) return dataset;
  return Object.defineProperty(dataset, 'cells', { enumerable: true, get: cells });
}
