import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { MachineError } from '../basis/errors.js';
import { blockPoints, type ModeKernel, type ModeTable, phaseNumbers, rows, vectorNumbers } from './mode-block.js';

interface Exports {
  blockAddress(): number;
  freeAddress(): number;
  clear(first: number, count: number): void;
  plainShell(groups: number, q: number, m: number, modes: number): void;
  shapedShell(groups: number, q: number, m: number, modes: number, flags: number, taper: number): void;
  moments(groups: number, m: number, modes: number, flags: number, taper: number, ratio: number): void;
  expected(groups: number, m: number, modes: number, flags: number, taper: number): void;
}

interface Instance {
  readonly memory: WebAssembly.Memory;
  readonly exports: Exports;
  pages: number;
}

// One instance a thread: the kernel is synchronous and its block is refilled by every call.
let instance: Instance | undefined;

/** Built kernel beside the built library; sources run against the same file. */
function kernelFile(): string {
  return fileURLToPath(new URL('./modes.wasm', import.meta.url)).replace(/([\\/])src([\\/]kernels[\\/])/, '$1dist$2');
}

const pageBytes = 65536;
const maximumPages = 1024;

function start(): Instance {
  const file = kernelFile();
  let code: Uint8Array<ArrayBuffer>;
  try {
    code = new Uint8Array(readFileSync(file));
  } catch {
    throw new MachineError({ file, cause: 'the kernel is missing', remedy: 'build first: npm run build' });
  }
  const pages = 8;
  const memory = new WebAssembly.Memory({ initial: pages, maximum: maximumPages, shared: true });
  const module = new WebAssembly.Module(code);
  const abort = (): never => {
    throw new Error('The mode kernel aborted.');
  };
  const made = new WebAssembly.Instance(module, { env: { memory, abort } });
  return { memory, exports: made.exports as unknown as Exports, pages };
}

/**
 * The mode kernel with a mode set loaded. One a thread: opening another replaces the modes of the first.
 *
 * @throws MachineError when the kernel has not been built
 */
export function openModeKernel(table: ModeTable): ModeKernel {
  instance ??= start();
  const { exports, memory } = instance;
  const phaseAt = exports.freeAddress();
  const vectorAt = phaseAt + table.count * phaseNumbers * 8;
  const needed = Math.ceil((vectorAt + table.count * vectorNumbers * 4) / pageBytes);
  if (needed > maximumPages) throw new MachineError({ cause: `${table.count} modes are more than the kernel holds` });
  if (needed > instance.pages) {
    memory.grow(needed - instance.pages);
    instance.pages = needed;
  }
  const buffer = memory.buffer;
  new Float64Array(buffer, phaseAt, table.count * phaseNumbers).set(table.phases);
  new Float32Array(buffer, vectorAt, table.count * vectorNumbers).set(table.vectors);
  const at = exports.blockAddress();
  const rowsAt = at + 3 * blockPoints * 8;
  const position = (axis: number) => new Float64Array(buffer, at + axis * blockPoints * 8, blockPoints);
  const q = (mode: number) => phaseAt + mode * phaseNumbers * 8;
  const m = (mode: number) => vectorAt + mode * vectorNumbers * 4;
  const groups = (points: number) => (points + 3) >> 2;
  return {
    x: position(0),
    y: position(1),
    z: position(2),
    rows: Array.from(
      { length: rows.count },
      (_, row) => new Float32Array(buffer, rowsAt + row * blockPoints * 4, blockPoints),
    ),
    clear: (first, count) => exports.clear(first, count),
    plainShell: (points, first, modes) => exports.plainShell(groups(points), q(first), m(first), modes),
    shapedShell: (points, first, modes, flags, taper) =>
      exports.shapedShell(groups(points), q(first), m(first), modes, flags, taper),
    moments: (points, first, modes, flags, taper, ratio) =>
      exports.moments(groups(points), m(first), modes, flags, taper, ratio),
    expected: (points, first, modes, flags, taper) => exports.expected(groups(points), m(first), modes, flags, taper),
  };
}
