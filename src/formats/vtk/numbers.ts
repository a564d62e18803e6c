import type { NumberArray, NumberType } from '../../basis/dataset.js';

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

/** Reverses the bytes of every item in place. */
export function swapBytes(bytes: Uint8Array, width: number): void {
  const buffer = Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength - (bytes.byteLength % width));
  if (width === 2) buffer.swap16();
  else if (width === 4) buffer.swap32();
  else if (width === 8) buffer.swap64();
}

export function numberTypeOf(values: NumberArray): NumberType {
  for (const [type, kind] of Object.entries(kinds)) if (values instanceof kind.make) return type as NumberType;
  return 'Float64';
}
