import { InputError } from '../basis/errors.js';
import { type LengthCurve, lengthCurve, lengthRatioAt, limitByWall, shearedLengthRatio } from './length.js';
import type { Spectrum } from './spectra.js';

/** C_mu of two-equation models: eps = C_mu k omega, nu_t = C_mu k^2 / eps. */
export const cMu = 0.09;

/** One number for all cells, or one a cell. */
export type CellValue = number | Float64Array;

/** What is known of the turbulence at the target cells. */
export interface ScaleInput {
  readonly cells: number;
  /** m2/s2. */
  readonly k?: CellValue;
  /** rms of one component over `speed`; supplies k = 1.5 (intensity speed)^2. */
  readonly intensity?: CellValue;
  /** |mean velocity|, m/s; needed with `intensity`. */
  readonly speed?: CellValue;
  /** TurbulentDissipation, m2/s3. */
  readonly epsilon?: CellValue;
  /** TurbulentDissipationRate, 1/s. */
  readonly omega?: CellValue;
  /** `two-equation`: eps = 0.09 k omega (default); `epsilon-over-k`: eps = k omega. */
  readonly omegaMeans?: 'two-equation' | 'epsilon-over-k';
  /** ViscosityEddyKinematic, m2/s. */
  readonly eddyViscosity?: CellValue;
  /** Longitudinal integral scale L11 given by the user, metres: overrides every rule for the length. */
  readonly integralScale?: CellValue;
  /** ViscosityKinematic, m2/s; without it no viscous end. */
  readonly viscosity?: CellValue;
  /** WallDistance, metres. */
  readonly wallDistance?: Float64Array;
  /** 9 x cells, du_i/dx_j of the mean velocity, row i, 1/s; supplies the shear S. */
  readonly velocityGradient?: Float64Array;
}

export interface ScaleOptions {
  readonly spectrum: Spectrum;
  readonly subgrid: 'model' | 'none';
  /** c_w of L <= c_w WallDistance. */
  readonly wallLengthFactor: number;
}

/** Local scales of the turbulence. */
export interface LocalScales {
  /** m2/s2, never negative. */
  readonly k: Float64Array;
  /** TurbulentDissipation, m2/s3. */
  readonly epsilon: Float64Array;
  /** IntegralLength L = k^(3/2) / eps, metres, before any limit. */
  readonly length: Float64Array;
  /** L11 laid on the mesh, metres. */
  readonly integralScale: Float64Array;
  /** kappa_e, 1/m. */
  readonly energyWave: Float64Array;
  /** Kolmogorov's length, metres; absent without viscosity. */
  readonly eta?: Float64Array;
  /** Sentences for the report: what was assumed, what was limited and where. */
  readonly remarks: readonly string[];
  readonly counts: { readonly negativeK: number; readonly limitedByWall: number };
}

const at = (value: CellValue, cell: number): number => (typeof value === 'number' ? value : value[cell]!);

function missingPair(input: ScaleInput): InputError {
  const hasK = input.k !== undefined || input.intensity !== undefined;
  if (!hasK) {
    return new InputError({
      place: 'TurbulentEnergyKinetic',
      cause: 'there is no k, so the fluctuations have no energy',
      remedy: 'supply TurbulentEnergyKinetic or VelocityCovariance, or give --intensity (case key fluctuations.energy)',
    });
  }
  return new InputError({
    place: 'TurbulentDissipation, TurbulentDissipationRate or ViscosityEddyKinematic',
    cause: 'k is known but no length scale: k with one of these three is the pair that is needed',
    remedy: 'supply one of them (--rename where it has another name) or give --length (case key fluctuations.length)',
  });
}

/** omega of two-equation models and eps / k differ by a factor of 11: where nu_t is at hand it tells them apart. */
function checkOmega(input: ScaleInput, k: Float64Array): void {
  if (input.omega === undefined || input.eddyViscosity === undefined) return;
  const logs: number[] = [];
  const stride = Math.max(1, Math.floor(input.cells / 20000));
  for (let i = 0; i < input.cells; i += stride) {
    const r = (at(input.eddyViscosity, i) * at(input.omega, i)) / k[i]!;
    if (r > 0 && Number.isFinite(r)) logs.push(Math.log(r));
  }
  if (logs.length === 0) return;
  logs.sort((a, b) => a - b);
  const median = Math.exp(logs[logs.length >> 1]!);
  const given = input.omegaMeans ?? 'two-equation';
  const found = median > 0.3 ? 'two-equation' : 'epsilon-over-k';
  if (found !== given) {
    throw new InputError({
      place: 'TurbulentDissipationRate',
      cause: `nu_t omega / k is ${median.toPrecision(3)} in the median, which does not fit omega taken as ${given}`,
      remedy: `set omega: ${found} (case key precursor.omega)`,
    });
  }
}

function energyOf(input: ScaleInput): { k: Float64Array; negative: number } {
  const k = new Float64Array(input.cells);
  let negative = 0;
  if (input.k === undefined && input.intensity === undefined) throw missingPair(input);
  if (input.intensity !== undefined && input.speed === undefined) {
    throw new InputError({
      place: 'Velocity',
      cause: 'an intensity needs the mean velocity and there is none',
      remedy: 'supply VelocityX, VelocityY, VelocityZ',
    });
  }
  for (let i = 0; i < input.cells; i++) {
    const value =
      input.intensity !== undefined && input.speed !== undefined
        ? 1.5 * (at(input.intensity, i) * at(input.speed, i)) ** 2
        : at(input.k ?? 0, i);
    if (!Number.isFinite(value)) {
      throw new InputError({ place: 'TurbulentEnergyKinetic', cause: `cell ${i} holds ${value}`, remedy: 'repair it' });
    }
    if (value < 0) negative++;
    k[i] = Math.max(0, value);
  }
  return { k, negative };
}

function dissipationOf(input: ScaleInput, i: number, k: number, lengthRatio: number): number {
  if (input.integralScale !== undefined) return (k ** 1.5 * lengthRatio) / at(input.integralScale, i);
  if (input.epsilon !== undefined) return at(input.epsilon, i);
  if (input.omega !== undefined) {
    return (input.omegaMeans === 'epsilon-over-k' ? 1 : cMu) * k * at(input.omega, i);
  }
  if (input.eddyViscosity !== undefined) return (cMu * k * k) / at(input.eddyViscosity, i);
  throw missingPair(input);
}

const gradientSize = (g: Float64Array, i: number): number => {
  let sum = 0;
  for (let c = 9 * i; c < 9 * i + 9; c++) sum += g[c]! * g[c]!;
  return Math.sqrt(sum);
};

function remarksOf(input: ScaleInput, options: ScaleOptions, curve: LengthCurve, limited: number): string[] {
  const remarks: string[] = [];
  if (options.spectrum.fixed) {
    remarks.push('The spectrum is the given table everywhere; local lengths play no part.');
    return remarks;
  }
  if (input.integralScale !== undefined) {
    remarks.push('The longitudinal integral scale L11 is the one given.');
  } else {
    remarks.push(
      input.viscosity === undefined
        ? `Without ViscosityKinematic L11 = ${curve.limit.toFixed(2)} L is assumed (high Reynolds number) and the spectrum has no viscous end.`
        : 'L11 / L is the one with which the spectrum dissipates the local epsilon.',
    );
    remarks.push(
      input.velocityGradient === undefined
        ? 'No velocity gradient: the length is not shortened by shear.'
        : `Sheared lengths follow a rule fitted to one channel flow (Re_tau 180), subgrid: ${options.subgrid}.`,
    );
  }
  if (input.wallDistance !== undefined) {
    remarks.push(`L <= ${options.wallLengthFactor} WallDistance limits the length in ${limited} cells.`);
  }
  return remarks;
}

/**
 * k, epsilon and lengths at the target cells from whatever pair is at hand.
 *
 * @throws InputError naming the missing pair and the option that supplies it; for values that are not finite
 */
export function localScales(input: ScaleInput, options: ScaleOptions): LocalScales {
  const n = input.cells;
  const { k, negative } = energyOf(input);
  checkOmega(input, k);
  const { spectrum } = options;
  const curve = spectrum.fixed
    ? { lnReynolds: new Float64Array([0]), ratio: new Float64Array([0.39]), limit: spectrum.lengthRatio }
    : lengthCurve(spectrum);
  const epsilon = new Float64Array(n);
  const length = new Float64Array(n);
  const integralScale = new Float64Array(n);
  const energyWave = new Float64Array(n);
  const eta = input.viscosity === undefined ? undefined : new Float64Array(n);
  let limited = 0;
  const noLength = spectrum.fixed && input.epsilon === undefined && input.omega === undefined;
  for (let i = 0; i < n; i++) {
    const energy = k[i]!;
    if (noLength && input.eddyViscosity === undefined && input.integralScale === undefined) {
      length[i] = spectrum.waveTimesLength / curve.limit;
      epsilon[i] = energy ** 1.5 / length[i]!;
    } else {
      const eps = dissipationOf(input, i, energy, curve.limit);
      if (!Number.isFinite(eps) || eps < 0) {
        throw new InputError({
          place: 'TurbulentDissipation',
          cause: `cell ${i} holds a dissipation of ${eps}`,
          remedy: 'epsilon, omega and nu_t must be positive where k is',
        });
      }
      epsilon[i] = eps;
      length[i] = energy > 0 && eps > 0 ? energy ** 1.5 / eps : 0;
    }
    const eps = epsilon[i]!;
    let scale: number;
    if (spectrum.fixed) {
      scale = spectrum.waveTimesLength;
    } else if (input.integralScale !== undefined) {
      scale = at(input.integralScale, i);
    } else {
      const nu = input.viscosity === undefined ? 0 : at(input.viscosity, i);
      let ratio = nu > 0 && eps > 0 ? lengthRatioAt(curve, (energy * energy) / (eps * nu)) : curve.limit;
      if (input.velocityGradient !== undefined && eps > 0) {
        ratio = shearedLengthRatio(ratio, (gradientSize(input.velocityGradient, i) * energy) / eps, options.subgrid);
      }
      scale = ratio * length[i]!;
      if (input.wallDistance !== undefined) {
        const limit = options.wallLengthFactor * input.wallDistance[i]! * ratio;
        if (scale > limit) limited++;
        scale = limitByWall(scale, limit);
      }
    }
    integralScale[i] = scale;
    energyWave[i] = spectrum.fixed ? 1 : spectrum.waveTimesLength / scale;
    if (eta !== undefined && input.viscosity !== undefined) {
      const nu = at(input.viscosity, i);
      eta[i] = eps > 0 ? (nu ** 3 / eps) ** 0.25 : 0;
    }
  }
  return {
    k,
    epsilon,
    length,
    integralScale,
    energyWave,
    ...(eta === undefined ? {} : { eta }),
    remarks: remarksOf(input, options, curve, limited),
    counts: { negativeK: negative, limitedByWall: limited },
  };
}
