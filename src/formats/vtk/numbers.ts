import { endianness } from 'node:os';
import type { NumberArray, NumberType } from '../../basis/dataset.js';
import { MachineError } from '../../basis/errors.js';

type ArrayMaker = new (buffer: ArrayBuffer, offset?: number, length?: number) => NumberArray;

interface Kind {
  readonly bytes: number;
  readonly make: ArrayMaker;
}

const kinds: Readonly<Record<NumberType, Kind>> = {
  Int8: { bytes: 1, make: Int8Array },
  UInt8: { bytes: 1, make: Uint8Array },
  Int16: { bytes: 2, make: Int16Array },
  UInt16: { bytes: 2, make: Uint16Array },
  Int32: { bytes: 4, make: Int32Array },
  UInt32: { bytes: 4, make: Uint32Array },
  Int64: { bytes: 8, make: BigInt64Array },
  UInt64: { bytes: 8, make: BigUint64Array },
  Float32: { bytes: 4, make: Float32Array },
  Float64: { bytes: 8, make: Float64Array },
};

/** Byte order of this machine in the format's words. */
export const hostByteOrder = endianness() === 'LE' ? 'LittleEndian' : 'BigEndian';

export function isNumberType(name: string | undefined): name is NumberType {
  return name !== undefined && Object.hasOwn(kinds, name);
}

export function bytesOf(type: NumberType): number {
  return kinds[type].bytes;
}

/** The bytes as numbers of this type; `bytes` must start on its buffer's first byte and lie in host order. */
export function viewAs(bytes: Uint8Array, type: NumberType): NumberArray {
  const { make, bytes: width } = kinds[type];
  const aligned = bytes.byteOffset % width === 0 ? bytes : bytes.slice();
  return new make(aligned.buffer as ArrayBuffer, aligned.byteOffset, Math.floor(aligned.byteLength / width));
}

/** A new array of `length` numbers of this type. */
export function createNumbers(type: NumberType, length: number): NumberArray {
  const { make, bytes } = kinds[type];
  return new make(new ArrayBuffer(length * bytes));
}

/** Makes an array, or says in one sentence that the machine has not the memory for it. */
export function allocate<T>(file: string, place: string, make: () => T): T {
  try {
    return make();
  } catch (error) {
    if (error instanceof RangeError) throw new MachineError({ file, place, cause: 'not enough memory for this array' });
    throw error;
  }
}

const swapStep = 1 << 30;

/** Reverses the bytes of every item in place. */
export function swapBytes(bytes: Uint8Array, width: number): void {
  if (width === 1) return;
  const whole = bytes.byteLength - (bytes.byteLength % width);
  for (let at = 0; at < whole; at += swapStep) {
    const part = Buffer.from(bytes.buffer, bytes.byteOffset + at, Math.min(swapStep, whole - at));
    if (width === 2) part.swap16();
    else if (width === 4) part.swap32();
    else part.swap64();
  }
}

export function numberTypeOf(values: NumberArray): NumberType {
  for (const [type, kind] of Object.entries(kinds)) if (values instanceof kind.make) return type as NumberType;
  return 'Float64';
}
