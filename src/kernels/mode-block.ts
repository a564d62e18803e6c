/** Points in a block of the mode kernels. */
export const blockPoints = 64;

/** Rows of 32-bit numbers in a block, 64 points each; counts in brackets. */
export const rows = {
  /** Weight W of the shell (1). */
  weight: 0,
  /** Gradient of W (3). */
  weightGradient: 1,
  /** Potential A (3). */
  potential: 4,
  /** Velocity u (3). */
  velocity: 7,
  /** Width tensor H, XX XY XZ YY YZ ZZ (6). */
  width: 10,
  /** Half the polarisation multipliers, same order (6). */
  polarisation: 16,
  /** d/dx, d/dy, d/dz of the width tensor (18). */
  widthGradient: 22,
  /** d/dx, d/dy, d/dz of the polarisation row (18). */
  polarisationGradient: 40,
  /** Seeded energy (1), resolvable energy (1), second moments (6). */
  moments: 58,
  /** P (1), Q (3), T (6) of the expected energy. */
  expected: 66,
  count: 76,
} as const;

/** Flags of the shaped kernels. */
export const shaped = { cut: 1, stress: 2, slopes: 4 } as const;

/** 64-bit numbers of one mode in `phases`, 32-bit numbers of one in `vectors`. */
export const phaseNumbers = 4;
export const vectorNumbers = 24;

/**
 * Constants of the modes as the kernels read them.
 */
export interface ModeTable {
  readonly count: number;
  /** 4 x n: K / (2 pi), phase / (2 pi). */
  readonly phases: Float64Array;
  /** 24 x n: a (3), b (3), K K times the square of (shortest wave / 2 pi) (6), unit a a (6), unused (6); off-diagonal products doubled. */
  readonly vectors: Float32Array;
}

/** What the WebAssembly kernel and its plain twin offer alike, on one block of at most 64 points. */
export interface ModeKernel {
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly z: Float64Array;
  /** One view a row. */
  readonly rows: readonly (Float32Array | Float64Array)[];
  readonly clear: (first: number, count: number) => void;
  /** Adds a shell with one weight for all its modes to potential and velocity. */
  readonly plainShell: (points: number, firstMode: number, modes: number) => void;
  /** Adds a shell whose weight differs from mode to mode. */
  readonly shapedShell: (points: number, firstMode: number, modes: number, flags: number, taper: number) => void;
  /** Adds a shell to the moments; the row `weight` holds the energy of one of its modes. */
  readonly moments: (
    points: number,
    firstMode: number,
    modes: number,
    flags: number,
    taper: number,
    ratio: number,
  ) => void;
  /** Adds a shell to the expected energy. */
  readonly expected: (points: number, firstMode: number, modes: number, flags: number, taper: number) => void;
}
