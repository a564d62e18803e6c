import { extname } from 'node:path';
import type { Dataset, Format, WriteRequest } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { cgnsFormat } from './cgns.js';
import { csvFormat } from './csv.js';
import { withFile } from './file-reader.js';
import { vtkFormats } from './vtk/formats.js';

/** Every file format; the first that recognises a file reads it. */
export const formats: readonly Format[] = [...vtkFormats, cgnsFormat, csvFormat];

const headBytes = 4096;

function readHeadBytes(path: string): Uint8Array {
  return withFile(path, (reader) => reader.bytes(0, Math.min(headBytes, reader.size)));
}

function listOf(wanted: readonly Format[]): string {
  return [...new Set(wanted.flatMap((format) => format.extensions))].join(' ');
}

/**
 * The format of an existing file, by its first bytes or its extension.
 *
 * @throws InputError when there is no such file or no format recognises it, MachineError when it cannot be opened
 */
export async function findFormat(path: string): Promise<Format> {
  const head = readHeadBytes(path);
  if (head.length === 0) throw new InputError({ file: path, cause: 'the file is empty' });
  const found = formats.find((format) => format.recognise(path, head));
  if (found === undefined) {
    throw new InputError({
      file: path,
      cause: 'this is none of the formats that are read',
      remedy: `give one of ${listOf(formats)}`,
    });
  }
  return found;
}

/** Reads a file of any format. */
export async function readDataset(path: string): Promise<Dataset> {
  return (await findFormat(path)).read(path);
}

/**
 * The format that writes a file of this name.
 *
 * @throws InputError when the extension belongs to no format that is written
 */
export function formatToWrite(path: string): Format & Required<Pick<Format, 'write'>> {
  const extension = extname(path).toLowerCase();
  for (const format of formats) {
    const { write } = format;
    if (write !== undefined && format.extensions.includes(extension)) return { ...format, write };
  }
  throw new InputError({
    file: path,
    cause: `files with the extension '${extension}' are not written`,
    remedy: `name one of ${listOf(formats.filter((format) => format.write !== undefined))}`,
  });
}

/** Writes a mesh with its arrays; the extension chooses the format. */
export async function writeDataset(path: string, request: WriteRequest): Promise<void> {
  await formatToWrite(path).write(path, request);
}
