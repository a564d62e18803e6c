import { InputError } from '../basis/errors.js';
import { integrate } from './quadrature.js';

/** Kolmogorov's constant of E = C eps^(2/3) kappa^(-5/3). */
export const kolmogorovConstant = 1.5;

/**
 * An energy spectrum as a product: E(kappa) dkappa = k F(x) V(y) dx / N, x = kappa / kappa_e, y = kappa eta,
 * with the integral of F over x equal to one and N the integral of F V, so that the integral of E is k at any
 * Reynolds number.
 */
export interface Spectrum {
  readonly name: string;
  /** F(x), energy-containing range and inertial range. */
  readonly large: (x: number) => number;
  /** ln V(y), viscous end. */
  readonly lnViscous: (y: number) => number;
  /** d ln V / d ln y. */
  readonly viscousSlope: (y: number) => number;
  /** kappa_e L11 at high Reynolds number. */
  readonly waveTimesLength: number;
  /** L11 / L, L = k^(3/2) / eps, for Kolmogorov's constant 1.5 at high Reynolds number. */
  readonly lengthRatio: number;
  /** Range of ln x outside which F holds no energy worth counting. */
  readonly range: readonly [number, number];
  /** True when the shape is given in absolute wave numbers: kappa_e is then 1 m^-1 everywhere, lengths play no part. */
  readonly fixed: boolean;
}

// Gamma(5/6) and Gamma(1/3) (Abramowitz & Stegun 1972, section 6.1).
const gamma56 = 1.128787029908126;
const gamma13 = 2.678938534707747;
/** alpha = (55 / (9 sqrt(pi))) Gamma(5/6) / Gamma(1/3). */
export const vonKarmanAlpha = ((55 / (9 * Math.sqrt(Math.PI))) * gamma56) / gamma13;
/** kappa_e L11 = 9 pi alpha / 55. */
const vonKarmanWaveLength = (9 * Math.PI * vonKarmanAlpha) / 55;

const paoFactor = 1.5 * kolmogorovConstant;

/**
 * von Karman's spectrum (von Karman 1948) with Pao's viscous end (Pao 1965, Phys. Fluids 8:1063):
 * E = alpha (2k/3) / kappa_e x^4 / (1 + x^2)^(17/6) exp[-(3/2) C y^(4/3)].
 */
export const vonKarmanPao: Spectrum = {
  name: 'von-karman-pao',
  large: (x) => (2 / 3) * vonKarmanAlpha * x ** 4 * (1 + x * x) ** (-17 / 6),
  lnViscous: (y) => -paoFactor * y ** (4 / 3),
  viscousSlope: (y) => (-4 / 3) * paoFactor * y ** (4 / 3),
  waveTimesLength: vonKarmanWaveLength,
  // C eps^(2/3) = (2/3) alpha k kappa_e^(2/3).
  lengthRatio: vonKarmanWaveLength / ((1.5 * kolmogorovConstant) / vonKarmanAlpha) ** 1.5,
  range: [-7, 16],
  fixed: false,
};

// Pope 2000, Turbulent Flows, eqs 6.246-6.248: c_L and c_eta solved so that the integrals are k and eps at high
// Reynolds number (the book rounds them to 6.78 and 0.40).
const popeLarge = 6.783;
const popeEta = 0.4017;
const popeBeta = 5.2;

const popeShape = (x: number): number =>
  kolmogorovConstant * x ** (-5 / 3) * (x / Math.sqrt(x * x + popeLarge)) ** (5 / 3 + 2);
const popeRange: readonly [number, number] = [-7, 18];
const inLog = (f: (x: number) => number) => (l: number) => Math.exp(l) * f(Math.exp(l));
const popeNorm = integrate(inLog(popeShape), popeRange[0], popeRange[1], 60);
const popeWaveLength =
  ((Math.PI / (4 / 3)) * integrate((l) => popeShape(Math.exp(l)), popeRange[0], popeRange[1], 60)) / popeNorm;

/** Pope's model spectrum (Turbulent Flows, 2000, eqs 6.246-6.248); kappa_e here is 1 / L. */
export const pope: Spectrum = {
  name: 'pope',
  large: (x) => popeShape(x) / popeNorm,
  lnViscous: (y) => -popeBeta * ((y ** 4 + popeEta ** 4) ** 0.25 - popeEta),
  viscousSlope: (y) => -popeBeta * y ** 4 * (y ** 4 + popeEta ** 4) ** -0.75,
  waveTimesLength: popeWaveLength,
  lengthRatio: popeWaveLength,
  range: popeRange,
  fixed: false,
};

/** Slopes of a monotone piecewise cubic (Fritsch & Carlson 1980, SIAM J. Numer. Anal. 17:238). */
function monotoneSlopes(x: Float64Array, y: Float64Array): Float64Array {
  const n = x.length;
  const secant = Float64Array.from({ length: n - 1 }, (_, i) => (y[i + 1]! - y[i]!) / (x[i + 1]! - x[i]!));
  const slopes = new Float64Array(n);
  slopes[0] = secant[0]!;
  slopes[n - 1] = secant[n - 2]!;
  for (let i = 1; i < n - 1; i++) {
    const p = secant[i - 1]!;
    const q = secant[i]!;
    const hp = x[i]! - x[i - 1]!;
    const hq = x[i + 1]! - x[i]!;
    slopes[i] = p * q <= 0 ? 0 : (3 * (hp + hq)) / ((2 * hq + hp) / p + (hq + 2 * hp) / q);
  }
  return slopes;
}

/**
 * A spectrum measured elsewhere, interpolated in logarithms; k^2 below its first point, its last slope above its last.
 *
 * @param wavenumbers  rising, 1/m
 * @param energies     E, m3/s2; only the shape is used, the energy is the local k
 * @throws InputError for fewer than four rows, or wave numbers or energies that are not positive or not rising
 */
export function tabulatedSpectrum(
  wavenumbers: ArrayLike<number>,
  energies: ArrayLike<number>,
  file?: string,
): Spectrum {
  const where = file === undefined ? {} : { file };
  const n = wavenumbers.length;
  if (n < 4 || energies.length !== n) {
    throw new InputError({ ...where, cause: `a spectrum of ${n} rows is too short`, remedy: 'give at least 4 rows' });
  }
  for (let i = 0; i < n; i++) {
    const rising = i === 0 || wavenumbers[i]! > wavenumbers[i - 1]!;
    if (!(wavenumbers[i]! > 0 && energies[i]! > 0 && rising && Number.isFinite(energies[i]! + wavenumbers[i]!))) {
      throw new InputError({
        ...where,
        place: `spectrum row ${i + 1}`,
        cause: `wave number ${wavenumbers[i]}, energy ${energies[i]} cannot be used`,
        remedy: 'wave numbers must rise, both columns must be positive',
      });
    }
  }
  const x = Float64Array.from({ length: n }, (_, i) => Math.log(wavenumbers[i]!));
  const y = Float64Array.from({ length: n }, (_, i) => Math.log(energies[i]!));
  const slopes = monotoneSlopes(x, y);
  const lnEnergy = (l: number): number => {
    if (l <= x[0]!) return y[0]! + 2 * (l - x[0]!);
    if (l >= x[n - 1]!) return y[n - 1]! + slopes[n - 1]! * (l - x[n - 1]!);
    let i = 0;
    while (x[i + 1]! < l) i++;
    const h = x[i + 1]! - x[i]!;
    const t = (l - x[i]!) / h;
    const s = 1 - t;
    const left = (1 + 2 * t) * s * s * y[i]! + t * s * s * h * slopes[i]!;
    return left + t * t * (3 - 2 * t) * y[i + 1]! - t * t * s * h * slopes[i + 1]!;
  };
  const range: [number, number] = [x[0]! - 6, slopes[n - 1]! < -1.2 ? x[n - 1]! + 6 : x[n - 1]!];
  const raw = (k: number): number => Math.exp(lnEnergy(Math.log(k)));
  const norm = integrate(inLog(raw), range[0], range[1], 120);
  const overWave = integrate((l) => raw(Math.exp(l)), range[0], range[1], 120);
  const length = ((Math.PI / (4 / 3)) * overWave) / norm;
  return {
    name: 'table',
    large: (k) => raw(k) / norm,
    lnViscous: () => 0,
    viscousSlope: () => 0,
    waveTimesLength: length,
    lengthRatio: vonKarmanPao.lengthRatio,
    range,
    fixed: true,
  };
}

/** N(kappa_e eta), the integral of F V over x; `moment` 2 gives that of x^2 F V (dissipation). */
export function shapeIntegral(spectrum: Spectrum, waveTimesEta: number, moment = 0): number {
  const [low, high] = spectrum.range;
  // Beyond kappa eta = 40 nothing is left.
  const end = waveTimesEta > 0 ? Math.min(high, Math.log(40 / waveTimesEta)) : high;
  if (end <= low) return 0;
  const f = (l: number): number => {
    const x = Math.exp(l);
    return x ** (1 + moment) * spectrum.large(x) * Math.exp(spectrum.lnViscous(x * waveTimesEta));
  };
  return integrate(f, low, end, Math.ceil((end - low) * 2));
}

/**
 * Energy spectrum E(kappa), m3/s2.
 *
 * @param eta  Kolmogorov's length (nu^3 / eps)^(1/4), metres; 0 without viscosity
 */
export function spectralEnergy(spectrum: Spectrum, k: number, energyWave: number, eta: number, kappa: number): number {
  const x = kappa / energyWave;
  const norm = shapeIntegral(spectrum, energyWave * eta);
  return (k * spectrum.large(x) * Math.exp(spectrum.lnViscous(kappa * eta))) / (norm * energyWave);
}
