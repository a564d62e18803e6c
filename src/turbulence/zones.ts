import { InputError } from '../basis/errors.js';

type Vector = readonly [number, number, number];

/** Where fluctuations are seeded: whole inside, fading to nothing over `fade` outside. */
export type Zone =
  | { readonly kind: 'box'; readonly low: Vector; readonly high: Vector; readonly fade: number }
  | { readonly kind: 'sphere'; readonly centre: Vector; readonly radius: number; readonly fade: number }
  | {
      readonly kind: 'cylinder';
      readonly from: Vector;
      readonly to: Vector;
      readonly radius: number;
      readonly fade: number;
    }
  /** Closer than `within` to some boundary faces; `distance` holds the cells' distances from them, metres. */
  | { readonly kind: 'near'; readonly distance: Float64Array; readonly within: number; readonly fade: number }
  /** Further than `beyond` from some boundary faces. */
  | { readonly kind: 'far'; readonly distance: Float64Array; readonly beyond: number; readonly fade: number }
  /** Where a field is at least `above`; `fade` in the field's unit below that. */
  | { readonly kind: 'exceeds'; readonly values: Float64Array; readonly above: number; readonly fade: number };

/** Distance from a point to a zone, zero inside; in the field's unit for `exceeds`. */
function outside(zone: Zone, cell: number, x: number, y: number, z: number): number {
  switch (zone.kind) {
    case 'box': {
      const dx = Math.max(zone.low[0] - x, 0, x - zone.high[0]);
      const dy = Math.max(zone.low[1] - y, 0, y - zone.high[1]);
      const dz = Math.max(zone.low[2] - z, 0, z - zone.high[2]);
      return Math.hypot(dx, dy, dz);
    }
    case 'sphere':
      return Math.max(0, Math.hypot(x - zone.centre[0], y - zone.centre[1], z - zone.centre[2]) - zone.radius);
    case 'cylinder': {
      const axis = [zone.to[0] - zone.from[0], zone.to[1] - zone.from[1], zone.to[2] - zone.from[2]] as const;
      const length = Math.hypot(...axis);
      const d = [x - zone.from[0], y - zone.from[1], z - zone.from[2]] as const;
      const along = (d[0] * axis[0] + d[1] * axis[1] + d[2] * axis[2]) / length;
      const across = Math.sqrt(Math.max(0, d[0] ** 2 + d[1] ** 2 + d[2] ** 2 - along * along));
      return Math.hypot(Math.max(-along, 0, along - length), Math.max(0, across - zone.radius));
    }
    case 'near':
      return Math.max(0, zone.distance[cell]! - zone.within);
    case 'far':
      return Math.max(0, zone.beyond - zone.distance[cell]!);
    case 'exceeds':
      return Math.max(0, zone.above - zone.values[cell]!);
  }
}

/** 1 to 0 over t from 0 to 1 with two continuous derivatives. */
const fadeOut = (t: number): number => (t >= 1 ? 0 : 1 - t ** 3 * (10 + t * (6 * t - 15)));

/**
 * Amplitude of the seeding, 0 to 1, at the centres of cells: the largest over the zones, 1 without zones.
 *
 * @param centroids  3 x cells
 * @throws InputError when a fade is negative, or no cell lies in any zone
 */
export function zoneWeight(zones: readonly Zone[], centroids: Float64Array): Float64Array {
  const cells = centroids.length / 3;
  const weight = new Float64Array(cells);
  if (zones.length === 0) return weight.fill(1);
  zones.forEach((zone, index) => {
    if (!(zone.fade >= 0)) {
      throw new InputError({
        place: `fluctuations.zones[${index}].fade`,
        cause: `a fade of ${zone.fade} cannot be used`,
        remedy: 'give a distance of 0 or more',
      });
    }
    for (let i = 0; i < cells; i++) {
      const d = outside(zone, i, centroids[3 * i]!, centroids[3 * i + 1]!, centroids[3 * i + 2]!);
      const w = d === 0 ? 1 : zone.fade > 0 ? fadeOut(d / zone.fade) : 0;
      if (w > weight[i]!) weight[i] = w;
    }
  });
  if (!weight.some((w) => w > 0)) {
    throw new InputError({
      place: 'fluctuations.zones',
      cause: 'no cell of the target lies in any zone',
      remedy: 'check their coordinates (metres, target axes)',
    });
  }
  return weight;
}

/**
 * Ramp of the potential near walls, where k and the length do not go to zero by themselves: r(d / L11) with
 * r(t) = 15/8 t - 10/8 t^3 + 3/8 t^5 up to t = 1 (Bridson, Houriham & Nordenstam 2007, ACM Trans. Graph. 26(3):46, from
 * memory). With a length that follows the wall distance (L11 about d or less) it is 1 up to the wall's own cell.
 *
 * @returns factor of the amplitude, cells
 */
export function wallRamp(wallDistance: Float64Array, integralScale: Float64Array): Float64Array {
  return wallDistance.map((d, i) => {
    const scale = integralScale[i]!;
    const t = scale > 0 ? d / scale : 1;
    return t >= 1 ? 1 : t * (15 / 8 - t * t * (10 / 8 - (3 / 8) * t * t));
  });
}
