import { type FileHandle, open } from 'node:fs/promises';
import type { DataArray, Dataset, Format } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { type CsvColumn, type CsvHeader, readHeader } from './csv-header.js';
import { type ColumnTable, parseRows } from './csv-numbers.js';
import { writeCsv } from './csv-write.js';

const blockBytes = 4 << 20;
const longestLine = 1 << 20;
const newline = 10;
const axisNames = ['x', 'y', 'z'] as const;

/** Blocks that end with a line end (the last: with the file). */
async function* wholeLines(file: FileHandle, path: string): AsyncGenerator<Uint8Array> {
  let buffer = Buffer.allocUnsafe(blockBytes + longestLine);
  let kept = 0;
  for (;;) {
    const { bytesRead } = await file.read(buffer, kept, blockBytes);
    const filled = kept + bytesRead;
    if (bytesRead === 0) {
      if (filled > 0) yield buffer.subarray(0, filled);
      return;
    }
    const last = buffer.lastIndexOf(newline, filled - 1);
    if (last < 0) {
      if (filled > longestLine) {
        throw new InputError({
          file: path,
          cause: 'a line is longer than a million characters',
          remedy: 'this is no table of numbers; check the file',
        });
      }
      kept = filled;
      continue;
    }
    yield buffer.subarray(0, last + 1);
    const rest = buffer.subarray(last + 1, filled);
    if (rest.length > longestLine) {
      throw new InputError({
        file: path,
        cause: 'a line is longer than a million characters',
        remedy: 'this is no table of numbers; check the file',
      });
    }
    // The block just handed out may still be referred to: the rest moves to a new one.
    const following = Buffer.allocUnsafe(blockBytes + longestLine);
    rest.copy(following, 0);
    kept = rest.length;
    buffer = following;
  }
}

/** Length of a byte-order mark. */
function markLength(bytes: Uint8Array, path: string): number {
  if (bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf) return 3;
  if ((bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff)) {
    throw new InputError({ file: path, cause: 'the text is in UTF-16', remedy: 'save it as UTF-8' });
  }
  return 0;
}

/** A file whose lines end with a carriage return alone is given line feeds. */
function withLineFeeds(bytes: Uint8Array): Uint8Array {
  return bytes.map((byte) => (byte === 13 ? newline : byte));
}

function notesOf(comments: readonly string[]): Map<string, string> {
  const notes = new Map<string, string>();
  for (const comment of comments) {
    const match = /^([^:]{1,80}):\s+(.*)$/.exec(comment);
    if (match?.[1] !== undefined && match[2] !== undefined) notes.set(match[1].trim(), match[2]);
  }
  return notes;
}

function convert(values: Float64Array, { factor, offset }: CsvColumn): void {
  if (factor === 1 && offset === 0) return;
  for (let row = 0; row < values.length; row++) values[row] = values[row]! * factor + offset;
}

function gatherPoints(header: CsvHeader, table: ColumnTable, path: string): Float64Array {
  const points = new Float64Array(table.rows * 3);
  header.columns.forEach((column, at) => {
    if (column.axis < 0) return;
    const values = table.columns[at]!.subarray(0, table.rows);
    for (let row = 0; row < values.length; row++) {
      const value = values[row]!;
      if (value - value !== 0) {
        throw new InputError({
          file: path,
          place: `point ${row} (counted from 0), column ${column.name}`,
          cause: 'a coordinate is not a finite number',
          remedy: 'repair or remove the row',
        });
      }
      points[row * 3 + column.axis] = value;
    }
  });
  return points;
}

function assemble(path: string, header: CsvHeader, table: ColumnTable): Dataset {
  const { rows } = table;
  header.columns.forEach((column, at) => {
    if (!column.skipped) convert(table.columns[at]!.subarray(0, rows), column);
  });
  const points = gatherPoints(header, table, path);
  const pointArrays: DataArray[] = [];
  header.columns.forEach(({ name, axis, skipped }, at) => {
    if (axis >= 0 || skipped) return;
    const values = table.columns[at]!;
    const load = (): Float64Array => values.slice(0, rows);
    pointArrays.push({ name, components: 1, tuples: rows, type: 'Float64', load });
  });
  return {
    file: path,
    format: 'csv',
    points,
    pointType: 'Float64',
    pointArrays,
    cellArrays: [],
    zones: [{ name: 'points', pointBegin: 0, pointEnd: rows, cellBegin: 0, cellEnd: 0 }],
    boundaries: [],
    missingAxes: axisNames.filter((_, axis) => !header.columns.some((column) => column.axis === axis)),
    notes: notesOf(header.comments),
    remarks: header.remarks,
  };
}

function requireCoordinates(header: CsvHeader, path: string): void {
  if (header.columns.some(({ axis }) => axis >= 0)) return;
  const names = header.columns.map(({ name }) => name).join(', ');
  throw new InputError({
    file: path,
    place: 'header',
    cause: `no column is a coordinate (found ${names.slice(0, 200)})`,
    remedy: 'name at least one of them CoordinateX, CoordinateY or CoordinateZ',
  });
}

function openTable(header: CsvHeader, size: number, block: Uint8Array): ColumnTable {
  const skipped = Uint8Array.from(header.columns, (column) => (column.skipped ? 1 : 0));
  let lines = 0;
  for (const byte of block) if (byte === newline) lines++;
  const capacity = Math.ceil((lines + 2) * Math.max(1, (1.02 * size) / block.length));
  return {
    layout: { delimiter: header.delimiter, columns: header.columns.length, skipped },
    columns: header.columns.map((column) => new Float64Array(column.skipped ? 0 : capacity)),
    rows: 0,
    capacity,
    line: header.dataLine,
    decimalPoint: false,
    decimalComma: false,
  };
}

/**
 * Reads a table of points: a header line with names (units in brackets), then rows of numbers, parted by commas,
 * semicolons, tabs, strokes or blanks. Coordinates are the columns CoordinateX, CoordinateY, CoordinateZ, or x, y, z
 * where none of these is there; those that are absent are listed in `missingAxes`. Known units are converted to SI.
 *
 * @throws InputError with line and column for the first cell that is not a number
 */
export async function readCsv(path: string): Promise<Dataset> {
  const file = await open(path, 'r');
  try {
    const { size } = await file.stat();
    let header: CsvHeader | undefined;
    let table: ColumnTable | undefined;
    let feeds = false;
    for await (const block of wholeLines(file, path)) {
      let bytes = block;
      if (header === undefined) {
        const begin = markLength(bytes, path);
        if (!bytes.includes(newline) && bytes.includes(13)) feeds = true;
        if (feeds) bytes = withLineFeeds(bytes);
        header = readHeader(bytes, begin, path);
        requireCoordinates(header, path);
        table = openTable(header, size, bytes);
        bytes = bytes.subarray(header.dataBegin);
      }
      const fault = table === undefined ? undefined : parseRows(table, bytes);
      if (fault === undefined) continue;
      const column = fault.column < 0 ? '' : `, column ${fault.column + 1} (${header.columns[fault.column]?.name})`;
      throw new InputError({
        file: path,
        place: `line ${fault.line}${column}`,
        cause: fault.cause,
        remedy: 'correct the row or remove it',
      });
    }
    if (header === undefined || table === undefined) {
      throw new InputError({
        file: path,
        cause: 'the file is empty',
        remedy: 'write a header line and rows of numbers',
      });
    }
    return assemble(path, header, table);
  } finally {
    await file.close();
  }
}

/** Point clouds, profiles and plane sections as tables of numbers. */
export const csvFormat: Format = {
  id: 'csv',
  extensions: ['.csv', '.tsv', '.txt', '.dat'],
  description: 'table of points (comma, semicolon, tab, stroke or blanks between columns)',
  recognise: (path) => /\.(?:csv|tsv|txt|dat)$/i.test(path),
  read: readCsv,
  write: writeCsv,
};
