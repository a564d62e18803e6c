/** Means over slabs of cells along one axis. */
export interface SlabProfile {
  /** Volume-weighted middles of the slabs, m. */
  readonly positions: Float64Array;
  /** One array a quantity. */
  readonly means: readonly Float64Array[];
}

/**
 * Volume means of quantities in slabs along an axis; empty slabs are left out.
 *
 * @param axis        0 x, 1 y, 2 z
 * @param quantities  each a function of the cell
 */
export function slabProfile(
  centroids: Float64Array,
  volumes: Float64Array,
  axis: number,
  slabs: number,
  quantities: readonly ((cell: number) => number)[],
): SlabProfile {
  let low = Infinity;
  let high = -Infinity;
  for (let c = 0; c < volumes.length; c += 1) {
    const x = centroids[3 * c + axis] as number;
    if (x < low) low = x;
    if (x > high) high = x;
  }
  const scale = high > low ? slabs / (high - low) : 0;
  const weight = new Float64Array(slabs);
  const place = new Float64Array(slabs);
  const sums = quantities.map(() => new Float64Array(slabs));
  for (let c = 0; c < volumes.length; c += 1) {
    const x = centroids[3 * c + axis] as number;
    const slab = Math.min(slabs - 1, Math.floor((x - low) * scale));
    const v = volumes[c] as number;
    weight[slab] = (weight[slab] as number) + v;
    place[slab] = (place[slab] as number) + v * x;
    quantities.forEach((quantity, q) => {
      const sum = sums[q] as Float64Array;
      sum[slab] = (sum[slab] as number) + v * quantity(c);
    });
  }
  const kept = [...weight.keys()].filter((slab) => (weight[slab] as number) > 0);
  const mean = (sum: Float64Array): Float64Array =>
    Float64Array.from(kept, (slab) => (sum[slab] as number) / (weight[slab] as number));
  return { positions: mean(place), means: sums.map(mean) };
}
