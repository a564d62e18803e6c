import { closeSync, openSync, writeSync } from 'node:fs';
import { promisify } from 'node:util';
import { deflate } from 'node:zlib';
import type { NumberArray, NumberType } from '../../basis/dataset.js';
import { InputError, MachineError } from '../../basis/errors.js';
import { writeBeside } from '../../basis/half-written.js';
import { hostByteOrder, numberTypeOf } from './numbers.js';

/** One array of the appended block, made when its turn comes. */
export interface StoredArray {
  readonly place: string;
  readonly type: NumberType;
  /** Numbers. */
  readonly count: number;
  readonly load: () => NumberArray;
}

/** The XML of a file, by the offsets of its arrays; every offset must fill as many characters as any other. */
export interface FilePlan {
  readonly type: string;
  readonly arrays: readonly StoredArray[];
  readonly body: (offsetOf: (array: number) => string) => string;
}

const largestWrite = 1 << 30;
const compressedBlock = 1 << 20;
const blocksAtOnce = 8;
const level = 4;
const deflateBlock = promisify(deflate) as (block: Uint8Array, options: { level: number }) => Promise<Uint8Array>;

function bytesView(values: NumberArray): Uint8Array {
  return new Uint8Array(values.buffer as ArrayBuffer, values.byteOffset, values.byteLength);
}

/** Writes in order and counts; numbers of any size are taken. */
function createSink(handle: number) {
  let position = 0;
  const put = (bytes: Uint8Array, begin: number): void => {
    for (let done = 0; done < bytes.length; ) {
      const part = bytes.subarray(done, done + largestWrite);
      done += writeSync(handle, part, 0, part.length, begin + done);
    }
  };
  return {
    position: () => position,
    append(bytes: Uint8Array): void {
      put(bytes, position);
      position += bytes.length;
    },
    /** Overwrites at a place that has been written or reserved. */
    put,
    reserve(bytes: number): number {
      position += bytes;
      return position - bytes;
    },
  };
}

type Sink = ReturnType<typeof createSink>;

/** Blocks after the compressed header of the format: number, size, size of a shorter last one, compressed sizes. */
async function appendCompressed(sink: Sink, bytes: Uint8Array): Promise<void> {
  const count = Math.ceil(bytes.length / compressedBlock);
  const header = new BigUint64Array(3 + count);
  header[0] = BigInt(count);
  header[1] = BigInt(compressedBlock);
  header[2] = BigInt(bytes.length % compressedBlock);
  const headerPlace = sink.reserve(header.byteLength);
  for (let first = 0; first < count; first += blocksAtOnce) {
    const numbers = Array.from({ length: Math.min(blocksAtOnce, count - first) }, (_, i) => first + i);
    const blocks = await Promise.all(
      numbers.map((i) => deflateBlock(bytes.subarray(i * compressedBlock, (i + 1) * compressedBlock), { level })),
    );
    blocks.forEach((block, i) => {
      header[3 + first + i] = BigInt(block.length);
      sink.append(block);
    });
  }
  sink.put(bytesView(header), headerPlace);
}

function loadChecked(path: string, array: StoredArray): Uint8Array {
  const values = array.load();
  if (values.length !== array.count || numberTypeOf(values) !== array.type) {
    throw new InputError({
      file: path,
      place: array.place,
      cause: `it holds ${values.length} ${numberTypeOf(values)} where ${array.count} ${array.type} are announced`,
    });
  }
  return bytesView(values);
}

/** Characters kept for an offset, enough for any file. */
const offsetWidth = 16;

/**
 * Writes a VTK XML file with raw appended data and UInt64 headers, beside its name and renamed when complete. One
 * array at a time is in memory.
 *
 * @param compress  zlib blocks of 1 MiB
 * @throws InputError when an array is not what it announces, MachineError when the system refuses to write
 */
export async function writeVtkFile(path: string, plan: FilePlan, compress: boolean): Promise<void> {
  const head = (offsets: readonly number[]): Buffer => {
    const body = plan.body((array) => `offset="${offsets[array] ?? 0}"`.padEnd(offsetWidth + 9));
    return Buffer.from(
      `<?xml version="1.0"?>\n<VTKFile type="${plan.type}" version="1.0" byte_order="${hostByteOrder}" ` +
        `header_type="UInt64"${compress ? ' compressor="vtkZLibDataCompressor"' : ''}>\n${body}` +
        '<AppendedData encoding="raw">\n_',
    );
  };
  const write = async (temporary: string): Promise<void> => {
    const handle = openSync(temporary, 'w');
    try {
      const sink = createSink(handle);
      const offsets: number[] = [];
      const begin = head(offsets).length;
      sink.reserve(begin);
      for (const array of plan.arrays) {
        offsets.push(sink.position() - begin);
        const bytes = loadChecked(path, array);
        if (compress) {
          await appendCompressed(sink, bytes);
        } else {
          sink.append(bytesView(BigUint64Array.of(BigInt(bytes.length))));
          sink.append(bytes);
        }
      }
      sink.append(Buffer.from('\n</AppendedData>\n</VTKFile>\n'));
      sink.put(head(offsets), 0);
    } finally {
      closeSync(handle);
    }
  };
  try {
    await writeBeside(path, write);
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    if (code === undefined || error instanceof InputError || error instanceof MachineError) throw error;
    throw new MachineError({ file: path, cause: `the file cannot be written (${code})` });
  }
}
