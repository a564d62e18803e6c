import type { CellTopology, Dataset } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { sharedInt32 } from '../basis/fields.js';
import {
  cellSixVolume,
  createFaceBuffer,
  type FaceBuffer,
  faceCountBound,
  isVolumeType,
  readCellFaces,
  reverseFace,
} from './cell-faces.js';
import type { CellMesh } from './cell-mesh.js';
import { cellShape, polyhedronType, wedgeShape } from './cell-types.js';
import { createFaceTable, findFace, putFace, renumberFaces, setKeyOfFace, takeFace } from './face-table.js';
import { findPatches } from './patches.js';
import { orientPolyhedron } from './polyhedron-orientation.js';
import { volumeError } from './quality.js';
import { weldPoints } from './weld.js';

function requireCells(dataset: Dataset): CellTopology {
  const { cells, file } = dataset;
  if (cells === undefined || cells.types.length === 0)
    throw new InputError({ file, cause: 'the file holds no cells', remedy: 'give a mesh with volume cells' });
  const pointCount = dataset.points.length / 3;
  const check = (p: number, place: string): void => {
    if (!(p >= 0 && p < pointCount))
      throw new InputError({ file, place, cause: `point ${p} does not exist (the file has ${pointCount} points)` });
  };
  const { connectivity } = cells;
  for (let i = 0; i < connectivity.length; i++)
    if (connectivity[i]! >>> 0 >= pointCount) check(connectivity[i]!, `connectivity entry ${i}`);
  return cells;
}

/** Numbers of the volume cells in the data set. */
function volumeCells(dataset: Dataset, cells: CellTopology): Int32Array {
  let count = 0;
  for (let c = 0; c < cells.types.length; c++) {
    const type = cells.types[c]!;
    if (isVolumeType(type)) count++;
    else if (cellShape(type) === undefined)
      throw new InputError({
        file: dataset.file,
        place: `cell ${c}`,
        cause: `cells of type ${type} are not supported`,
        remedy: 'use linear cells or polyhedra',
      });
  }
  if (count === 0)
    throw new InputError({
      file: dataset.file,
      cause: 'the file holds no volume cells',
      remedy: 'give a three-dimensional mesh',
    });
  const numbers = sharedInt32(count);
  let at = 0;
  for (let c = 0; c < cells.types.length; c++) if (isVolumeType(cells.types[c]!)) numbers[at++] = c;
  return numbers;
}

/**
 * Zones whose cells are all numbered left-handed (legal for structured grids with left-handed i, j, k, and what mirroring
 * leaves): ranges of data-set cells. Judged by 200 cells spread over the zone; a right-handed zone with single inverted
 * cells is no such zone, and those cells keep their negative volumes.
 */
function leftHandedRanges(dataset: Dataset, cells: CellTopology, buffer: FaceBuffer): readonly [number, number][] {
  const ranges: [number, number][] = [];
  for (const zone of dataset.zones) {
    const step = Math.max(1, Math.floor((zone.cellEnd - zone.cellBegin) / 200));
    let negative = 0;
    let others = 0;
    for (let c = zone.cellBegin; c < zone.cellEnd && others === 0; c += step) {
      const type = cells.types[c]!;
      if (!isVolumeType(type) || type === polyhedronType || cellShape(type) === wedgeShape) continue;
      readCellFaces(cells, c, undefined, buffer, dataset.file);
      if (buffer.count > 0 && cellSixVolume(buffer, dataset.points) < 0) negative++;
      else others++;
    }
    if (negative > 0 && others === 0) ranges.push([zone.cellBegin, zone.cellEnd]);
  }
  return ranges;
}

type Ranges = readonly (readonly [number, number])[];

/** Faces of a cell with their area vectors outwards, as far as the cell is not inverted. */
function readOutwardFaces(
  dataset: Dataset,
  cell: number,
  pointOf: Int32Array | undefined,
  leftHanded: Ranges,
  buffer: FaceBuffer,
): void {
  const cells = dataset.cells!;
  const type = cells.types[cell]!;
  readCellFaces(cells, cell, pointOf, buffer, dataset.file);
  if (type === polyhedronType) orientPolyhedron(buffer, dataset.points);
  else if (cellShape(type) === wedgeShape) {
    // Wedges are met with either triangle first; both are wedges.
    if (cellSixVolume(buffer, dataset.points) < 0) reverseAll(buffer);
  } else if (leftHanded.length > 0 && leftHanded.some(([begin, end]) => cell >= begin && cell < end))
    reverseAll(buffer);
}

function reverseAll(buffer: FaceBuffer): void {
  for (let f = 0; f < buffer.count; f++) reverseFace(buffer, f);
}

/** True when a face runs against the same face as its other cell has it, at `stored[begin ... end)`. */
function runsOpposite(faces: FaceBuffer, f: number, stored: Int32Array, begin: number, end: number): boolean {
  const a = faces.points[faces.starts[f]!]!;
  let at = begin;
  while (stored[at] !== a) at++;
  return stored[at === begin ? end - 1 : at - 1] === faces.points[faces.starts[f]! + 1]!;
}

/** What to say about cells whose faces disagree with their neighbours': all cells with no positive volume of their own. */
function invertedCells(
  dataset: Dataset,
  mesh: Pick<CellMesh, 'cellCount' | 'datasetCell'>,
  pointOf: Int32Array | undefined,
  leftHanded: Ranges,
  met: number,
): InputError {
  const buffer = createFaceBuffer();
  const volumes = new Float64Array(mesh.cellCount);
  for (let c = 0; c < mesh.cellCount; c++) {
    readOutwardFaces(dataset, mesh.datasetCell[c]!, pointOf, leftHanded, buffer);
    volumes[c] = buffer.count === 0 ? 0 : cellSixVolume(buffer, dataset.points) / 6;
  }
  return (
    volumeError(volumes, mesh, dataset.file) ??
    new InputError({
      file: dataset.file,
      place: `cell ${met}`,
      cause: 'its faces run the same way as those of the cell beside it',
      remedy: 'check the order of the points in this cell',
    })
  );
}

/**
 * Builds faces with their cells from cells of any type (all linear VTK types, polyhedra, higher-order cells by their
 * corners). Points that coincide across zones are one point for the topology; `points` itself stays as it is.
 *
 * @throws InputError when there are no volume cells, a cell type is not supported, a point does not exist, three cells
 *   share a face, or single cells are inverted
 */
export function buildMesh(dataset: Dataset): CellMesh {
  const cells = requireCells(dataset);
  const datasetCell = volumeCells(dataset, cells);
  const cellCount = datasetCell.length;
  const xyz = dataset.points;
  const { file } = dataset;
  const pointOf = weldPoints(dataset);
  const buffer = createFaceBuffer();

  let bound = 0;
  for (let c = 0; c < cellCount; c++) bound += faceCountBound(cells, datasetCell[c]!);
  // Upper bounds: pages that are never written cost no memory.
  const firstCell = new Int32Array(bound);
  const secondCell = new Int32Array(bound);
  const corners = new Uint16Array(bound);
  const cellFaceOffsets = sharedInt32(cellCount + 1);
  let cellFaces = sharedInt32(bound);
  const table = createFaceTable(xyz.length / 3);

  let faceCount = 0;
  let innerFaceCount = 0;
  let at = 0;
  for (let c = 0; c < cellCount; c++) {
    readCellFaces(cells, datasetCell[c]!, pointOf, buffer, file);
    for (let f = 0; f < buffer.count; f++) {
      setKeyOfFace(buffer, f);
      let face = takeFace(table);
      if (face >= 0) {
        secondCell[face] = c;
        innerFaceCount++;
      } else {
        face = faceCount++;
        firstCell[face] = c;
        secondCell[face] = -1;
        corners[face] = buffer.starts[f + 1]! - buffer.starts[f]!;
        putFace(table, face);
      }
      cellFaces[at++] = face;
    }
    cellFaceOffsets[c + 1] = at;
  }
  if (at < bound) {
    const exact = sharedInt32(at);
    exact.set(cellFaces.subarray(0, at));
    cellFaces = exact;
  }

  const owner = sharedInt32(faceCount);
  const neighbour = sharedInt32(innerFaceCount);
  const faceOffsets = sharedInt32(faceCount + 1);
  const numbers = new Int32Array(faceCount);
  let inner = 0;
  let outer = innerFaceCount;
  for (let face = 0; face < faceCount; face++) {
    const second = secondCell[face]!;
    const number = second >= 0 ? inner++ : outer++;
    numbers[face] = number;
    owner[number] = firstCell[face]!;
    if (second >= 0) neighbour[number] = second;
    faceOffsets[number + 1] = corners[face]!;
  }
  for (let face = 0; face < faceCount; face++) faceOffsets[face + 1] = faceOffsets[face + 1]! + faceOffsets[face]!;
  for (let i = 0; i < at; i++) cellFaces[i] = numbers[cellFaces[i]!]!;
  renumberFaces(table, numbers);

  const facePoints = sharedInt32(faceOffsets[faceCount]!);
  const mesh = { cellCount, datasetCell };
  const leftHanded = leftHandedRanges(dataset, cells, buffer);
  for (let c = 0; c < cellCount; c++) {
    const cell = datasetCell[c]!;
    readOutwardFaces(dataset, cell, pointOf, leftHanded, buffer);
    const begin = cellFaceOffsets[c]!;
    for (let f = 0; f < buffer.count; f++) {
      const face = cellFaces[begin + f]!;
      if (owner[face] !== c) {
        if (!runsOpposite(buffer, f, facePoints, faceOffsets[face]!, faceOffsets[face + 1]!))
          throw invertedCells(dataset, mesh, pointOf, leftHanded, cell);
        continue;
      }
      let to = faceOffsets[face]!;
      for (let i = buffer.starts[f]!; i < buffer.starts[f + 1]!; i++) facePoints[to++] = buffer.points[i]!;
      if (face < innerFaceCount) {
        setKeyOfFace(buffer, f);
        const third = findFace(table);
        if (third >= 0)
          throw new InputError({
            file,
            place: `cell ${datasetCell[owner[third]!]!}`,
            cause: `it shares a face with cells ${cell} and ${datasetCell[neighbour[face]!]!}, so three cells meet at one face`,
            remedy: 'remove cells that are there twice',
          });
      }
    }
  }

  return {
    points: xyz,
    cellCount,
    faceCount,
    innerFaceCount,
    faceOffsets,
    facePoints,
    owner,
    neighbour,
    cellFaceOffsets,
    cellFaces,
    datasetCell,
    patches: findPatches(dataset, table, pointOf),
  };
}
