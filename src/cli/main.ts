import { Command, CommanderError } from 'commander';
import { InputError, MachineError } from '../basis/errors.js';
import { removeHalfWritten } from '../basis/half-written.js';
import { packageVersion } from './version.js';

/** Exit codes of every command. */
export const exitCodes = { done: 0, checkFailed: 1, badInput: 2, machineRefused: 3, interrupted: 130 } as const;

const machineRefusals = new Map<string, string>([
  ['ENOSPC', 'the disk is full; free space or write elsewhere'],
  ['EACCES', 'permission is denied; check who may read and write there'],
  ['EPERM', 'permission is denied; check who may read and write there'],
  ['EROFS', 'the file system is read-only; write elsewhere'],
  ['EMFILE', 'too many files are open; close other programs or raise the limit'],
  ['EIO', 'the disk reports an error; check the device'],
  ['ENOENT', 'there is no such file or folder; check the path'],
  ['EISDIR', 'this is a folder; name a file'],
  ['ENOTDIR', 'a part of the path is not a folder; check the path'],
]);

interface SystemError extends Error {
  readonly code?: string;
  readonly path?: string;
}

function sentenceOf(error: unknown): { text: string; code: number } {
  if (error instanceof InputError) return { text: error.message, code: exitCodes.badInput };
  if (error instanceof MachineError) return { text: error.message, code: exitCodes.machineRefused };
  if (error instanceof Error) {
    const { code, path } = error as SystemError;
    const known = code === undefined ? undefined : machineRefusals.get(code);
    if (known !== undefined) {
      const missing = code === 'ENOENT' || code === 'EISDIR' || code === 'ENOTDIR';
      return { text: `${path ?? 'file'}: ${known}.`, code: missing ? exitCodes.badInput : exitCodes.machineRefused };
    }
    if (error instanceof RangeError && /allocation|array length|buffer/i.test(error.message)) {
      return {
        text: 'The machine has not enough memory for this case; use a smaller target or a larger machine.',
        code: exitCodes.machineRefused,
      };
    }
    return {
      text: `Internal fault: ${error.message}; run again with --debug and report what it prints.`,
      code: exitCodes.machineRefused,
    };
  }
  return { text: `Internal fault: ${String(error)}.`, code: exitCodes.machineRefused };
}

/** The program with all its commands; errors are thrown. */
export async function buildProgram(): Promise<Command> {
  const program = new Command('eddygraft');
  program
    .description('Turns a cheap precursor flow result into a start that an eddy-resolving run can trust.')
    .version(packageVersion(), '-V, --version', 'print the version')
    .option('--debug', 'print stack traces of faults')
    .showHelpAfterError('(eddygraft <command> --help shows the options and an example)')
    .exitOverride()
    .configureOutput({ outputError: (text, write) => write(text.replace(/^error: /, '')) });
  const { addCommands } = await import('./commands.js');
  addCommands(program);
  for (const command of program.commands) {
    command.exitOverride();
    command.option('--debug', 'print stack traces of faults');
  }
  return program;
}

/**
 * Runs the command line.
 *
 * @param argv  arguments after the program's name
 * @returns the exit code: 0 done, 1 a check failed, 2 bad usage or input, 3 the machine refused, 130 interrupted
 */
export async function main(argv: readonly string[]): Promise<number> {
  const interrupt = (): void => {
    removeHalfWritten();
    process.stderr.write('\nInterrupted: nothing half-written is left.\n');
    process.exit(exitCodes.interrupted);
  };
  process.once('SIGINT', interrupt);
  process.once('SIGTERM', interrupt);
  process.stdout.on('error', (error: SystemError) => {
    // The reader of a pipe has gone: there is nobody to tell.
    if (error.code === 'EPIPE') process.exit(exitCodes.done);
  });
  try {
    const program = await buildProgram();
    process.exitCode = exitCodes.done;
    await program.parseAsync([...argv], { from: 'user' });
    return typeof process.exitCode === 'number' ? process.exitCode : exitCodes.done;
  } catch (error) {
    removeHalfWritten();
    if (error instanceof CommanderError) {
      return error.exitCode === 0 ? exitCodes.done : exitCodes.badInput;
    }
    const { text, code } = sentenceOf(error);
    process.stderr.write(`${text}\n`);
    if (argv.includes('--debug') && error instanceof Error) process.stderr.write(`${error.stack ?? ''}\n`);
    return code;
  } finally {
    process.removeListener('SIGINT', interrupt);
    process.removeListener('SIGTERM', interrupt);
  }
}
