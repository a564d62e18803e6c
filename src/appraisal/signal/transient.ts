/** Where a signal's start-up transient ends by the marginal-standard-error rule. */
export interface Transient {
  /** Samples to discard. */
  readonly samples: number;
  /** False when the rule would discard half of the record or more: the record is too short to tell. */
  readonly ended: boolean;
  /** Marginal standard error squared of the rest at that truncation. */
  readonly marginalError: number;
}

/**
 * Marginal-standard-error rule: the truncation d that makes the width of the confidence interval of the remaining mean
 * smallest, z(d) = sum_{i >= d} (x_i - mean_d)^2 / (n - d)^2, found on means of batches. A minimum in the second half
 * of the record does not count as found.
 *
 * @param batch  samples a batch; 5 in the published form, longer for strongly correlated signals
 * @see White 1997, Simulation 69(6):323-334; White, Cobb & Spratt 2000, Proc. Winter Simul. Conf.: 755-760
 */
export function marginalStandardError(signal: Float64Array, batch = 5): Transient {
  const n = Math.floor(signal.length / batch);
  if (n < 8) return { samples: 0, ended: false, marginalError: Number.NaN };
  const means = new Float64Array(n);
  for (let b = 0; b < n; b++) {
    let sum = 0;
    for (let i = 0; i < batch; i++) sum += signal[b * batch + i] as number;
    means[b] = sum / batch;
  }
  // Backwards with Welford's update, so that each truncation costs one step and loses no digits.
  let mean = 0;
  let squares = 0;
  let best = Number.POSITIVE_INFINITY;
  let bestAt = 0;
  for (let d = n - 1; d >= 0; d--) {
    const count = n - d;
    const value = means[d] as number;
    const difference = value - mean;
    mean += difference / count;
    squares += difference * (value - mean);
    if (count < 5) continue;
    const z = squares / (count * count);
    // The earliest of equal minima keeps most of the record.
    if (z <= best) {
      best = z;
      bestAt = d;
    }
  }
  return { samples: bestAt * batch, ended: bestAt < n / 2, marginalError: best };
}

/** Batch length that puts at least 400 batches into a record and never fewer than 5 samples into a batch. */
export function batchLengthFor(samples: number): number {
  return Math.max(5, Math.floor(samples / 400));
}
