import type { ResolvedCase } from '../case/read-case.js';
import { loadPrecursor, type Precursor } from './precursor.js';
import type { Progress } from './progress.js';

/** Reads the snapshot that the case wants. */
export async function placedPrecursor(
  given: ResolvedCase,
  progress: Progress,
  timings: Map<string, number>,
): Promise<Precursor> {
  const { files, rename, constants, placement } = given.precursor;
  const file = files.at(-1) as string;
  return loadPrecursor(
    file,
    {
      rename: rename as Readonly<Record<string, string>>,
      constants: constants as Readonly<Record<string, number>>,
      quantities: given.transfer.quantities,
      extrude: placement.extrude,
    },
    progress,
    timings,
  );
}
