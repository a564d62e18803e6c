/** Tables of one transform length; n is a power of two, at least 2. */
export interface FourierPlan {
  readonly length: number;
  readonly cosines: Float64Array;
  readonly sines: Float64Array;
  readonly reversed: Uint32Array;
}

export function isPowerOfTwo(n: number): boolean {
  return Number.isInteger(n) && n > 0 && (n & (n - 1)) === 0;
}

/** Smallest power of two that is not below n. */
export function nextPowerOfTwo(n: number): number {
  return 2 ** Math.ceil(Math.log2(Math.max(1, n)));
}

/** @throws RangeError when the length is not a power of two of at least 2 */
export function fourierPlan(length: number): FourierPlan {
  if (!isPowerOfTwo(length) || length < 2) throw new RangeError(`Transform length ${length} is not a power of two.`);
  const cosines = new Float64Array(length / 2);
  const sines = new Float64Array(length / 2);
  for (let i = 0; i < length / 2; i++) {
    cosines[i] = Math.cos((2 * Math.PI * i) / length);
    sines[i] = Math.sin((2 * Math.PI * i) / length);
  }
  const reversed = new Uint32Array(length);
  for (let i = 1; i < length; i++) {
    reversed[i] = ((reversed[i >> 1] as number) >> 1) | (i & 1 ? length >> 1 : 0);
  }
  return { length, cosines, sines, reversed };
}

/**
 * Discrete Fourier transform in place, X_k = sum_j x_j exp(-2 pi i j k / n).
 *
 * @see Cooley & Tukey 1965, Math. Comput. 19:297-301
 */
export function transform(plan: FourierPlan, real: Float64Array, imaginary: Float64Array): void {
  const { length, cosines, sines, reversed } = plan;
  for (let i = 0; i < length; i++) {
    const j = reversed[i] as number;
    if (j <= i) continue;
    const re = real[i] as number;
    const im = imaginary[i] as number;
    real[i] = real[j] as number;
    imaginary[i] = imaginary[j] as number;
    real[j] = re;
    imaginary[j] = im;
  }
  for (let half = 1; half < length; half *= 2) {
    const stride = length / (2 * half);
    for (let start = 0; start < length; start += 2 * half) {
      for (let k = 0; k < half; k++) {
        const c = cosines[k * stride] as number;
        const s = sines[k * stride] as number;
        const low = start + k;
        const high = low + half;
        const xr = real[high] as number;
        const xi = imaginary[high] as number;
        const tr = xr * c + xi * s;
        const ti = xi * c - xr * s;
        real[high] = (real[low] as number) - tr;
        imaginary[high] = (imaginary[low] as number) - ti;
        real[low] = (real[low] as number) + tr;
        imaginary[low] = (imaginary[low] as number) + ti;
      }
    }
  }
}

/**
 * |X_k|^2, k = 0 ... n / 2, of a real signal of n = 2 m values through one complex transform of length m.
 *
 * @param plan  of length m
 * @param signal  2 m values
 * @param power  m + 1 values are written
 */
export function realPower(plan: FourierPlan, signal: Float64Array, power: Float64Array): void {
  const m = plan.length;
  const real = new Float64Array(m);
  const imaginary = new Float64Array(m);
  for (let i = 0; i < m; i++) {
    real[i] = signal[2 * i] as number;
    imaginary[i] = signal[2 * i + 1] as number;
  }
  transform(plan, real, imaginary);
  power[0] = ((real[0] as number) + (imaginary[0] as number)) ** 2;
  power[m] = ((real[0] as number) - (imaginary[0] as number)) ** 2;
  for (let k = 1; k < m; k++) {
    const ar = real[k] as number;
    const ai = imaginary[k] as number;
    const br = real[m - k] as number;
    const bi = -(imaginary[m - k] as number);
    const evenR = 0.5 * (ar + br);
    const evenI = 0.5 * (ai + bi);
    const oddR = 0.5 * (ai - bi);
    const oddI = -0.5 * (ar - br);
    const c = Math.cos((Math.PI * k) / m);
    const s = -Math.sin((Math.PI * k) / m);
    power[k] = (evenR + c * oddR - s * oddI) ** 2 + (evenI + c * oddI + s * oddR) ** 2;
  }
}
