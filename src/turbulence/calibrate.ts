import { latticeFrame } from './lattice.js';
import { type Calibration, type EnergySums, fitMultiplier } from './multiplier.js';
import type { MultiplierField } from './multiplier-field.js';
import type { FluctuationPlan } from './plan.js';

export interface CalibrationInput {
  readonly plan: FluctuationPlan;
  /** A0 and u0 of the finished sum, 3 x cells. */
  readonly potential: Float64Array;
  readonly velocity: Float64Array;
  /** cells, m3. */
  readonly volumes: Float64Array;
  /** Periodic translations of the mesh. */
  readonly periods: readonly (readonly [number, number, number])[];
  /** cells, m: L11. */
  readonly integralScale: Float64Array;
  /** Size of a window in integral scales, where no direction is homogeneous. */
  readonly windowScales?: number;
}

interface Axis {
  readonly direction: readonly [number, number, number];
  /** Period along it, 0 when it is not periodic. */
  readonly period: number;
}

/** Boxes along every axis of a window: the sums are taken in these. */
const boxesPerWindow = 4;
/** Relative spread of the wanted energy within a layer below which its directions count as homogeneous. */
const evenSpread = 0.1;

/** Directions on which the statistics depend when all periodic ones of `homogeneous` do not count. */
function freeAxes(periods: CalibrationInput['periods'], homogeneous: readonly boolean[]): Axis[] {
  const frame = latticeFrame(periods);
  return frame.axes
    .map((direction, a) => ({ direction, period: a < periods.length ? Math.hypot(...periods[a]!) : 0, a }))
    .filter(({ a }) => a >= periods.length || !homogeneous[a])
    .map(({ direction, period }) => ({ direction, period }));
}

const coordinate = (c: Float64Array, i: number, d: readonly [number, number, number]): number =>
  c[3 * i]! * d[0] + c[3 * i + 1]! * d[1] + c[3 * i + 2]! * d[2];

/** Layers of cells across one axis: a new one begins where three quarters of the local cell width are passed. */
function layersOf(plan: FluctuationPlan, axis: Axis): { of: Int32Array; count: number } {
  const n = plan.cells;
  const s = Float64Array.from({ length: n }, (_, i) => coordinate(plan.centroids, i, axis.direction));
  const order = new Uint32Array(n).map((_, i) => i).sort((a, b) => s[a]! - s[b]!);
  const of = new Int32Array(n);
  const [x, y, z] = axis.direction;
  let layer = -1;
  let limit = -Infinity;
  for (const i of order) {
    if (s[i]! > limit) {
      layer++;
      const h = plan.parameters;
      const at = plan.columns * i + 3;
      const width2 =
        h[at]! * x * x +
        h[at + 3]! * y * y +
        h[at + 5]! * z * z +
        2 * (h[at + 1]! * x * y + h[at + 2]! * x * z + h[at + 4]! * y * z);
      limit = s[i]! + 0.75 * Math.sqrt(width2);
    }
    of[i] = layer;
  }
  return { of, count: layer + 1 };
}

function sumInto(input: CalibrationInput, boxOf: (cell: number) => number, boxes: number): EnergySums {
  const { potential: a, velocity: u, volumes, plan } = input;
  const middle = new Float64Array(3 * boxes);
  const volume = new Float64Array(boxes);
  const p = new Float64Array(boxes);
  const q = new Float64Array(3 * boxes);
  const t = new Float64Array(6 * boxes);
  const wanted = new Float64Array(boxes);
  for (let i = 0; i < plan.cells; i++) {
    const b = boxOf(i);
    const v = volumes[i]!;
    const ax = a[3 * i]!;
    const ay = a[3 * i + 1]!;
    const az = a[3 * i + 2]!;
    const ux = u[3 * i]!;
    const uy = u[3 * i + 1]!;
    const uz = u[3 * i + 2]!;
    volume[b]! += v;
    for (let c = 0; c < 3; c++) middle[3 * b + c]! += v * plan.centroids[3 * i + c]!;
    p[b]! += 0.5 * v * (ux * ux + uy * uy + uz * uz);
    q[3 * b]! += v * (ay * uz - az * uy);
    q[3 * b + 1]! += v * (az * ux - ax * uz);
    q[3 * b + 2]! += v * (ax * uy - ay * ux);
    t[6 * b]! += 0.5 * v * (ay * ay + az * az);
    t[6 * b + 1]! -= 0.5 * v * ax * ay;
    t[6 * b + 2]! -= 0.5 * v * ax * az;
    t[6 * b + 3]! += 0.5 * v * (ax * ax + az * az);
    t[6 * b + 4]! -= 0.5 * v * ay * az;
    t[6 * b + 5]! += 0.5 * v * (ax * ax + ay * ay);
    wanted[b]! += v * plan.wanted[i]!;
  }
  for (let b = 0; b < boxes; b++) for (let c = 0; c < 3; c++) if (volume[b]! > 0) middle[3 * b + c]! /= volume[b]!;
  return { boxes, middle, p, q, t, wanted };
}

const emptyField = (kind: MultiplierField['kind'], unknowns: number): MultiplierField => ({
  kind,
  axes: new Float64Array(0),
  knots: new Float64Array(0),
  origin: new Float64Array(0),
  spacing: new Float64Array(0),
  counts: new Int32Array(0),
  wrapped: new Uint8Array(0),
  values: new Float64Array(unknowns),
});

function inLayers(input: CalibrationInput, axis: Axis): Calibration {
  const { of, count } = layersOf(input.plan, axis);
  const sums = sumInto(input, (i) => of[i]!, count);
  const knots = Float64Array.from({ length: count }, (_, b) => coordinate(sums.middle, b, axis.direction));
  return fitMultiplier({ ...emptyField('layers', count), axes: Float64Array.from(axis.direction), knots }, sums);
}

/** Energy-weighted mean integral scale and width of the cells. */
function typicalLengths(input: CalibrationInput): { scale: number; width: number } {
  let scale = 0;
  let energy = 0;
  let width = 0;
  let volume = 0;
  const { plan, volumes, integralScale } = input;
  for (let i = 0; i < plan.cells; i++) {
    const e = plan.wanted[i]! * volumes[i]!;
    if (e > 0 && integralScale[i]! < Infinity) {
      scale += e * integralScale[i]!;
      energy += e;
    }
    width += volumes[i]! * Math.cbrt(volumes[i]!);
    volume += volumes[i]!;
  }
  return { scale: energy > 0 ? scale / energy : 0, width: width / volume };
}

function inWindows(input: CalibrationInput, axes: readonly Axis[]): Calibration {
  const { plan } = input;
  const { scale, width } = typicalLengths(input);
  const wanted = Math.max((input.windowScales ?? 4) * scale, boxesPerWindow * width);
  const dimensions = axes.length;
  const origin = new Float64Array(dimensions);
  const spacing = new Float64Array(dimensions);
  const counts = new Int32Array(dimensions);
  const wrapped = new Uint8Array(dimensions);
  const boxCounts = new Int32Array(dimensions);
  axes.forEach((axis, d) => {
    let low = Infinity;
    let high = -Infinity;
    for (let i = 0; i < plan.cells; i++) {
      const s = coordinate(plan.centroids, i, axis.direction);
      low = Math.min(low, s);
      high = Math.max(high, s);
    }
    const extent = axis.period > 0 ? axis.period : Math.max(high - low, 1e-300);
    const pieces = Math.max(axis.period > 0 ? 3 : 1, Math.round(extent / wanted));
    origin[d] = low;
    spacing[d] = extent / pieces;
    counts[d] = axis.period > 0 ? pieces : pieces + 2;
    wrapped[d] = axis.period > 0 ? 1 : 0;
    boxCounts[d] = pieces * boxesPerWindow;
  });
  const boxes = boxCounts.reduce((a, b) => a * b, 1);
  const boxOf = (i: number): number => {
    let at = 0;
    let stride = 1;
    for (let d = 0; d < dimensions; d++) {
      const n = boxCounts[d]!;
      const u = ((coordinate(plan.centroids, i, axes[d]!.direction) - origin[d]!) / spacing[d]!) * boxesPerWindow;
      at += stride * Math.min(n - 1, Math.max(0, Math.floor(u)));
      stride *= n;
    }
    return at;
  };
  const all = sumInto(input, boxOf, boxes);
  const unknowns = counts.reduce((a, b) => a * b, 1);
  const field = {
    ...emptyField('windows', unknowns),
    axes: Float64Array.from(axes.flatMap((axis) => [...axis.direction])),
    origin,
    spacing,
    counts,
    wrapped,
  };
  const { sums, kept } = onlyFilled(all);
  const windowOf = kept.map((box) => {
    let at = 0;
    let stride = 1;
    let rest = box;
    for (let d = 0; d < dimensions; d++) {
      at += stride * Math.floor((rest % boxCounts[d]!) / boxesPerWindow);
      stride *= boxCounts[d]! / boxesPerWindow;
      rest = Math.floor(rest / boxCounts[d]!);
    }
    return at;
  });
  return fitMultiplier(field, sums, windowOf);
}

/** Boxes that hold cells; a box in a solid corner has no middle. */
function onlyFilled(sums: EnergySums): { sums: EnergySums; kept: Int32Array } {
  const keep: number[] = [];
  for (let b = 0; b < sums.boxes; b++) if (sums.wanted[b]! > 0 || sums.p[b]! > 0) keep.push(b);
  const pick = (values: Float64Array, width: number): Float64Array => {
    const out = new Float64Array(width * keep.length);
    keep.forEach((b, i) => {
      out.set(values.subarray(width * b, width * (b + 1)), width * i);
    });
    return out;
  };
  const filled = {
    boxes: keep.length,
    middle: pick(sums.middle, 3),
    p: pick(sums.p, 1),
    q: pick(sums.q, 3),
    t: pick(sums.t, 6),
    wanted: pick(sums.wanted, 1),
  };
  return { sums: filled, kept: Int32Array.from(keep) };
}

/** Relative spread of the wanted energy within layers (or over everything) of the directions that remain free. */
function spreadWithin(input: CalibrationInput, axes: readonly Axis[]): number {
  const { plan, volumes } = input;
  let of: ArrayLike<number> = new Uint8Array(plan.cells);
  let count = 1;
  if (axes.length === 1) ({ of, count } = layersOf(plan, axes[0]!));
  const volume = new Float64Array(count);
  const first = new Float64Array(count);
  const second = new Float64Array(count);
  for (let i = 0; i < plan.cells; i++) {
    const b = of[i]!;
    volume[b]! += volumes[i]!;
    first[b]! += volumes[i]! * plan.wanted[i]!;
    second[b]! += volumes[i]! * plan.wanted[i]! ** 2;
  }
  let spread = 0;
  let weight = 0;
  for (let b = 0; b < count; b++) {
    const mean = first[b]! / volume[b]!;
    if (!(mean > 0)) continue;
    const variance = Math.max(0, second[b]! / volume[b]! - mean * mean);
    spread += first[b]! * (Math.sqrt(variance) / mean);
    weight += first[b]!;
  }
  return weight > 0 ? spread / weight : 0;
}

/**
 * The multiplier of the potential for this realisation: c(x) with u = c u0 + grad c x A0, solenoidal for any smooth c,
 * such that the energy of u averaged over the homogeneous directions is the wanted one.
 *
 * Periodic directions count as homogeneous when the wanted energy does not vary along them (10 % within layers). Two
 * homogeneous directions: c is a function of the third, one value a layer of cells. Three: a constant. Fewer: quadratic
 * B-splines over windows of several L11 in the remaining directions.
 *
 * Apply the result with `applyMultiplierRange`.
 */
export function calibrate(input: CalibrationInput): Calibration & { readonly averagedOver: string } {
  const { periods } = input;
  const all = periods.map(() => true);
  const free = freeAxes(periods, all);
  if (free.length === 0 && spreadWithin(input, free) < evenSpread) {
    return {
      ...fitMultiplier(
        emptyField('constant', 1),
        sumInto(input, () => 0, 1),
      ),
      averagedOver: 'the whole box',
    };
  }
  if (free.length === 1 && free[0]!.period === 0 && spreadWithin(input, free) < evenSpread) {
    return { ...inLayers(input, free[0]!), averagedOver: 'planes of homogeneous directions' };
  }
  // One periodic direction counts as homogeneous; of two, the statistics were found to vary along at least one.
  const homogeneous = periods.map((_, i) => periods.length === 1 && i === 0);
  const axes = freeAxes(periods, homogeneous);
  return {
    ...inWindows(input, axes),
    averagedOver: `windows of ${input.windowScales ?? 4} integral scales`,
  };
}
