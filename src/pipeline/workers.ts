import { availableParallelism } from 'node:os';
import { fileURLToPath } from 'node:url';
import { Piscina } from 'piscina';
import type { Progress } from './progress.js';
import { shareDeep } from './shared.js';
import { runTask, type TaskName, type TaskPayload } from './tasks.js';

/** Cells in a block. Fixed: results must not depend on the number of workers, and caches like it. */
export const blockCells = 4096;

/** Runs range tasks on worker threads, or in this thread when one worker is asked for. */
export interface Workers {
  readonly count: number;
  /** Runs `task` over [0, total) in pieces that begin and end on block boundaries. */
  readonly overRanges: <N extends TaskName>(
    task: N,
    payload: TaskPayload<N>,
    total: number,
    progress: Progress,
  ) => Promise<void>;
  readonly close: () => Promise<void>;
}

function workerFile(): string {
  // Tests run the TypeScript sources; threads need the built file beside them.
  return fileURLToPath(new URL('./worker.js', import.meta.url)).replace(/([\\/])src([\\/]pipeline[\\/])/, '$1dist$2');
}

/** Ranges of whole blocks, about `pieces` of them. */
export function blockRanges(total: number, pieces: number): readonly (readonly [number, number])[] {
  const blocks = Math.ceil(total / blockCells);
  const perPiece = Math.max(1, Math.ceil(blocks / Math.max(1, pieces)));
  const ranges: [number, number][] = [];
  for (let block = 0; block < blocks; block += perPiece) {
    ranges.push([block * blockCells, Math.min(total, (block + perPiece) * blockCells)]);
  }
  return ranges;
}

/**
 * Opens the pool.
 *
 * @param wanted  number of worker threads; default all cores
 */
export function openWorkers(wanted?: number): Workers {
  const count = Math.max(1, wanted ?? availableParallelism());
  let pool: Piscina | undefined;
  return {
    count,
    overRanges: async (task, payload, total, progress) => {
      const ranges = blockRanges(total, Math.max(32, count * 16));
      if (count === 1 || ranges.length === 1) {
        for (const [begin, end] of ranges) {
          await runTask({ task, payload, begin, end });
          progress.advance(end - begin);
          // Lets the progress bar draw and an interrupt arrive.
          await new Promise((resolve) => setImmediate(resolve));
        }
        return;
      }
      pool ??= new Piscina({ filename: workerFile(), name: 'runTask', minThreads: count, maxThreads: count });
      const active = pool;
      const shared = shareDeep(payload);
      await Promise.all(
        ranges.map(async ([begin, end]) => {
          await active.run({ task, payload: shared, begin, end });
          progress.advance(end - begin);
        }),
      );
    },
    close: async () => {
      await pool?.destroy();
    },
  };
}
