import { closeSync, existsSync, fsyncSync, mkdirSync, openSync, renameSync, rmSync, writeSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';
import { InputError } from './errors.js';

const open = new Set<string>();

/** Removes what is being written when the program has to stop. */
export function removeHalfWritten(): void {
  for (const path of open) rmSync(path, { force: true });
  open.clear();
}

/** Name of the file that is written beside `path` until it is complete. */
export function besideName(path: string): string {
  return join(dirname(path), `.${basename(path)}.${process.pid}.part`);
}

/**
 * Writes a file beside its final name and renames it when complete, so that no reader ever sees half of it.
 *
 * @param write  gets the temporary path; may be asynchronous
 */
export async function writeBeside<T>(path: string, write: (temporary: string) => T | Promise<T>): Promise<T> {
  const temporary = besideName(path);
  mkdirSync(dirname(path), { recursive: true });
  open.add(temporary);
  try {
    const result = await write(temporary);
    renameSync(temporary, path);
    return result;
  } finally {
    rmSync(temporary, { force: true });
    open.delete(temporary);
  }
}

/** Writes text or bytes by `writeBeside`. */
export async function writeFileBeside(path: string, content: string | Uint8Array): Promise<void> {
  await writeBeside(path, (temporary) => {
    const file = openSync(temporary, 'w');
    try {
      const bytes = typeof content === 'string' ? Buffer.from(content) : content;
      let at = 0;
      while (at < bytes.byteLength) at += writeSync(file, bytes, at, bytes.byteLength - at);
      fsyncSync(file);
    } finally {
      closeSync(file);
    }
  });
}

/** @throws InputError when the file exists and overwriting was not asked for */
export function requireFree(path: string, overwrite: boolean): void {
  if (!overwrite && existsSync(path)) {
    throw new InputError({ file: path, cause: 'the file exists already', remedy: 'name another or add --overwrite' });
  }
}
