import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';
import { componentRms, type DivergenceFigures } from './divergence-figures.js';
import { type LineFigures, lineFigures } from './line-figures.js';
import { type CellZones, type ZoneFigures, zoneFigures } from './zone-figures.js';

/** What is measured; the arrays of a finished start. */
export interface AuditInput {
  readonly mesh: CellMesh;
  readonly geometry: MeshGeometry;
  readonly periodic?: PeriodicPairs | undefined;
  /** 3 x cells, m/s. */
  readonly velocity: Float64Array;
  /** 3 x cells; the whole velocity less its volume mean is taken when left out. */
  readonly fluctuation?: Float64Array | undefined;
  /** cells: k of the precursor, what of it is resolvable, what is left to the model, m2/s2. */
  readonly wanted?: Float64Array | undefined;
  readonly resolvable?: Float64Array | undefined;
  readonly modelled?: Float64Array | undefined;
  /** cells: codes of the `Outside` array. */
  readonly outside?: Uint8Array | undefined;
  readonly divergenceBefore?: DivergenceFigures | undefined;
  readonly divergenceAfter: DivergenceFigures;
  readonly projectionLoss?: number | undefined;
  /** The operator by which divergence and loss were measured; default interpolated faces, weights by distance. */
  readonly operator?: string | undefined;
  /** 6 x cells, wanted covariances, m2/s2. */
  readonly covarianceWanted?: Float64Array | undefined;
  /** 3 x cells: the fluctuation before control, for the flux through boundaries. */
  readonly fluctuationBefore?: Float64Array | undefined;
  readonly zones?: CellZones | undefined;
  /** cells: |div u| CellWidth / u_rms after control, for the zones. */
  readonly scaledDivergence?: Float64Array | undefined;
  /** Seconds; Courant numbers are given for it. */
  readonly timeStep?: number | undefined;
}

export interface CourantFigures {
  readonly timeStep: number;
  readonly mean: number;
  readonly p99: number;
  readonly max: number;
}

/** Figures under the names that the JSON of `audit` and the manifest use. */
export interface AuditFigures {
  readonly cells: number;
  /** m3. */
  readonly volume: number;
  /** Volume means of k, m2/s2. */
  readonly energy: {
    readonly wanted: number | null;
    readonly resolvable: number | null;
    readonly recovered: number;
    readonly modelled: number | null;
  };
  readonly divergence: {
    readonly before: DivergenceFigures | null;
    readonly after: DivergenceFigures;
    readonly operator: string;
  };
  readonly projectionLoss: number | null;
  /** Volume means of the fluctuation's products, XX XY XZ YY YZ ZZ, m2/s2. */
  readonly covariance: readonly [number, number, number, number, number, number];
  /** The same of what was wanted. */
  readonly covarianceWanted: readonly number[] | null;
  /** Of each component of the fluctuation, volume-weighted. */
  readonly skewness: readonly [number, number, number];
  readonly flatness: readonly [number, number, number];
  /** m/s. */
  readonly velocityMax: number;
  readonly fluctuationRms: number;
  /** Largest time step at which no cell's Courant number exceeds 1, s. */
  readonly timeStepForCourantOne: number | null;
  readonly courant: CourantFigures | null;
  readonly outside: {
    readonly inside: number;
    readonly nearest: number;
    readonly extrapolated: number;
    readonly constant: number;
  } | null;
  /** Net flux of the fluctuation through each named boundary, m3/s, with its area, m2. */
  readonly boundaries: readonly {
    readonly name: string;
    readonly area: number;
    readonly netFlux: number;
    /** Before control; null when it is not known. */
    readonly netFluxBefore: number | null;
  }[];
  /** Spectra and correlation lengths along periods with equally spaced cells. */
  readonly alongPeriods: readonly LineFigures[];
  readonly zones: readonly ZoneFigures[];
}

function volumeMean(values: Float64Array | undefined, volumes: Float64Array, volume: number): number | null {
  if (values === undefined) return null;
  let sum = 0;
  for (let c = 0; c < volumes.length; c += 1) sum += (volumes[c] as number) * (values[c] as number);
  return sum / volume;
}

/**
 * Courant number per second of every cell: half the sum of the absolute face fluxes, face velocity averaged of both
 * cells, over the volume. On a brick this is |u|/dx + |v|/dy + |w|/dz.
 */
export function courantRates(mesh: CellMesh, geometry: MeshGeometry, velocity: Float64Array): Float64Array {
  const rates = new Float64Array(mesh.cellCount);
  const { faceAreas, cellVolumes } = geometry;
  for (let f = 0; f < mesh.faceCount; f += 1) {
    const p = mesh.owner[f] as number;
    const n = f < mesh.innerFaceCount ? (mesh.neighbour[f] as number) : p;
    let flux = 0;
    for (let c = 0; c < 3; c += 1) {
      flux +=
        0.5 * (faceAreas[3 * f + c] as number) * ((velocity[3 * p + c] as number) + (velocity[3 * n + c] as number));
    }
    const half = Math.abs(flux) / 2;
    rates[p] = (rates[p] as number) + half;
    if (n !== p) rates[n] = (rates[n] as number) + half;
  }
  for (let c = 0; c < rates.length; c += 1) rates[c] = (rates[c] as number) / (cellVolumes[c] as number);
  return rates;
}

function courantFigures(rates: Float64Array, timeStep: number | undefined): CourantFigures | null {
  if (timeStep === undefined) return null;
  const sorted = Float64Array.from(rates).sort();
  const mean = sorted.reduce((sum, rate) => sum + rate, 0) / sorted.length;
  return {
    timeStep,
    mean: mean * timeStep,
    p99: (sorted[Math.floor(0.99 * (sorted.length - 1))] as number) * timeStep,
    max: (sorted.at(-1) ?? 0) * timeStep,
  };
}

interface Moments {
  readonly covariance: readonly [number, number, number, number, number, number];
  readonly skewness: readonly [number, number, number];
  readonly flatness: readonly [number, number, number];
}

/** Products, third and fourth moments of the fluctuation about zero: its mean is meant to be zero. */
function moments(u: Float64Array, volumes: Float64Array, volume: number): Moments {
  const second = [0, 0, 0, 0, 0, 0];
  const third = [0, 0, 0];
  const fourth = [0, 0, 0];
  for (let c = 0; c < volumes.length; c += 1) {
    const v = volumes[c] as number;
    let at = 0;
    for (let i = 0; i < 3; i += 1) {
      const a = u[3 * c + i] as number;
      for (let j = i; j < 3; j += 1) {
        second[at] = (second[at] as number) + v * a * (u[3 * c + j] as number);
        at += 1;
      }
      third[i] = (third[i] as number) + v * a * a * a;
      fourth[i] = (fourth[i] as number) + v * a * a * a * a;
    }
  }
  const normal = [0, 3, 5].map((place) => (second[place] as number) / volume);
  const ratio = (sum: number, i: number, power: number): number => {
    const variance = normal[i] as number;
    return variance > 0 ? sum / volume / variance ** power : 0;
  };
  return {
    covariance: second.map((sum) => sum / volume) as unknown as Moments['covariance'],
    skewness: third.map((sum, i) => ratio(sum, i, 1.5)) as unknown as Moments['skewness'],
    flatness: fourth.map((sum, i) => ratio(sum, i, 2)) as unknown as Moments['flatness'],
  };
}

function lessMean(velocity: Float64Array, volumes: Float64Array, volume: number): Float64Array {
  const out = velocity.slice();
  for (let i = 0; i < 3; i += 1) {
    let sum = 0;
    for (let c = 0; c < volumes.length; c += 1) sum += (volumes[c] as number) * (velocity[3 * c + i] as number);
    for (let c = 0; c < volumes.length; c += 1) out[3 * c + i] = (out[3 * c + i] as number) - sum / volume;
  }
  return out;
}

function tensorMean(values: Float64Array, volumes: Float64Array, volume: number): number[] {
  const sum = new Array<number>(6).fill(0);
  for (let c = 0; c < volumes.length; c += 1) {
    for (let i = 0; i < 6; i += 1) sum[i] = (sum[i] as number) + (volumes[c] as number) * (values[6 * c + i] as number);
  }
  return sum.map((s) => s / volume);
}

/** Net outward flux through boundary faces, each with the velocity of its cell. */
function fluxThrough(mesh: CellMesh, geometry: MeshGeometry, faces: Int32Array, u: Float64Array): number {
  let flux = 0;
  for (const face of faces) {
    const cell = mesh.owner[face] as number;
    for (let c = 0; c < 3; c += 1) flux += (geometry.faceAreas[3 * face + c] as number) * (u[3 * cell + c] as number);
  }
  return flux;
}

/**
 * Measures a velocity field on its mesh.
 *
 * @returns figures with the keys of the audit's JSON; null where the file holds too little to say
 */
export function auditField(input: AuditInput): AuditFigures {
  const { mesh, geometry, velocity } = input;
  const volumes = geometry.cellVolumes;
  const volume = volumes.reduce((sum, v) => sum + v, 0);
  const u = input.fluctuation ?? lessMean(velocity, volumes, volume);
  const measured = moments(u, volumes, volume);
  const [xx, , , yy, , zz] = measured.covariance;
  let fastest = 0;
  for (let c = 0; c < volumes.length; c += 1) {
    const speed = Math.hypot(velocity[3 * c] as number, velocity[3 * c + 1] as number, velocity[3 * c + 2] as number);
    if (speed > fastest) fastest = speed;
  }
  const rates = courantRates(mesh, geometry, velocity);
  const largestRate = rates.reduce((most, rate) => Math.max(most, rate), 0);
  const counts = [0, 0, 0, 0];
  for (const code of input.outside ?? []) counts[code] = (counts[code] ?? 0) + 1;
  const [inside = 0, nearest = 0, extrapolated = 0, constant = 0] = counts;
  return {
    cells: mesh.cellCount,
    volume,
    energy: {
      wanted: volumeMean(input.wanted, volumes, volume),
      resolvable: volumeMean(input.resolvable, volumes, volume),
      recovered: (xx + yy + zz) / 2,
      modelled: volumeMean(input.modelled, volumes, volume),
    },
    divergence: {
      before: input.divergenceBefore ?? null,
      after: input.divergenceAfter,
      operator: input.operator ?? 'interpolated faces, weights by distance',
    },
    projectionLoss: input.projectionLoss ?? null,
    ...measured,
    covarianceWanted: input.covarianceWanted === undefined ? null : tensorMean(input.covarianceWanted, volumes, volume),
    velocityMax: fastest,
    fluctuationRms: componentRms(u, volumes),
    timeStepForCourantOne: largestRate > 0 ? 1 / largestRate : null,
    courant: courantFigures(rates, input.timeStep),
    outside: input.outside === undefined ? null : { inside, nearest, extrapolated, constant },
    boundaries: mesh.patches.map((patch) => {
      let area = 0;
      for (const face of patch.faces) area += Math.hypot(...geometry.faceAreas.subarray(3 * face, 3 * face + 3));
      const before = input.fluctuationBefore;
      return {
        name: patch.name,
        area,
        netFlux: fluxThrough(mesh, geometry, patch.faces, u),
        netFluxBefore: before === undefined ? null : fluxThrough(mesh, geometry, patch.faces, before),
      };
    }),
    alongPeriods: lineFigures(mesh, geometry, input.periodic, u),
    zones: input.zones === undefined ? [] : zoneFigures(input.zones, { ...input, volumes, fluctuation: u }),
  };
}
