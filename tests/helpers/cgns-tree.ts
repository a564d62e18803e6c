import { closeHdf5, createHdf5, hdf5Ready } from '../../src/formats/cgns/hdf5.js';
import { type CgnsType, createLink, createNode, createRoot } from '../../src/formats/cgns/write-node.js';

/** A CGNS node written by hand, so that tests can leave out, bend and break what a library would not. */
export interface TreeNode {
  readonly name: string;
  readonly label: string;
  readonly type?: CgnsType;
  /** Fortran order. */
  readonly dimensions?: readonly number[];
  readonly values?: readonly number[];
  readonly children?: readonly TreeNode[];
  readonly link?: { readonly file: string; readonly path: string };
}

export function text(name: string, label: string, value: string, children: readonly TreeNode[] = []): TreeNode {
  const values = [...Buffer.from(value, 'latin1')];
  return { name, label, type: 'C1', dimensions: [values.length], values, children };
}

export function numbers(
  name: string,
  label: string,
  type: CgnsType,
  values: readonly number[],
  dimensions: readonly number[] = [values.length],
  children: readonly TreeNode[] = [],
): TreeNode {
  return { name, label, type, dimensions, values, children };
}

export function group(name: string, label: string, children: readonly TreeNode[]): TreeNode {
  return { name, label, children };
}

/** Writes nodes beneath the root. */
export async function writeTree(path: string, nodes: readonly TreeNode[]): Promise<void> {
  await hdf5Ready();
  const file = createHdf5(path);
  try {
    createRoot(file);
    const write = (parent: string, node: TreeNode): void => {
      if (node.link !== undefined) {
        createLink(file, parent, node.name, node.link);
        return;
      }
      const { type, values, dimensions } = node;
      const at = createNode(
        file,
        parent,
        node.name,
        node.label,
        type === undefined || values === undefined || dimensions === undefined
          ? undefined
          : {
              type,
              dimensions,
              fill: (out, begin) => {
                for (let i = 0; i < out.length; i++) {
                  const value = values[begin + i] ?? 0;
                  if (out instanceof BigInt64Array) out[i] = BigInt(value);
                  else out[i] = value;
                }
              },
            },
      );
      for (const child of node.children ?? []) write(at, child);
    };
    for (const node of nodes) write('/', node);
  } finally {
    closeHdf5(file);
  }
}

export interface CubeOptions {
  /** Type of index numbers. */
  readonly index?: 'I4' | 'I8';
  readonly real?: 'R4' | 'R8';
  /** Counts between the lists instead of ElementStartOffset. */
  readonly interleaved?: boolean;
  readonly kind?: 'polyhedra' | 'mixed' | 'hexahedra';
  readonly more?: readonly TreeNode[];
  readonly field?: readonly TreeNode[];
}

/** Two unit cubes side by side along x (12 points) in every layout; the file's nodes beneath the root. */
export function cubes(options: CubeOptions = {}): TreeNode[] {
  const { index = 'I4', real = 'R8', interleaved = false, kind = 'polyhedra', more = [], field = [] } = options;
  const axis = (a: number): number[] =>
    Array.from({ length: 12 }, (_, p) => [p % 3, Math.floor(p / 3) % 2, Math.floor(p / 6)][a] ?? 0);
  const hexa = (i: number): number[] => [1, 2, 5, 4, 7, 8, 11, 10].map((p) => p + i);
  const sides = [
    [0, 4, 7, 3],
    [1, 2, 6, 5],
    [0, 1, 5, 4],
    [3, 7, 6, 2],
    [0, 3, 2, 1],
    [4, 5, 6, 7],
  ];
  // The shared side is the first cube's second polygon.
  const polygons = [
    ...sides.map((side) => side.map((c) => hexa(0)[c] ?? 0)),
    ...sides.slice(1).map((side) => side.map((c) => hexa(1)[c] ?? 0)),
  ];
  const lists = (
    name: string,
    number: number,
    first: number,
    all: readonly (readonly number[])[],
    mixed = false,
  ): TreeNode => {
    const flat = all.flatMap((list) => (mixed ? [17, ...list] : interleaved ? [list.length, ...list] : [...list]));
    const starts = [0];
    for (const list of all) starts.push((starts[starts.length - 1] ?? 0) + list.length + (mixed ? 1 : 0));
    return numbers(
      name,
      'Elements_t',
      'I4',
      [number, 0],
      [2],
      [
        numbers('ElementRange', 'IndexRange_t', index, [first, first + all.length - 1]),
        numbers('ElementConnectivity', 'DataArray_t', index, flat),
        ...(interleaved ? [] : [numbers('ElementStartOffset', 'DataArray_t', index, starts)]),
      ],
    );
  };
  const sections: readonly TreeNode[] =
    kind === 'mixed'
      ? [lists('cells', 20, 1, [hexa(0), hexa(1)], true)]
      : kind === 'hexahedra'
        ? [
            numbers(
              'cells',
              'Elements_t',
              'I4',
              [17, 0],
              [2],
              [
                numbers('ElementRange', 'IndexRange_t', index, [1, 2]),
                numbers('ElementConnectivity', 'DataArray_t', index, [...hexa(0), ...hexa(1)]),
              ],
            ),
          ]
        : [
            lists('faces', 22, 1, polygons),
            lists('cells', 23, 12, [
              [1, 2, 3, 4, 5, 6],
              [-2, 7, 8, 9, 10, 11],
            ]),
          ];
  return [
    numbers(
      'Base',
      'CGNSBase_t',
      'I4',
      [3, 3],
      [2],
      [
        numbers(
          'Zone',
          'Zone_t',
          index,
          [12, 2, 0],
          [1, 3],
          [
            text('ZoneType', 'ZoneType_t', 'Unstructured'),
            group(
              'GridCoordinates',
              'GridCoordinates_t',
              ['X', 'Y', 'Z'].map((name, a) => numbers(`Coordinate${name}`, 'DataArray_t', real, axis(a))),
            ),
            ...sections,
            group('Fields', 'FlowSolution_t', [
              text('GridLocation', 'GridLocation_t', 'CellCenter'),
              numbers('Pressure', 'DataArray_t', real, [3, 4]),
              ...field,
            ]),
            ...more,
          ],
        ),
      ],
    ),
  ];
}
