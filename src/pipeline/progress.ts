/** Receives the progress of a run; the command line draws it, the library's default ignores it. */
export interface Progress {
  /** A stage begins; `total` in the stage's own units (cells, iterations), 0 when unknown. */
  readonly begin: (stage: string, total: number) => void;
  readonly advance: (amount: number) => void;
  readonly end: () => void;
  /** One line the user should see once (a decision taken, an assumption). */
  readonly note: (text: string) => void;
}

export const silentProgress: Progress = {
  begin: () => undefined,
  advance: () => undefined,
  end: () => undefined,
  note: () => undefined,
};

/** Runs one stage with its begin and end reported, and returns its result and its wall time in seconds. */
export async function timed<T>(
  progress: Progress,
  timings: Map<string, number>,
  stage: string,
  total: number,
  work: () => T | Promise<T>,
): Promise<T> {
  const start = performance.now();
  progress.begin(stage, total);
  try {
    return await work();
  } finally {
    progress.end();
    timings.set(stage, (timings.get(stage) ?? 0) + (performance.now() - start) / 1000);
  }
}
