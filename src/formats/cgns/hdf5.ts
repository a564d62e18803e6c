import { closeSync, openSync, readSync, statSync } from 'node:fs';
import { devNull } from 'node:os';
import { Attribute, Module, ready } from 'h5wasm/node';
import type { NumberArray, NumberType } from '../../basis/dataset.js';
import { InputError, MachineError } from '../../basis/errors.js';
import { isHdf5 } from './signature.js';

/** Values moved through WebAssembly memory at once; that memory never shrinks again, so pieces stay small. */
const PIECE_BYTES = 8 * 1024 * 1024;

/** No filter of HDF5 packs better than deflate's limit of about 1032 : 1. */
const BEST_COMPRESSION = 1100;

/** An open file; every call on it is synchronous, so nothing else runs between opening and closing. */
export interface Hdf5File {
  readonly id: bigint;
  /** As given by the user, for the text of errors. */
  readonly path: string;
  readonly bytes: number;
}

/** Shape and number type of a data set, HDF5 order of dimensions (slowest first). */
export interface Hdf5DataInfo {
  readonly shape: readonly number[];
  readonly type: NumberType;
  readonly size: number;
  readonly count: number;
}

let quiet: Promise<void> | undefined;

/** Waits for the WebAssembly module and silences the trace that the HDF5 library prints on its own. */
export async function hdf5Ready(): Promise<void> {
  quiet ??= ready.then((module) => {
    const streams = (module.FS as unknown as { streams: ({ nfd?: number } | undefined)[] }).streams;
    const trace = streams[2];
    if (trace?.nfd !== undefined) trace.nfd = openSync(devNull, 'w');
  });
  await quiet;
}

/** Any failure below the library becomes one sentence about the file. */
export function damaged(path: string, place: string, error: unknown): Error {
  if (error instanceof InputError || error instanceof MachineError) return error;
  if (error instanceof RangeError && /array length|allocation/i.test(error.message)) {
    return new MachineError({ file: path, place, cause: 'there is not enough memory to read it' });
  }
  const { syscall, code } = (error ?? {}) as NodeJS.ErrnoException;
  if (syscall !== undefined) return new MachineError({ file: path, place, cause: `the system refused (${code})` });
  const result = new InputError({
    file: path,
    place,
    cause: 'the HDF5 data cannot be read, the file is cut off or damaged',
    remedy: 'copy or export it again',
  });
  result.cause = error;
  return result;
}

/** @throws MachineError when the file cannot be read, InputError when it is not HDF5 */
function requireHdf5(path: string): number {
  let bytes: number;
  const head = Buffer.alloc(32);
  try {
    const status = statSync(path);
    if (!status.isFile()) throw new InputError({ file: path, cause: 'this is not a file' });
    bytes = status.size;
    const file = openSync(path, 'r');
    try {
      readSync(file, head, 0, 32, 0);
    } finally {
      closeSync(file);
    }
  } catch (error) {
    if (error instanceof InputError) throw error;
    const code = (error as NodeJS.ErrnoException).code;
    if (code === 'ENOENT') throw new InputError({ file: path, cause: 'there is no such file' });
    throw new MachineError({ file: path, cause: `the file cannot be read (${code ?? 'unknown reason'})` });
  }
  if (!isHdf5(head)) {
    const old = head.toString('latin1').includes('ADF Database');
    throw new InputError({
      file: path,
      cause: old ? 'the CGNS file is in the older ADF storage' : 'this is not an HDF5 file',
      remedy: old ? 'convert it to HDF5 storage with adf2hdf' : 'give a CGNS file in HDF5 storage',
    });
  }
  return bytes;
}

/** @throws InputError, MachineError */
export function openHdf5(path: string, mode: 'read' | 'append' = 'read'): Hdf5File {
  const bytes = requireHdf5(path);
  let id: bigint;
  try {
    id = Module.open(path, mode === 'read' ? Module.H5F_ACC_RDONLY : Module.H5F_ACC_RDWR, false, -1, -1);
  } catch (error) {
    throw damaged(path, '', error);
  }
  if (id < 0n) throw damaged(path, '', undefined);
  return { id, path, bytes };
}

/** Creates a file whose root tracks the order of creation, as the CGNS library requires. */
export function createHdf5(path: string): Hdf5File {
  const id = Module.open(path, Module.H5F_ACC_TRUNC, true, -1, -1);
  if (id < 0n) throw new MachineError({ file: path, cause: 'the file cannot be created' });
  return { id, path, bytes: 0 };
}

export function closeHdf5(file: Hdf5File): void {
  try {
    Module.close_file(file.id);
  } catch {
    // A damaged file may fail to close; the error that matters was raised before.
  }
}

/**
 * Closes a file that was written and makes sure that all of it has reached the disk: the binding's own calls do not
 * tell of every failed write, but a file that is shorter than it says cannot be opened again.
 *
 * @throws MachineError
 */
export function finishHdf5(file: Hdf5File): void {
  const flushed = Module.flush(file.id) >= 0;
  const closed = Module.close_file(file.id) >= 0;
  const again = flushed && closed ? Module.open(file.path, Module.H5F_ACC_RDONLY, false, -1, -1) : -1n;
  if (again < 0n) throw new MachineError({ file: file.path, cause: 'writing failed, the disk may be full' });
  Module.close_file(again);
}

/** Writes by `use` and closes; a failure in between closes as well. */
export function writeHdf5<T>(file: Hdf5File, use: () => T): T {
  let result: T;
  try {
    result = use();
  } catch (error) {
    closeHdf5(file);
    throw error;
  }
  finishHdf5(file);
  return result;
}

/** Names of a group's links, in order of creation where the file keeps it. */
export function linkNames(file: Hdf5File, path: string): string[] {
  return Module.get_names(file.id, path, false);
}

export function isGroup(file: Hdf5File, path: string): boolean {
  return Module.get_type(file.id, path) === Module.H5G_GROUP;
}

/** Text of an attribute; empty when it is missing or no text. */
export function textAttribute(file: Hdf5File, path: string, name: string): string {
  const value = new Attribute(file.id, path, name).value;
  const text = Array.isArray(value) ? value[0] : value;
  return typeof text === 'string' ? text.replace(/[\0 ]+$/, '') : '';
}

function numberType(kind: number, size: number, signed: boolean): NumberType | undefined {
  if (kind === 0) return `${signed ? 'Int' : 'UInt'}${size * 8}` as NumberType;
  if (kind === 1 && size === 4) return 'Float32';
  if (kind === 1 && size === 8) return 'Float64';
  // Text of fixed length is read as its bytes.
  return kind === 3 ? 'Int8' : undefined;
}

/** @throws InputError when the type is none of CGNS or the size cannot be in a file of this length */
export function dataInfo(file: Hdf5File, path: string): Hdf5DataInfo {
  const data = Module.get_dataset_metadata(file.id, path);
  const type = data.vlen ? undefined : numberType(data.type, data.size, data.signed);
  if (type === undefined || data.shape === null) {
    throw new InputError({ file: file.path, place: path, cause: 'the data type is none that CGNS stores' });
  }
  const shape = data.shape.map(Number);
  if (data.type === 3) shape.push(data.size);
  const size = data.type === 3 ? 1 : data.size;
  const count = shape.reduce((product, n) => product * n, 1);
  const bytes = count * size;
  if (bytes > file.bytes * (data.chunks === null ? 1 : BEST_COMPRESSION)) {
    throw new InputError({
      file: file.path,
      place: path,
      cause: `${count} values are declared, more than a file of ${file.bytes} bytes can hold`,
      remedy: 'copy or export it again',
    });
  }
  return { shape, type, size, count };
}

export function createNumbers(type: NumberType, length: number): NumberArray {
  switch (type) {
    case 'Int8':
      return new Int8Array(length);
    case 'UInt8':
      return new Uint8Array(length);
    case 'Int16':
      return new Int16Array(length);
    case 'UInt16':
      return new Uint16Array(length);
    case 'Int32':
      return new Int32Array(length);
    case 'UInt32':
      return new Uint32Array(length);
    case 'Int64':
      return new BigInt64Array(length);
    case 'UInt64':
      return new BigUint64Array(length);
    case 'Float32':
      return new Float32Array(length);
    case 'Float64':
      return new Float64Array(length);
  }
}

/** Cuts an n-dimensional block into pieces that lie one after the other in memory, none larger than `limit` values. */
function pieces(
  offset: readonly number[],
  count: readonly number[],
  limit: number,
  use: (offset: readonly number[], count: readonly number[], values: number) => void,
): void {
  const values = count.reduce((product, n) => product * n, 1);
  const axis = count.findIndex((n) => n > 1);
  if (values <= limit || axis < 0) {
    if (values > 0) use(offset, count, values);
    return;
  }
  const n = count[axis] as number;
  const step = Math.max(1, Math.floor(limit / (values / n)));
  for (let begin = 0; begin < n; begin += step) {
    const at = offset.slice();
    at[axis] = (offset[axis] as number) + begin;
    const size = count.slice();
    size[axis] = Math.min(step, n - begin);
    pieces(at, size, limit, use);
  }
}

/**
 * Reads a data set piece by piece, in the order in which it lies in the file.
 *
 * @param use   gets each piece's values and the number of the first one
 * @param rows  part along the slowest axis (default: all); numbers then count from its first value
 */
export function readPieces(
  file: Hdf5File,
  path: string,
  info: Hdf5DataInfo,
  use: (values: NumberArray, begin: number) => void,
  rows?: { readonly begin: number; readonly count: number },
): void {
  const text = info.size === 1 && info.shape.length > 0 && Module.get_dataset_metadata(file.id, path).type === 3;
  const shape = text ? info.shape.slice(0, -1) : info.shape;
  const width = text ? (info.shape[info.shape.length - 1] as number) : 1;
  const limit = Math.max(1, Math.floor(PIECE_BYTES / (info.size * width)));
  const memory = Module._malloc(Math.max(8, Math.min(info.count * info.size, limit * info.size * width)));
  if (memory === 0) throw new MachineError({ file: file.path, place: path, cause: 'there is not enough memory' });
  try {
    let begin = 0;
    const all = shape.length === 0;
    const from = shape.map((_, axis) => (axis === 0 ? (rows?.begin ?? 0) : 0));
    const size = shape.map((n, axis) => (axis === 0 ? (rows?.count ?? n) : n));
    pieces(all ? [0] : from, all ? [1] : size, limit, (offset, count, tuples) => {
      const status = Module.get_dataset_data(
        file.id,
        path,
        all ? null : count.map(BigInt),
        all ? null : offset.map(BigInt),
        all ? null : count.map(() => 1n),
        BigInt(memory),
      );
      if (status < 0) throw new Error('read failed');
      const values = createNumbers(info.type, tuples * width);
      new Uint8Array(values.buffer).set(Module.HEAPU8.subarray(memory, memory + values.byteLength));
      use(values, begin);
      begin += values.length;
    });
  } catch (error) {
    throw damaged(file.path, path, error);
  } finally {
    Module._free(memory);
  }
}

/** Reads a data set whole. */
export function readNumbers(file: Hdf5File, path: string, info: Hdf5DataInfo): NumberArray {
  let result: NumberArray | undefined;
  readPieces(file, path, info, (values, begin) => {
    if (values.length === info.count) result = values;
    result ??= createNumbers(info.type, info.count);
    if (result !== values) (result as Float64Array).set(values as Float64Array, begin);
  });
  return result ?? createNumbers(info.type, 0);
}
