import type { ResolutionFields, ResolutionInput, ResolutionSummary } from './resolution.js';
import { summariseResolution } from './resolution.js';

/** A box of the target and its figures. */
export interface Region {
  readonly low: readonly [number, number, number];
  readonly high: readonly [number, number, number];
  /** Part of the whole turbulent energy below the wanted share that is missing in this box, 0 to 1. */
  readonly deficitShare: number;
  readonly summary: ResolutionSummary;
}

/** Bounding box of interleaved points. */
export function boundsOf(points: Float64Array): { low: [number, number, number]; high: [number, number, number] } {
  const low: [number, number, number] = [Infinity, Infinity, Infinity];
  const high: [number, number, number] = [-Infinity, -Infinity, -Infinity];
  for (let i = 0; i < points.length; i += 3) {
    for (let a = 0; a < 3; a++) {
      const x = points[i + a] as number;
      if (x < (low[a] as number)) low[a] = x;
      if (x > (high[a] as number)) high[a] = x;
    }
  }
  return { low, high };
}

/**
 * Cuts the bounding box of the cell centres into boxes of about equal sides and lists those that miss most of the wanted
 * energy, worst first. Boxes that reach the wanted share in the energy-weighted mean are not listed.
 *
 * @param centroids  3 x n, metres
 * @param divisions  boxes along the longest side
 */
export function worstRegions(
  input: ResolutionInput,
  fields: ResolutionFields,
  centroids: Float64Array,
  count = 6,
  divisions = 6,
): readonly Region[] {
  const n = input.volumes.length;
  if (n === 0) return [];
  const wanted = input.wantedShare ?? 0.8;
  const { low, high } = boundsOf(centroids);
  const sides = [0, 1, 2].map((a) => (high[a] as number) - (low[a] as number));
  const longest = Math.max(...sides);
  const parts = sides.map((side) => Math.max(1, Math.round((divisions * side) / longest) || 1));
  const boxOf = new Int32Array(n);
  const deficit = new Float64Array((parts[0] as number) * (parts[1] as number) * (parts[2] as number));
  let total = 0;
  for (let i = 0; i < n; i++) {
    let box = 0;
    for (let a = 2; a >= 0; a--) {
      const side = sides[a] as number;
      const many = parts[a] as number;
      const at = side > 0 ? Math.floor((((centroids[3 * i + a] as number) - (low[a] as number)) / side) * many) : 0;
      box = box * many + Math.min(many - 1, Math.max(0, at));
    }
    boxOf[i] = box;
    if (fields.quiet[i] === 1) continue;
    const missing = wanted - (fields.share[i] as number);
    if (missing <= 0) continue;
    const energy = missing * (input.k[i] as number) * (input.volumes[i] as number);
    deficit[box] = (deficit[box] as number) + energy;
    total += energy;
  }
  const order = Array.from(deficit.keys())
    .filter((box) => (deficit[box] as number) > 0)
    .sort((a, b) => (deficit[b] as number) - (deficit[a] as number) || a - b);
  const regions: Region[] = [];
  for (const box of order) {
    if (regions.length >= count) break;
    const summary = summariseResolution(input, fields, boxOf, box);
    if (summary.meanShare >= wanted) continue;
    const index = [
      box % (parts[0] as number),
      Math.floor(box / (parts[0] as number)) % (parts[1] as number),
      Math.floor(box / ((parts[0] as number) * (parts[1] as number))),
    ];
    const corner = (shift: number): [number, number, number] =>
      [0, 1, 2].map(
        (a) => (low[a] as number) + (((index[a] as number) + shift) * (sides[a] as number)) / (parts[a] as number),
      ) as [number, number, number];
    regions.push({ low: corner(0), high: corner(1), deficitShare: (deficit[box] as number) / total, summary });
  }
  return regions;
}
