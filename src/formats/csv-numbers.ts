/** Layout of the rows of one file. */
export interface RowLayout {
  /** Byte between cells; -1 for any run of blanks and tabs. */
  readonly delimiter: number;
  readonly columns: number;
  /** Columns that are passed over: 1. */
  readonly skipped: Uint8Array;
}

/** What is wrong with a cell or a row; `column` counts from 0, -1 for the row as a whole. */
export interface RowFault {
  readonly line: number;
  readonly column: number;
  readonly cause: string;
}

/** Columns of numbers as they grow; the parser's state between two blocks. */
export interface ColumnTable {
  readonly layout: RowLayout;
  columns: Float64Array[];
  rows: number;
  /** Rows for which the columns have room. */
  capacity: number;
  /** Number of the line that comes next, 1 for the first of the file. */
  line: number;
  decimalPoint: boolean;
  decimalComma: boolean;
}

const tab = 9;
const newline = 10;
const carriageReturn = 13;
const space = 32;
const bang = 33;
const quote = 34;
const hash = 35;
const percent = 37;
const plus = 43;
const comma = 44;
const minus = 45;
const point = 46;
const slash = 47;
const zero = 48;
const nine = 57;
const capitalE = 69;
const smallE = 101;

// Powers of ten that a double holds exactly.
const exactPowers = Float64Array.from({ length: 23 }, (_, power) => Number(`1e${power}`));
const numberPattern = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const specialWords: Readonly<Record<string, number>> = {
  nan: Number.NaN,
  inf: Number.POSITIVE_INFINITY,
  infinity: Number.POSITIVE_INFINITY,
};

/**
 * Value of one cell, by the standard's own conversion; `undefined` when it is not a number. Takes `1,5` for 1.5 when
 * commas do not part cells, an exponent written with D, quotes around the number, and the words nan and inf.
 */
export function parseCell(text: string, commaParts: boolean): number | undefined {
  let cell = text.trim();
  if (cell.startsWith('"') && cell.endsWith('"') && cell.length > 1) cell = cell.slice(1, -1).trim();
  if (!commaParts) cell = cell.replace(',', '.');
  const plain = cell.replace(/[dD]/, 'e');
  if (numberPattern.test(plain)) return Number(plain);
  const word = specialWords[cell.replace(/^[+-]/, '').toLowerCase()];
  return word === undefined ? undefined : cell.startsWith('-') ? -word : word;
}

function grow(table: ColumnTable, capacity: number): void {
  table.columns = table.columns.map((column, at) => {
    if (table.layout.skipped[at] === 1) return column;
    const larger = new Float64Array(capacity);
    larger.set(column);
    return larger;
  });
}

/** True when a line that begins with these bytes is a comment: # % ! or two strokes. */
export function isComment(bytes: Uint8Array, at: number): boolean {
  const byte = bytes[at];
  return byte === hash || byte === percent || byte === bang || (byte === slash && bytes[at + 1] === slash);
}

/** Error of the rounded product a * b (Dekker 1971, "A floating-point technique for extending the available precision"). */
function productError(a: number, b: number, product: number): number {
  const scaledA = a * 134217729;
  const highA = scaledA - (scaledA - a);
  const lowA = a - highA;
  const scaledB = b * 134217729;
  const highB = scaledB - (scaledB - b);
  const lowB = b - highB;
  return lowA * lowB - (product - highA * highB - lowA * highB - highA * lowB);
}

/**
 * The double nearest to (mantissa * 10^places + tail) * 10^scale, by a quotient or product in two parts. The second part
 * is known to a few units of its last place; where that leaves the rounding open the result is NaN.
 *
 * @param mantissa  15 digits
 * @param tail      up to 4 more, `places` of them
 * @param scale     -22 to 22
 */
function roundLong(mantissa: number, tail: number, places: number, scale: number): number {
  // The digits as an exact sum high + low.
  const shifted = mantissa * exactPowers[places]!;
  const high = shifted + tail;
  const low = productError(mantissa, exactPowers[places]!, shifted) + (tail - (high - shifted));
  const power = exactPowers[Math.abs(scale)]!;
  let first: number;
  let second: number;
  if (scale < 0) {
    first = high / power;
    const back = first * power;
    // The remainder of a rounded quotient is itself a double: nothing is lost here but in the sum with `low`.
    second = (high - back - productError(first, power, back) + low) / power;
  } else {
    first = high * power;
    second = productError(high, power, first) + low * power;
  }
  const margin = (Math.abs(second) + Math.abs(scale < 0 ? low / power : low * power)) * 2 ** -48;
  const above = first + (second + margin);
  return above === first + (second - margin) ? above : Number.NaN;
}

/** Result of `scanNumber`; kept between calls so that no object is made per cell. */
interface Scan {
  value: number;
  sawPoint: boolean;
  sawComma: boolean;
}

/**
 * Reads one plain decimal number of at most 19 digits. Numbers of at most 15 digits with a decimal exponent of at most 22 are one exact
 * integer times or over one exact power of ten, so that the one rounding of that operation is the right one (Clinger
 * 1990, "How to read floating point numbers accurately"); longer ones see `roundLong`.
 *
 * @returns where it ends, or -1 when it is no such number
 */
function scanNumber(scan: Scan, bytes: Uint8Array, begin: number, stop: number, commaParts: boolean): number {
  let at = begin;
  let byte = bytes[at]!;
  const negative = byte === minus;
  if (negative || byte === plus) byte = bytes[++at]!;
  let mantissa = 0;
  let tail = 0;
  let digits = 0;
  let scale = 0;
  const first = at;
  let marks = 0;
  while (byte >= zero && byte <= nine) {
    if (digits > 0 || byte !== zero) digits++;
    if (digits <= 15) mantissa = mantissa * 10 + (byte - zero);
    else tail = tail * 10 + (byte - zero);
    byte = bytes[++at]!;
  }
  if (byte === point || (byte === comma && !commaParts)) {
    if (byte === point) scan.sawPoint = true;
    else scan.sawComma = true;
    marks = 1;
    byte = bytes[++at]!;
    const fraction = at;
    while (byte >= zero && byte <= nine) {
      if (digits > 0 || byte !== zero) digits++;
      if (digits <= 15) mantissa = mantissa * 10 + (byte - zero);
      else tail = tail * 10 + (byte - zero);
      byte = bytes[++at]!;
    }
    scale = fraction - at;
  }
  if (at - first - marks === 0 || digits > 19) return -1;
  if (byte === smallE || byte === capitalE) {
    byte = bytes[++at]!;
    const below = byte === minus;
    if (below || byte === plus) byte = bytes[++at]!;
    const from = at;
    let exponent = 0;
    while (byte >= zero && byte <= nine) {
      exponent = exponent * 10 + (byte - zero);
      byte = bytes[++at]!;
    }
    if (at === from) return -1;
    scale += below ? -exponent : exponent;
  }
  if (scale < -22 || scale > 22 || at > stop) return -1;
  let value: number;
  if (digits > 15) value = roundLong(mantissa, tail, digits - 15, scale);
  else value = scale < 0 ? mantissa / exactPowers[-scale]! : mantissa * exactPowers[scale]!;
  if (Number.isNaN(value)) return -1;
  scan.value = negative ? -value : value;
  return at;
}

/** First place at or after `at` that is no blank (a tab is one unless it parts cells). */
function skipBlanks(bytes: Uint8Array, at: number, stop: number, delimiter: number): number {
  let place = at;
  while (place < stop && (bytes[place] === space || (bytes[place] === tab && delimiter !== tab))) place++;
  return place;
}

/** End of the cell that begins here: a delimiter outside quotes, or the end of the row. */
function cellEnd(bytes: Uint8Array, at: number, stop: number, delimiter: number): number {
  let quoted = false;
  let place = at;
  for (; place < stop; place++) {
    const byte = bytes[place]!;
    if (byte === quote) quoted = !quoted;
    else if (quoted) continue;
    else if (byte === delimiter || (delimiter === -1 && (byte === space || byte === tab))) break;
  }
  return place;
}

function shownCell(bytes: Uint8Array, begin: number, end: number): string {
  return Buffer.from(bytes.subarray(begin, Math.min(end, begin + 40)))
    .toString('utf8')
    .trim();
}

/**
 * Parses whole rows into the table. Numbers that `scanNumber` does not take go through the language's own conversion,
 * so that every value is the correctly rounded one.
 *
 * @param bytes  block that ends with a line end, or with the file
 * @returns the first fault, or undefined; rows before it are in the table
 */
export function parseRows(table: ColumnTable, bytes: Uint8Array): RowFault | undefined {
  const { delimiter, columns: count, skipped } = table.layout;
  const commaParts = delimiter === comma;
  const scan: Scan = { value: 0, sawPoint: table.decimalPoint, sawComma: table.decimalComma };
  const latin = Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const end = bytes.length;
  let text: string | undefined;
  let { columns, rows, line, capacity } = table;
  let fault: RowFault | undefined;

  for (let next = 0; next < end && fault === undefined; line++) {
    let at = next;
    let stop = latin.indexOf(newline, at);
    if (stop < 0) stop = end;
    next = stop + 1;
    while (stop > at && (bytes[stop - 1] === carriageReturn || bytes[stop - 1] === space)) stop--;
    at = skipBlanks(bytes, at, stop, delimiter);
    if (at >= stop || isComment(bytes, at)) continue;
    if (rows >= capacity) {
      capacity = Math.max(1024, Math.ceil(capacity * 1.5));
      grow(table, capacity);
      columns = table.columns;
    }
    let c = 0;
    for (; c < count; c++) {
      if (skipped[c] === 1) {
        at = cellEnd(bytes, at, stop, delimiter);
      } else {
        const begin = skipBlanks(bytes, at, stop, delimiter);
        const reached = begin < stop ? scanNumber(scan, bytes, begin, stop, commaParts) : -1;
        at = reached < 0 ? -1 : skipBlanks(bytes, reached, stop, delimiter);
        const clean = at === stop || (at >= 0 && (delimiter === -1 ? at > reached : bytes[at] === delimiter));
        if (!clean) {
          at = cellEnd(bytes, begin, stop, delimiter);
          text ??= latin.toString('latin1');
          const value = parseCell(text.slice(begin, at), commaParts);
          if (value === undefined) {
            const shown = shownCell(bytes, begin, at);
            fault = { line, column: c, cause: shown === '' ? 'the cell is empty' : `"${shown}" is not a number` };
            break;
          }
          scan.value = value;
        }
        columns[c]![rows] = scan.value;
      }
      if (delimiter === -1) at = skipBlanks(bytes, at, stop, delimiter);
      if (at >= stop) break;
      if (delimiter !== -1) at++;
    }
    if (fault !== undefined) break;
    // One delimiter after the last cell is forgiven.
    if (at < stop && skipBlanks(bytes, at, stop, delimiter) < stop) {
      fault = { line, column: -1, cause: `the row has more cells than the header, which has ${count}` };
    } else if (c < count - 1) {
      fault = { line, column: -1, cause: `the row has ${c + 1} cell${c === 0 ? '' : 's'}, the header ${count}` };
    } else if (scan.sawPoint && scan.sawComma) {
      fault = { line, column: -1, cause: 'decimal points and decimal commas are mixed' };
    } else {
      rows++;
    }
  }
  table.rows = rows;
  table.line = line;
  table.capacity = capacity;
  table.decimalPoint = scan.sawPoint;
  table.decimalComma = scan.sawComma;
  return fault;
}
