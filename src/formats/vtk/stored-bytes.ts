import { inflateSync } from 'node:zlib';
import lz4 from 'lz4js';
import { InputError } from '../../basis/errors.js';
import type { ArraySource } from './array-source.js';
import { type ByteSection, openSection } from './byte-sections.js';
import { allocate, type SourceFile } from './source-file.js';

/** Uncompressed bytes of an array, in the byte order of the file, read in order. */
export interface StoredBytes {
  readonly byteLength: number;
  readonly read: (target: Uint8Array) => void;
}

/** The compressed blocks of an array, not yet decompressed. */
export interface PackedBlocks {
  readonly byteLength: number;
  readonly count: number;
  /** Uncompressed bytes of a block. */
  readonly size: (block: number) => number;
  /** Compressed bytes of the next block. */
  readonly next: () => Uint8Array;
}

/**
 * Most bytes that one compressed byte can stand for: deflate 1032 (RFC 1951: 258 bytes by 2 bits), LZ4 255 (one length
 * byte), LZMA about 7000 (measured on zeros). A file that promises more is refused before memory is taken.
 */
const largestRatio = { none: 1, zlib: 1032, lz4: 255, xz: 10_000 } as const;

function wrong(source: ArraySource, cause: string): InputError {
  return new InputError({ file: source.file, place: source.place, cause, remedy: 'copy or write the file again' });
}

function words(source: ArraySource, bytes: Uint8Array): number[] {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const little = new Uint8Array(new Uint16Array([1]).buffer)[0] === 1 ? !source.swap : source.swap;
  const out: number[] = [];
  for (let at = 0; at < bytes.byteLength; at += source.headerBytes) {
    const value = source.headerBytes === 4 ? view.getUint32(at, little) : Number(view.getBigUint64(at, little));
    if (value > Number.MAX_SAFE_INTEGER) throw wrong(source, 'its header states an absurd size');
    out.push(value);
  }
  return out;
}

function readBytes(section: ByteSection, length: number): Uint8Array {
  const bytes = new Uint8Array(length);
  section.read(bytes);
  return bytes;
}

function openPlain(file: SourceFile, source: ArraySource): StoredBytes {
  const head = source.headerBytes;
  const headSection = openSection(file, source, source.begin, head);
  const [byteLength = 0] = words(source, readBytes(headSection, head));
  if (source.encoding === 'raw') {
    return { byteLength, read: openSection(file, source, source.begin + head, byteLength).read };
  }
  // The header of base64 data is encoded either together with the data or by itself, and then it ends in `=`.
  const apart = isPadded(file, source, headSection.end());
  if (apart) return { byteLength, read: openSection(file, source, headSection.end(), byteLength).read };
  const both = openSection(file, source, source.begin, head + byteLength);
  both.read(new Uint8Array(head));
  return { byteLength, read: both.read };
}

/** True when the character before a position is the padding of base64. */
function isPadded(file: SourceFile, source: ArraySource, end: number): boolean {
  const character = new Uint8Array(1);
  openSection(file, { ...source, encoding: 'raw' }, end - 1, 1).read(character);
  return character[0] === 61;
}

/**
 * Opens the header of a compressed array: number of blocks, bytes of a block, bytes of the last block where it is
 * shorter, compressed bytes of each.
 *
 * @throws InputError when the header does not fit the bytes that are there
 */
export function openBlocks(file: SourceFile, source: ArraySource): PackedBlocks {
  const head = 3 * source.headerBytes;
  const first = openSection(file, source, source.begin, head);
  const [count = 0, blockSize = 0, lastSize = 0] = words(source, readBytes(first, head));
  if (count === 0) return { byteLength: 0, count: 0, size: () => 0, next: () => new Uint8Array(0) };
  const room = source.end - source.begin;
  if (count * source.headerBytes > room) throw wrong(source, 'its header states more blocks than the file can hold');
  if (blockSize === 0 || lastSize > blockSize) throw wrong(source, 'its header states impossible block sizes');
  // Three words are a whole number of base64 groups, so the rest of the header decodes by itself.
  const second = openSection(file, source, first.end(), count * source.headerBytes);
  const packed = words(source, readBytes(second, count * source.headerBytes));
  const byteLength = (count - 1) * blockSize + (lastSize === 0 ? blockSize : lastSize);
  const packedLength = packed.reduce((sum, length) => sum + length, 0);
  const data = openSection(file, source, second.end(), packedLength);
  if (byteLength > packedLength * largestRatio[source.compressor]) {
    throw wrong(source, `its header promises ${byteLength} bytes from ${packedLength} compressed ones`);
  }
  let block = 0;
  return {
    byteLength,
    count,
    size: (index) => (index === count - 1 && lastSize !== 0 ? lastSize : blockSize),
    next: () => readBytes(data, packed[block++] as number),
  };
}

function unpackBlock(source: ArraySource, packed: Uint8Array, length: number): Uint8Array {
  if (source.compressor === 'zlib') {
    try {
      const plain = inflateSync(packed, { maxOutputLength: length });
      if (plain.byteLength === length) return plain;
    } catch {
      throw wrong(source, 'its compressed data are damaged');
    }
  } else {
    const plain = new Uint8Array(length);
    if (lz4.decompressBlock(packed, plain, 0, packed.length, 0) === length) return plain;
  }
  throw wrong(source, 'its compressed data are damaged');
}

function openPacked(file: SourceFile, source: ArraySource): StoredBytes {
  const blocks = openBlocks(file, source);
  let block = 0;
  let plain = new Uint8Array(0);
  let at = 0;
  return {
    byteLength: blocks.byteLength,
    read(target) {
      let out = 0;
      while (out < target.byteLength) {
        if (at === plain.byteLength) {
          plain = unpackBlock(source, blocks.next(), blocks.size(block++)) as Uint8Array<ArrayBuffer>;
          at = 0;
        }
        const length = Math.min(plain.byteLength - at, target.byteLength - out);
        target.set(plain.subarray(at, at + length), out);
        at += length;
        out += length;
      }
    },
  };
}

function openUnpacked(bytes: Uint8Array): StoredBytes {
  let at = 0;
  return {
    byteLength: bytes.byteLength,
    read(target) {
      target.set(bytes.subarray(at, at + target.byteLength));
      at += target.byteLength;
    },
  };
}

/**
 * Opens the bytes of a binary array.
 *
 * @throws InputError when its header does not fit the bytes that are there
 */
export function openStoredBytes(file: SourceFile, source: ArraySource): StoredBytes {
  if (source.begin === source.end) throw wrong(source, 'it has no data');
  if (source.unpacked !== undefined) return openUnpacked(source.unpacked);
  return allocate(source.file, source.place, () =>
    source.compressor === 'none' ? openPlain(file, source) : openPacked(file, source),
  );
}
