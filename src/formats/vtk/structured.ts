import type { CellTopology, DataArray, GridStructure } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { type FileContext, readArray } from './arrays.js';
import { childNamed, childrenNamed, type Element } from './head.js';
import type { Piece } from './pieces.js';
import { float64Points, pointsOf, sectionArrays } from './unstructured.js';

export type Extent = readonly [number, number, number, number, number, number];

const hexahedron = 12;
const quadrilateral = 9;
const line = 3;
const vertex = 1;

function numbers(text: string | undefined, count: number, file: string, what: string): number[] {
  const list = (text ?? '').trim().split(/\s+/).map(Number);
  if (list.length !== count || list.some((value) => !Number.isFinite(value))) {
    throw new InputError({ file, cause: `${what} '${text ?? ''}' should be ${count} numbers` });
  }
  return list;
}

export function extentOf(element: Element, attribute: string, file: string): Extent {
  const extent = numbers(element.attributes[attribute], 6, file, attribute);
  for (let axis = 0; axis < 3; axis += 1) {
    const [low, high] = [extent[2 * axis] as number, extent[2 * axis + 1] as number];
    if (!Number.isInteger(low) || !Number.isInteger(high) || high < low) {
      throw new InputError({ file, cause: `${attribute} '${element.attributes[attribute]}' is no extent` });
    }
  }
  return extent as unknown as Extent;
}

/** Points along i, j, k. */
export function sizesOf(extent: Extent): [number, number, number] {
  return [extent[1] - extent[0] + 1, extent[3] - extent[2] + 1, extent[5] - extent[4] + 1];
}

/** Cells of a structured grid; one point along an axis makes quadrilaterals, lines or vertices. */
export function structuredCells(extent: Extent): CellTopology {
  const [ni, nj, nk] = sizesOf(extent);
  const axes = [
    { count: ni, stride: 1 },
    { count: nj, stride: ni },
    { count: nk, stride: ni * nj },
  ];
  const used = axes.filter((axis) => axis.count > 1);
  const type = [vertex, line, quadrilateral, hexahedron][used.length] as number;
  const [a = 0, b = 0, c = 0] = used.map((axis) => axis.stride);
  const corners = [[0], [0, a], [0, a, a + b, b], [0, a, a + b, b, c, a + c, a + b + c, b + c]][
    used.length
  ] as number[];
  const [ci, cj, ck] = axes.map((axis) => Math.max(1, axis.count - 1)) as [number, number, number];
  const cellCount = ci * cj * ck;
  const types = new Uint8Array(cellCount).fill(type);
  const offsets = new Int32Array(cellCount + 1);
  const connectivity = new Int32Array(cellCount * corners.length);
  let cell = 0;
  for (let k = 0; k < ck; k += 1) {
    for (let j = 0; j < cj; j += 1) {
      for (let i = 0; i < ci; i += 1) {
        const base = i + ni * (j + nj * k);
        for (let corner = 0; corner < corners.length; corner += 1) {
          connectivity[cell * corners.length + corner] = base + (corners[corner] as number);
        }
        cell += 1;
        offsets[cell] = cell * corners.length;
      }
    }
  }
  return { types, offsets, connectivity };
}

export function imagePoints(structure: GridStructure): Float64Array {
  const { extent, origin = [0, 0, 0], spacing = [1, 1, 1], direction = [1, 0, 0, 0, 1, 0, 0, 0, 1] } = structure;
  const [ni, nj, nk] = sizesOf(extent);
  const points = new Float64Array(3 * ni * nj * nk);
  let at = 0;
  for (let k = 0; k < nk; k += 1) {
    for (let j = 0; j < nj; j += 1) {
      for (let i = 0; i < ni; i += 1) {
        const local = [
          (extent[0] + i) * (spacing[0] as number),
          (extent[2] + j) * (spacing[1] as number),
          (extent[4] + k) * (spacing[2] as number),
        ] as const;
        for (let row = 0; row < 3; row += 1) {
          points[at] =
            (origin[row] as number) +
            (direction[3 * row] as number) * local[0] +
            (direction[3 * row + 1] as number) * local[1] +
            (direction[3 * row + 2] as number) * local[2];
          at += 1;
        }
      }
    }
  }
  return points;
}

export function rectilinearPoints(axes: readonly [Float64Array, Float64Array, Float64Array]): Float64Array {
  const [x, y, z] = axes;
  const points = new Float64Array(3 * x.length * y.length * z.length);
  let at = 0;
  for (const zk of z) {
    for (const yj of y) {
      for (const xi of x) {
        points[at] = xi;
        points[at + 1] = yj;
        points[at + 2] = zk;
        at += 3;
      }
    }
  }
  return points;
}

async function axesOf(piece: Element, extent: Extent, context: FileContext, place: string): Promise<DataArray[]> {
  const elements = childrenNamed(childNamed(piece, 'Coordinates'), 'DataArray');
  if (elements.length !== 3) {
    throw new InputError({ file: context.reader.path, place, cause: `${elements.length} coordinate arrays, not 3` });
  }
  const sizes = sizesOf(extent);
  const arrays: DataArray[] = [];
  for (let axis = 0; axis < 3; axis += 1) {
    const wish = { place: `${place} Coordinates`, tuples: sizes[axis] as number };
    arrays.push(await readArray(elements[axis] as Element, context, wish));
  }
  return arrays;
}

/** One Piece of ImageData, RectilinearGrid or StructuredGrid. */
export async function structuredPiece(
  grid: Element,
  piece: Element,
  context: FileContext,
  name: string,
): Promise<Piece> {
  const file = context.reader.path;
  const extent = extentOf(piece, 'Extent', file);
  const [ni, nj, nk] = sizesOf(extent);
  const pointCount = ni * nj * nk;
  if (pointCount > 2 ** 31 - 2) throw new InputError({ file, place: name, cause: `extent has ${pointCount} points` });
  const cellCount = Math.max(1, ni - 1) * Math.max(1, nj - 1) * Math.max(1, nk - 1);
  const pointArrays = await sectionArrays(piece, 'PointData', pointCount, context, name);
  const cellArrays = await sectionArrays(piece, 'CellData', cellCount, context, name);
  const common = { name, pointCount, cellCount, cells: () => structuredCells(extent), pointArrays, cellArrays };
  if (grid.name.endsWith('ImageData')) {
    const origin = numbers(grid.attributes.Origin ?? '0 0 0', 3, file, 'Origin');
    const spacing = numbers(grid.attributes.Spacing ?? '1 1 1', 3, file, 'Spacing');
    const structure: GridStructure = {
      kind: 'image',
      extent,
      origin: origin as [number, number, number],
      spacing: spacing as [number, number, number],
      ...(grid.attributes.Direction === undefined
        ? {}
        : { direction: numbers(grid.attributes.Direction, 9, file, 'Direction') }),
    };
    return {
      ...common,
      points: () => imagePoints(structure),
      pointType: 'Float64',
      structure,
    };
  }
  if (grid.name.endsWith('RectilinearGrid')) {
    const arrays = await axesOf(piece, extent, context, name);
    const axes = arrays.map((array) => float64Points(array).load()) as [Float64Array, Float64Array, Float64Array];
    const pointType = arrays.every((array) => array.type === 'Float32') ? 'Float32' : 'Float64';
    return {
      ...common,
      points: () => rectilinearPoints(axes),
      pointType,
      structure: { kind: 'rectilinear', extent, axes },
    };
  }
  const points = await pointsOf(piece, pointCount, context, name);
  return { ...common, points: points.load, pointType: points.type, structure: { kind: 'curvilinear', extent } };
}
