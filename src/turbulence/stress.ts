import { sharedFloat64 } from '../basis/fields.js';
import { cMu } from './scales.js';

/**
 * Covariances of an eddy-viscosity closure: u'_i u'_j = (2/3) k delta_ij - 2 nu_t S_ij (Boussinesq 1877). What no velocity
 * can have (negative eigenvalues) is clipped and counted where the weights are set.
 *
 * @param velocityGradient  9 x cells, du_i/dx_j row by row, 1/s
 * @param eddyViscosity     cells, m2/s; absent: C_mu k^2 / eps
 * @returns 6 x cells XX XY XZ YY YZ ZZ, m2/s2
 */
export function eddyViscosityCovariance(
  k: Float64Array,
  epsilon: Float64Array,
  velocityGradient: Float64Array,
  eddyViscosity?: Float64Array,
): Float64Array {
  const n = k.length;
  const out = sharedFloat64(6 * n);
  for (let i = 0; i < n; i++) {
    const g = velocityGradient.subarray(9 * i, 9 * i + 9);
    const dilatation = (g[0]! + g[4]! + g[8]!) / 3;
    const nut = eddyViscosity?.[i] ?? (epsilon[i]! > 0 ? (cMu * k[i]! * k[i]!) / epsilon[i]! : 0);
    let c = 6 * i;
    for (let p = 0; p < 3; p++)
      for (let q = p; q < 3; q++) {
        const strain = 0.5 * (g[3 * p + q]! + g[3 * q + p]!) - (p === q ? dilatation : 0);
        out[c++] = (p === q ? (2 / 3) * k[i]! : 0) - 2 * nut * strain;
      }
  }
  return out;
}

/** k of covariances: half the trace, cells, m2/s2. */
export function energyOfCovariance(covariance: Float64Array): Float64Array {
  return Float64Array.from(
    { length: covariance.length / 6 },
    (_, i) => 0.5 * (covariance[6 * i]! + covariance[6 * i + 3]! + covariance[6 * i + 5]!),
  );
}
