import { InputError } from '../basis/errors.js';
import { findQuantity, unitOf } from '../basis/quantities.js';
import { isComment, parseCell } from './csv-numbers.js';
import { parseUnit, splitUnit, type UnitConversion } from './csv-units.js';

/** One column as its header tells it. */
export interface CsvColumn {
  /** Header without its unit. */
  readonly name: string;
  /** Axis 0 1 2 of a coordinate, or -1. */
  readonly axis: number;
  /** Text in the first row, or no header: passed over. */
  readonly skipped: boolean;
  readonly factor: number;
  readonly offset: number;
}

export interface CsvHeader {
  /** Byte between cells; -1 for blanks. */
  readonly delimiter: number;
  readonly columns: readonly CsvColumn[];
  /** Where the first data row begins. */
  readonly dataBegin: number;
  /** Number of that line. */
  readonly dataLine: number;
  /** Text of the comment lines above, without their marks. */
  readonly comments: readonly string[];
  readonly remarks: readonly string[];
}

const candidates = [';', '\t', '|', ','] as const;

/** Cells of one line; quotes and brackets keep delimiters in. */
function splitLine(line: string, delimiter: string): string[] {
  const cells: string[] = [];
  let cell = '';
  let quoted = false;
  let depth = 0;
  for (let at = 0; at < line.length; at++) {
    const char = line[at]!;
    if (char === '"') {
      // A doubled quote inside quotes stands for one.
      if (quoted && line[at + 1] === '"') cell += line[at++];
      else quoted = !quoted;
      continue;
    }
    if (!quoted && (char === '[' || char === '(')) depth++;
    if (!quoted && (char === ']' || char === ')')) depth = Math.max(0, depth - 1);
    const parts = delimiter === ' ' ? char === ' ' || char === '\t' : char === delimiter;
    if (parts && !quoted && depth === 0) {
      cells.push(cell.trim());
      cell = '';
    } else {
      cell += char;
    }
  }
  cells.push(cell.trim());
  return delimiter === ' ' ? joinUnits(cells.filter((entry) => entry !== '')) : cells;
}

/** Where blanks part cells, `CoordinateX [mm]` came apart: a bracketed piece belongs to the name before it. */
function joinUnits(cells: readonly string[]): string[] {
  const joined: string[] = [];
  for (const cell of cells) {
    if (/^[[(].*[\])]$/.test(cell) && joined.length > 0) joined.push(`${joined.pop()} ${cell}`);
    else joined.push(cell);
  }
  return joined;
}

/** The delimiter under which header and first row have the same number of cells, two at least. */
function findDelimiter(header: string, row: string): string | undefined {
  const widths = [...candidates, ' '].map((delimiter) => {
    const cells = splitLine(header, delimiter);
    // A last empty cell comes from a delimiter at the end of the line.
    const width = cells.at(-1) === '' ? cells.length - 1 : cells.length;
    const values = splitLine(row, delimiter);
    return { delimiter, width, found: values.at(-1) === '' ? values.length - 1 : values.length };
  });
  const fitting = widths.filter(({ width, found }) => width > 1 && width === found);
  return (fitting[0] ?? widths.find(({ width }) => width > 1))?.delimiter;
}

interface Line {
  readonly text: string;
  readonly begin: number;
  readonly end: number;
  readonly number: number;
}

function* linesOf(bytes: Uint8Array, from: number): Generator<Line> {
  const buffer = Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  let number = 1;
  for (let begin = from; begin < bytes.length; number++) {
    let end = buffer.indexOf(10, begin);
    if (end < 0) end = bytes.length;
    yield { text: buffer.toString('utf8', begin, end).replace(/\r$/, ''), begin, end: end + 1, number };
    begin = end + 1;
  }
}

function isNumberRow(cells: readonly string[], delimiter: string): boolean {
  return cells.length > 0 && cells.every((cell) => parseCell(cell, delimiter === ',') !== undefined);
}

const coordinateNames = ['coordinatex', 'coordinatey', 'coordinatez'];

function axisOf(name: string, plain: boolean): number {
  const lower = name.toLowerCase();
  return plain ? ['x', 'y', 'z'].indexOf(lower) : coordinateNames.indexOf(lower);
}

/** Conversion of a column to SI, and what is to be said about it. */
function conversionOf(
  name: string,
  axis: number,
  unit: string | undefined,
): { readonly conversion?: UnitConversion; readonly remark?: string } {
  const standard = axis >= 0 ? 'm' : unitOf(name);
  if (unit === undefined || unit === '' || standard === undefined) return {};
  const found = parseUnit(unit);
  const wanted = parseUnit(standard);
  if (found === undefined || wanted === undefined) {
    return { remark: `Unit [${unit}] of ${name} is not known: values taken as ${standard}.` };
  }
  if (found.dimension.some((entry, at) => entry !== wanted.dimension[at])) {
    return { remark: `Unit [${unit}] of ${name} is not one of its kind (${standard}): values taken as they stand.` };
  }
  if (found.factor === 1 && found.offset === 0) return {};
  return { conversion: found, remark: `${name} converted from ${unit} to ${standard}.` };
}

function describeColumns(
  headers: readonly string[],
  firstRow: readonly string[],
  commaParts: boolean,
  file: string,
  remarks: string[],
): CsvColumn[] {
  const split = headers.map(splitUnit);
  const plain = !split.some(({ name }) => axisOf(name, false) >= 0);
  const lengths = new Set<string>();
  const seen = new Set<string>();
  const columns = split.map(({ name, unit }, at): CsvColumn => {
    const axis = axisOf(name, plain);
    const text = firstRow[at] !== undefined && firstRow[at] !== '' && parseCell(firstRow[at], commaParts) === undefined;
    const known = axis >= 0 || findQuantity(name) !== undefined || unitOf(name) !== undefined;
    const skipped = name === '' || (text && !known);
    if (name !== '' && skipped) remarks.push(`Column ${name} holds text: left out.`);
    if (!skipped && seen.has(name)) {
      throw new InputError({
        file,
        place: `column ${at + 1}`,
        cause: `two columns are called ${name}`,
        remedy: 'give each its own name',
      });
    }
    seen.add(name);
    const { conversion, remark } = conversionOf(name, axis, unit);
    if (remark !== undefined && !skipped) remarks.push(remark);
    if (axis >= 0) lengths.add(unit ?? '');
    return { name, axis, skipped, factor: conversion?.factor ?? 1, offset: conversion?.offset ?? 0 };
  });
  if (plain && lengths.size > 0) {
    remarks.push('Columns x, y, z taken as CoordinateX, CoordinateY, CoordinateZ.');
  }
  if (lengths.size > 1) {
    throw new InputError({
      file,
      place: 'header',
      cause: `the coordinates have different units (${[...lengths].map((unit) => unit || 'none').join(', ')})`,
      remedy: 'write one unit for all of them',
    });
  }
  return columns;
}

/**
 * Finds comments, delimiter and columns from the beginning of a file.
 *
 * @param bytes  beginning of the file, up to the end of a line
 * @param begin  first byte after a byte-order mark
 */
export function readHeader(bytes: Uint8Array, begin: number, file: string): CsvHeader {
  const comments: string[] = [];
  const remarks: string[] = [];
  let header: Line | undefined;
  let row: Line | undefined;
  for (const line of linesOf(bytes, begin)) {
    if (line.text.trim() === '') continue;
    if (isComment(bytes, line.begin + (line.text.length - line.text.trimStart().length))) {
      if (header === undefined) comments.push(line.text.trim().replace(/^(?:#+|%+|!+|\/\/+)\s*/, ''));
      continue;
    }
    if (header === undefined) header = line;
    else {
      row = line;
      break;
    }
  }
  if (header === undefined) {
    throw new InputError({ file, cause: 'the file holds no table', remedy: 'write a header line and rows of numbers' });
  }
  let headerText = header.text;
  let dataLine = row;
  const guess = findDelimiter(header.text, row?.text ?? header.text) ?? ' ';
  if (isNumberRow(splitLine(header.text, guess), guess)) {
    // Some programs write the names as the last comment above the numbers.
    headerText = comments.at(-1) ?? '';
    dataLine = header;
    if (findDelimiter(headerText, header.text) === undefined || headerText === '') {
      throw new InputError({
        file,
        place: `line ${header.number}`,
        cause: 'numbers stand where the header is expected',
        remedy: 'put a line with the names of the columns above them, for example CoordinateX,CoordinateY,VelocityX',
      });
    }
    remarks.push('Names of the columns taken from the comment line above the numbers.');
  }
  if (dataLine === undefined) {
    throw new InputError({ file, cause: 'the table has a header and no rows', remedy: 'write the rows' });
  }
  const delimiter = findDelimiter(headerText, dataLine.text);
  if (delimiter === undefined) {
    throw new InputError({
      file,
      place: `line ${header.number}`,
      cause: 'only one column is found',
      remedy: 'part the columns by comma, semicolon, tab, stroke or blanks',
    });
  }
  const headers = splitLine(headerText, delimiter);
  if (headers.at(-1) === '') headers.pop();
  const firstRow = splitLine(dataLine.text, delimiter);
  const columns = describeColumns(headers, firstRow, delimiter === ',', file, remarks);
  return {
    delimiter: delimiter === ' ' ? -1 : delimiter.charCodeAt(0),
    columns,
    dataBegin: dataLine.begin,
    dataLine: dataLine.number,
    comments,
    remarks,
  };
}
