import { InputError } from '../basis/errors.js';
import type { CellMesh, MeshGeometry } from '../mesh/cell-mesh.js';
import { quantiles } from './histogram.js';
import { boundsOf } from './regions.js';
import { timeForMeanError, timeForVarianceError } from './signal/statistics.js';

/**
 * Courant number per second of time step, (1 / 2V) sum |u . S_f| over a cell's faces: sum |u_i| / width_i for a brick.
 *
 * @param velocity  3 x cells, m/s
 * @returns cells, 1/s
 */
export function courantRates(mesh: CellMesh, geometry: MeshGeometry, velocity: Float64Array): Float64Array {
  const rates = new Float64Array(mesh.cellCount);
  for (let face = 0; face < mesh.faceCount; face++) {
    const f = 3 * face;
    const sx = geometry.faceAreas[f] as number;
    const sy = geometry.faceAreas[f + 1] as number;
    const sz = geometry.faceAreas[f + 2] as number;
    const count = face < mesh.innerFaceCount ? 2 : 1;
    for (let side = 0; side < count; side++) {
      const cell = (side === 0 ? mesh.owner[face] : mesh.neighbour[face]) as number;
      const c = 3 * cell;
      const flux = (velocity[c] as number) * sx + (velocity[c + 1] as number) * sy + (velocity[c + 2] as number) * sz;
      rates[cell] = (rates[cell] as number) + Math.abs(flux);
    }
  }
  for (let cell = 0; cell < mesh.cellCount; cell++) {
    rates[cell] = (rates[cell] as number) / (2 * (geometry.cellVolumes[cell] as number));
  }
  return rates;
}

/**
 * Standard deviation of the Courant number per second that isotropic fluctuations of energy k add,
 * sqrt(2k / 3) sqrt(sum 1 / width_i^2); the sum is the trace of the inverse width tensor.
 */
export function fluctuationRates(widthTensors: Float64Array, k: Float64Array): Float64Array {
  const rates = new Float64Array(k.length);
  for (let i = 0; i < k.length; i++) {
    const t = 6 * i;
    const xx = widthTensors[t] as number;
    const xy = widthTensors[t + 1] as number;
    const xz = widthTensors[t + 2] as number;
    const yy = widthTensors[t + 3] as number;
    const yz = widthTensors[t + 4] as number;
    const zz = widthTensors[t + 5] as number;
    const determinant = xx * (yy * zz - yz * yz) - xy * (xy * zz - yz * xz) + xz * (xy * yz - yy * xz);
    const minors = yy * zz - yz * yz + (xx * zz - xz * xz) + (xx * yy - xy * xy);
    rates[i] = Math.sqrt(((2 / 3) * (k[i] as number) * minors) / determinant);
  }
  return rates;
}

export interface RunPlanInput {
  /** cells, 1/s: Courant number per second of the mean velocity, or of the started field itself. */
  readonly rates: Float64Array;
  /** cells, 1/s: standard deviation by fluctuations that `rates` does not hold yet. */
  readonly fluctuationRates?: Float64Array;
  readonly centroids: Float64Array;
  readonly volumes: Float64Array;
  /** 3 x cells, m/s. */
  readonly velocity: Float64Array;
  readonly k: Float64Array;
  readonly epsilon: Float64Array;
  /** Largest and 99th-percentile Courant number wanted; 0.8 and 0.5 by default (common practice: at most 0.5 to 1). */
  readonly courantMax?: number;
  readonly courantP99?: number;
  /** Standard error wanted of the mean velocity, relative to the local mean speed; default 0.01. */
  readonly meanError?: number;
  /** Relative standard error wanted of variances; default 0.05. */
  readonly varianceError?: number;
  /** Transient to discard: the longer of these numbers of flow-throughs and turnovers; 2 and 5 (common practice). */
  readonly transientFlowThroughs?: number;
  readonly transientTurnovers?: number;
  readonly secondsPerStep?: number;
}

export interface RunPlan {
  readonly timeStep: number;
  /** Which of the two limits decided. */
  readonly timeStepBy: 'largest' | '99th percentile';
  /** Courant numbers at that time step, fluctuations at three standard deviations where they are estimated. */
  readonly courantMax: number;
  readonly courantP99: number;
  readonly bulkSpeed: number;
  readonly bulkDirection: readonly [number, number, number];
  readonly flowThroughTime: number;
  /** Energy-weighted k / epsilon, s. */
  readonly turnoverTime: number;
  /** Energy-weighted integral time at a fixed point, L11 / speed, s. */
  readonly integralTime: number;
  readonly transient: number;
  readonly averagingForMean: number;
  readonly averagingForVariance: number;
  readonly averaging: number;
  readonly steps: number;
  readonly costHours?: number;
  readonly assumptions: readonly string[];
}

/** L11 / L of a high-Reynolds-number spectrum (Pope 2000, figure 6.24). */
const longitudinal = 0.43;

/**
 * Time step, length of the transient, averaging time and cost.
 *
 * @throws InputError when nothing moves or a wanted number is not positive
 * @see Tennekes & Lumley 1972, section 6.4 (error^2 = 2 T_int / T)
 */
export function planRun(input: RunPlanInput): RunPlan {
  const wantMax = input.courantMax ?? 0.8;
  const wantP99 = input.courantP99 ?? 0.5;
  const meanError = input.meanError ?? 0.01;
  const varianceError = input.varianceError ?? 0.05;
  for (const [place, value] of Object.entries({ courantMax: wantMax, courantP99: wantP99, meanError, varianceError })) {
    if (!(value > 0)) throw new InputError({ place, cause: `${value} was given`, remedy: 'give a number above zero' });
  }
  const n = input.volumes.length;
  const gust = input.fluctuationRates;
  const total =
    gust === undefined ? input.rates : Float64Array.from(input.rates, (rate, i) => rate + 3 * (gust[i] as number));
  let largest = 0;
  for (const rate of total) if (rate > largest) largest = rate;
  if (!(largest > 0)) throw new InputError({ cause: 'the velocity is zero everywhere', remedy: 'check Velocity' });
  const p99 = quantiles(total, [0.99])[0] as number;
  const byMax = wantMax / largest;
  const byP99 = p99 > 0 ? wantP99 / p99 : Number.POSITIVE_INFINITY;
  const timeStep = Math.min(byMax, byP99);

  let volume = 0;
  const bulk: [number, number, number] = [0, 0, 0];
  let energy = 0;
  let turnoverSum = 0;
  let integralSum = 0;
  let intensitySum = 0;
  for (let i = 0; i < n; i++) {
    const v = input.volumes[i] as number;
    volume += v;
    let speed2 = 0;
    for (let a = 0; a < 3; a++) {
      const u = input.velocity[3 * i + a] as number;
      bulk[a] = (bulk[a] as number) + v * u;
      speed2 += u * u;
    }
    const k = input.k[i] as number;
    const epsilon = input.epsilon[i] as number;
    if (!(k > 0 && epsilon > 0)) continue;
    const weight = v * k;
    // Eddies pass with the mean speed, or with their own where the mean stands still.
    const passing = Math.sqrt(speed2 + (2 / 3) * k);
    energy += weight;
    turnoverSum += (weight * k) / epsilon;
    integralSum += (weight * longitudinal * k ** 1.5) / (epsilon * passing);
    intensitySum += (weight * ((2 / 3) * k)) / (passing * passing);
  }
  const bulkSpeed = Math.hypot(...bulk) / volume;
  const size = Math.hypot(...bulk);
  const direction = (size > 0 ? bulk.map((x) => x / size) : [0, 0, 0]) as [number, number, number];
  const { low, high } = boundsOf(input.centroids);
  const span = direction.reduce((sum, d, a) => sum + Math.abs(d) * ((high[a] as number) - (low[a] as number)), 0);
  const flowThroughTime = bulkSpeed > 0 ? span / bulkSpeed : Number.NaN;
  const turnoverTime = energy > 0 ? turnoverSum / energy : Number.NaN;
  const integralTime = energy > 0 ? integralSum / energy : Number.NaN;
  const flowThroughs = input.transientFlowThroughs ?? 2;
  const turnovers = input.transientTurnovers ?? 5;
  const transient = Math.max(
    Number.isNaN(flowThroughTime) ? 0 : flowThroughs * flowThroughTime,
    Number.isNaN(turnoverTime) ? 0 : turnovers * turnoverTime,
  );
  const averagingForMean = energy > 0 ? timeForMeanError(intensitySum / energy, integralTime, meanError) : 0;
  const averagingForVariance = energy > 0 ? timeForVarianceError(integralTime, varianceError) : 0;
  const averaging = Math.max(averagingForMean, averagingForVariance);
  const steps = Math.ceil((transient + averaging) / timeStep);
  return {
    timeStep,
    timeStepBy: byMax <= byP99 ? 'largest' : '99th percentile',
    courantMax: largest * timeStep,
    courantP99: p99 * timeStep,
    bulkSpeed,
    bulkDirection: direction,
    flowThroughTime,
    turnoverTime,
    integralTime,
    transient,
    averagingForMean,
    averagingForVariance,
    averaging,
    steps,
    ...(input.secondsPerStep === undefined ? {} : { costHours: (steps * input.secondsPerStep) / 3600 }),
    assumptions: [
      gust === undefined
        ? 'Courant numbers are those of the velocity field itself.'
        : 'Courant numbers add three standard deviations of isotropic fluctuations of energy k to the mean velocity.',
      `The transient is the longer of ${flowThroughs} flow-through times and ${turnovers} turnover times k / epsilon (common practice).`,
      "Integral times are 0.43 L over the speed with which eddies pass a fixed point (Taylor's hypothesis; mean speed and turbulence together).",
      `Averaging times follow error^2 = 2 T_int / T (Tennekes & Lumley 1972) for errors of ${meanError} of the local speed in means and ${varianceError} in variances, at one point without spatial averaging.`,
    ],
  };
}
