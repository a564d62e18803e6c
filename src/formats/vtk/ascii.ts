import type { NumberArray, NumberType } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import type { FileReader } from '../file-reader.js';
import { allocate, createNumbers } from './numbers.js';

type Ranges = readonly (readonly [number, number])[];

const chunkBytes = 1 << 20;
/** No number is written with more characters than this. */
const longestToken = 400;

const limits: Readonly<Record<NumberType, readonly [number | bigint, number | bigint] | undefined>> = {
  Int8: [-(2 ** 7), 2 ** 7 - 1],
  UInt8: [0, 2 ** 8 - 1],
  Int16: [-(2 ** 15), 2 ** 15 - 1],
  UInt16: [0, 2 ** 16 - 1],
  Int32: [-(2 ** 31), 2 ** 31 - 1],
  UInt32: [0, 2 ** 32 - 1],
  Int64: [-(2n ** 63n), 2n ** 63n - 1n],
  UInt64: [0n, 2n ** 64n - 1n],
  Float32: undefined,
  Float64: undefined,
};

/** Powers of ten that doubles hold exactly. */
const powersOfTen = Float64Array.from({ length: 23 }, (_, power) => Number(`1e${power}`));

const isSpace = (byte: number): boolean => byte === 32 || (byte >= 9 && byte <= 13);
const isDigit = (byte: number): boolean => byte >= 48 && byte <= 57;
const decimal = /^[-+]?(\d+\.?\d*|\.\d+)([eEdD][-+]?\d+)?$/;

/** A number in full generality; undefined when the token is none. */
function parseToken(token: string): number | undefined {
  if (decimal.test(token)) return Number(token.replace(/[dD]/, 'e'));
  const word = token.toLowerCase();
  if (/^[-+]?nan(\(\w*\))?$/.test(word)) return Number.NaN;
  if (/^[-+]?inf(inity)?$/.test(word)) return word.startsWith('-') ? -Infinity : Infinity;
  return undefined;
}

/**
 * The number that stands in `bytes` from `begin` to `end`. Up to 15 digits and powers of ten up to 22 are exact in
 * double arithmetic, so one rounding gives the nearest double (Clinger 1990, "How to read floating point numbers
 * accurately"); everything else goes the general way.
 */
function parseBytes(bytes: Uint8Array, begin: number, end: number): number | undefined {
  let at = begin;
  const negative = bytes[at] === 45;
  if (negative || bytes[at] === 43) at++;
  let mantissa = 0;
  let digits = 0;
  let exponent = 0;
  let points = 0;
  for (; at < end; at++) {
    const byte = bytes[at] as number;
    if (isDigit(byte)) {
      mantissa = mantissa * 10 + (byte - 48);
      digits++;
      exponent -= points;
    } else if (byte === 46 && points === 0) points = 1;
    else break;
  }
  if (digits > 0 && digits <= 15) {
    if (at < end - 1 && (bytes[at] === 101 || bytes[at] === 69)) {
      let mark = at + 1;
      const down = bytes[mark] === 45;
      if (down || bytes[mark] === 43) mark++;
      let power = 0;
      const first = mark;
      while (mark < end && mark - first < 4 && isDigit(bytes[mark] as number)) {
        power = power * 10 + (bytes[mark++] as number) - 48;
      }
      if (mark === end && mark > first) {
        exponent += down ? -power : power;
        at = end;
      }
    }
    if (at === end && exponent >= -22 && exponent <= 22) {
      const value =
        exponent < 0 ? mantissa / (powersOfTen[-exponent] as number) : mantissa * (powersOfTen[exponent] as number);
      return negative ? -value : value;
    }
  }
  return parseToken(Buffer.from(bytes.buffer, bytes.byteOffset + begin, end - begin).toString('latin1'));
}

/** Calls `take` for every token of the ranges, in order, with the bytes it lies in. */
function eachToken(
  reader: FileReader,
  ranges: Ranges,
  take: (bytes: Uint8Array, begin: number, end: number) => void,
): void {
  for (const [rangeBegin, rangeEnd] of ranges) {
    let position = rangeBegin;
    while (position < rangeEnd) {
      const length = Math.min(chunkBytes, rangeEnd - position);
      const bytes = reader.bytes(position, length);
      const last = position + length === rangeEnd;
      let at = 0;
      let done = 0;
      for (;;) {
        while (at < length && isSpace(bytes[at] as number)) at++;
        const begin = at;
        while (at < length && !isSpace(bytes[at] as number)) at++;
        // A token at the end of a chunk may go on in the next.
        if (begin === length || (at === length && !last && at - begin < longestToken)) {
          done = begin;
          break;
        }
        take(bytes, begin, at);
      }
      position += done;
    }
  }
}

/**
 * Numbers written as text.
 *
 * @param count  how many there must be; undefined: as many as there are
 * @throws InputError when a token is no number or does not fit the type, or their number is another
 */
export function readAscii(
  reader: FileReader,
  ranges: Ranges,
  type: NumberType,
  count: number | undefined,
  label: string,
): NumberArray {
  const fault = (cause: string): InputError =>
    new InputError({ file: reader.path, place: label, cause, remedy: 'write the file again' });
  const characters = ranges.reduce((sum, [begin, end]) => sum + end - begin, 0);
  // Every number but the last has white space behind it.
  if (count !== undefined && 2 * count - 1 > characters) {
    throw fault(`${count} numbers are needed and the text has ${characters} characters`);
  }
  let needed = count;
  if (needed === undefined) {
    needed = 0;
    eachToken(reader, ranges, () => {
      needed = (needed as number) + 1;
    });
  }
  const total = needed;
  const values = allocate(reader.path, label, () => createNumbers(type, total));
  const text = (bytes: Uint8Array, begin: number, end: number): string =>
    Buffer.from(bytes.buffer, bytes.byteOffset + begin, Math.min(end - begin, 40)).toString('latin1');
  let used = 0;
  const room = (): void => {
    if (used === total) throw fault(`more than ${total} numbers where ${total} are needed`);
  };
  if (values instanceof BigInt64Array || values instanceof BigUint64Array) {
    const [least, most] = limits[type] as [bigint, bigint];
    eachToken(reader, ranges, (bytes, begin, end) => {
      room();
      const plain = parseBytes(bytes, begin, end);
      if (plain === undefined || !Number.isInteger(plain))
        throw fault(`'${text(bytes, begin, end)}' is no whole number`);
      let value: bigint;
      if (Number.isSafeInteger(plain)) value = BigInt(plain);
      else {
        const token = text(bytes, begin, end);
        if (!/^[-+]?\d+$/.test(token)) throw fault(`'${token}' is no whole number`);
        value = BigInt(token.replace('+', ''));
      }
      if (value < least || value > most) throw fault(`'${text(bytes, begin, end)}' does not fit the type ${type}`);
      values[used++] = value;
    });
  } else {
    const range = limits[type] as readonly [number, number] | undefined;
    eachToken(reader, ranges, (bytes, begin, end) => {
      room();
      const value = parseBytes(bytes, begin, end);
      if (value === undefined) throw fault(`'${text(bytes, begin, end)}' is no number`);
      if (range !== undefined && !(value >= range[0] && value <= range[1] && Number.isInteger(value))) {
        throw fault(`'${text(bytes, begin, end)}' does not fit the type ${type}`);
      }
      values[used++] = value;
    });
  }
  if (used !== total) throw fault(`${used} numbers where ${total} are needed`);
  return values;
}
