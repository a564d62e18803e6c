import type {
  CellTopology,
  DataArray,
  Dataset,
  GridStructure,
  NumberArray,
  NumberType,
  WriteRequest,
} from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { type StoredArray, writeVtkFile } from './write-file.js';

export type GridKind = 'UnstructuredGrid' | 'StructuredGrid' | 'RectilinearGrid' | 'ImageData';

const polyhedron = 42;
const vertex = 1;

function escapeAttribute(text: string): string {
  return text
    .replace(/&/g, '&amp;')
    .replace(/</g, '&lt;')
    .replace(/>/g, '&gt;')
    .replace(/"/g, '&quot;')
    .replace(/[\n\r\t]/g, (mark) => `&#${mark.charCodeAt(0)};`);
}

type Body = (offsetOf: (array: number) => string) => string;

/** Collects the arrays of a file in the order in which its XML names them. */
function createArrayList() {
  const arrays: StoredArray[] = [];
  const add = (array: StoredArray, element: string, attributes: string): Body => {
    const number = arrays.push(array) - 1;
    return (offsetOf) => `<${element} ${attributes} format="appended" ${offsetOf(number)}/>\n`;
  };
  return {
    arrays,
    numbers({ name, components, tuples, type, load }: DataArray): Body {
      const stored = { place: `array ${name}`, type, count: tuples * components, load };
      const attributes = `type="${type}" Name="${escapeAttribute(name)}" NumberOfComponents="${components}"`;
      return add(stored, 'DataArray', attributes);
    },
    /** Text stands as the codes of its characters with a zero behind. */
    text(name: string, content: string): Body {
      const codes = Uint8Array.from([...Buffer.from(content, 'utf8'), 0]);
      const stored = { place: `note ${name}`, type: 'UInt8' as const, count: codes.length, load: () => codes };
      return add(stored, 'Array', `type="String" Name="${escapeAttribute(name)}" NumberOfTuples="1"`);
    },
  };
}

type ArrayList = ReturnType<typeof createArrayList>;

function plain(name: string, type: NumberType, components: number, count: number, load: () => NumberArray): DataArray {
  return { name, components, tuples: count / components, type, load };
}

function element(name: string, content: readonly Body[]): Body {
  if (content.length === 0) return () => '';
  return (offsetOf) => `<${name}>\n${content.map((part) => part(offsetOf)).join('')}</${name}>\n`;
}

/** Cells of a cloud: a vertex a point, so that it can be seen and read again. */
function vertices(count: number): CellTopology {
  return {
    types: new Uint8Array(count).fill(vertex),
    offsets: Int32Array.from({ length: count + 1 }, (_, i) => i),
    connectivity: Int32Array.from({ length: count }, (_, i) => i),
  };
}

/** Cumulative ends into the face stream, -1 for cells that are no polyhedra. */
function faceEnds(types: Uint8Array, starts: Int32Array): Int32Array {
  const ends = new Int32Array(types.length);
  for (let i = 0; i < types.length; i += 1) ends[i] = types[i] === polyhedron ? (starts[i + 1] as number) : -1;
  return ends;
}

function cellsElement(list: ArrayList, cells: CellTopology): Body {
  const { types, offsets, connectivity, polyhedronFaces, polyhedronOffsets } = cells;
  const parts = [
    list.numbers(plain('connectivity', 'Int32', 1, connectivity.length, () => connectivity)),
    list.numbers(plain('offsets', 'Int32', 1, types.length, () => offsets.subarray(1))),
    list.numbers(plain('types', 'UInt8', 1, types.length, () => types)),
  ];
  if (polyhedronFaces !== undefined && polyhedronOffsets !== undefined && types.includes(polyhedron)) {
    const ends = (): NumberArray => faceEnds(types, polyhedronOffsets);
    parts.push(list.numbers(plain('faces', 'Int32', 1, polyhedronFaces.length, () => polyhedronFaces)));
    parts.push(list.numbers(plain('faceoffsets', 'Int32', 1, types.length, ends)));
  }
  return element('Cells', parts);
}

/** Coordinates in the number type of the mesh's own file. */
function inType(mesh: Dataset, values: Float64Array): NumberArray {
  return mesh.pointType === 'Float32' ? new Float32Array(values) : values;
}

function pointsElement(list: ArrayList, mesh: Dataset): Body {
  const load = (): NumberArray => inType(mesh, mesh.points);
  return element('Points', [list.numbers(plain('Points', mesh.pointType, 3, mesh.points.length, load))]);
}

function structureFor(mesh: Dataset, kind: GridKind, path: string): GridStructure {
  const structure = mesh.zones.length === 1 ? mesh.zones[0]?.structure : undefined;
  const fits =
    (kind === 'StructuredGrid' && structure !== undefined) ||
    (kind === 'RectilinearGrid' && structure?.kind === 'rectilinear') ||
    (kind === 'ImageData' && structure?.kind === 'image');
  if (fits) return structure as GridStructure;
  const wanted = {
    StructuredGrid: 'one structured grid',
    RectilinearGrid: 'a rectilinear grid',
    ImageData: 'an image',
  };
  throw new InputError({
    file: path,
    cause: `the mesh of ${mesh.file} is not ${wanted[kind as keyof typeof wanted]}`,
    remedy: 'write a .vtu file instead',
  });
}

/** Arrays of the mesh's own file in their order, replaced where a new one has the name, then the other new ones. */
function mergedArrays(
  own: readonly DataArray[],
  added: readonly DataArray[],
  tuples: number,
  path: string,
): readonly DataArray[] {
  const news = new Map(added.map((array) => [array.name, array]));
  const kept = own.map((array) => news.get(array.name) ?? array);
  const names = new Set(own.map((array) => array.name));
  const merged = [...kept, ...[...news.values()].filter((array) => !names.has(array.name))];
  const wrong = merged.find((array) => array.tuples !== tuples);
  if (wrong !== undefined) {
    const cause = `it has ${wrong.tuples} entries where the mesh has ${tuples} places`;
    throw new InputError({ file: path, place: `array ${wrong.name}`, cause });
  }
  return merged;
}

function fieldData(list: ArrayList, request: WriteRequest): Body {
  const notes = new Map([...request.mesh.notes, ...request.notes]);
  const parts = [...notes].map(([name, text]) => list.text(name, text));
  const { time } = request.mesh;
  if (time !== undefined) {
    const stored = list.numbers(plain('TimeValue', 'Float64', 1, 1, () => Float64Array.of(time)));
    parts.push((offsetOf) => stored(offsetOf).replace('<DataArray ', '<DataArray NumberOfTuples="1" '));
  }
  return element('FieldData', parts);
}

/** Opening tag and geometry of a structured grid. */
function structuredGeometry(list: ArrayList, mesh: Dataset, kind: GridKind, structure: GridStructure): [string, Body] {
  const { extent, origin = [0, 0, 0], spacing = [1, 1, 1], direction, axes = [] } = structure;
  const whole = `${kind} WholeExtent="${extent.join(' ')}"`;
  if (kind === 'ImageData') {
    const turned = direction === undefined ? '' : ` Direction="${direction.join(' ')}"`;
    return [`${whole} Origin="${origin.join(' ')}" Spacing="${spacing.join(' ')}"${turned}`, () => ''];
  }
  if (kind === 'RectilinearGrid') {
    const parts = axes.map((axis, i) =>
      list.numbers(plain(`Coordinate${'XYZ'[i]}`, mesh.pointType, 1, axis.length, () => inType(mesh, axis))),
    );
    return [whole, element('Coordinates', parts)];
  }
  return [whole, pointsElement(list, mesh)];
}

/** Points and cells of a mesh, without making those that are computed when asked for. */
function sizeOf(mesh: Dataset): readonly [number, number] {
  const last = mesh.zones.at(-1);
  if (last !== undefined) return [last.pointEnd, last.cellEnd];
  return [mesh.points.length / 3, mesh.cells?.types.length ?? 0];
}

/**
 * Writes a mesh with its arrays. Topology, number types, notes and time of the mesh's own file are carried through;
 * arrays of the request replace those of the same name. A cloud without cells gets a vertex at each point.
 *
 * @throws InputError when a structured format is asked for a mesh that is not of that kind, or an array does not fit
 */
export async function writeVtkXml(path: string, request: WriteRequest, kind: GridKind): Promise<void> {
  const { mesh, compress = false } = request;
  const structure = kind === 'UnstructuredGrid' ? undefined : structureFor(mesh, kind, path);
  const [pointCount, cellCount] = sizeOf(mesh);
  const list = createArrayList();
  const field = fieldData(list, request);
  const section = (name: string, own: readonly DataArray[], added: readonly DataArray[], tuples: number): Body =>
    element(
      name,
      mergedArrays(own, added, tuples, path).map((array) => list.numbers(array)),
    );
  const pointData = section('PointData', mesh.pointArrays, request.pointArrays, pointCount);
  const cellData = section('CellData', mesh.cellArrays, request.cellArrays, cellCount);
  let tag = kind as string;
  let piece: string;
  let geometry: Body;
  if (structure === undefined) {
    const cells = mesh.cells ?? vertices(pointCount);
    piece = `NumberOfPoints="${pointCount}" NumberOfCells="${cells.types.length}"`;
    const points = pointsElement(list, mesh);
    const topology = cellsElement(list, cells);
    geometry = (offsetOf) => points(offsetOf) + topology(offsetOf);
  } else {
    piece = `Extent="${structure.extent.join(' ')}"`;
    [tag, geometry] = structuredGeometry(list, mesh, kind, structure);
  }
  const body: Body = (offsetOf) =>
    `<${tag}>\n${field(offsetOf)}<Piece ${piece}>\n${pointData(offsetOf)}${cellData(offsetOf)}${geometry(offsetOf)}` +
    `</Piece>\n</${kind}>\n`;
  await writeVtkFile(path, { type: kind, arrays: list.arrays, body }, compress);
}
