/** Weighted histogram. */
export interface Histogram {
  /** bins + 1 edges. */
  readonly edges: Float64Array;
  /** bins, share of the whole weight, 0 to 1. */
  readonly shares: Float64Array;
  /** Shares of the weight below the first and above the last edge, and of places without a number. */
  readonly below: number;
  readonly above: number;
  readonly missing: number;
  readonly scale: 'linear' | 'log';
}

export interface HistogramOptions {
  readonly bins?: number;
  readonly scale?: 'linear' | 'log';
  /** Default: the smallest and largest (positive, for logarithmic) value. */
  readonly range?: readonly [number, number];
}

/** Smallest and largest finite value, above zero only for a logarithmic scale; undefined when there is none. */
export function valueRange(values: Float64Array, positive: boolean): readonly [number, number] | undefined {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const x of values) {
    if (!Number.isFinite(x) || (positive && x <= 0)) continue;
    if (x < low) low = x;
    if (x > high) high = x;
  }
  return low <= high ? [low, high] : undefined;
}

/**
 * Histogram of values weighted by volume, area or one.
 *
 * @param weights  same length; undefined: every value counts one
 */
export function weightedHistogram(
  values: Float64Array,
  weights: Float64Array | undefined,
  options: HistogramOptions = {},
): Histogram {
  const bins = options.bins ?? 40;
  const scale = options.scale ?? 'linear';
  const log = scale === 'log';
  let [low, high] = options.range ?? valueRange(values, log) ?? [log ? 0.1 : 0, 1];
  if (!(high > low)) [low, high] = log ? [low / 1.5, low * 1.5] : [low - 0.5, low + 0.5];
  const from = log ? Math.log(low) : low;
  const width = ((log ? Math.log(high) : high) - from) / bins;
  const shares = new Float64Array(bins);
  let below = 0;
  let above = 0;
  let missing = 0;
  let total = 0;
  for (let i = 0; i < values.length; i++) {
    const x = values[i] as number;
    const w = weights === undefined ? 1 : (weights[i] as number);
    total += w;
    if (Number.isNaN(x)) missing += w;
    else if (x < low) below += w;
    else if (x > high) above += w;
    else {
      const bin = Math.min(bins - 1, Math.max(0, Math.floor(((log ? Math.log(x) : x) - from) / width)));
      shares[bin] = (shares[bin] as number) + w;
    }
  }
  if (total > 0) for (let b = 0; b < bins; b++) shares[b] = (shares[b] as number) / total;
  const edges = Float64Array.from({ length: bins + 1 }, (_, b) =>
    log ? Math.exp(from + b * width) : from + b * width,
  );
  const part = (x: number): number => (total > 0 ? x / total : 0);
  return { edges, shares, below: part(below), above: part(above), missing: part(missing), scale };
}

/**
 * Values below which the given shares of the places lie (nearest rank on the sorted values; NaN left out).
 *
 * @param shares  0 to 1
 */
export function quantiles(values: Float64Array, shares: readonly number[]): readonly number[] {
  const sorted = values.filter((x) => !Number.isNaN(x)).sort();
  return shares.map((share) =>
    sorted.length === 0
      ? Number.NaN
      : (sorted[Math.min(sorted.length - 1, Math.max(0, Math.ceil(share * sorted.length) - 1))] as number),
  );
}

/** Value below which a share of the weight lies, exact. */
export function weightedQuantile(values: Float64Array, weights: Float64Array, share: number): number {
  const order = new Float64Array(values.length);
  let count = 0;
  let total = 0;
  for (let i = 0; i < values.length; i++) {
    if (Number.isNaN(values[i] as number) || !((weights[i] as number) > 0)) continue;
    order[count++] = i;
    total += weights[i] as number;
  }
  const sorted = order.subarray(0, count).sort((a, b) => (values[a] as number) - (values[b] as number));
  let sum = 0;
  for (const i of sorted) {
    sum += weights[i] as number;
    if (sum >= share * total) return values[i] as number;
  }
  return count === 0 ? Number.NaN : (values[sorted[count - 1] as number] as number);
}
