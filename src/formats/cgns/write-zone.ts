import type { BoundaryKind, BoundaryPatch, CellTopology, Dataset, ZoneRange } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { cellShape } from '../../mesh/cell-types.js';
import { pointCounts } from '../../mesh/structured.js';
import { type ElementType, elementOfVtk, elementTypes, NGON } from './elements.js';
import type { Hdf5File } from './hdf5.js';
import { createNode, type NodeData, textData, wholeData } from './write-node.js';
import { type SolutionPlaces, shortName, writeExponents } from './write-solution.js';

/** A zone as it was written: where its fields go. */
export interface WrittenZone {
  readonly path: string;
  readonly cells: SolutionPlaces;
  readonly points: SolutionPlaces;
}

const conditions: Readonly<Record<BoundaryKind, string>> = {
  wall: 'BCWall',
  inflow: 'BCInflow',
  outflow: 'BCOutflow',
  symmetry: 'BCSymmetryPlane',
  farfield: 'BCFarfield',
  periodic: 'BCGeneral',
  other: 'BCTypeUserDefined',
};

/** Coordinates of a range of points. */
export function writeCoordinates(
  file: Hdf5File,
  zone: string,
  dataset: Dataset,
  pointBegin: number,
  dimensions: readonly number[],
): void {
  const grid = createNode(file, zone, 'GridCoordinates', 'GridCoordinates_t');
  ['X', 'Y', 'Z'].forEach((axis, a) => {
    const node = createNode(file, grid, `Coordinate${axis}`, 'DataArray_t', {
      type: dataset.pointType === 'Float32' ? 'R4' : 'R8',
      dimensions,
      fill: (out, begin) => {
        for (let i = 0; i < out.length; i++) {
          (out as Float64Array)[i] = dataset.points[3 * (pointBegin + begin + i) + a] as number;
        }
      },
    });
    writeExponents(file, node, [0, 1, 0, 0, 0]);
  });
}

export function createZone(
  file: Hdf5File,
  base: string,
  name: string,
  kind: 'Structured' | 'Unstructured',
  sizes: readonly number[],
): string {
  const axes = sizes.length / 3;
  const zone = createNode(file, base, name, 'Zone_t', wholeData('I4', [axes, 3], sizes));
  createNode(file, zone, 'ZoneType', 'ZoneType_t', textData(kind));
  return zone;
}

export function createSection(
  file: Hdf5File,
  zone: string,
  name: string,
  type: number,
  first: number,
  last: number,
  connectivity: NodeData,
  starts?: NodeData,
): string {
  const section = createNode(file, zone, name, 'Elements_t', wholeData('I4', [2], [type, 0]));
  createNode(file, section, 'ElementRange', 'IndexRange_t', wholeData('I4', [2], [first, last]));
  createNode(file, section, 'ElementConnectivity', 'DataArray_t', connectivity);
  if (starts !== undefined) createNode(file, section, 'ElementStartOffset', 'DataArray_t', starts);
  return section;
}

/** A boundary by faces or points. @param set  its PointList or PointRange */
export function createCondition(
  file: Hdf5File,
  zoneConditions: string,
  patch: Pick<BoundaryPatch, 'name' | 'kind'>,
  taken: Set<string>,
  location: 'FaceCenter' | 'Vertex',
  set: { readonly name: 'PointList' | 'PointRange'; readonly data: NodeData },
): void {
  const name = shortName(patch.name, taken);
  taken.add(name);
  const node = createNode(file, zoneConditions, name, 'BC_t', textData(conditions[patch.kind]));
  createNode(file, node, 'GridLocation', 'GridLocation_t', textData(location));
  createNode(file, node, set.name, set.name === 'PointList' ? 'IndexArray_t' : 'IndexRange_t', set.data);
}

/** How a VTK cell becomes an element: the element's node k is the cell's point `points[k]`. */
interface Recipe {
  readonly element: ElementType;
  readonly points: readonly number[];
}

const pixel = [0, 1, 3, 2];
const voxel = [0, 1, 3, 2, 4, 5, 7, 6];

function recipeOf(vtk: number): Recipe | undefined {
  if (vtk === 8) return { element: elementOfVtk(9) as ElementType, points: pixel };
  if (vtk === 11) return { element: elementOfVtk(12) as ElementType, points: voxel };
  const exact = elementOfVtk(vtk);
  if (exact !== undefined) {
    const points = new Array<number>(exact.nodes);
    exact.order.forEach((node, point) => {
      points[node] = point;
    });
    return { element: exact, points };
  }
  // Cells of higher order that the standard numbers differently keep their corners.
  const shape = cellShape(vtk);
  const linear = elementTypes.find(
    ({ dimension, nodes, corners }) => shape?.dimension === dimension && corners === shape.corners && nodes === corners,
  );
  return linear === undefined || shape === undefined || shape.name.endsWith('prism') ? undefined : recipeOf(linear.vtk);
}

/** Number of cells of each VTK type, by type. */
export function countTypes(cells: CellTopology, begin = 0, end = cells.types.length): Int32Array {
  const counts = new Int32Array(256);
  for (let c = begin; c < end; c++) counts[cells.types[c] as number] = (counts[cells.types[c] as number] as number) + 1;
  return counts;
}

/** Some volume cell has no element in the standard but a polyhedron. */
export function needsPolyhedra(cells: CellTopology): boolean {
  return countTypes(cells).some(
    (count, type) => count > 0 && cellShape(type)?.dimension === 3 && recipeOf(type) === undefined,
  );
}

/** VTK points of a wedge (linear or quadratic) in the standard's order where its first triangle looks at the second. */
const uprightWedge = [0, 1, 2, 3, 4, 5, 6, 7, 8, 12, 13, 14, 9, 10, 11, 15, 16, 17];

/** Six times the volume under the first triangle of a wedge, positive when the second lies on its positive side. */
function wedgeSense(points: Float64Array, cells: CellTopology, at: number): number {
  const [p, q, r, s] = [0, 1, 2, 3].map((k) => 3 * (cells.connectivity[at + k] as number)) as [
    number,
    number,
    number,
    number,
  ];
  const edge = (to: number, a: number): number => (points[to + a] as number) - (points[p + a] as number);
  const [ux, uy, uz, vx, vy, vz] = [edge(q, 0), edge(q, 1), edge(q, 2), edge(r, 0), edge(r, 1), edge(r, 2)];
  return (uy * vz - uz * vy) * edge(s, 0) + (uz * vx - ux * vz) * edge(s, 1) + (ux * vy - uy * vx) * edge(s, 2);
}

function elementData(dataset: Dataset, zone: ZoneRange, recipe: Recipe, list: Int32Array): NodeData {
  const cells = dataset.cells as CellTopology;
  const { nodes } = recipe.element;
  const wedge = cellShape(recipe.element.vtk)?.name === 'wedge';
  const straight = uprightWedge.slice(0, nodes);
  return {
    type: 'I4',
    dimensions: [list.length * nodes],
    unit: nodes,
    fill: (out, begin) => {
      for (let i = 0, e = begin / nodes; i < out.length; e++) {
        const at = cells.offsets[list[e] as number] as number;
        // Wedges are met with either triangle first; the standard wants one.
        const order = wedge && wedgeSense(dataset.points, cells, at) > 0 ? straight : recipe.points;
        for (let k = 0; k < nodes; k++, i++) {
          (out as Int32Array)[i] = (cells.connectivity[at + (order[k] as number)] as number) - zone.pointBegin + 1;
        }
      }
    },
  };
}

/** Groups of equal element type in the order of the standard's enumeration; the cells keep their order inside. */
function groups(
  dataset: Dataset,
  zone: ZoneRange,
  dimension: number,
): { recipe: Recipe | undefined; cells: Int32Array }[] {
  const cells = dataset.cells as CellTopology;
  const result: { recipe: Recipe | undefined; cells: Int32Array; key: number }[] = [];
  const lists: (Int32Array | undefined)[] = new Array(256).fill(undefined);
  countTypes(cells, zone.cellBegin, zone.cellEnd).forEach((count, type) => {
    if (count === 0 || cellShape(type)?.dimension !== dimension) return;
    const recipe = type === 7 ? undefined : recipeOf(type);
    if (recipe === undefined && type !== 7) {
      throw new InputError({
        file: dataset.file,
        place: `zone ${zone.name}`,
        cause: `cells of VTK type ${type} have no counterpart in CGNS`,
        remedy: 'write a VTK file',
      });
    }
    const list = new Int32Array(count);
    lists[type] = list;
    result.push({ recipe, cells: list, key: recipe?.element.number ?? NGON });
  });
  const filled = new Int32Array(256);
  for (let c = zone.cellBegin; c < zone.cellEnd; c++) {
    const type = cells.types[c] as number;
    const list = lists[type];
    if (list === undefined) continue;
    const at = filled[type] as number;
    list[at] = c;
    filled[type] = at + 1;
  }
  return result.sort((a, b) => a.key - b.key);
}

function polygonData(
  dataset: Dataset,
  zone: ZoneRange,
  list: Int32Array,
): { connectivity: NodeData; starts: NodeData } {
  const cells = dataset.cells as CellTopology;
  const starts = new Int32Array(list.length + 1);
  list.forEach((c, i) => {
    starts[i + 1] = (starts[i] as number) + (cells.offsets[c + 1] as number) - (cells.offsets[c] as number);
  });
  const values = new Int32Array(starts[list.length] as number);
  list.forEach((c, i) => {
    const from = cells.offsets[c] as number;
    for (let k = starts[i] as number, p = from; k < (starts[i + 1] as number); k++, p++) {
      values[k] = (cells.connectivity[p] as number) - zone.pointBegin + 1;
    }
  });
  return { connectivity: wholeData('I4', [values.length], values), starts: wholeData('I4', [starts.length], starts) };
}

/** Patches' faces that lie in a zone, as sections of triangles and quadrilaterals behind the cells. */
function writePatches(
  file: Hdf5File,
  path: string,
  dataset: Dataset,
  zone: ZoneRange,
  next: number,
  taken: Set<string>,
): void {
  let first = next;
  let parent: string | undefined;
  const names = new Set<string>();
  for (const patch of dataset.boundaries) {
    const byCorners = new Map<number, number[]>();
    for (let f = 0; f + 1 < patch.offsets.length; f++) {
      const points = patch.points.subarray(patch.offsets[f] as number, patch.offsets[f + 1] as number);
      if (points.some((point) => point < zone.pointBegin || point >= zone.pointEnd)) continue;
      const list = byCorners.get(points.length) ?? [];
      byCorners.set(points.length, list);
      for (const point of points) list.push(point - zone.pointBegin + 1);
    }
    const begin = first;
    for (const [corners, vtk] of [
      [3, 5],
      [4, 9],
    ] as const) {
      const list = byCorners.get(corners);
      if (list === undefined) continue;
      const element = elementOfVtk(vtk) as ElementType;
      const name = shortName(`${patch.name} ${element.name}`, taken);
      taken.add(name);
      const last = first + list.length / corners - 1;
      createSection(file, path, name, element.number, first, last, wholeData('I4', [list.length], list));
      first = last + 1;
    }
    if (first === begin) continue;
    parent ??= createNode(file, path, 'ZoneBC', 'ZoneBC_t');
    const data = wholeData('I4', [1, 2], [begin, first - 1]);
    createCondition(file, parent, patch, names, 'FaceCenter', { name: 'PointRange', data });
  }
}

/** Writes an unstructured zone with one section for each element type. */
export function writeUnstructured(
  file: Hdf5File,
  base: string,
  name: string,
  dataset: Dataset,
  zone: ZoneRange,
  dimension: number,
): WrittenZone {
  const parts = groups(dataset, zone, dimension);
  const count = parts.reduce((sum, { cells }) => sum + cells.length, 0);
  const points = zone.pointEnd - zone.pointBegin;
  const path = createZone(file, base, name, 'Unstructured', [points, count, 0]);
  writeCoordinates(file, path, dataset, zone.pointBegin, [points]);
  const taken = new Set(['GridCoordinates', 'ZoneType', 'ZoneBC']);
  let first = 1;
  const surfaces = dimension === 3 ? groups(dataset, zone, 2).filter(({ recipe }) => recipe !== undefined) : [];
  for (const { recipe, cells } of [...parts, ...surfaces]) {
    const last = first + cells.length - 1;
    const section = shortName(recipe?.element.name ?? 'NGON_n', taken);
    taken.add(section);
    if (recipe !== undefined) {
      createSection(file, path, section, recipe.element.number, first, last, elementData(dataset, zone, recipe, cells));
    } else {
      const { connectivity, starts } = polygonData(dataset, zone, cells);
      createSection(file, path, section, NGON, first, last, connectivity, starts);
    }
    first = last + 1;
  }
  if (dimension === 3) writePatches(file, path, dataset, zone, first, taken);
  let order: Int32Array | undefined;
  if (parts.length !== 1 || count !== zone.cellEnd - zone.cellBegin) {
    order = new Int32Array(count);
    let at = 0;
    for (const { cells } of parts) {
      order.set(cells, at);
      at += cells.length;
    }
  }
  return {
    path,
    cells: { zone: path, dimensions: [count], count, begin: zone.cellBegin, ...(order === undefined ? {} : { order }) },
    points: { zone: path, dimensions: [points], count: points, begin: zone.pointBegin },
  };
}

/** Writes a structured zone; boundaries are kept by their points. */
export function writeStructured(
  file: Hdf5File,
  base: string,
  name: string,
  dataset: Dataset,
  zone: ZoneRange,
): WrittenZone {
  const sizes = pointCounts(zone.structure as NonNullable<ZoneRange['structure']>);
  const cellSizes = sizes.map((n) => n - 1);
  const path = createZone(file, base, name, 'Structured', [...sizes, ...cellSizes, 0, 0, 0]);
  writeCoordinates(file, path, dataset, zone.pointBegin, sizes);
  const names = new Set<string>();
  let parent: string | undefined;
  for (const patch of dataset.boundaries) {
    const inside = new Set<number>();
    for (const point of patch.points)
      if (point >= zone.pointBegin && point < zone.pointEnd) inside.add(point - zone.pointBegin);
    if (inside.size < 4) continue;
    parent ??= createNode(file, path, 'ZoneBC', 'ZoneBC_t');
    const [nx, ny] = sizes;
    const list = [...inside]
      .sort((a, b) => a - b)
      .flatMap((p) => [(p % nx) + 1, (Math.floor(p / nx) % ny) + 1, Math.floor(p / (nx * ny)) + 1]);
    const data = wholeData('I4', [3, inside.size], list);
    createCondition(file, parent, patch, names, 'Vertex', { name: 'PointList', data });
  }
  const cells = cellSizes.reduce((product, n) => product * n, 1);
  return {
    path,
    cells: { zone: path, dimensions: cellSizes, count: cells, begin: zone.cellBegin },
    points: { zone: path, dimensions: sizes, count: zone.pointEnd - zone.pointBegin, begin: zone.pointBegin },
  };
}
