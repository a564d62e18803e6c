import type { CellTopology, DataArray, Dataset, WriteRequest, ZoneRange } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { buildMesh } from '../../mesh/build.js';
import type { CellMesh } from '../../mesh/cell-mesh.js';
import { cellShape } from '../../mesh/cell-types.js';
import { pointCounts } from '../../mesh/structured.js';
import { NFACE, NGON } from './elements.js';
import { createHdf5, type Hdf5File, writeHdf5 } from './hdf5.js';
import { type FaceFields, writeFaceFields } from './write-faces.js';
import { createNode, createRoot, type NodeData, wholeData } from './write-node.js';
import { componentNames, shortName, writeNotes, writeSiUnits, writeSolutions } from './write-solution.js';
import {
  countTypes,
  createCondition,
  createSection,
  createZone,
  needsPolyhedra,
  type WrittenZone,
  writeCoordinates,
  writeStructured,
  writeUnstructured,
} from './write-zone.js';

/** Index of the entry of `offsets` that `at` falls into. */
function rowOf(offsets: Int32Array, at: number): number {
  let low = 0;
  let high = offsets.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if ((offsets[middle] as number) <= at) low = middle;
    else high = middle;
  }
  return low;
}

/** Signed face numbers of the cells: positive where the face's area vector points out of the cell. */
function cellFaceData(mesh: CellMesh): NodeData {
  const { cellFaceOffsets, cellFaces, owner } = mesh;
  return {
    type: 'I4',
    dimensions: [cellFaces.length],
    fill: (out, begin) => {
      let cell = rowOf(cellFaceOffsets, begin);
      for (let i = 0; i < out.length; i++) {
        while (begin + i >= (cellFaceOffsets[cell + 1] as number)) cell++;
        const face = cellFaces[begin + i] as number;
        (out as Int32Array)[i] = owner[face] === cell ? face + 1 : -(face + 1);
      }
    },
  };
}

/** Both cells of each face (0 outside), and the place of the face among each cell's faces. */
function writeParents(file: Hdf5File, section: string, mesh: CellMesh): void {
  const { faceCount, innerFaceCount, owner, neighbour, cellFaceOffsets, cellFaces, cellCount } = mesh;
  const elementOf = (cell: number): number => faceCount + 1 + cell;
  createNode(file, section, 'ParentElements', 'DataArray_t', {
    type: 'I4',
    dimensions: [faceCount, 2],
    fill: (out, begin) => {
      for (let i = 0; i < out.length; i++) {
        const at = begin + i;
        const face = at < faceCount ? at : at - faceCount;
        if (at < faceCount) (out as Int32Array)[i] = elementOf(owner[face] as number);
        else (out as Int32Array)[i] = face < innerFaceCount ? elementOf(neighbour[face] as number) : 0;
      }
    },
  });
  const position = new Int32Array(2 * faceCount);
  for (let cell = 0; cell < cellCount; cell++) {
    const begin = cellFaceOffsets[cell] as number;
    for (let i = begin; i < (cellFaceOffsets[cell + 1] as number); i++) {
      const face = cellFaces[i] as number;
      position[owner[face] === cell ? face : faceCount + face] = i - begin + 1;
    }
  }
  createNode(file, section, 'ParentElementsPosition', 'DataArray_t', wholeData('I4', [faceCount, 2], position));
}

/** One zone of polygons and polyhedra for the whole data set. */
function writePolyhedra(file: Hdf5File, base: string, dataset: Dataset, faces: FaceFields | undefined): WrittenZone {
  const mesh = faces?.mesh ?? buildMesh(dataset);
  const points = dataset.points.length / 3;
  const path = createZone(file, base, 'Zone', 'Unstructured', [points, mesh.cellCount, 0]);
  writeCoordinates(file, path, dataset, 0, [points]);
  const polygons: NodeData = {
    type: 'I4',
    dimensions: [mesh.facePoints.length],
    fill: (out, begin) => {
      for (let i = 0; i < out.length; i++) (out as Int32Array)[i] = (mesh.facePoints[begin + i] as number) + 1;
    },
  };
  const starts = wholeData('I4', [mesh.faceCount + 1], mesh.faceOffsets);
  const section = createSection(file, path, 'Faces', NGON, 1, mesh.faceCount, polygons, starts);
  writeParents(file, section, mesh);
  const cellStarts = wholeData('I4', [mesh.cellCount + 1], mesh.cellFaceOffsets);
  const [first, last] = [mesh.faceCount + 1, mesh.faceCount + mesh.cellCount];
  createSection(file, path, 'Cells', NFACE, first, last, cellFaceData(mesh), cellStarts);
  const filled = mesh.patches.filter((patch) => patch.faces.length > 0);
  if (filled.length > 0) {
    const parent = createNode(file, path, 'ZoneBC', 'ZoneBC_t');
    const names = new Set<string>();
    for (const patch of filled) {
      const data = wholeData(
        'I4',
        [1, patch.faces.length],
        Array.from(patch.faces, (face) => face + 1),
      );
      createCondition(file, parent, patch, names, 'FaceCenter', { name: 'PointList', data });
    }
  }
  if (faces !== undefined) {
    const whole = { first: 1, last: mesh.faceCount, offsets: mesh.faceOffsets, values: mesh.facePoints };
    writeFaceFields(file, [{ zone: path, pointBegin: 0, section: whole }], dataset, faces, (name) => name);
  }
  return {
    path,
    cells: { zone: path, dimensions: [mesh.cellCount], count: mesh.cellCount, begin: 0, order: mesh.datasetCell },
    points: { zone: path, dimensions: [points], count: points, begin: 0 },
  };
}

function highestDimension(cells: CellTopology): number {
  let highest = 0;
  countTypes(cells).forEach((count, type) => {
    if (count > 0) highest = Math.max(highest, cellShape(type)?.dimension ?? 0);
  });
  return highest;
}

function isBox(zone: ZoneRange, dimension: number): boolean {
  return dimension === 3 && zone.structure !== undefined && pointCounts(zone.structure).every((n) => n > 1);
}

/** Arrays of the mesh that no new one replaces, then the new ones. */
function allArrays(kept: readonly DataArray[], added: readonly DataArray[]): DataArray[] {
  const names = new Set(added.flatMap(componentNames));
  return [...kept.filter((array) => !componentNames(array).some((name) => names.has(name))), ...added];
}

/**
 * Writes a new CGNS file: structured zones stay structured, other cells come in one section for each type, meshes with
 * polyhedra as one zone of polygons and polyhedra.
 *
 * @throws InputError for point clouds and for cells without counterpart, MachineError when it cannot be written
 */
export function writeNew(temporary: string, request: WriteRequest, faces?: FaceFields): void {
  const { mesh: dataset } = request;
  const { cells } = dataset;
  const dimension = cells === undefined ? 0 : highestDimension(cells);
  if (cells === undefined || dimension < 2) {
    throw new InputError({
      file: dataset.file,
      cause: 'CGNS needs a mesh, the data hold none',
      remedy: 'write a VTK file',
    });
  }
  const file = createHdf5(temporary);
  writeHdf5(file, () => {
    createRoot(file);
    const base = createNode(file, '/', 'Base', 'CGNSBase_t', wholeData('I4', [2], [dimension, 3]));
    writeSiUnits(file, base);
    const written: WrittenZone[] = [];
    if (dimension === 3 && (faces !== undefined || needsPolyhedra(cells)))
      written.push(writePolyhedra(file, base, dataset, faces));
    else {
      const names = new Set<string>(['DataClass', 'DimensionalUnits']);
      for (const zone of dataset.zones) {
        if (zone.cellEnd === zone.cellBegin) continue;
        const name = shortName(zone.name, names);
        names.add(name);
        written.push(
          isBox(zone, dimension)
            ? writeStructured(file, base, name, dataset, zone)
            : writeUnstructured(file, base, name, dataset, zone, dimension),
        );
      }
    }
    const cellArrays = allArrays(dataset.cellArrays, request.cellArrays).filter((array) => array.tuples > 0);
    const pointArrays = allArrays(dataset.pointArrays, request.pointArrays).filter((array) => array.tuples > 0);
    const filled = written.map((zone) => zone.cells).filter(({ count }) => count > 0);
    if (cellArrays.length > 0) writeSolutions(file, 'FlowSolution', 'CellCenter', filled, cellArrays);
    if (pointArrays.length > 0) {
      writeSolutions(
        file,
        'PointSolution',
        'Vertex',
        written.map((zone) => zone.points),
        pointArrays,
      );
    }
    const notes = new Map([...dataset.notes, ...request.notes]);
    const zoneNames = written.map(({ path }) => [path.slice(path.lastIndexOf('/') + 1), ''] as const);
    writeNotes(file, base, notes, new Map(zoneNames));
  });
}
