import { closeSync, openSync, writeSync } from 'node:fs';
import { deflateSync } from 'node:zlib';
import type {
  CellTopology,
  DataArray,
  Dataset,
  GridStructure,
  NumberArray,
  WriteRequest,
} from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { writeBeside } from '../../basis/half-written.js';
import { bytesOf } from './numbers.js';

type GridKind = 'UnstructuredGrid' | 'StructuredGrid' | 'RectilinearGrid' | 'ImageData';

const polyhedron = 42;
const compressedBlock = 1 << 20;

function escapeAttribute(text: string): string {
  return text
    .replace(/&/g, '&amp;')
    .replace(/</g, '&lt;')
    .replace(/>/g, '&gt;')
    .replace(/"/g, '&quot;')
    .replace(/[\n\r\t]/g, (mark) => `&#${mark.charCodeAt(0)};`);
}

function bytesView(values: NumberArray): Uint8Array {
  return new Uint8Array(values.buffer as ArrayBuffer, values.byteOffset, values.byteLength);
}

/** Blocks of an array after the compressed header of the format: counts, sizes, then the blocks. */
function compressArray(values: NumberArray): Uint8Array[] {
  const bytes = bytesView(values);
  const count = Math.ceil(bytes.length / compressedBlock);
  const last = bytes.length % compressedBlock;
  const header = new BigUint64Array(3 + count);
  header[0] = BigInt(count);
  header[1] = BigInt(compressedBlock);
  header[2] = BigInt(last);
  const blocks: Uint8Array[] = [];
  for (let i = 0; i < count; i += 1) {
    const block = deflateSync(bytes.subarray(i * compressedBlock, (i + 1) * compressedBlock), { level: 4 });
    header[3 + i] = BigInt(block.length);
    blocks.push(block);
  }
  return [bytesView(header), ...blocks];
}

interface Appended {
  readonly element: string;
  readonly load: () => NumberArray;
  readonly bytes: number;
}

/** Puts all bytes of the list into the file. */
function writeAll(handle: number, bytes: Uint8Array): void {
  const step = 1 << 30;
  for (let at = 0; at < bytes.length; ) at += writeSync(handle, bytes, at, Math.min(step, bytes.length - at));
}

function textBytes(text: string): Uint8Array {
  const bytes = Buffer.from(text, 'utf8');
  const out = new Uint8Array(bytes.length + 1);
  out.set(bytes);
  return out;
}

function facesForFile(cells: CellTopology): { faces: Int32Array; ends: Int32Array } | undefined {
  const { polyhedronFaces, polyhedronOffsets, types } = cells;
  if (polyhedronFaces === undefined || polyhedronOffsets === undefined || !types.includes(polyhedron)) return undefined;
  const ends = new Int32Array(types.length);
  for (let i = 0; i < types.length; i += 1) {
    ends[i] = types[i] === polyhedron ? (polyhedronOffsets[i + 1] as number) : -1;
  }
  return { faces: polyhedronFaces, ends };
}

function requireStructure(mesh: Dataset, kind: GridKind, path: string): GridStructure {
  const [zone] = mesh.zones;
  const structure = mesh.zones.length === 1 ? zone?.structure : undefined;
  const wanted = { ImageData: 'image', RectilinearGrid: 'rectilinear', StructuredGrid: 'curvilinear' }[
    kind as 'ImageData'
  ];
  const fits = structure !== undefined && (structure.kind === wanted || kind === 'StructuredGrid');
  if (!fits) {
    throw new InputError({
      file: path,
      cause: `the target mesh is not ${kind === 'StructuredGrid' ? 'one structured grid' : `of the kind ${kind}`}`,
      remedy: 'write a .vtu file instead',
    });
  }
  return structure;
}

/** Arrays to write: those of the mesh's own file that are not replaced, then the new ones. */
function mergedArrays(own: readonly DataArray[], added: readonly DataArray[]): readonly DataArray[] {
  const names = new Set(added.map((array) => array.name));
  return [...own.filter((array) => !names.has(array.name)), ...added];
}

/**
 * Writes a VTK XML file with raw appended data (UInt64 headers), beside its name and renamed when complete.
 *
 * @throws InputError when a structured format is asked for a mesh that is not of that kind
 */
export async function writeVtkXml(path: string, request: WriteRequest, kind: GridKind): Promise<void> {
  const { mesh, compress = false } = request;
  const { cells } = mesh;
  if (cells === undefined) {
    throw new InputError({
      file: path,
      cause: 'a point cloud has no mesh to write',
      remedy: 'write a .csv file instead',
    });
  }
  const list: Appended[] = [];
  let raw = 0;
  const declare = (array: Omit<DataArray, 'type'> & { readonly type: string }, bytes: number): string => {
    const offset = compress ? `@${list.length}@` : String(raw);
    const element =
      `<DataArray type="${array.type}" Name="${escapeAttribute(array.name)}" ` +
      `NumberOfComponents="${array.components}" format="appended" offset="${offset}"/>`;
    list.push({ element, load: array.load, bytes });
    raw += 8 + bytes;
    return element;
  };
  const declareArray = (array: DataArray): string =>
    declare(array, array.tuples * array.components * bytesOf(array.type));
  const plain = (name: string, type: DataArray['type'], values: NumberArray, components = 1): string =>
    declareArray({ name, components, tuples: values.length / components, type, load: () => values });
  const pointValues = (): NumberArray => (mesh.pointType === 'Float32' ? Float32Array.from(mesh.points) : mesh.points);
  const pointCount = mesh.points.length / 3;
  const pointsElement = (): string =>
    declareArray({ name: 'Points', components: 3, tuples: pointCount, type: mesh.pointType, load: pointValues });

  const section = (name: string, arrays: readonly DataArray[]): string =>
    arrays.length === 0 ? '' : `<${name}>\n${arrays.map(declareArray).join('\n')}\n</${name}>\n`;
  let fieldData = '';
  for (const [name, text] of request.notes) {
    const bytes = textBytes(text);
    fieldData += `<DataArray type="String" Name="${escapeAttribute(name)}" NumberOfTuples="1" format="ascii">${[...bytes].join(' ')}</DataArray>\n`;
  }
  if (mesh.time !== undefined) {
    fieldData += `<DataArray type="Float64" Name="TimeValue" NumberOfTuples="1" format="ascii">${mesh.time}</DataArray>\n`;
  }
  if (fieldData !== '') fieldData = `<FieldData>\n${fieldData}</FieldData>\n`;

  const data = (): string =>
    section('PointData', mergedArrays(mesh.pointArrays, request.pointArrays)) +
    section('CellData', mergedArrays(mesh.cellArrays, request.cellArrays));
  let body: string;
  if (kind === 'UnstructuredGrid') {
    const faces = facesForFile(cells);
    const cellArrays =
      `${plain('connectivity', 'Int32', cells.connectivity)}\n` +
      `${plain('offsets', 'Int32', cells.offsets.slice(1))}\n${plain('types', 'UInt8', cells.types)}\n` +
      (faces === undefined
        ? ''
        : `${plain('faces', 'Int32', faces.faces)}\n${plain('faceoffsets', 'Int32', faces.ends)}\n`);
    body =
      `<UnstructuredGrid>\n${fieldData}<Piece NumberOfPoints="${pointCount}" NumberOfCells="${cells.types.length}">\n` +
      `${data()}<Points>\n${pointsElement()}\n</Points>\n<Cells>\n${cellArrays}</Cells>\n</Piece>\n</UnstructuredGrid>\n`;
  } else {
    const structure = requireStructure(mesh, kind, path);
    const extent = structure.extent.join(' ');
    let attributes = `WholeExtent="${extent}"`;
    let geometry = '';
    if (kind === 'ImageData') {
      attributes += ` Origin="${structure.origin?.join(' ')}" Spacing="${structure.spacing?.join(' ')}"`;
      if (structure.direction !== undefined) attributes += ` Direction="${structure.direction.join(' ')}"`;
    } else if (kind === 'RectilinearGrid') {
      const axes = structure.axes as readonly [Float64Array, Float64Array, Float64Array];
      const stored = (axis: Float64Array): NumberArray =>
        mesh.pointType === 'Float32' ? Float32Array.from(axis) : axis;
      geometry = `<Coordinates>\n${axes.map((axis, i) => plain(`Coordinate${'XYZ'[i]}`, mesh.pointType, stored(axis))).join('\n')}\n</Coordinates>\n`;
    } else {
      geometry = `<Points>\n${pointsElement()}\n</Points>\n`;
    }
    body = `<${kind} ${attributes}>\n${fieldData}<Piece Extent="${extent}">\n${data()}${geometry}</Piece>\n</${kind}>\n`;
  }

  await writeBeside(path, (temporary) => {
    const handle = openSync(temporary, 'w');
    try {
      const head = (content: string): string =>
        `<?xml version="1.0"?>\n<VTKFile type="${kind}" version="1.0" byte_order="LittleEndian" header_type="UInt64"` +
        `${compress ? ' compressor="vtkZLibDataCompressor"' : ''}>\n${content}<AppendedData encoding="raw">\n_`;
      if (compress) {
        // Offsets of compressed arrays are known only when they are compressed: the data go to memory first.
        const parts = list.map((entry) => compressArray(entry.load()));
        let offset = 0;
        const offsets = parts.map((blocks) => {
          const at = offset;
          offset += blocks.reduce((sum, block) => sum + block.length, 0);
          return at;
        });
        writeAll(
          handle,
          Buffer.from(head(body.replace(/offset="@(\d+)@"/g, (_, i) => `offset="${offsets[Number(i)]}"`))),
        );
        for (const blocks of parts) for (const block of blocks) writeAll(handle, block);
      } else {
        writeAll(handle, Buffer.from(head(body)));
        for (const entry of list) {
          const values = entry.load();
          if (values.byteLength !== entry.bytes) {
            throw new InputError({ file: path, cause: `an array has ${values.byteLength} bytes, not ${entry.bytes}` });
          }
          writeAll(handle, bytesView(BigUint64Array.of(BigInt(entry.bytes))));
          writeAll(handle, bytesView(values));
        }
      }
      writeAll(handle, Buffer.from('\n</AppendedData>\n</VTKFile>\n'));
    } finally {
      closeSync(handle);
    }
  });
}
