import type { PowerSpectrum } from './welch.js';

/** A line that stands out of a spectrum. */
export interface SpectralPeak {
  /** Hz, refined between bins by a parabola through the logarithms of three bins. */
  readonly frequency: number;
  readonly density: number;
  /** Height over the surroundings: geometric mean of the medians below and above the peak, within an octave. */
  readonly prominence: number;
}

/** A peak needs this many bins below it, otherwise its surroundings cannot be told from it. */
const lowestBin = 6;

function medianBetween(values: Float64Array, begin: number, end: number): number {
  const sorted = values.slice(begin, end + 1).sort();
  return sorted[sorted.length >> 1] as number;
}

/**
 * Peaks that rise above `prominence` times their surroundings, highest first. With eight averaged half-overlapping
 * segments a bin of plain noise exceeds five times its median less than once in 1e6 (chi-square, about 14 degrees of
 * freedom). Frequencies below six bins cannot be judged.
 */
export function spectralPeaks(spectrum: PowerSpectrum, prominence = 5, count = 3): readonly SpectralPeak[] {
  const { frequency, density } = spectrum;
  const last = frequency.length - 1;
  const found: SpectralPeak[] = [];
  for (let k = lowestBin; k < last - 4; k++) {
    const here = density[k] as number;
    if (!(here >= (density[k - 1] as number) && here > (density[k + 1] as number))) continue;
    const below = medianBetween(density, Math.max(1, k >> 1), k - 3);
    const above = medianBetween(density, k + 3, Math.min(last, 2 * k));
    const surroundings = Math.sqrt(below * above);
    // Where a spectrum bends down steeply the surroundings lie below a bin that is no peak: ask for height over the near side too.
    const near = medianBetween(density, Math.max(1, Math.floor(0.7 * k)), k - 3);
    if (!(here > prominence * surroundings && here > 0.6 * prominence * near)) continue;
    const left = Math.log(density[k - 1] as number);
    const right = Math.log(density[k + 1] as number);
    const curvature = left - 2 * Math.log(here) + right;
    const shift = Number.isFinite(curvature) && curvature < 0 ? (0.5 * (left - right)) / curvature : 0;
    found.push({
      frequency: (frequency[k] as number) + shift * (frequency[1] as number),
      density: here,
      prominence: surroundings > 0 ? here / surroundings : Number.POSITIVE_INFINITY,
    });
  }
  // Neighbouring maxima of one broad line are one peak.
  found.sort((a, b) => b.density - a.density);
  const kept: SpectralPeak[] = [];
  for (const peak of found) {
    if (kept.length >= count) break;
    if (kept.every((other) => Math.abs(Math.log(peak.frequency / other.frequency)) > 0.25)) kept.push(peak);
  }
  return kept;
}

/** Strouhal number f D / U. */
export function strouhal(frequency: number, length: number, speed: number): number {
  return (frequency * length) / speed;
}
