import { pope, type Spectrum, shapeIntegral } from './spectra.js';

/**
 * L11 / L (L = k^(3/2) / eps) as a function of the Reynolds number k^2 / (eps nu), such that the spectrum with its
 * viscous end dissipates eps: integral of 2 nu kappa^2 E = eps.
 *
 * With y = kappa_e eta the condition reads 2 y^2 D(y) / N(y) = Re^(-1/2), N and D the integrals of F V and x^2 F V:
 * one curve for every spectrum, tabulated over y.
 */
export interface LengthCurve {
  /** Rising ln Re. */
  readonly lnReynolds: Float64Array;
  readonly ratio: Float64Array;
  /** Value at high Reynolds number. */
  readonly limit: number;
}

/** Tabulates the dissipation-consistent length ratio. */
export function lengthCurve(spectrum: Spectrum): LengthCurve {
  const points: [number, number][] = [];
  for (let lnY = Math.log(3); lnY > Math.log(1e-6); lnY -= 0.1) {
    const y = Math.exp(lnY);
    const n = shapeIntegral(spectrum, y);
    const d = shapeIntegral(spectrum, y, 2);
    const reynolds = (n / (2 * y * y * d)) ** 2;
    // kappa_e L = y Re^(3/4).
    const ratio = spectrum.waveTimesLength / (y * reynolds ** 0.75);
    const last = points.at(-1);
    if (last === undefined || Math.log(reynolds) > last[0] + 1e-3) points.push([Math.log(reynolds), ratio]);
  }
  return {
    lnReynolds: Float64Array.from(points, (p) => p[0]),
    ratio: Float64Array.from(points, (p) => p[1]),
    limit: spectrum.name === pope.name ? pope.lengthRatio : (points.at(-1)?.[1] ?? spectrum.lengthRatio),
  };
}

/** L11 / L at one Reynolds number k^2 / (eps nu); linear in ln Re, constant beyond the ends. */
export function lengthRatioAt(curve: LengthCurve, reynolds: number): number {
  const { lnReynolds, ratio } = curve;
  const n = lnReynolds.length;
  const l = Math.log(reynolds);
  if (!(l > lnReynolds[0]!)) return ratio[0]!;
  if (l >= lnReynolds[n - 1]!) return curve.limit;
  let low = 0;
  let high = n - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (lnReynolds[middle]! <= l) low = middle;
    else high = middle;
  }
  const t = (l - lnReynolds[low]!) / (lnReynolds[high]! - lnReynolds[low]!);
  return (1 - t) * ratio[low]! + t * ratio[high]!;
}

/** Shear parameter S k / eps at which the sheared length ratio is reached. */
const fullShear = 3.3;
/** L11 / L in full shear, fitted to one channel (Re_tau 180) on two meshes; none / model: will a sub-grid model act. */
export const shearedRatio = { none: 0.26, model: 0.39 } as const;

/**
 * Sheared eddies are smaller than k and eps alone say: 1/C = 1/C0 + (1/Cs - 1/C0) sigma, sigma = min(S k / eps, 3.3) / 3.3.
 * Never longer than unsheared.
 */
export function shearedLengthRatio(unsheared: number, shearTimesTime: number, subgrid: 'none' | 'model'): number {
  const sigma = Math.min(Math.max(shearTimesTime, 0), fullShear) / fullShear;
  const sheared = Math.min(shearedRatio[subgrid], unsheared);
  return 1 / (1 / unsheared + (1 / sheared - 1 / unsheared) * sigma);
}

/** Smooth smaller of a length and the wall's limit c_w d (eighth powers: 8 % below where both are equal). */
export function limitByWall(length: number, limit: number): number {
  if (!(limit > 0)) return 0;
  const r = length / limit;
  return r > 8 ? limit : length * (1 + r ** 8) ** -0.125;
}
