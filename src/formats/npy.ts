import { closeSync, openSync, readFileSync, writeSync } from 'node:fs';
import type { NumberArray } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { writeBeside } from '../basis/half-written.js';

/** An array of an .npy file. */
export interface NpyArray {
  readonly shape: readonly number[];
  /** Last index fastest. */
  readonly values: NumberArray;
}

const magic = '\x93NUMPY';

const arrayTypes = {
  i1: Int8Array,
  u1: Uint8Array,
  i2: Int16Array,
  u2: Uint16Array,
  i4: Int32Array,
  u4: Uint32Array,
  i8: BigInt64Array,
  u8: BigUint64Array,
  f4: Float32Array,
  f8: Float64Array,
} as const;

function descriptionOf(values: NumberArray): string {
  const entry = Object.entries(arrayTypes).find(([, type]) => values instanceof type);
  const code = entry?.[0] ?? 'f8';
  return `${values.BYTES_PER_ELEMENT === 1 ? '|' : '<'}${code}`;
}

/** Header of version 1.0, padded so that the numbers begin on a multiple of 64 bytes. */
function headerOf(values: NumberArray, shape: readonly number[]): Buffer {
  const tuple = shape.length === 1 ? `(${shape[0]},)` : `(${shape.join(', ')})`;
  const text = `{'descr': '${descriptionOf(values)}', 'fortran_order': False, 'shape': ${tuple}, }`;
  const fixed = magic.length + 4;
  const total = Math.ceil((fixed + text.length + 1) / 64) * 64;
  const header = Buffer.alloc(total, ' ');
  header.write(magic, 0, 'latin1');
  header[6] = 1;
  header[7] = 0;
  header.writeUInt16LE(total - fixed, 8);
  header.write(text, fixed, 'latin1');
  header[total - 1] = 0x0a;
  return header;
}

/**
 * Writes an array in the NPY format, version 1.0, little endian, last index fastest.
 *
 * @param shape  default one dimension
 * @throws MachineError or a file-system error when the place cannot be written
 * @see NumPy Enhancement Proposal 1 (the format)
 */
export async function writeNpy(
  path: string,
  values: NumberArray,
  shape: readonly number[] = [values.length],
): Promise<void> {
  const size = shape.reduce((product, n) => product * n, 1);
  if (size !== values.length) {
    throw new InputError({ file: path, cause: `${values.length} numbers do not fill the shape ${shape.join(' x ')}` });
  }
  await writeBeside(path, (temporary) => {
    const file = openSync(temporary, 'w');
    try {
      const bytes = new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
      for (const part of [headerOf(values, shape), bytes]) {
        let at = 0;
        while (at < part.byteLength) at += writeSync(file, part, at, Math.min(1 << 26, part.byteLength - at));
      }
    } finally {
      closeSync(file);
    }
  });
}

function fault(file: string, cause: string): InputError {
  return new InputError({ file, cause, remedy: 'write it anew as a plain numeric array (NPY 1.0 to 3.0)' });
}

/**
 * Reads an NPY file of numbers, versions 1.0 to 3.0, little endian, last index fastest.
 *
 * @throws InputError for anything else
 */
export function readNpy(path: string): NpyArray {
  const bytes = readFileSync(path);
  if (bytes.length < 12 || bytes.toString('latin1', 0, 6) !== magic) throw fault(path, 'this is no NPY file');
  const version = bytes[6]!;
  if (version < 1 || version > 3) throw fault(path, `NPY version ${version} is not known`);
  const begin = version === 1 ? 10 : 12;
  const end = begin + (version === 1 ? bytes.readUInt16LE(8) : bytes.readUInt32LE(8));
  if (end > bytes.length) throw fault(path, 'the file ends within its header');
  const header = bytes.toString('latin1', begin, end);
  const type = /'descr':\s*'([<|=])([iuf][1248])'/.exec(header)?.[2];
  const shapeText = /'shape':\s*\(([\d\s,]*)\)/.exec(header)?.[1];
  const create = type === undefined ? undefined : (arrayTypes as Partial<Record<string, unknown>>)[type];
  if (type === undefined || create === undefined || shapeText === undefined) {
    throw fault(path, `its header ${header.trim()} describes no little-endian numbers`);
  }
  if (!/'fortran_order':\s*False/.test(header)) throw fault(path, 'its numbers are stored first index fastest');
  const shape = shapeText
    .split(',')
    .map((part) => part.trim())
    .filter((part) => part !== '')
    .map(Number);
  const length = shape.reduce((product, n) => product * n, 1);
  const ArrayType = arrayTypes[type as keyof typeof arrayTypes];
  const wanted = length * ArrayType.BYTES_PER_ELEMENT;
  if (bytes.length - end !== wanted) {
    throw fault(path, `${bytes.length - end} bytes of numbers where the shape (${shapeText}) needs ${wanted}`);
  }
  const own = new Uint8Array(bytes.subarray(end)).buffer;
  return { shape, values: new ArrayType(own, 0, length) };
}
