import { InputError } from '../basis/errors.js';

/** A time series file: equally spaced signals. */
export interface History {
  readonly file: string;
  readonly start: number;
  readonly step: number;
  readonly samples: number;
  /** Columns besides time, each `samples` long. */
  readonly signals: ReadonlyMap<string, Float64Array>;
  /** Velocities found by their names: probe name -> names of the X, Y, Z columns. */
  readonly probes: ReadonlyMap<string, readonly [string, string, string]>;
  readonly remarks: readonly string[];
}

export interface HistoryOptions {
  /** Name of the time column; default: a column called Time, TimeValue or t, in any case. */
  readonly time?: string;
}

/** Splits one line at commas, semicolons, tabs or blanks; quoted cells keep them. */
function splitLine(line: string, separator: RegExp | string): string[] {
  if (!line.includes('"')) return line.split(separator).map((part) => part.trim());
  const cells: string[] = [];
  let text = '';
  let quoted = false;
  for (let i = 0; i < line.length; i++) {
    const c = line[i] as string;
    if (quoted) {
      if (c === '"' && line[i + 1] === '"') {
        text += '"';
        i++;
      } else if (c === '"') quoted = false;
      else text += c;
    } else if (c === '"') quoted = true;
    else if (typeof separator === 'string' ? c === separator : /\s/.test(c)) {
      // A run of blanks is one separator.
      if (typeof separator === 'string' || text !== '') cells.push(text.trim());
      text = '';
    } else text += c;
  }
  cells.push(text.trim());
  return cells;
}

const isNumber = (text: string): boolean => text !== '' && Number.isFinite(Number(text));

interface Table {
  readonly names: readonly string[];
  readonly columns: readonly number[][];
}

/** A plain table of CSV text with a header line (which may follow a `#`). @throws InputError */
export function parseTable(
  text: string,
  file: string,
): { names: readonly string[]; rows: readonly string[][]; lines: readonly number[] } {
  const lines = text.replace(/^\uFEFF/, '').split(/\r\n|\n|\r/);
  let names: string[] | undefined;
  let separator: RegExp | string = ',';
  let pending: string | undefined;
  const rows: string[][] = [];
  const numbers: number[] = [];
  for (let i = 0; i < lines.length; i++) {
    const line = (lines[i] as string).trim();
    if (line === '') continue;
    if (line.startsWith('#')) {
      if (names === undefined) pending = line.replace(/^#+\s*/, '');
      continue;
    }
    if (names === undefined) {
      const probe = pending !== undefined && /^[-+.\d]/.test(line) ? pending : line;
      separator = line.includes(',') ? ',' : line.includes(';') ? ';' : line.includes('\t') ? '\t' : /\s+/;
      names = splitLine(probe, separator);
      if (names.every(isNumber)) {
        throw new InputError({
          file,
          place: `line ${i + 1}`,
          cause: 'the columns have no names',
          remedy: 'put a header line above the numbers',
        });
      }
      if (probe === line) continue;
    }
    const cells = splitLine(line, separator);
    if (cells.length !== names.length) {
      throw new InputError({
        file,
        place: `line ${i + 1}`,
        cause: `${cells.length} values stand under ${names.length} column names`,
        remedy: 'complete or delete the line',
      });
    }
    rows.push(cells);
    numbers.push(i + 1);
  }
  if (names === undefined)
    throw new InputError({ file, cause: 'the file is empty', remedy: 'give a CSV file with a header line' });
  return { names, rows, lines: numbers };
}

function numericTable(text: string, file: string): Table {
  const { names, rows, lines } = parseTable(text, file);
  const columns: number[][] = names.map(() => []);
  const twice = names.find((name, i) => names.indexOf(name) !== i);
  if (twice !== undefined) {
    throw new InputError({
      file,
      place: `column ${twice}`,
      cause: 'two columns have this name',
      remedy: 'rename one of them',
    });
  }
  rows.forEach((cells, r) => {
    cells.forEach((cell, c) => {
      if (!isNumber(cell)) {
        throw new InputError({
          file,
          place: `line ${lines[r]}, column ${names[c]}`,
          cause: `"${cell}" is not a number`,
          remedy: 'write plain numbers with a decimal point',
        });
      }
      (columns[c] as number[]).push(Number(cell));
    });
  });
  return { names, columns };
}

function timeColumn(names: readonly string[], wanted: string | undefined, file: string): number {
  const at = names.findIndex((name) =>
    wanted === undefined
      ? ['time', 'timevalue', 't', 'time [s]', 'time (s)'].includes(name.toLowerCase())
      : name === wanted,
  );
  if (at < 0) {
    throw new InputError({
      file,
      place: `columns ${names.join(', ')}`,
      cause: wanted === undefined ? 'none of them is called Time' : `none of them is called ${wanted}`,
      remedy: 'name the time column with --time',
    });
  }
  return at;
}

/** Triplets of columns that end in VelocityX, VelocityY, VelocityZ; what stands before is the probe's name. */
function findProbes(names: readonly string[]): Map<string, readonly [string, string, string]> {
  const probes = new Map<string, readonly [string, string, string]>();
  for (const name of names) {
    const match = /^(.*)VelocityX$/.exec(name);
    if (match === null) continue;
    const head = match[1] as string;
    const y = `${head}VelocityY`;
    const z = `${head}VelocityZ`;
    if (!names.includes(y) || !names.includes(z)) continue;
    const probe = head.replace(/[\s._:/-]+$/, '');
    probes.set(probe === '' ? 'probe' : probe, [name, y, z]);
  }
  return probes;
}

/**
 * Reads a monitor history: CSV with a header line, one column of time, any number of signals. Velocities of a probe are
 * recognised as `NAME.VelocityX`, `NAME.VelocityY`, `NAME.VelocityZ` (any separator or none). Where a restarted run wrote
 * the same times twice the later lines count; unequal time steps are interpolated to their mean step.
 *
 * @param text  content of the file
 * @throws InputError for missing columns, non-numbers (names line and column), fewer than 64 times
 */
export function readHistory(text: string, file: string, options: HistoryOptions = {}): History {
  const table = numericTable(text, file);
  const timeAt = timeColumn(table.names, options.time, file);
  const raw = table.columns[timeAt] as number[];
  const remarks: string[] = [];
  const keep: number[] = [];
  let dropped = 0;
  for (let i = 0; i < raw.length; i++) {
    while (keep.length > 0 && (raw[keep[keep.length - 1] as number] as number) >= (raw[i] as number)) {
      keep.pop();
      dropped++;
    }
    keep.push(i);
  }
  if (dropped > 0)
    remarks.push(
      `${file}: ${dropped} lines were overtaken by later lines with the same or earlier times and left out.`,
    );
  if (keep.length < 64) {
    throw new InputError({
      file,
      cause: `only ${keep.length} times are left`,
      remedy: 'let the run write at least 64 samples',
    });
  }
  const times = Float64Array.from(keep, (i) => raw[i] as number);
  const samples = times.length;
  const start = times[0] as number;
  const step = ((times[samples - 1] as number) - start) / (samples - 1);
  let unequal = 0;
  for (let i = 1; i < samples; i++) {
    unequal = Math.max(unequal, Math.abs((times[i] as number) - (times[i - 1] as number) - step));
  }
  const even = unequal <= 1e-3 * step;
  if (!even) {
    remarks.push(
      `${file}: time steps are unequal (they differ by up to ${((100 * unequal) / step).toPrecision(3)} % from their mean); ` +
        'signals were interpolated linearly to the mean step, which damps the highest frequencies.',
    );
  }
  const signals = new Map<string, Float64Array>();
  table.names.forEach((name, c) => {
    if (c === timeAt) return;
    const column = table.columns[c] as number[];
    const values = Float64Array.from(keep, (i) => column[i] as number);
    signals.set(name, even ? values : resample(times, values, start, step));
  });
  if (signals.size === 0)
    throw new InputError({ file, cause: 'there is no column besides time', remedy: 'add a signal' });
  return { file, start, step, samples, signals, probes: findProbes([...signals.keys()]), remarks };
}

function resample(times: Float64Array, values: Float64Array, start: number, step: number): Float64Array {
  const result = new Float64Array(values.length);
  let j = 0;
  for (let i = 0; i < values.length; i++) {
    const t = start + i * step;
    while (j < times.length - 2 && (times[j + 1] as number) < t) j++;
    const low = times[j] as number;
    const part = Math.min(1, Math.max(0, (t - low) / ((times[j + 1] as number) - low)));
    result[i] = (values[j] as number) + part * ((values[j + 1] as number) - (values[j] as number));
  }
  return result;
}
