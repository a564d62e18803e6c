import { type GradientOperator, gradientRange } from '../mesh/gradient.js';
import { type WallDistancePlan, wallDistanceRange } from '../mesh/wall-distance.js';
import { type CellLinearOutput, type CellLinearPlan, cellLinearRange } from '../transfer/cell-linear.js';
import { type PointLinearPlan, pointLinearRange } from '../transfer/cell-linear-points.js';
import { type CloudField, type CloudPlan, cloudTransferRange } from '../transfer/cloud.js';
import { type ConservativeOutput, type ConservativePlan, conservativeRange } from '../transfer/conservative.js';
import { expectedRange } from '../turbulence/compensate.js';
import { applyMultiplierRange, type MultiplierField } from '../turbulence/multiplier-field.js';
import type { FluctuationPlan } from '../turbulence/plan.js';
import { type SynthesisOutput, synthesiseRange } from '../turbulence/synthesis.js';
import { weighRange } from '../turbulence/weights.js';

/** Payloads of the range tasks, by name. Plain data: they travel to threads. */
export interface TaskPayloads {
  readonly cloud: {
    readonly plan: CloudPlan;
    readonly fields: readonly CloudField[];
    readonly targets: Float64Array;
    readonly out: CellLinearOutput;
  };
  readonly cells: { readonly plan: CellLinearPlan; readonly targets: Float64Array; readonly out: CellLinearOutput };
  readonly points: { readonly plan: PointLinearPlan; readonly targets: Float64Array; readonly out: CellLinearOutput };
  readonly conservative: { readonly plan: ConservativePlan; readonly out: ConservativeOutput };
  readonly wallDistance: { readonly plan: WallDistancePlan; readonly out: Float64Array };
  readonly gradient: {
    readonly operator: GradientOperator;
    readonly values: Float64Array;
    readonly components: number;
    readonly out: Float64Array;
  };
  readonly weigh: { readonly plan: FluctuationPlan };
  readonly expect: { readonly plan: FluctuationPlan; readonly out: Float32Array };
  readonly synthesise: { readonly plan: FluctuationPlan; readonly out: SynthesisOutput };
  readonly multiply: {
    readonly field: MultiplierField;
    readonly centroids: Float64Array;
    readonly out: SynthesisOutput;
  };
}

export type TaskName = keyof TaskPayloads;
export type TaskPayload<N extends TaskName> = TaskPayloads[N];

type RangeWork = { readonly [N in TaskName]: (payload: TaskPayload<N>, begin: number, end: number) => void };

const work: RangeWork = {
  cloud: ({ plan, fields, targets, out }, begin, end) => cloudTransferRange(plan, fields, targets, begin, end, out),
  cells: ({ plan, targets, out }, begin, end) => cellLinearRange(plan, targets, begin, end, out),
  points: ({ plan, targets, out }, begin, end) => pointLinearRange(plan, targets, begin, end, out),
  conservative: ({ plan, out }, begin, end) => conservativeRange(plan, begin, end, out),
  wallDistance: ({ plan, out }, begin, end) => wallDistanceRange(plan, begin, end, out),
  gradient: ({ operator, values, components, out }, begin, end) =>
    gradientRange(operator, values, components, begin, end, out),
  weigh: ({ plan }, begin, end) => weighRange(plan, begin, end),
  expect: ({ plan, out }, begin, end) => expectedRange(plan, begin, end, out),
  synthesise: ({ plan, out }, begin, end) => synthesiseRange(plan, begin, end, out),
  multiply: ({ field, centroids, out }, begin, end) =>
    applyMultiplierRange(field, centroids, out.potential, out.velocity, begin, end),
};

/** One range of one task, as it is sent to a thread. */
export interface RangeTask<N extends TaskName = TaskName> {
  readonly task: N;
  readonly payload: TaskPayload<N>;
  readonly begin: number;
  readonly end: number;
}

/** Does one range; results lie in the payload's shared output arrays. */
export async function runTask<N extends TaskName>({ task, payload, begin, end }: RangeTask<N>): Promise<void> {
  work[task](payload, begin, end);
}
