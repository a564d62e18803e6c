/** Shape of a cell by its corners; quadratic and higher-order cells share the shape of their linear relative. */
export interface CellShape {
  readonly name: string;
  readonly dimension: 0 | 1 | 2 | 3;
  /** Number of corners, which come first in the point list; 0 when the point list is as long as it is. */
  readonly corners: number;
  /** Corners of the faces, each running so that its area vector points outwards. Empty below 3 dimensions and for polyhedra. */
  readonly faces: readonly (readonly number[])[];
}

const solid = (name: string, corners: number, faces: readonly (readonly number[])[]): CellShape => ({
  name,
  dimension: 3,
  corners,
  faces,
});
const flat = (name: string, dimension: 0 | 1 | 2, corners: number): CellShape => ({
  name,
  dimension,
  corners,
  faces: [],
});

const tetrahedron = solid('tetrahedron', 4, [
  [0, 1, 3],
  [1, 2, 3],
  [2, 0, 3],
  [0, 2, 1],
]);
const hexahedron = solid('hexahedron', 8, [
  [0, 4, 7, 3],
  [1, 2, 6, 5],
  [0, 1, 5, 4],
  [3, 7, 6, 2],
  [0, 3, 2, 1],
  [4, 5, 6, 7],
]);
// As the hexahedron, in the order of its corners x fastest, then y, then z.
const voxel = solid('voxel', 8, [
  [0, 4, 6, 2],
  [1, 3, 7, 5],
  [0, 1, 5, 4],
  [2, 6, 7, 3],
  [0, 2, 3, 1],
  [4, 5, 7, 6],
]);
const wedge = solid('wedge', 6, [
  [0, 2, 1],
  [3, 4, 5],
  [0, 1, 4, 3],
  [1, 2, 5, 4],
  [2, 0, 3, 5],
]);
const pyramid = solid('pyramid', 5, [
  [0, 3, 2, 1],
  [0, 1, 4],
  [1, 2, 4],
  [2, 3, 4],
  [3, 0, 4],
]);

/** Prism over a polygon of n corners: base, top, sides. */
function prismFaces(n: number): readonly (readonly number[])[] {
  const ring = Array.from({ length: n }, (_, i) => i);
  return [
    [...ring].reverse(),
    ring.map((i) => i + n),
    ...ring.map((i) => [i, (i + 1) % n, n + ((i + 1) % n), n + i] as const),
  ];
}

const triangle = flat('triangle', 2, 3);
const quadrilateral = flat('quadrilateral', 2, 4);
const line = flat('line', 1, 2);

/** VTK cell-type number of an arbitrary polyhedron. */
export const polyhedronType = 42;
export const wedgeShape: CellShape = wedge;

const polyhedron = solid('polyhedron', 0, []);

/** Shapes by VTK cell-type number (VTK file formats, cell types of the XML formats). */
const shapes: ReadonlyMap<number, CellShape> = new Map<number, CellShape>([
  [1, flat('vertex', 0, 1)],
  [2, flat('vertices', 0, 0)],
  [3, line],
  [4, flat('polyline', 1, 0)],
  [5, triangle],
  [6, flat('triangle strip', 2, 0)],
  [7, flat('polygon', 2, 0)],
  [8, flat('pixel', 2, 4)],
  [9, quadrilateral],
  [10, tetrahedron],
  [11, voxel],
  [12, hexahedron],
  [13, wedge],
  [14, pyramid],
  [15, solid('pentagonal prism', 10, prismFaces(5))],
  [16, solid('hexagonal prism', 12, prismFaces(6))],
  [21, line],
  [22, triangle],
  [23, quadrilateral],
  [24, tetrahedron],
  [25, hexahedron],
  [26, wedge],
  [27, pyramid],
  [28, quadrilateral],
  [29, hexahedron],
  [30, quadrilateral],
  [31, wedge],
  [32, wedge],
  [33, hexahedron],
  [34, triangle],
  [35, line],
  [37, pyramid],
  [42, polyhedron],
  [68, line],
  [69, triangle],
  [70, quadrilateral],
  [71, tetrahedron],
  [72, hexahedron],
  [73, wedge],
  [74, pyramid],
  [75, line],
  [76, triangle],
  [77, quadrilateral],
  [78, tetrahedron],
  [79, hexahedron],
  [80, wedge],
  [81, pyramid],
]);

/** Shape of a VTK cell type; undefined for types that have none here. */
export function cellShape(type: number): CellShape | undefined {
  return shapes.get(type);
}
