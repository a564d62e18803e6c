import { Group, Module } from 'h5wasm/node';
import { MachineError } from '../../basis/errors.js';
import type { Hdf5File } from './hdf5.js';

/** Values handed to the file at once. */
const PIECE_VALUES = 1 << 20;

export type CgnsType = 'C1' | 'I4' | 'I8' | 'R4' | 'R8';
export type CgnsValues = Int8Array | Int32Array | BigInt64Array | Float32Array | Float64Array;

/** Data of a node: values at hand, or made piece by piece. */
export interface NodeData {
  readonly type: CgnsType;
  /** The standard's (Fortran) order, fastest first. */
  readonly dimensions: readonly number[];
  /** Fills `out` with the values from number `begin` on. */
  readonly fill: (out: CgnsValues, begin: number) => void;
  /** Pieces of one-dimensional data begin at multiples of this (default 1). */
  readonly unit?: number;
}

const letters: Readonly<Record<CgnsType, string>> = { C1: '<b', I4: '<i', I8: '<q', R4: '<f', R8: '<d' };

function createValues(type: CgnsType, length: number): CgnsValues {
  if (type === 'C1') return new Int8Array(length);
  if (type === 'I4') return new Int32Array(length);
  if (type === 'I8') return new BigInt64Array(length);
  return type === 'R4' ? new Float32Array(length) : new Float64Array(length);
}

function bytesOf(values: CgnsValues): Uint8Array {
  return new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
}

/** Values at hand as the data of a node. */
export function wholeData(type: CgnsType, dimensions: readonly number[], values: ArrayLike<number>): NodeData {
  return {
    type,
    dimensions,
    fill: (out, begin) => {
      for (let i = 0; i < out.length; i++) (out as Float64Array)[i] = values[begin + i] as number;
    },
  };
}

/** Text as the data of a node. */
export function textData(text: string): NodeData {
  const bytes = Int8Array.from(Buffer.from(text === '' ? ' ' : text, 'utf8'));
  return wholeData('C1', [bytes.length], bytes);
}

function refuse(file: Hdf5File): MachineError {
  return new MachineError({ file: file.path, cause: 'writing failed, the disk may be full' });
}

/** Data set in pieces; chunks divide the slowest axis evenly so that the last one is not left half empty. */
function writeData(file: Hdf5File, group: Group, data: NodeData): void {
  const shape = [...data.dimensions].reverse();
  const slow = shape[0] ?? 1;
  const row = shape.slice(1).reduce((product, n) => product * n, 1);
  const total = slow * row;
  const dtype = letters[data.type];
  if (total <= PIECE_VALUES) {
    const values = createValues(data.type, total);
    data.fill(values, 0);
    group.create_dataset({ name: ' data', data: values, shape, dtype });
    return;
  }
  const unit = shape.length === 1 ? (data.unit ?? 1) : 1;
  const parts = Math.ceil(total / PIECE_VALUES);
  const rows = Math.max(1, Math.ceil(slow / parts / unit)) * unit;
  const first = createValues(data.type, rows * row);
  data.fill(first, 0);
  group.create_dataset({
    name: ' data',
    data: first,
    shape: [rows, ...shape.slice(1)],
    maxshape: shape,
    chunks: [rows, ...shape.slice(1)],
    dtype,
  });
  const path = `${group.path}/ data`;
  if (Module.resize_dataset(file.id, path, shape.map(BigInt)) < 0) throw refuse(file);
  const memory = Module._malloc(first.byteLength);
  if (memory === 0) throw new MachineError({ file: file.path, cause: 'there is not enough memory' });
  try {
    for (let begin = rows; begin < slow; begin += rows) {
      const count = Math.min(rows, slow - begin);
      const values = count === rows ? first : createValues(data.type, count * row);
      data.fill(values, begin * row);
      Module.HEAPU8.set(bytesOf(values), memory);
      const status = Module.set_dataset_data(
        file.id,
        path,
        [count, ...shape.slice(1)].map(BigInt),
        [begin, ...shape.slice(1).map(() => 0)].map(BigInt),
        shape.map(() => 1n),
        BigInt(memory),
      );
      if (status < 0) throw refuse(file);
    }
  } finally {
    Module._free(memory);
  }
}

function attributes(group: Group, name: string, label: string, type: string, flags: boolean): void {
  group.create_attribute('name', name, null, 'S33');
  group.create_attribute('label', label, null, 'S33');
  group.create_attribute('type', type, null, 'S3');
  if (flags) group.create_attribute('flags', new Int32Array([1]), [1], '<i');
}

function createGroup(file: Hdf5File, parent: string, name: string): Group {
  const path = parent === '/' ? `/${name}` : `${parent}/${name}`;
  if (Module.create_group(file.id, path, true) < 0) throw refuse(file);
  return new Group(file.id, path);
}

/** Adds a node and returns its path. */
export function createNode(file: Hdf5File, parent: string, name: string, label: string, data?: NodeData): string {
  const group = createGroup(file, parent, name);
  attributes(group, name, label, data?.type ?? 'MT', true);
  if (data !== undefined) writeData(file, group, data);
  return group.path;
}

/** Adds a link node. @param target  file relative to this one, empty for this file, and path in it */
export function createLink(file: Hdf5File, parent: string, name: string, target: { file: string; path: string }): void {
  const group = createGroup(file, parent, name);
  attributes(group, name, '', 'LK', true);
  const text = (value: string): Int8Array => Int8Array.from([...Buffer.from(value, 'utf8'), 0]);
  const path = text(target.path);
  group.create_dataset({ name: ' path', data: path, shape: [path.length], dtype: '<b' });
  if (target.file === '') {
    group.create_soft_link(target.path, ' link');
    return;
  }
  const name1 = text(target.file);
  group.create_dataset({ name: ' file', data: name1, shape: [name1.length], dtype: '<b' });
  group.create_external_link(target.file, target.path, ' link');
}

/** Root of a new file as the standard's HDF5 mapping wants it, with the version of the standard's library. */
export function createRoot(file: Hdf5File, version = 3.4): void {
  const root = new Group(file.id, '/');
  attributes(root, 'HDF5 MotherNode', 'Root Node of HDF5 File', 'MT', false);
  const fixed = (text: string, length: number): Int8Array => {
    const bytes = new Int8Array(length);
    bytes.set(Buffer.from(text, 'latin1'));
    return bytes;
  };
  root.create_dataset({ name: ' format', data: fixed('IEEE_LITTLE_32', 15), shape: [15], dtype: '<b' });
  root.create_dataset({ name: ' hdf5version', data: fixed('HDF5 Version 2.0.0', 33), shape: [33], dtype: '<b' });
  createNode(file, '/', 'CGNSLibraryVersion', 'CGNSLibraryVersion_t', wholeData('R4', [1], [version]));
}
