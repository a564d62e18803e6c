/** Scaled divergence |div u| CellWidth / u_rms of a field, u_rms the volume rms of one fluctuation component. */
export interface DivergenceFigures {
  /** Volume-weighted root mean square. */
  readonly scaledRms: number;
  /** Below it lies 99 % of the volume. */
  readonly scaledP99: number;
  readonly scaledMax: number;
  /** Centroid of the cell of the largest value, m. */
  readonly where: readonly [number, number, number];
}

/** Volume rms of one component: sqrt(mean |u|^2 / 3). */
export function componentRms(velocity: Float64Array, volumes: Float64Array): number {
  let sum = 0;
  let volume = 0;
  for (let c = 0; c < volumes.length; c += 1) {
    const v = volumes[c] as number;
    sum +=
      v *
      ((velocity[3 * c] as number) ** 2 + (velocity[3 * c + 1] as number) ** 2 + (velocity[3 * c + 2] as number) ** 2);
    volume += v;
  }
  return Math.sqrt(sum / (3 * volume));
}

/** Value below which the given share of the volume lies, from a histogram of 4096 logarithmic bins. */
function volumeQuantile(scaled: Float64Array, volumes: Float64Array, share: number, largest: number): number {
  if (largest === 0) return 0;
  const bins = 4096;
  const decades = 16;
  const counts = new Float64Array(bins);
  let total = 0;
  for (let c = 0; c < scaled.length; c += 1) {
    const value = scaled[c] as number;
    const place = value > 0 ? 1 + Math.log10(value / largest) / decades : 0;
    const bin = Math.min(bins - 1, Math.max(0, Math.floor(place * bins)));
    counts[bin] = (counts[bin] as number) + (volumes[c] as number);
    total += volumes[c] as number;
  }
  let sum = 0;
  for (let bin = 0; bin < bins; bin += 1) {
    sum += counts[bin] as number;
    if (sum >= share * total) return largest * 10 ** (((bin + 1) / bins - 1) * decades);
  }
  return largest;
}

/**
 * Figures of a net flux field.
 *
 * @param netFlux  cells, net outward volume flux, m3/s
 * @param scale    u_rms, m/s; 0 gives zeros
 */
export function divergenceFigures(
  netFlux: Float64Array,
  volumes: Float64Array,
  centroids: Float64Array,
  scale: number,
): DivergenceFigures {
  const scaled = scaledDivergence(netFlux, volumes, scale);
  let squares = 0;
  let volume = 0;
  let largest = 0;
  let at = 0;
  for (let c = 0; c < scaled.length; c += 1) {
    const value = scaled[c] as number;
    squares += (volumes[c] as number) * value * value;
    volume += volumes[c] as number;
    if (value > largest) {
      largest = value;
      at = c;
    }
  }
  return {
    scaledRms: Math.sqrt(squares / volume),
    scaledP99: volumeQuantile(scaled, volumes, 0.99, largest),
    scaledMax: largest,
    where: [centroids[3 * at] as number, centroids[3 * at + 1] as number, centroids[3 * at + 2] as number],
  };
}

/** |div u| CellWidth / u_rms of every cell. */
export function scaledDivergence(netFlux: Float64Array, volumes: Float64Array, scale: number): Float64Array {
  const out = new Float64Array(netFlux.length);
  if (scale === 0) return out;
  for (let c = 0; c < out.length; c += 1) {
    const v = volumes[c] as number;
    out[c] = (Math.abs(netFlux[c] as number) / v) * (Math.cbrt(v) / scale);
  }
  return out;
}
