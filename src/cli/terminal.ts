import type { Progress } from '../pipeline/progress.js';

export interface TerminalOptions {
  readonly quiet: boolean;
  readonly json: boolean;
}

/** Where a command prints: results on standard output, everything else on standard error. */
export interface Terminal {
  readonly progress: Progress;
  /** A result for people; silent with --json or --quiet. */
  readonly say: (text: string) => void;
  /** The one JSON document of --json; silent otherwise. */
  readonly json: (document: unknown) => void;
  /** A line on standard error; silent with --quiet. */
  readonly remark: (text: string) => void;
}

const barWidth = 28;
const appearAfter = 1000;

/** A bar appears on standard error when it is a terminal and the stage has lasted over a second. */
export function createProgress(options: TerminalOptions): Progress {
  const drawn = process.stderr.isTTY === true && !options.quiet;
  let stage = '';
  let total = 0;
  let done = 0;
  let start = 0;
  let last = 0;
  let visible = false;

  const clear = (): void => {
    if (visible) process.stderr.write('\r\x1b[2K');
    visible = false;
  };
  const draw = (): void => {
    const now = performance.now();
    if (!drawn || now - start < appearAfter || now - last < 100) return;
    last = now;
    const seconds = ((now - start) / 1000).toFixed(0);
    if (total > 0) {
      const share = Math.min(1, done / total);
      const filled = Math.round(share * barWidth);
      const left = share > 0.02 ? ` ${Math.ceil(((now - start) / 1000) * (1 / share - 1))} s left` : '';
      const bar = `${'='.repeat(filled)}${' '.repeat(barWidth - filled)}`;
      process.stderr.write(`\r\x1b[2K${stage.padEnd(22)} |${bar}| ${(share * 100).toFixed(0).padStart(3)} %${left}`);
    } else {
      process.stderr.write(`\r\x1b[2K${stage.padEnd(22)} ${seconds} s`);
    }
    visible = true;
  };

  return {
    begin: (name, amount) => {
      stage = name;
      total = amount;
      done = 0;
      start = performance.now();
      last = 0;
    },
    advance: (amount) => {
      done += amount;
      draw();
    },
    end: clear,
    note: (text) => {
      clear();
      if (!options.quiet) process.stderr.write(`${text}\n`);
    },
  };
}

export function openTerminal(options: TerminalOptions): Terminal {
  return {
    progress: createProgress(options),
    say: (text) => {
      if (!options.json && !options.quiet) process.stdout.write(`${text}\n`);
    },
    json: (document) => {
      if (options.json) process.stdout.write(`${JSON.stringify(document, null, 2)}\n`);
    },
    remark: (text) => {
      if (!options.quiet) process.stderr.write(`${text}\n`);
    },
  };
}
