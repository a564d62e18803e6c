import { InputError } from '../../basis/errors.js';
import type { FileReader } from '../file-reader.js';

const space = 64;
const padding = 65;
const foreign = 255;
/** Six bits of each character of the alphabet (RFC 4648), or one of the marks above. */
const sixBits = new Uint8Array(256).fill(foreign);
for (let i = 0; i < 64; i += 1) {
  sixBits['ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/'.charCodeAt(i)] = i;
}
for (const character of [9, 10, 11, 12, 13, 32]) sixBits[character] = space;
sixBits[61] = padding;

const firstWindow = 1 << 12;
const laterWindows = 1 << 18;

/** Decodes base64 text of a file in order, a window of characters at a time; white space may stand anywhere. */
export interface Base64Reader {
  /** Fills `target` with the next bytes. */
  readonly read: (target: Uint8Array) => void;
  /** Begins the next stream of text; what is left of the last group is padding. */
  readonly nextStream: () => void;
}

/**
 * Opens base64 text in bytes [begin, end) of a file. Reading throws InputError for characters that do not belong
 * there and where the text ends too early.
 */
export function openBase64(reader: FileReader, begin: number, end: number, label: string): Base64Reader {
  const fault = (cause: string): InputError =>
    new InputError({ file: reader.path, place: label, cause, remedy: 'the file is damaged; write it again' });
  // A header needs few characters, data many.
  let window = new Uint8Array(Math.min(firstWindow, end - begin));
  let windowBegin = begin;
  let length = 0;
  let at = 0;
  const group = new Uint8Array(3);
  let groupAt = 0;
  let groupEnd = 0;

  const refill = (): void => {
    windowBegin += length;
    if (windowBegin >= end) throw fault('the base64 text ends too early');
    if (windowBegin > begin && window.length === firstWindow) window = new Uint8Array(laterWindows);
    length = Math.min(window.length, end - windowBegin);
    reader.into(window.subarray(0, length), windowBegin, label);
    at = 0;
  };
  /** The next four characters, wherever white space stands, into `group`. */
  const readGroup = (): void => {
    let bits = 0;
    let padded = 0;
    for (let count = 0; count < 4; ) {
      if (at === length) refill();
      const value = sixBits[window[at] as number] as number;
      at += 1;
      if (value === space) continue;
      if (value === foreign || (value === padding ? count < 2 : padded > 0)) {
        throw fault(`byte ${windowBegin + at - 1} of the file does not belong in base64 text`);
      }
      if (value === padding) padded += 1;
      bits = (bits << 6) | (value === padding ? 0 : value);
      count += 1;
    }
    group[0] = bits >> 16;
    group[1] = bits >> 8;
    group[2] = bits;
    groupAt = 0;
    groupEnd = 3 - padded;
  };
  /** Whole groups without white space, as many as there are at once; returns the next place in `target`. */
  const readPlain = (target: Uint8Array, from: number): number => {
    const groups = Math.min((length - at) >> 2, Math.floor((target.length - from) / 3));
    let out = from;
    for (let i = 0; i < groups; i += 1) {
      const a = sixBits[window[at] as number] as number;
      const b = sixBits[window[at + 1] as number] as number;
      const c = sixBits[window[at + 2] as number] as number;
      const d = sixBits[window[at + 3] as number] as number;
      if ((a | b | c | d) > 63) break;
      at += 4;
      target[out] = (a << 2) | (b >> 4);
      target[out + 1] = (b << 4) | (c >> 2);
      target[out + 2] = (c << 6) | d;
      out += 3;
    }
    return out;
  };
  return {
    read(target) {
      let out = 0;
      while (out < target.length) {
        if (groupAt === groupEnd) {
          out = readPlain(target, out);
          if (out === target.length) break;
          readGroup();
        }
        while (groupAt < groupEnd && out < target.length) {
          target[out] = group[groupAt] as number;
          groupAt += 1;
          out += 1;
        }
        if (groupEnd < 3 && out < target.length) throw fault('the base64 text ends too early');
      }
    },
    nextStream() {
      groupAt = groupEnd;
    },
  };
}
