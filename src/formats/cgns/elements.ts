/** One element type of the standard and the VTK cell type of the same shape. */
export interface ElementType {
  /** Number in the standard's enumeration ElementType_t. */
  readonly number: number;
  readonly name: string;
  readonly dimension: 0 | 1 | 2 | 3;
  readonly nodes: number;
  /** VTK cell type number. */
  readonly vtk: number;
  /** VTK point k is the standard's node `order[k]` (from 0); shorter than `nodes` where VTK knows fewer points. */
  readonly order: readonly number[];
  /** Number of corners: the first so many VTK points. */
  readonly corners: number;
}

const range = (n: number): number[] => Array.from({ length: n }, (_, i) => i);

function element(
  number: number,
  name: string,
  dimension: 0 | 1 | 2 | 3,
  nodes: number,
  vtk: number,
  corners: number,
  order: readonly number[] = range(nodes),
): ElementType {
  return { number, name, dimension, nodes, vtk, corners, order };
}

/**
 * Linear and quadratic elements. The two standards number the wedge with opposite sense of its base, the hexahedron's
 * upright edges and the mid-face nodes in different order.
 *
 * @see CGNS Standard Interface Data Structures, section 3.3 (numbering of elements); VTK, vtkCellType.h and the class
 *   documentation of its cells
 */
export const elementTypes: readonly ElementType[] = [
  element(2, 'NODE', 0, 1, 1, 1),
  element(3, 'BAR_2', 1, 2, 3, 2),
  element(4, 'BAR_3', 1, 3, 21, 2),
  element(5, 'TRI_3', 2, 3, 5, 3),
  element(6, 'TRI_6', 2, 6, 22, 3),
  element(7, 'QUAD_4', 2, 4, 9, 4),
  element(8, 'QUAD_8', 2, 8, 23, 4),
  element(9, 'QUAD_9', 2, 9, 28, 4),
  element(10, 'TETRA_4', 3, 4, 10, 4),
  element(11, 'TETRA_10', 3, 10, 24, 4),
  element(12, 'PYRA_5', 3, 5, 14, 5),
  // VTK has no pyramid with a base node and without the others: the node in the base is left out.
  element(13, 'PYRA_14', 3, 14, 27, 5, range(13)),
  element(14, 'PENTA_6', 3, 6, 13, 6, [0, 2, 1, 3, 5, 4]),
  element(15, 'PENTA_15', 3, 15, 26, 6, [0, 2, 1, 3, 5, 4, 8, 7, 6, 14, 13, 12, 9, 11, 10]),
  element(16, 'PENTA_18', 3, 18, 32, 6, [0, 2, 1, 3, 5, 4, 8, 7, 6, 14, 13, 12, 9, 11, 10, 17, 16, 15]),
  element(17, 'HEXA_8', 3, 8, 12, 8),
  element(18, 'HEXA_20', 3, 20, 25, 8, [...range(12), 16, 17, 18, 19, 12, 13, 14, 15]),
  element(19, 'HEXA_27', 3, 27, 29, 8, [...range(12), 16, 17, 18, 19, 12, 13, 14, 15, 24, 22, 21, 23, 20, 25, 26]),
  element(21, 'PYRA_13', 3, 13, 27, 5),
];

export const MIXED = 20;
export const NGON = 22;
export const NFACE = 23;

const byNumber = new Map(elementTypes.map((type) => [type.number, type]));
const byVtk = new Map(elementTypes.filter((type) => type.order.length === type.nodes).map((type) => [type.vtk, type]));

export function elementType(number: number): ElementType | undefined {
  return byNumber.get(number);
}

/** Type of the standard with the same points as a VTK cell type. */
export function elementOfVtk(vtk: number): ElementType | undefined {
  return byVtk.get(vtk);
}
