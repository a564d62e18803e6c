import { InputError } from '../../basis/errors.js';
import type { ArraySource } from './array-source.js';
import { readAt, type SourceFile } from './source-file.js';

/** Bytes that belong together (a header, the data), read in order. */
export interface ByteSection {
  /** Fills `target` with the next bytes. */
  readonly read: (target: Uint8Array) => void;
  /** Position in the file behind the section, when all its bytes have been read. */
  readonly end: () => number;
}

const windowCharacters = 1 << 20;

function tooShort(source: ArraySource): InputError {
  return new InputError({
    file: source.file,
    place: source.place,
    cause: 'its data end too early',
    remedy: 'copy or write the file again',
  });
}

function openRaw(file: SourceFile, source: ArraySource, begin: number, length: number): ByteSection {
  if (begin + length > source.end) throw tooShort(source);
  let at = begin;
  return {
    read(target) {
      readAt(file, target, at);
      at += target.byteLength;
    },
    end: () => begin + length,
  };
}

/** Six bits of each base64 character; 64 white space, 65 padding, 255 anything else. */
const sixBits = new Uint8Array(256).fill(255);
for (let i = 0; i < 64; i++) {
  sixBits['ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/'.charCodeAt(i)] = i;
}
for (const space of [9, 10, 11, 12, 13, 32]) sixBits[space] = 64;
sixBits[61] = 65;

function openBase64(file: SourceFile, source: ArraySource, begin: number, length: number): ByteSection {
  if (begin + Math.ceil(length / 3) * 4 > source.end) throw tooShort(source);
  const window = new Uint8Array(Math.max(4, Math.min(windowCharacters, source.end - begin)));
  let windowBegin = begin;
  let windowLength = 0;
  let at = 0;
  const left = new Uint8Array(3);
  let leftBegin = 0;
  let leftEnd = 0;

  const refill = (): void => {
    windowBegin += windowLength;
    at = 0;
    windowLength = Math.min(window.length, source.end - windowBegin);
    if (windowLength <= 0) throw tooShort(source);
    readAt(file, window.subarray(0, windowLength), windowBegin);
  };
  /** One group of four characters, wherever white space stands, into `left`. */
  const readGroup = (): void => {
    let bits = 0;
    let padding = 0;
    for (let count = 0; count < 4; ) {
      if (at === windowLength) refill();
      const value = sixBits[window[at++] as number] as number;
      if (value === 64) continue;
      if (value === 255 || (value < 64 && padding > 0) || (value === 65 && count < 2)) {
        throw new InputError({
          file: source.file,
          place: source.place,
          cause: `the character at byte ${windowBegin + at - 1} does not belong in base64 data`,
        });
      }
      if (value === 65) padding++;
      bits = (bits << 6) | (value === 65 ? 0 : value);
      count++;
    }
    left[0] = bits >> 16;
    left[1] = bits >> 8;
    left[2] = bits;
    leftBegin = 0;
    leftEnd = 3 - padding;
  };

  return {
    read(target) {
      let out = 0;
      const wanted = target.byteLength;
      while (out < wanted) {
        if (leftBegin < leftEnd) {
          target[out++] = left[leftBegin++] as number;
          continue;
        }
        const groups = Math.min((windowLength - at) >> 2, Math.floor((wanted - out) / 3));
        for (let group = 0; group < groups; group++) {
          const a = sixBits[window[at] as number] as number;
          const b = sixBits[window[at + 1] as number] as number;
          const c = sixBits[window[at + 2] as number] as number;
          const d = sixBits[window[at + 3] as number] as number;
          if ((a | b | c | d) > 63) break;
          at += 4;
          target[out++] = (a << 2) | (b >> 4);
          target[out++] = (b << 4) | (c >> 2);
          target[out++] = (c << 6) | d;
        }
        if (out < wanted) {
          readGroup();
          if (leftEnd === 0 || (leftEnd < 3 && wanted - out > leftEnd)) throw tooShort(source);
        }
      }
    },
    end: () => windowBegin + at,
  };
}

/**
 * Opens bytes that are stored in one piece: `length` raw bytes, or the base64 characters of that many bytes.
 *
 * @throws InputError when the array's place in the file is shorter (before anything is read or allocated)
 */
export function openSection(file: SourceFile, source: ArraySource, begin: number, length: number): ByteSection {
  return (source.encoding === 'raw' ? openRaw : openBase64)(file, source, begin, length);
}
