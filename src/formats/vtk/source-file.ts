import { closeSync, fstatSync, openSync, readSync } from 'node:fs';
import { InputError, MachineError } from '../../basis/errors.js';

/** A file open for reading at any place. */
export interface SourceFile {
  readonly path: string;
  /** Bytes. */
  readonly size: number;
  readonly descriptor: number;
}

/** One call of the system reads less than 2 GiB. */
const largestRead = 1 << 30;

function refusal(path: string, error: unknown): InputError | MachineError {
  const code = (error as NodeJS.ErrnoException).code;
  if (code === 'ENOENT' || code === 'ENOTDIR') {
    return new InputError({ file: path, cause: 'there is no such file', remedy: 'check the path' });
  }
  if (code === 'EISDIR') return new InputError({ file: path, cause: 'this is a folder', remedy: 'name a file' });
  return new MachineError({ file: path, cause: `the file cannot be read (${code ?? String(error)})` });
}

/**
 * Opens a file for the time of `action`.
 *
 * @throws InputError when there is no such file, MachineError when the system refuses it
 */
export function useFile<T>(path: string, action: (file: SourceFile) => T): T {
  let descriptor: number;
  try {
    descriptor = openSync(path, 'r');
  } catch (error) {
    throw refusal(path, error);
  }
  try {
    const status = fstatSync(descriptor);
    if (status.isDirectory()) throw refusal(path, { code: 'EISDIR' });
    return action({ path, size: status.size, descriptor });
  } finally {
    closeSync(descriptor);
  }
}

/**
 * Fills `target` with the bytes from `position` on.
 *
 * @throws InputError when the file ends before
 */
export function readAt(file: SourceFile, target: Uint8Array, position: number): void {
  let done = 0;
  while (done < target.byteLength) {
    const length = Math.min(target.byteLength - done, largestRead);
    let got: number;
    try {
      got = readSync(file.descriptor, target, done, length, position + done);
    } catch (error) {
      throw refusal(file.path, error);
    }
    if (got === 0) {
      throw new InputError({ file: file.path, cause: 'the file ends too early', remedy: 'copy or write it again' });
    }
    done += got;
  }
}

/**
 * Makes an array or says in one sentence that the machine has not the memory.
 *
 * @param what  named in the error, for example `array "k"`
 */
export function allocate<T>(file: string, what: string, make: () => T): T {
  try {
    return make();
  } catch (error) {
    if (error instanceof RangeError) throw new MachineError({ file, place: what, cause: 'not enough memory for it' });
    throw error;
  }
}
