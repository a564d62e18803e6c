import { closeSync, fstatSync, openSync, readSync } from 'node:fs';
import { InputError, MachineError } from '../basis/errors.js';

/** Reads slices of a file by position. */
export interface FileReader {
  readonly path: string;
  readonly size: number;
  /** Reads exactly [begin, begin + length). @throws InputError when the file ends before */
  readonly bytes: (begin: number, length: number, place?: string) => Uint8Array;
  /** Reads into `target` from `begin`. */
  readonly into: (target: Uint8Array, begin: number, place?: string) => void;
  readonly close: () => void;
}

const largestRead = 1 << 30;

function refusal(path: string, code: string | undefined): InputError | MachineError {
  if (code === 'ENOENT' || code === 'ENOTDIR') {
    return new InputError({ file: path, cause: 'there is no such file', remedy: 'check the path' });
  }
  if (code === 'EISDIR') return new InputError({ file: path, cause: 'this is a folder', remedy: 'name a file' });
  return new MachineError({ file: path, cause: `the file cannot be opened (${code ?? 'unknown reason'})` });
}

/** @throws InputError when there is no such file, MachineError when the system refuses to open it */
export function openFile(path: string): FileReader {
  let handle: number;
  try {
    handle = openSync(path, 'r');
  } catch (error) {
    throw refusal(path, (error as NodeJS.ErrnoException).code);
  }
  const status = fstatSync(handle);
  if (status.isDirectory()) {
    closeSync(handle);
    throw refusal(path, 'EISDIR');
  }
  const { size } = status;
  const into = (target: Uint8Array, begin: number, place?: string): void => {
    if (begin < 0 || begin + target.byteLength > size) {
      throw new InputError({
        file: path,
        ...(place === undefined ? {} : { place }),
        cause: `the file ends at byte ${size} where data up to byte ${begin + target.byteLength} are announced`,
        remedy: 'the file is truncated or its offsets are wrong; write it again',
      });
    }
    let done = 0;
    while (done < target.byteLength) {
      const got = readSync(handle, target, done, Math.min(largestRead, target.byteLength - done), begin + done);
      if (got === 0) throw new InputError({ file: path, cause: 'the file became shorter while it was read' });
      done += got;
    }
  };
  return {
    path,
    size,
    into,
    bytes: (begin, length, place) => {
      if (begin + length > size) into({ byteLength: length } as Uint8Array, begin, place);
      const target = new Uint8Array(length);
      into(target, begin, place);
      return target;
    },
    close: () => closeSync(handle),
  };
}

/** Opens, works, closes. */
export function withFile<T>(path: string, work: (reader: FileReader) => T): T {
  const reader = openFile(path);
  try {
    return work(reader);
  } finally {
    reader.close();
  }
}
