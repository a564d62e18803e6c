import { endianness } from 'node:os';
import type { NumberArray, NumberType } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { type AppendedBlock, childNamed, describeArray, readMarkup, type XmlNode } from './markup.js';

export type Compressor = 'none' | 'zlib' | 'lz4' | 'xz';

/** A VTK XML file with its tags read. */
export interface VtkFile {
  readonly path: string;
  /** Type of the data set, for example `UnstructuredGrid`. */
  readonly type: string;
  /** Element of that name. */
  readonly body: XmlNode;
  readonly swap: boolean;
  readonly headerBytes: 4 | 8;
  readonly compressor: Compressor;
  readonly appended?: AppendedBlock;
  /** Arrays that had to be decompressed on opening, by their elements. */
  readonly unpacked: Map<XmlNode, Uint8Array>;
}

/** Where and how the numbers of one array are stored. */
export interface ArraySource {
  readonly file: string;
  /** Named in errors. */
  readonly place: string;
  readonly type: NumberType;
  readonly encoding: 'ascii' | 'base64' | 'raw';
  /** Bytes of the file. */
  readonly begin: number;
  readonly end: number;
  readonly swap: boolean;
  readonly headerBytes: 4 | 8;
  readonly compressor: Compressor;
  readonly unpacked?: Uint8Array;
}

export const bytesOfType: Readonly<Record<NumberType, number>> = {
  Int8: 1,
  UInt8: 1,
  Int16: 2,
  UInt16: 2,
  Int32: 4,
  UInt32: 4,
  Int64: 8,
  UInt64: 8,
  Float32: 4,
  Float64: 8,
};

const makers: Readonly<Record<NumberType, (length: number) => NumberArray>> = {
  Int8: (length) => new Int8Array(length),
  UInt8: (length) => new Uint8Array(length),
  Int16: (length) => new Int16Array(length),
  UInt16: (length) => new Uint16Array(length),
  Int32: (length) => new Int32Array(length),
  UInt32: (length) => new Uint32Array(length),
  Int64: (length) => new BigInt64Array(length),
  UInt64: (length) => new BigUint64Array(length),
  Float32: (length) => new Float32Array(length),
  Float64: (length) => new Float64Array(length),
};

/** Zeros of a number type. */
export function makeNumbers(type: NumberType, length: number): NumberArray {
  return makers[type](length);
}

export const nativeByteOrder = endianness() === 'LE' ? 'LittleEndian' : 'BigEndian';

const compressors: Readonly<Record<string, Compressor>> = {
  '': 'none',
  vtkZLibDataCompressor: 'zlib',
  vtkLZ4DataCompressor: 'lz4',
  vtkLZMADataCompressor: 'xz',
};

function oneOf(path: string, what: string, value: string, allowed: readonly string[]): void {
  if (allowed.includes(value)) return;
  throw new InputError({
    file: path,
    cause: `${what} "${value}" is unknown`,
    remedy: `write the file with ${allowed.filter((name) => name !== '').join(', ')}`,
  });
}

/**
 * Reads the tags of a VTK file.
 *
 * @throws InputError when it is no VTK XML file or states an unknown byte order, header type or compressor
 */
export function openVtkFile(path: string): VtkFile {
  const { root, appended } = readMarkup(path);
  const { type, byte_order: order = nativeByteOrder, header_type: header = 'UInt32', compressor = '' } = root.attributes;
  if (type === undefined) throw new InputError({ file: path, cause: 'the VTKFile element states no type' });
  oneOf(path, 'byte order', order, ['LittleEndian', 'BigEndian']);
  oneOf(path, 'header type', header, ['UInt32', 'UInt64']);
  oneOf(path, 'compressor', compressor, Object.keys(compressors));
  const body = childNamed(root, type);
  if (body === undefined) throw new InputError({ file: path, cause: `the element <${type}> is missing` });
  return {
    path,
    type,
    body,
    swap: order !== nativeByteOrder,
    headerBytes: header === 'UInt64' ? 8 : 4,
    compressor: compressors[compressor] as Compressor,
    ...(appended === undefined ? {} : { appended }),
    unpacked: new Map(),
  };
}

/** Whole number of an attribute, 0 to 2^53 - 1. */
export function countAttribute(file: string, node: XmlNode, name: string, fallback?: number): number {
  const text = node.attributes[name];
  if (text === undefined && fallback !== undefined) return fallback;
  const place = node.attributes.Name === undefined ? `<${node.name}>` : describeArray(node);
  const value = text !== undefined && /^\s*\d+\s*$/.test(text) ? Number(text) : Number.NaN;
  if (!Number.isSafeInteger(value)) {
    throw new InputError({
      file,
      place,
      cause: text === undefined ? `the attribute ${name} is missing` : `${name}="${text}" is not a whole number`,
    });
  }
  return value;
}

/** True for the number types that a `DataArray` can hold. */
export function isNumberType(type: string | undefined): type is NumberType {
  return type !== undefined && Object.hasOwn(bytesOfType, type);
}

/**
 * Where the numbers of a data array element are.
 *
 * @param type  number type, where it is not what the element says (strings are bytes)
 * @throws InputError for an unknown type, format or an offset outside the appended block
 */
export function arraySource(vtk: VtkFile, node: XmlNode, place: string, type = node.attributes.type): ArraySource {
  const fail = (cause: string): InputError => new InputError({ file: vtk.path, place, cause });
  if (!isNumberType(type)) throw fail(`"${type ?? ''}" is not a number type`);
  const shared = { file: vtk.path, place, type, swap: vtk.swap, headerBytes: vtk.headerBytes };
  const unpacked = vtk.unpacked.get(node);
  const packing = { compressor: vtk.compressor, ...(unpacked === undefined ? {} : { unpacked }) };
  const text = { begin: node.textBegin, end: node.textEnd };
  const format = node.attributes.format ?? 'ascii';
  if (format === 'ascii') return { ...shared, compressor: 'none', encoding: 'ascii', ...text };
  if (format === 'binary') return { ...shared, ...packing, encoding: 'base64', ...text };
  if (format !== 'appended') throw fail(`"${format}" is not a format of a data array`);
  if (vtk.appended === undefined) throw fail('the file has no appended data although the array refers to them');
  const begin = vtk.appended.begin + countAttribute(vtk.path, node, 'offset');
  if (begin >= vtk.appended.end) throw fail('its offset lies behind the end of the appended data');
  return { ...shared, ...packing, encoding: vtk.appended.encoding, begin, end: vtk.appended.end };
}
