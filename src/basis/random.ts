import seedrandom from 'seedrandom';

/**
 * An independent stream of numbers uniform on [0, 1) with 53 random bits each, the same on every machine. Streams of one
 * seed differ by their label, so that one part of the program can draw more numbers without moving another's.
 *
 * @param seed   whole number, 0 to 2^53 - 1
 * @param label  names the use, for example `modes/phases`
 */
export function randomStream(seed: number, label: string): () => number {
  if (!Number.isSafeInteger(seed) || seed < 0) {
    throw new RangeError(`A seed is a whole number from 0 to 2^53 - 1, not ${seed}.`);
  }
  return seedrandom.alea(`${seed}/${label}`).double;
}
