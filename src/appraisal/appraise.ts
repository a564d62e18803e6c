import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';
import { applyGradient, createGradient } from '../mesh/gradient.js';
import { wallDistance } from '../mesh/wall-distance.js';
import { comparePrecursors, type PrecursorComparison } from './comparison.js';
import { type Histogram, quantiles, weightedHistogram, weightedQuantile } from './histogram.js';
import { homogeneousAxes, middleCells } from './homogeneous.js';
import { type Monitor, type MonitorOptions, planMonitors } from './monitors.js';
import { type Region, worstRegions } from './regions.js';
import {
  appraiseResolution,
  type ResolutionFields,
  type ResolutionInput,
  type ResolutionSummary,
  summariseResolution,
} from './resolution.js';
import { courantRates, fluctuationRates, planRun, type RunPlan, type RunPlanInput } from './run-plan.js';
import type { ShareSpectrum } from './share.js';
import { appraiseWalls, type WallSpacings, wallVerdict } from './walls.js';

/** Fields of one precursor on the cells of the target. */
export interface TurbulenceOnCells {
  /** cells, m2/s2 and m2/s3. */
  readonly k: Float64Array;
  readonly epsilon: Float64Array;
  readonly nu?: number | Float64Array;
}

export interface AppraisalInput extends TurbulenceOnCells {
  readonly mesh: CellMesh;
  readonly geometry: MeshGeometry;
  readonly periodic?: PeriodicPairs;
  /** 3 x cells, mean velocity, m/s; without it no run plan, walls or monitors. */
  readonly velocity?: Float64Array;
  readonly wallFaces?: Int32Array;
  /** m: how deep the precursor's first values lie, see `precursorDepth`; default: the first cell's own depth. */
  readonly wallSamplingDistance?: number;
  /** cells, number of each cell's zone, and the zones' names. */
  readonly zones?: { readonly names: readonly string[]; readonly of: Int32Array };
  /** A second precursor on the same cells. */
  readonly second?: TurbulenceOnCells;
}

export interface AppraisalOptions {
  readonly wantedShare?: number;
  readonly spectrum?: ShareSpectrum;
  readonly regions?: number;
  readonly plan?: Pick<
    RunPlanInput,
    | 'courantMax'
    | 'courantP99'
    | 'meanError'
    | 'varianceError'
    | 'transientFlowThroughs'
    | 'transientTurnovers'
    | 'secondsPerStep'
  >;
  readonly monitors?: MonitorOptions;
}

/** Wall spacings in summary. */
export interface WallAppraisal {
  readonly spacings: WallSpacings;
  /** Median and 95th percentile by area. */
  readonly yPlus: readonly [number, number];
  readonly along: readonly [number, number];
  readonly across: readonly [number, number];
  readonly words: string;
  readonly yPlusHistogram: Histogram;
}

export interface Appraisal {
  readonly wantedShare: number;
  readonly fields: ResolutionFields;
  readonly summary: ResolutionSummary;
  readonly zones: readonly { readonly name: string; readonly summary: ResolutionSummary }[];
  readonly regions: readonly Region[];
  readonly gridRatioHistogram: Histogram;
  readonly shareHistogram: Histogram;
  readonly wall?: WallAppraisal;
  readonly wallDistance?: Float64Array;
  readonly plan?: RunPlan;
  readonly courantHistogram?: Histogram;
  readonly monitors?: readonly Monitor[];
  readonly second?: {
    readonly fields: ResolutionFields;
    readonly summary: ResolutionSummary;
    readonly gridRatioHistogram: Histogram;
    readonly shareHistogram: Histogram;
    readonly comparison: PrecursorComparison;
  };
}

function judge(turbulence: TurbulenceOnCells, volumes: Float64Array, options: AppraisalOptions) {
  const input: ResolutionInput = {
    volumes,
    k: turbulence.k,
    epsilon: turbulence.epsilon,
    ...(turbulence.nu === undefined ? {} : { nu: turbulence.nu }),
    ...(options.wantedShare === undefined ? {} : { wantedShare: options.wantedShare }),
    ...(options.spectrum === undefined ? {} : { spectrum: options.spectrum }),
  };
  const fields = appraiseResolution(input);
  return { input, fields, summary: summariseResolution(input, fields) };
}

/** Ratio histograms share their range, so that two precursors can be laid over each other. */
function histograms(fields: ResolutionFields, volumes: Float64Array, range: readonly [number, number] | undefined) {
  return {
    gridRatioHistogram: weightedHistogram(fields.gridRatio, volumes, {
      scale: 'log',
      ...(range === undefined ? {} : { range }),
    }),
    shareHistogram: weightedHistogram(fields.share, volumes, { range: [0, 1] }),
  };
}

function ratioRange(all: readonly ResolutionFields[]): readonly [number, number] | undefined {
  let low = Number.POSITIVE_INFINITY;
  let high = 0;
  for (const fields of all) {
    // A handful of stray cells must not set the scale.
    const [a, b] = quantiles(fields.gridRatio, [0.001, 0.999]) as [number, number];
    if (a > 0 && a < low) low = a;
    if (b > high) high = b;
  }
  return high > low ? [low, high] : undefined;
}

function judgeWalls(input: AppraisalInput): WallAppraisal | undefined {
  const { wallFaces, velocity, nu } = input;
  if (wallFaces === undefined || wallFaces.length === 0 || velocity === undefined || nu === undefined) return undefined;
  const spacings = appraiseWalls(input.mesh, input.geometry, wallFaces, velocity, nu, input.wallSamplingDistance);
  const pair = (values: Float64Array): readonly [number, number] => [
    weightedQuantile(values, spacings.areas, 0.5),
    weightedQuantile(values, spacings.areas, 0.95),
  ];
  const yPlus = pair(spacings.yPlus);
  const along = pair(spacings.alongPlus);
  const across = pair(spacings.acrossPlus);
  return {
    spacings,
    yPlus,
    along,
    across,
    words: wallVerdict(yPlus[1], along[1], across[1]),
    yPlusHistogram: weightedHistogram(spacings.yPlus, spacings.areas, { scale: 'log' }),
  };
}

/** Magnitude of the velocity gradient, 1/s. */
function shearRate(gradient: Float64Array): Float64Array {
  const rate = new Float64Array(gradient.length / 9);
  for (let i = 0; i < rate.length; i++) {
    let sum = 0;
    for (let c = 9 * i; c < 9 * i + 9; c++) sum += (gradient[c] as number) ** 2;
    rate[i] = Math.sqrt(sum);
  }
  return rate;
}

/**
 * The whole judgement of a target mesh by one or two precursors whose fields lie on its cells.
 *
 * @throws InputError for fields that are negative or not finite, or options out of range
 * @see appraiseResolution, appraiseWalls, planRun and planMonitors for the formulas and their sources
 */
export function appraiseTarget(input: AppraisalInput, options: AppraisalOptions = {}): Appraisal {
  const { mesh, geometry, velocity } = input;
  const volumes = geometry.cellVolumes;
  const first = judge(input, volumes, options);
  const second = input.second === undefined ? undefined : judge(input.second, volumes, options);
  const range = ratioRange(second === undefined ? [first.fields] : [first.fields, second.fields]);
  const distance =
    input.wallFaces === undefined || input.wallFaces.length === 0
      ? undefined
      : wallDistance(mesh, geometry, input.wallFaces, input.periodic);
  const wall = judgeWalls(input);
  const moving = velocity === undefined ? undefined : planMotion(input, velocity, first.fields, distance, options);
  return {
    wantedShare: options.wantedShare ?? 0.8,
    fields: first.fields,
    summary: first.summary,
    zones: (input.zones?.names ?? []).map((name, code) => ({
      name,
      summary: summariseResolution(first.input, first.fields, input.zones?.of, code),
    })),
    regions: worstRegions(first.input, first.fields, geometry.cellCentroids, options.regions ?? 6),
    ...histograms(first.fields, volumes, range),
    ...(wall === undefined ? {} : { wall }),
    ...(distance === undefined ? {} : { wallDistance: distance }),
    ...(moving ?? {}),
    ...(second === undefined
      ? {}
      : {
          second: {
            fields: second.fields,
            summary: second.summary,
            ...histograms(second.fields, volumes, range),
            comparison: comparePrecursors(first, second),
          },
        }),
  };
}

function planMotion(
  input: AppraisalInput,
  velocity: Float64Array,
  fields: ResolutionFields,
  distance: Float64Array | undefined,
  options: AppraisalOptions,
): { plan: RunPlan; courantHistogram: Histogram; monitors: readonly Monitor[] } {
  const { mesh, geometry, k, epsilon } = input;
  const rates = courantRates(mesh, geometry, velocity);
  const swing = fluctuationRates(geometry.widthTensors, k);
  const plan = planRun({
    ...options.plan,
    rates,
    fluctuationRates: swing,
    centroids: geometry.cellCentroids,
    volumes: geometry.cellVolumes,
    velocity,
    k,
    epsilon,
  });
  const courant = rates.map((rate, i) => (rate + 3 * (swing[i] as number)) * plan.timeStep);
  const gradient = applyGradient(createGradient(mesh, geometry, input.periodic), velocity, 3);
  // Where nothing varies along an axis across the flow, probes belong in the middle of it.
  const along = Math.max(...plan.bulkDirection.map(Math.abs));
  const speed = Float64Array.from({ length: mesh.cellCount }, (_, i) =>
    Math.hypot(velocity[3 * i] as number, velocity[3 * i + 1] as number, velocity[3 * i + 2] as number),
  );
  const still = homogeneousAxes(geometry, speed);
  const across = homogeneousAxes(geometry, k).filter(
    (axis) => still.includes(axis) && Math.abs(plan.bulkDirection[axis] as number) < 0.5 * along,
  );
  const monitors = planMonitors(
    {
      centroids: geometry.cellCentroids,
      velocity,
      k,
      epsilon,
      cellWidth: fields.cellWidth,
      shearRate: shearRate(gradient),
      ...(distance === undefined ? {} : { wallDistance: distance }),
      direction: plan.bulkDirection,
      ...(across.length === 0 ? {} : { eligible: middleCells(geometry, across) }),
    },
    options.monitors,
  );
  return { plan, courantHistogram: weightedHistogram(courant, undefined), monitors };
}
