import { inflateSync } from 'node:zlib';
import { decompressBlock } from 'lz4js';
import { InputError } from '../../basis/errors.js';
import type { FileReader } from '../file-reader.js';
import { openBase64 } from './base64.js';
import { allocate, swapBytes } from './numbers.js';

export type Compressor = 'none' | 'zlib' | 'lz4' | 'lzma';

/** How the arrays of one file are encoded. */
export interface Encoding {
  readonly headerBytes: 4 | 8;
  readonly bigEndian: boolean;
  readonly compressor: Compressor;
}

/** Where the encoded bytes of one array lie. */
export interface EncodedPlace {
  /** First byte (raw) or first base64 character. */
  readonly begin: number;
  /** One behind the last byte that may belong to it. */
  readonly end: number;
  readonly text: boolean;
  readonly label: string;
}

/** The still compressed blocks of an array, or its plain bytes. */
export interface Payload {
  readonly bytes: Uint8Array;
  /** Compressed sizes of the blocks; undefined for plain bytes. */
  readonly blocks?: readonly { readonly begin: number; readonly size: number; readonly full: number }[];
  readonly total: number;
}

/**
 * Most bytes that one compressed byte can stand for: deflate 1032 (RFC 1951: 258 bytes in 2 bits), LZ4 255 (a length
 * byte), LZMA about 7000 (measured on zeros). What a header promises beyond that is refused before memory is taken.
 */
const largestRatio = { none: 1, zlib: 1032, lz4: 255, lzma: 10_000 } as const;

function fault(reader: FileReader, label: string, cause: string): InputError {
  return new InputError({ file: reader.path, place: label, cause, remedy: 'the file is damaged; write it again' });
}

/** Source of decoded bytes in order, over raw bytes or base64 text. */
interface ByteSource {
  /** Takes the next `count` bytes of the present base64 stream (or of the raw bytes). */
  readonly take: (count: number) => Uint8Array;
  /** Begins the next base64 stream on a four-character border. */
  readonly nextStream: () => void;
  /** True when the stream that began the place ends after `count` bytes (padding right behind them). */
  readonly endsAfter: (count: number) => boolean;
}

function rawSource(reader: FileReader, place: EncodedPlace): ByteSource {
  let at = place.begin;
  return {
    take: (count) => {
      if (at + count > place.end) throw fault(reader, place.label, `the data end before the array does`);
      const bytes = allocate(reader.path, place.label, () => reader.bytes(at, count, place.label));
      at += count;
      return bytes;
    },
    nextStream: () => undefined,
    endsAfter: () => false,
  };
}

function textSource(reader: FileReader, place: EncodedPlace): ByteSource {
  const text = openBase64(reader, place.begin, place.end, place.label);
  return {
    take: (count) => {
      const out = allocate(reader.path, place.label, () => new Uint8Array(count));
      text.read(out);
      return out;
    },
    nextStream: text.nextStream,
    endsAfter: (count) => {
      const first = reader.bytes(place.begin, Math.min(256, place.end - place.begin), place.label);
      const characters = Buffer.from(first).toString('latin1').replace(/\s+/g, '');
      return characters[Math.ceil(count / 3) * 4 - 1] === '=';
    },
  };
}

function headerWords(bytes: Uint8Array, encoding: Encoding): number[] {
  if (encoding.bigEndian) swapBytes(bytes, encoding.headerBytes);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const words: number[] = [];
  for (let i = 0; i < bytes.byteLength; i += encoding.headerBytes) {
    words.push(encoding.headerBytes === 4 ? view.getUint32(i, true) : Number(view.getBigUint64(i, true)));
  }
  return words;
}

interface Announced {
  readonly source: ByteSource;
  readonly blocks?: Payload['blocks'];
  /** Uncompressed bytes. */
  readonly total: number;
  /** Bytes as they are stored. */
  readonly stored: number;
}

/** Blocks of a compressed array by its header: number, size, size of a shorter last one, compressed sizes. */
function announcedBlocks(reader: FileReader, place: EncodedPlace, encoding: Encoding, source: ByteSource): Announced {
  const h = encoding.headerBytes;
  const [count = 0] = headerWords(source.take(h), encoding);
  if (count * h > place.end - place.begin) {
    throw fault(reader, place.label, `${count} blocks are announced, more than the file has`);
  }
  const words = headerWords(source.take((2 + count) * h), encoding);
  if (count === 0) return { source, blocks: [], total: 0, stored: 0 };
  const [full = 0, partial = 0] = words;
  if (partial > full) throw fault(reader, place.label, `a last block of ${partial} bytes where all have ${full}`);
  const blocks: { begin: number; size: number; full: number }[] = [];
  let stored = 0;
  for (let i = 0; i < count; i += 1) {
    const size = words[2 + i] as number;
    blocks.push({ begin: stored, size, full: i === count - 1 && partial !== 0 ? partial : full });
    stored += size;
  }
  const total = (count - 1) * full + (partial === 0 ? full : partial);
  if (total > stored * largestRatio[encoding.compressor]) {
    throw fault(reader, place.label, `${total} bytes are announced in ${stored} compressed ones`);
  }
  source.nextStream();
  return { source, blocks, total, stored };
}

/**
 * Reads the header of an encoded array and checks it against what the file holds.
 *
 * @param expected  number of bytes the array must have, or undefined when only its own header says
 * @throws InputError when the header announces another size or more than there is
 */
function readAnnounced(
  reader: FileReader,
  place: EncodedPlace,
  encoding: Encoding,
  expected: number | undefined,
): Announced {
  const source = place.text ? textSource(reader, place) : rawSource(reader, place);
  let announced: Announced;
  if (encoding.compressor === 'none') {
    const separate = source.endsAfter(encoding.headerBytes);
    const [total = 0] = headerWords(source.take(encoding.headerBytes), encoding);
    if (separate) source.nextStream();
    announced = { source, total, stored: total };
  } else {
    announced = announcedBlocks(reader, place, encoding, source);
  }
  const { total, stored } = announced;
  if (expected !== undefined && total !== expected) {
    throw fault(reader, place.label, `${total} bytes are announced where ${expected} are needed`);
  }
  if ((place.text ? Math.ceil(stored / 3) * 4 : stored) > place.end - place.begin) {
    throw fault(reader, place.label, `${stored} bytes are announced, more than there are`);
  }
  return announced;
}

/** Checks the header of an array without reading the data; returns their number of bytes. */
export function checkAnnounced(...array: Parameters<typeof readAnnounced>): number {
  return readAnnounced(...array).total;
}

/** Reads the bytes of an array, still compressed where the file compresses. */
export function readPayload(...array: Parameters<typeof readAnnounced>): Payload {
  const { source, blocks, total, stored } = readAnnounced(...array);
  const bytes = stored === 0 ? new Uint8Array(0) : source.take(stored);
  return blocks === undefined ? { bytes, total } : { bytes, blocks, total };
}

function expand(block: Uint8Array, full: number, compressor: Compressor): Uint8Array {
  if (compressor === 'zlib') return inflateSync(block, { maxOutputLength: full });
  const out = new Uint8Array(full);
  // The decoder drops what it writes behind the end, but counts it.
  const written = decompressBlock(block, out, 0, block.length, 0);
  if (written !== full) throw new RangeError(`${written} bytes`);
  return out;
}

/** Expands one xz stream to at most `full` bytes and one chunk more, so that a bomb is noticed and not stored. */
async function expandXz(block: Uint8Array, full: number): Promise<Uint8Array> {
  const { XzReadableStream } = await import('xz-decompress');
  const stream = new XzReadableStream(new Blob([block as Uint8Array<ArrayBuffer>]).stream());
  const out = new Uint8Array(full);
  let at = 0;
  for await (const chunk of stream) {
    if (at + chunk.length > full) throw new RangeError('more bytes than announced');
    out.set(chunk, at);
    at += chunk.length;
  }
  return out.subarray(0, at);
}

function joinBlock(
  out: Uint8Array,
  at: number,
  bytes: Uint8Array,
  full: number,
  report: (cause: string) => InputError,
): number {
  if (bytes.length !== full) throw report(`a block expands to ${bytes.length} bytes where ${full} are announced`);
  out.set(bytes, at);
  return at + full;
}

/** Expands zlib and lz4 payloads. @throws InputError for damaged blocks */
export function expandPayload(payload: Payload, reader: FileReader, label: string, compressor: Compressor): Uint8Array {
  if (payload.blocks === undefined) return payload.bytes;
  const report = (cause: string): InputError => fault(reader, label, cause);
  const out = allocate(reader.path, label, () => new Uint8Array(payload.total));
  let at = 0;
  for (const { begin, size, full } of payload.blocks) {
    let bytes: Uint8Array;
    try {
      bytes = expand(payload.bytes.subarray(begin, begin + size), full, compressor);
    } catch {
      throw report(`a ${compressor} block cannot be expanded`);
    }
    at = joinBlock(out, at, bytes, full, report);
  }
  return out;
}

/** Expands LZMA (xz container) payloads, whose decoder works asynchronously. */
export async function expandXzPayload(payload: Payload, reader: FileReader, label: string): Promise<Uint8Array> {
  const report = (cause: string): InputError => fault(reader, label, cause);
  if (payload.blocks === undefined) return payload.bytes;
  const out = allocate(reader.path, label, () => new Uint8Array(payload.total));
  let at = 0;
  for (const { begin, size, full } of payload.blocks) {
    let bytes: Uint8Array;
    try {
      bytes = await expandXz(payload.bytes.subarray(begin, begin + size), full);
    } catch {
      throw report('an lzma block cannot be expanded');
    }
    at = joinBlock(out, at, bytes, full, report);
  }
  return out;
}
