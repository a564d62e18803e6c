import { closeSync, fsyncSync, openSync, writeSync } from 'node:fs';
import { readFile } from 'node:fs/promises';
import { InputError } from '../basis/errors.js';
import { writeBeside } from '../basis/half-written.js';

/** An array of an .npy file, rows one after the other (C order). */
export interface NpyArray {
  readonly shape: readonly number[];
  readonly values: Float64Array | Float32Array | Int32Array;
}

const magic = Uint8Array.of(0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59);
const chunkBytes = 1 << 24;

function descriptionOf(values: NpyArray['values']): string {
  if (values instanceof Float64Array) return '<f8';
  return values instanceof Float32Array ? '<f4' : '<i4';
}

/** Head of an .npy file, format version 1.0: magic, lengths and the dictionary padded so that data begin on a multiple of 64. */
function headOf({ shape, values }: NpyArray): Uint8Array {
  const sizes = shape.length === 1 ? `${shape[0]},` : shape.join(', ');
  const dictionary = `{'descr': '${descriptionOf(values)}', 'fortran_order': False, 'shape': (${sizes}), }`;
  const used = 10 + dictionary.length + 1;
  const text = `${dictionary}${' '.repeat((64 - (used % 64)) % 64)}\n`;
  const head = new Uint8Array(10 + text.length);
  head.set(magic);
  head.set([1, 0, text.length & 255, text.length >> 8], 6);
  head.set(new TextEncoder().encode(text), 10);
  return head;
}

/**
 * Writes an array as NPY format version 1.0, little-endian, C order (NumPy Enhancement Proposal 1). The file appears
 * under its name only when complete.
 *
 * @throws RangeError when the shape does not fit the number of values
 */
export async function writeNpy(path: string, array: NpyArray): Promise<void> {
  const { shape, values } = array;
  const expected = shape.reduce((product, size) => product * size, 1);
  if (expected !== values.length)
    throw new RangeError(`shape ${shape.join(' x ')} holds ${expected}, not ${values.length} values`);
  const head = headOf(array);
  await writeBeside(path, (temporary) => {
    const file = openSync(temporary, 'w');
    try {
      for (const part of [head, new Uint8Array(values.buffer, values.byteOffset, values.byteLength)]) {
        let at = 0;
        while (at < part.length) at += writeSync(file, part, at, Math.min(chunkBytes, part.length - at));
      }
      fsyncSync(file);
    } finally {
      closeSync(file);
    }
  });
}

/**
 * Reads an .npy file of format version 1.0, 2.0 or 3.0 with little-endian Float64, Float32 or Int32 values in C order.
 *
 * @throws InputError for anything else, or when the file is cut short
 */
export async function readNpy(path: string): Promise<NpyArray> {
  const bytes = await readFile(path);
  const refuse = (cause: string, remedy = 'save it with numpy.save as a C-ordered little-endian array'): never => {
    throw new InputError({ file: path, cause, remedy });
  };
  if (bytes.length < 12 || magic.some((byte, i) => bytes[i] !== byte)) refuse('this is not an .npy file');
  const long = (bytes[6] as number) > 1;
  const begin = long ? 12 : 10;
  const size = long ? bytes.readUInt32LE(8) : bytes.readUInt16LE(8);
  const text = bytes.toString('latin1', begin, begin + size);
  const type = /'descr':\s*'([^']*)'/.exec(text)?.[1] ?? '';
  const order = /'fortran_order':\s*(True|False)/.exec(text)?.[1];
  const sizes = /'shape':\s*\(([^)]*)\)/.exec(text)?.[1];
  if (order === undefined || sizes === undefined || bytes.length < begin + size) refuse('its head cannot be read');
  if (order === 'True') refuse('its values are in Fortran order');
  const shape = (sizes ?? '').split(',').flatMap((part) => (part.trim() === '' ? [] : [Number(part)]));
  const count = shape.reduce((product, n) => product * n, 1);
  const width = type === '<f8' ? 8 : 4;
  if (!['<f8', '<f4', '<i4'].includes(type)) refuse(`values of type ${type} are not read`);
  const data = begin + size;
  if (bytes.length < data + count * width) {
    refuse(`it holds ${bytes.length - data} of ${count * width} bytes of values`, 'copy the file again');
  }
  const copy = Uint8Array.prototype.slice.call(bytes, data, data + count * width).buffer as ArrayBuffer;
  if (type === '<f8') return { shape, values: new Float64Array(copy) };
  return { shape, values: type === '<f4' ? new Float32Array(copy) : new Int32Array(copy) };
}
