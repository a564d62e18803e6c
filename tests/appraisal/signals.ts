import seedrandom from 'seedrandom';

/** Standard normal numbers from a seed (Box & Muller 1958). */
export function gaussian(seed: string): () => number {
  const random = seedrandom(seed);
  return () => Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
}

/** Ornstein-Uhlenbeck process, exact update: autocorrelation exp(-t / integralTime). */
export function ornsteinUhlenbeck(
  n: number,
  step: number,
  integralTime: number,
  sigma: number,
  seed: string,
): Float64Array {
  const normal = gaussian(seed);
  const decay = Math.exp(-step / integralTime);
  const kick = sigma * Math.sqrt(1 - decay * decay);
  const values = new Float64Array(n);
  let x = sigma * normal();
  for (let i = 0; i < n; i++) {
    values[i] = x;
    x = decay * x + kick * normal();
  }
  return values;
}

/**
 * Periodic Gaussian signal with a given one-sided spectral density: a sum of harmonics with random phases. O(n m):
 * for short signals.
 */
export function withSpectrum(n: number, step: number, density: (f: number) => number, seed: string): Float64Array {
  const random = seedrandom(seed);
  const values = new Float64Array(n);
  const resolution = 1 / (n * step);
  for (let m = 1; m < n / 2; m++) {
    const amplitude = Math.sqrt(2 * density(m * resolution) * resolution);
    if (!(amplitude > 0)) continue;
    const phase = 2 * Math.PI * random();
    // A rotating pointer instead of a cosine per value.
    const turnC = Math.cos((2 * Math.PI * m) / n);
    const turnS = Math.sin((2 * Math.PI * m) / n);
    let c = amplitude * Math.cos(phase);
    let s = amplitude * Math.sin(phase);
    for (let i = 0; i < n; i++) {
      values[i] = (values[i] as number) + c;
      const next = c * turnC - s * turnS;
      s = s * turnC + c * turnS;
      c = next;
    }
  }
  return values;
}
