import { type Field, sharedFloat64 } from '../basis/fields.js';
import { type CloudField, cloudTransferRange, prepareCloudTransfer } from '../transfer/cloud.js';
import type { PrecursorCloud } from './precursor.js';
import type { Target } from './target.js';

/** Names that vanish on a no-slip wall. */
const zeroAtWalls = new Set(['Velocity', 'TurbulentEnergyKinetic', 'VelocityCovariance']);

/** Share of a period that a cloud must span to count as one period of the flow. */
const spansPeriod = 0.9;
/** Width of the copied margins, share of the period. */
const periodicMargin = 0.1;

/**
 * The cloud with margins copied across the target's periodic directions, so that cells near the periodic planes lie
 * inside it. A direction counts when the cloud spans one period of it.
 */
export function withPeriodicMargins(cloud: PrecursorCloud, target: Target, assumptions: string[]): PrecursorCloud {
  let present = cloud;
  for (const period of target.periodic?.periods ?? []) {
    const axis = period.findIndex((value) => value !== 0);
    // Oblique periods are left to the cloud as it is.
    if (period.filter((value) => value !== 0).length !== 1) continue;
    const length = Math.abs(period[axis as 0]);
    const { points } = present;
    const count = points.length / 3;
    let low = Infinity;
    let high = -Infinity;
    for (let i = 0; i < count; i += 1) {
      const x = points[3 * i + axis] as number;
      if (x < low) low = x;
      if (x > high) high = x;
    }
    if (high - low < spansPeriod * length || high - low > length * (1 + 1e-6)) continue;
    const copies: [number, number][] = [];
    for (let i = 0; i < count; i += 1) {
      const x = points[3 * i + axis] as number;
      if (x - low <= periodicMargin * length && x + length > high) copies.push([i, length]);
      if (high - x <= periodicMargin * length && x - length < low) copies.push([i, -length]);
    }
    const grown = sharedFloat64(3 * (count + copies.length));
    grown.set(points);
    copies.forEach(([i, shift], j) => {
      grown.set(points.subarray(3 * i, 3 * i + 3), 3 * (count + j));
      grown[3 * (count + j) + axis] = (points[3 * i + axis] as number) + shift;
    });
    const fields = new Map<string, Field>();
    for (const [name, { components, values }] of present.fields) {
      const more = sharedFloat64((count + copies.length) * components);
      more.set(values);
      copies.forEach(([i], j) => {
        more.set(values.subarray(i * components, (i + 1) * components), (count + j) * components);
      });
      fields.set(name, { components, values: more });
    }
    present = { place: cloud.place, points: grown, fields };
    assumptions.push(`The precursor spans one period along ${'xyz'[axis]} and is taken as periodic there.`);
  }
  return present;
}

/** Part of a wall face's direction along an axis from which on the wall counts as normal to it. */
const alongNormal = 0.5;

/**
 * Wall places that add something to the cloud. Along constant axes many fall together, and a profile may hold its wall
 * points already. Places beyond the cloud in a direction along their wall are left out: the hull would span from wall to
 * wall there, without a point of the flow between.
 */
function newPlaces(
  cloud: PrecursorCloud,
  walls: { readonly points: Float64Array; readonly areas: Float64Array },
  constantAxes: readonly number[],
): Float64Array {
  const axes = [0, 1, 2].filter((axis) => !constantAxes.includes(axis));
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  const { points } = cloud;
  for (let i = 0; i < points.length; i += 1) {
    low[i % 3] = Math.min(low[i % 3] as number, points[i] as number);
    high[i % 3] = Math.max(high[i % 3] as number, points[i] as number);
  }
  const key = (places: Float64Array, i: number): string => axes.map((axis) => places[3 * i + axis]).join();
  const merges = constantAxes.length > 0;
  const seen = new Set<string>();
  for (let i = 0; merges && i < points.length / 3; i += 1) seen.add(key(points, i));
  const kept: number[] = [];
  for (let i = 0; i < walls.points.length / 3; i += 1) {
    const size = Math.hypot(...walls.areas.subarray(3 * i, 3 * i + 3));
    const isBeyond = axes.some((axis) => {
      const x = walls.points[3 * i + axis] as number;
      const along = Math.abs(walls.areas[3 * i + axis] as number) < alongNormal * size;
      return along && (x < (low[axis] as number) || x > (high[axis] as number));
    });
    if (isBeyond) continue;
    if (merges) {
      const place = key(walls.points, i);
      if (seen.has(place)) continue;
      seen.add(place);
    }
    for (let c = 0; c < 3; c += 1) kept.push(walls.points[3 * i + c] as number);
  }
  return Float64Array.from(kept);
}

/** The cloud with its walls: zero velocity and k there, other quantities from the nearest point. */
export function withWalls(
  cloud: PrecursorCloud,
  all: { readonly points: Float64Array; readonly areas: Float64Array },
  constantAxes: readonly number[],
): PrecursorCloud {
  const walls = newPlaces(cloud, all, constantAxes);
  if (walls.length === 0) return cloud;
  const extra = walls.length / 3;
  const count = cloud.points.length / 3;
  const points = sharedFloat64(3 * (count + extra));
  points.set(cloud.points);
  points.set(walls, 3 * count);
  const nearest = prepareCloudTransfer(cloud.points, { method: 'nearest', constantAxes });
  const others = [...cloud.fields].filter(([name]) => !zeroAtWalls.has(name));
  const values = others.map(([, field]) => new Float64Array(extra * field.components));
  cloudAt(
    nearest,
    others.map(([, field]) => field),
    walls,
    values,
  );
  const fields = new Map<string, Field>();
  for (const [name, field] of cloud.fields) {
    const grown = sharedFloat64((count + extra) * field.components);
    grown.set(field.values);
    const at = others.findIndex(([other]) => other === name);
    if (at >= 0) grown.set(values[at] as Float64Array, count * field.components);
    fields.set(name, { components: field.components, values: grown });
  }
  return { place: cloud.place, points, fields };
}

function cloudAt(
  plan: ReturnType<typeof prepareCloudTransfer>,
  fields: readonly CloudField[],
  targets: Float64Array,
  values: readonly Float64Array[],
): void {
  const n = targets.length / 3;
  cloudTransferRange(plan, fields, targets, 0, n, {
    fields: values,
    outside: new Uint8Array(n),
    distance: new Float64Array(n),
  });
}
