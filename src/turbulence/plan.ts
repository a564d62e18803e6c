import type { ModeTable } from '../kernels/mode-block.js';
import type { GradientOperator } from '../mesh/gradient.js';
import type { ModeSet } from './modes.js';
import type { PolarisationTable } from './polarisation.js';
import type { ShellTable } from './shell-table.js';

/** `potential`: curl of the weighted potential, with the gradient term; `modes`: the same weights on the velocity itself. */
export type Grade = 'modes' | 'potential';

/** Places of the parameters of a cell; `width` and `polarisation` hold six numbers XX XY XZ YY YZ ZZ. */
export const column = {
  /** Amplitude, m/s: its square times the sum of the seeded shares is the energy laid on the cell. */
  amplitude: 0,
  /** ln kappa_e. */
  lnWave: 1,
  /** ln eta. */
  lnEta: 2,
  /** Width tensor H, m2. */
  width: 3,
  /** Half the polarisation multipliers. */
  polarisation: 9,
} as const;

/** Parameters a cell without and with polarisation multipliers. */
export const plainColumns = 9;
export const stressColumns = 15;

/** Bits of `flags`. */
export const cellFlag = {
  /** The wanted stress tensor was clipped to a realisable one. */
  clipped: 1,
  /** Fewer than a quarter of the resolvable energy's waves fit on the cell: energy is left to the model. */
  coarse: 2,
} as const;

/**
 * Everything that the synthesis of a range of cells needs; plain data, large arrays on shared memory.
 */
export interface FluctuationPlan {
  readonly grade: Grade;
  readonly modes: ModeSet;
  readonly table: ModeTable;
  readonly shellTable: ShellTable;
  /** Shortest seeded wave, cells along the wave. */
  readonly wavelengthCells: number;
  /** Slope of the cut-off: it is 1 where K . H K (cells / 2 pi)^2 <= 1 - 1 / taper, 0 from 1 on. */
  readonly taper: number;
  readonly cells: number;
  /** 3 x cells. */
  readonly centroids: Float64Array;
  /** 9 or 15. */
  readonly columns: number;
  /** columns x cells. */
  readonly parameters: Float64Array;
  readonly gradient: GradientOperator;
  /** Turbulent energy of the precursor, cells, m2/s2. */
  readonly k: Float64Array;
  /** Share of the amplitude that zones, fades and walls leave, 0 to 1. */
  readonly seeding: Float64Array;
  /** 6 x cells, m2/s2; absent when the stresses are isotropic. */
  readonly covariance?: Float64Array;
  readonly polarisationTable?: PolarisationTable;
  /** Filled by `weighRange`: energy wanted on the mesh, cells, m2/s2. */
  readonly wanted: Float64Array;
  /** Filled by `weighRange`: share of k that the cell's waves can carry. */
  readonly resolvableShare: Float64Array;
  readonly flags: Uint8Array;
}
