import { type Command, InvalidArgumentError, Option } from 'commander';

/** Options that every command takes. */
export interface CommonOptions {
  readonly json?: boolean;
  readonly quiet?: boolean;
  readonly workers?: number;
  readonly memory?: number;
  readonly overwrite?: boolean;
  readonly dryRun?: boolean;
  readonly seed?: number;
}

export function positiveNumber(text: string): number {
  const value = Number(text);
  if (text.trim() === '' || !Number.isFinite(value) || value <= 0) {
    throw new InvalidArgumentError(`'${text}' is not a positive number.`);
  }
  return value;
}

export function nonNegativeNumber(text: string): number {
  const value = Number(text);
  if (text.trim() === '' || !Number.isFinite(value) || value < 0) {
    throw new InvalidArgumentError(`'${text}' is not a number of 0 or more.`);
  }
  return value;
}

export function wholeNumber(text: string): number {
  const value = Number(text);
  if (!/^\d+$/.test(text) || !Number.isSafeInteger(value)) {
    throw new InvalidArgumentError(`'${text}' is not a whole number of 0 or more.`);
  }
  return value;
}

export function positiveWholeNumber(text: string): number {
  const value = wholeNumber(text);
  if (value === 0) throw new InvalidArgumentError('0 is too few.');
  return value;
}

const memoryUnits: Readonly<Record<string, number>> = {
  b: 1,
  kb: 1e3,
  mb: 1e6,
  gb: 1e9,
  kib: 2 ** 10,
  mib: 2 ** 20,
  gib: 2 ** 30,
};

/** `4GiB`, `800MB`, `1e9` -> bytes. */
export function memoryAmount(text: string): number {
  const match = /^([\d.]+(?:e\d+)?)\s*([a-z]*)$/i.exec(text.trim());
  const unit = memoryUnits[(match?.[2] ?? '').toLowerCase() || 'b'];
  const value = Number(match?.[1]);
  if (match === null || unit === undefined || !Number.isFinite(value) || value <= 0) {
    throw new InvalidArgumentError(`'${text}' is no amount of memory; write 4GiB or 800MB.`);
  }
  return value * unit;
}

/** `A,B` -> ['A', 'B']. */
export function nameList(text: string): string[] {
  const names = text
    .split(',')
    .map((name) => name.trim())
    .filter((name) => name !== '');
  if (names.length === 0) throw new InvalidArgumentError('no name is given.');
  return names;
}

/** `x,z` -> ['x', 'z']. */
export function axisList(text: string): ('x' | 'y' | 'z')[] {
  return nameList(text).map((name) => {
    if (name !== 'x' && name !== 'y' && name !== 'z') {
      throw new InvalidArgumentError(`'${name}' is no axis; write x, y or z with commas between.`);
    }
    return name;
  });
}

/** Collects `--rename FILE_NAME=StandardName` into standard name -> name in the file. */
export function collectRename(text: string, before: Record<string, string> = {}): Record<string, string> {
  const at = text.lastIndexOf('=');
  if (at <= 0 || at === text.length - 1) {
    throw new InvalidArgumentError(`'${text}' is not of the form FILE_NAME=StandardName.`);
  }
  return { ...before, [text.slice(at + 1)]: text.slice(0, at) };
}

/** Collects `--constant ViscosityKinematic=1.5e-5`. */
export function collectConstant(text: string, before: Record<string, number> = {}): Record<string, number> {
  const at = text.indexOf('=');
  const value = Number(text.slice(at + 1));
  if (at <= 0 || text.slice(at + 1).trim() === '' || !Number.isFinite(value)) {
    throw new InvalidArgumentError(`'${text}' is not of the form StandardName=NUMBER.`);
  }
  return { ...before, [text.slice(0, at)]: value };
}

/** Options of every command that reads and writes. */
export function withCommonOptions(command: Command, wanted: { seed?: boolean; writes?: boolean } = {}): Command {
  command
    .option('--json', 'print one JSON document on standard output, everything else on standard error')
    .option('--quiet', 'print nothing but errors')
    .addOption(new Option('--workers <n>', 'worker threads (default: all cores)').argParser(positiveWholeNumber));
  if (wanted.seed === true) {
    command.addOption(
      new Option('--seed <n>', 'seed of all randomness (default: the case file)').argParser(wholeNumber),
    );
  }
  if (wanted.writes !== false) {
    command
      .addOption(
        new Option('--memory <amount>', 'refuse when more is needed, for example 4GiB').argParser(memoryAmount),
      )
      .option('--overwrite', 'replace output files that exist')
      .option('--dry-run', 'read and check everything, write nothing');
  }
  return command;
}
