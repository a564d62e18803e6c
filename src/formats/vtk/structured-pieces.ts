import type { DataArray, GridStructure, NumberArray } from '../../basis/dataset.js';
import { allocate, createNumbers } from './numbers.js';
import { duplicateOrHidden, ghostArray, type Piece, sharedArrays } from './pieces.js';
import { type Extent, imagePoints, rectilinearPoints, sizesOf, structuredCells } from './structured.js';

/** Where the rows of a piece lie in the whole grid; `layer` 1 for cells, 0 for points. */
interface Placement {
  readonly rowLength: number;
  /** Start in the whole of each row of the piece, in the piece's order. */
  readonly rowStarts: Int32Array;
  /** Entries of the piece to leave out. */
  readonly skipped?: Uint8Array;
}

function counts(extent: Extent, layer: 0 | 1): [number, number, number] {
  return sizesOf(extent).map((points) => Math.max(1, points - layer)) as [number, number, number];
}

function placementOf(part: Extent, whole: Extent, layer: 0 | 1, skipped?: Uint8Array): Placement {
  const [rowLength, nj, nk] = counts(part, layer);
  const [wi, wj] = counts(whole, layer);
  const rowStarts = new Int32Array(nj * nk);
  for (let k = 0; k < nk; k += 1) {
    for (let j = 0; j < nj; j += 1) {
      rowStarts[j + nj * k] = part[0] - whole[0] + wi * (part[2] - whole[2] + j + wj * (part[4] - whole[4] + k));
    }
  }
  return { rowLength, rowStarts, ...(skipped === undefined ? {} : { skipped }) };
}

/** Copies the rows of a piece to their places in the whole. */
function place(source: NumberArray, target: NumberArray, placement: Placement, components: number): void {
  const from = source as Float64Array;
  const to = target as Float64Array;
  const { rowLength, rowStarts, skipped } = placement;
  for (let row = 0; row < rowStarts.length; row += 1) {
    const begin = row * rowLength;
    const start = rowStarts[row] as number;
    if (skipped === undefined) {
      to.set(from.subarray(begin * components, (begin + rowLength) * components), start * components);
      continue;
    }
    for (let i = 0; i < rowLength; i += 1) {
      if (skipped[begin + i] !== 0) continue;
      const at = (begin + i) * components;
      to.set(from.subarray(at, at + components), (start + i) * components);
    }
  }
}

function joinPlaced(
  lists: readonly (readonly DataArray[])[],
  placements: readonly Placement[],
  tuples: number,
  file: string,
  remarks: string[],
): DataArray[] {
  return sharedArrays(lists, file, remarks).map((parts) => {
    const { name, components, type } = parts[0] as DataArray;
    const load = (): NumberArray => {
      const whole = allocate(file, `array ${name}`, () => createNumbers(type, tuples * components));
      parts.forEach((part, index) => {
        place(part.load(), whole, placements[index] as Placement, components);
      });
      return whole;
    };
    return { name, components, tuples, type, load };
  });
}

function unionOf(extents: readonly Extent[]): Extent {
  const bound = (side: number): number => {
    const values = extents.map((extent) => extent[side] as number);
    return side % 2 === 0 ? Math.min(...values) : Math.max(...values);
  };
  return [0, 1, 2, 3, 4, 5].map(bound) as unknown as Extent;
}

/** True when every entry of the whole is given by some piece. */
function covers(placements: readonly Placement[], total: number): boolean {
  const given = new Uint8Array(total);
  for (const { rowLength, rowStarts, skipped } of placements) {
    for (let row = 0; row < rowStarts.length; row += 1) {
      const start = rowStarts[row] as number;
      for (let i = 0; i < rowLength; i += 1) if (skipped?.[row * rowLength + i] !== 1) given[start + i] = 1;
    }
  }
  return !given.includes(0);
}

/** Pieces of one grid are of one kind, and images lie on one lattice. */
function isSameGrid(a: GridStructure, b: GridStructure): boolean {
  const lattice = ({ kind, origin, spacing, direction }: GridStructure): string =>
    JSON.stringify([kind, origin, spacing, direction]);
  return lattice(a) === lattice(b);
}

function joinedAxes(parts: readonly GridStructure[], whole: Extent): GridStructure['axes'] {
  const sizes = sizesOf(whole);
  const axes = sizes.map((size) => new Float64Array(size)) as [Float64Array, Float64Array, Float64Array];
  for (const { axes: own, extent } of parts) {
    for (let axis = 0; axis < 3; axis += 1) {
      const values = own?.[axis];
      if (values !== undefined) axes[axis]?.set(values, (extent[2 * axis] as number) - (whole[2 * axis] as number));
    }
  }
  return axes;
}

/** Which cells of a piece are ghosts; undefined when none is. */
function ghostMask(piece: Piece): Uint8Array | undefined {
  const ghosts = ghostArray(piece);
  if (ghosts === undefined) return undefined;
  const mask = duplicateOrHidden(ghosts);
  return mask.includes(1) ? mask : undefined;
}

const withoutGhostArrays = (arrays: readonly DataArray[]): DataArray[] =>
  arrays.filter((array) => array.name !== 'vtkGhostType' && array.name !== 'vtkGhostLevels');

/**
 * Makes one grid of pieces that tile it (they share the points of their borders and may overlap in ghost cells).
 * Returns undefined when they leave a gap, so that the pieces stay separate.
 */
export function joinStructured(pieces: readonly Piece[], file: string, remarks: string[]): Piece | undefined {
  const structures = pieces.map((piece) => piece.structure);
  const [first] = structures;
  if (
    first === undefined ||
    !structures.every((structure) => structure !== undefined && isSameGrid(structure, first))
  ) {
    return undefined;
  }
  const parts = structures as GridStructure[];
  const extent = unionOf(parts.map((part) => part.extent));
  const [ni, nj, nk] = sizesOf(extent);
  const pointCount = ni * nj * nk;
  const cellCount = counts(extent, 1).reduce((product, count) => product * count, 1);
  // More than the pieces have together cannot be covered; found before anything of that size is made.
  if (cellCount > pieces.reduce((sum, piece) => sum + piece.cellCount, 0)) return undefined;
  const masks = pieces.map(ghostMask);
  const onPoints = parts.map((part) => placementOf(part.extent, extent, 0));
  const onCells = parts.map((part, index) => placementOf(part.extent, extent, 1, masks[index]));
  if (!covers(onPoints, pointCount) || !covers(onCells, cellCount)) return undefined;
  const structure: GridStructure = { ...first, extent };
  const axes = first.kind === 'rectilinear' ? joinedAxes(parts, extent) : undefined;
  const curvilinear = (): Float64Array => {
    const whole = new Float64Array(3 * pointCount);
    pieces.forEach((piece, index) => {
      place(piece.points(), whole, onPoints[index] as Placement, 3);
    });
    return whole;
  };
  const points =
    axes !== undefined
      ? () => rectilinearPoints(axes)
      : first.kind === 'image'
        ? () => imagePoints(structure)
        : curvilinear;
  const hasGhosts = masks.some((mask) => mask !== undefined);
  const own = (arrays: readonly DataArray[]): readonly DataArray[] => (hasGhosts ? withoutGhostArrays(arrays) : arrays);
  return {
    name: 'grid',
    pointCount,
    cellCount,
    points,
    pointType: pieces.every((piece) => piece.pointType === 'Float32') ? 'Float32' : 'Float64',
    cells: () => structuredCells(extent),
    pointArrays: joinPlaced(
      pieces.map((piece) => own(piece.pointArrays)),
      onPoints,
      pointCount,
      file,
      remarks,
    ),
    cellArrays: joinPlaced(
      pieces.map((piece) => own(piece.cellArrays)),
      onCells,
      cellCount,
      file,
      remarks,
    ),
    structure: axes === undefined ? structure : { ...structure, axes },
  };
}
