import type { NumberArray, NumberType } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import type { FileReader } from '../file-reader.js';
import { createNumbers } from './numbers.js';

const chunkBytes = 1 << 20;

function parseNumber(token: string): number {
  const value = Number(token);
  if (!Number.isNaN(value)) return value;
  const lower = token.toLowerCase();
  if (/^[-+]?nan/.test(lower)) return Number.NaN;
  if (/^[-+]?inf(inity)?$/.test(lower)) return lower.startsWith('-') ? -Infinity : Infinity;
  return Number.NaN;
}

/** Calls `take` for every token of the ranges, in order. */
function eachToken(
  reader: FileReader,
  ranges: readonly (readonly [number, number])[],
  take: (token: string) => void,
): void {
  for (const [begin, end] of ranges) {
    let rest = '';
    for (let at = begin; at < end; at += chunkBytes) {
      const length = Math.min(chunkBytes, end - at);
      const text = rest + Buffer.from(reader.bytes(at, length)).toString('latin1');
      const last = at + length >= end;
      const cut = last ? text.length : Math.max(text.lastIndexOf(' '), text.lastIndexOf('\n'), text.lastIndexOf('\t'));
      if (cut < 0) {
        rest = text;
        continue;
      }
      for (const token of text.slice(0, cut).split(/\s+/)) if (token !== '') take(token);
      rest = text.slice(cut);
    }
  }
}

/**
 * Numbers written as text.
 *
 * @param count  how many there must be; undefined: as many as there are
 */
export function readAscii(
  reader: FileReader,
  ranges: readonly (readonly [number, number])[],
  type: NumberType,
  count: number | undefined,
  label: string,
): NumberArray {
  const fault = (cause: string): InputError =>
    new InputError({ file: reader.path, place: label, cause, remedy: 'write the file again' });
  const big = type === 'Int64' || type === 'UInt64';
  let values = createNumbers(type, count ?? 1024);
  let used = 0;
  eachToken(reader, ranges, (token) => {
    if (used === values.length) {
      if (count !== undefined) throw fault(`more than ${count} numbers where ${count} are needed`);
      const larger = createNumbers(type, values.length * 2);
      if (big) (larger as BigInt64Array).set(values as BigInt64Array);
      else (larger as Float64Array).set(values as Float64Array);
      values = larger;
    }
    if (big) {
      if (!/^[-+]?\d+$/.test(token)) throw fault(`'${token}' is no whole number`);
      (values as BigInt64Array)[used] = BigInt(token);
    } else {
      const value = parseNumber(token);
      if (Number.isNaN(value) && !/nan/i.test(token)) throw fault(`'${token}' is no number`);
      (values as Float64Array)[used] = value;
    }
    used += 1;
  });
  if (count !== undefined && used !== count) throw fault(`${used} numbers where ${count} are needed`);
  return used === values.length ? values : values.slice(0, used);
}
