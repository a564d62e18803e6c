import { incompleteBeta } from './special-functions.js';

/** Model spectra of the appraisal. Both carry a viscous end where the Kolmogorov length is known. */
export type ShareSpectrum = 'von-karman-pao' | 'pope';

/**
 * Share of k below a wave number, tabulated against ln(kappa L) and ln(L / eta); L = k^(3/2) / epsilon, eta the
 * Kolmogorov length. The last row is the limit L / eta -> infinity.
 */
export interface ShareModel {
  readonly spectrum: ShareSpectrum;
  /** Rows x columns, row by row; each row rises from 0 to 1. */
  readonly table: Float64Array;
  /** L11 / L of each row. */
  readonly lengthRatios: Float64Array;
}

const firstLogK = Math.log(1e-2);
const stepLogK = 0.04;
const columns = 621;
const firstLogRe = Math.log(4);
const stepLogRe = 0.4;
const finiteRows = 34;
const rows = finiteRows + 1;

/** kappa_e L11 of the von Karman spectrum, sqrt(pi) Gamma(5/6) / Gamma(1/3). */
const vonKarmanPeak = 0.7468342;
/** L11 / L that joins the von Karman spectrum to a Kolmogorov constant of 1.5. */
export const vonKarmanLengthRatio = 0.3875;
/** L11 / L of Pope's spectrum without a viscous end (Pope 2000, section 6.5). */
export const popeLengthRatio = 0.4302;

/**
 * Share of k below `cutoff` for the von Karman spectrum without a viscous end, closed form.
 *
 * @param cutoff  kappa_c L11
 * @see von Karman 1948, PNAS 34:530-539; integral I_y(5/2, 1/3), y = x^2 / (1 + x^2), x = kappa_c / kappa_e
 */
export function vonKarmanShare(cutoff: number): number {
  const x = cutoff / vonKarmanPeak;
  return incompleteBeta((x * x) / (1 + x * x), 5 / 2, 1 / 3);
}

/** Fills one row by the trapezoidal rule in ln K and returns the second moment of the normalised spectrum. */
function accumulate(density: (wave: number) => number, tail: (wave: number) => number, row: Float64Array): number {
  let before = 0;
  let sum = 0;
  let second = 0;
  for (let i = 0; i < columns; i++) {
    const wave = Math.exp(firstLogK + i * stepLogK);
    const value = density(wave) * wave;
    if (i > 0) sum += 0.5 * (before + value) * stepLogK;
    second += value * wave * wave * stepLogK;
    row[i] = sum;
    before = value;
  }
  const total = sum + tail(Math.exp(firstLogK + (columns - 1) * stepLogK));
  for (let i = 0; i < columns; i++) row[i] = (row[i] as number) / total;
  return second / total;
}

/** Pao's viscous end with the Kolmogorov constant 1.5 (Pao 1965, Phys. Fluids 8:1063-1075). */
function vonKarmanPaoRow(lengthRatio: number, etaOverL: number, row: Float64Array): number {
  const peak = vonKarmanPeak / lengthRatio;
  return accumulate(
    (wave) => {
      const x2 = (wave / peak) ** 2;
      return x2 * x2 * (1 + x2) ** (-17 / 6) * Math.exp(-2.25 * (wave * etaOverL) ** (4 / 3));
    },
    () => 0,
    row,
  );
}

/** L11 / L for which the spectrum dissipates the given epsilon: 2 nu int kappa^2 E = epsilon. */
function consistentRatio(etaOverL: number, row: Float64Array): number {
  let low = 0.2;
  let high = 4;
  for (let i = 0; i < 48; i++) {
    const middle = Math.sqrt(low * high);
    // The longer the eddies, the less they dissipate.
    if (2 * etaOverL ** (4 / 3) * vonKarmanPaoRow(middle, etaOverL, row) > 1) low = middle;
    else high = middle;
  }
  return Math.sqrt(low * high);
}

/** Pope's model spectrum (Pope 2000, equations 6.246 to 6.248), normalised to k. */
function popeRow(etaOverL: number, row: Float64Array): void {
  accumulate(
    (wave) => {
      const large = (wave / Math.sqrt(wave * wave + 6.78)) ** (5 / 3 + 2);
      const viscous = etaOverL === 0 ? 1 : Math.exp(-5.2 * (((wave * etaOverL) ** 4 + 0.4 ** 4) ** 0.25 - 0.4));
      return wave ** (-5 / 3) * large * viscous;
    },
    (last) => (etaOverL === 0 ? 1.5 * last ** (-2 / 3) : 0),
    row,
  );
}

const built = new Map<ShareSpectrum, ShareModel>();

/** The table of one spectrum; built once in a fraction of a second. */
export function shareModel(spectrum: ShareSpectrum = 'von-karman-pao'): ShareModel {
  const known = built.get(spectrum);
  if (known !== undefined) return known;
  const table = new Float64Array(rows * columns);
  const lengthRatios = new Float64Array(rows);
  for (let r = 0; r < rows; r++) {
    const row = table.subarray(r * columns, (r + 1) * columns);
    const etaOverL = r === finiteRows ? 0 : Math.exp(-(firstLogRe + r * stepLogRe));
    if (spectrum === 'pope') {
      popeRow(etaOverL, row);
      lengthRatios[r] = popeLengthRatio;
    } else if (r === finiteRows) {
      for (let i = 0; i < columns; i++) {
        row[i] = vonKarmanShare(Math.exp(firstLogK + i * stepLogK) * vonKarmanLengthRatio);
      }
      lengthRatios[r] = vonKarmanLengthRatio;
    } else {
      const ratio = consistentRatio(etaOverL, row);
      vonKarmanPaoRow(ratio, etaOverL, row);
      lengthRatios[r] = ratio;
    }
  }
  const model: ShareModel = { spectrum, table, lengthRatios };
  built.set(spectrum, model);
  return model;
}

/** Row and its weight for L / eta; beyond the last finite row the limit row is used. */
function rowOf(lengthOverKolmogorov: number): { row: number; weight: number } {
  if (!(lengthOverKolmogorov < Number.POSITIVE_INFINITY)) return { row: finiteRows, weight: 0 };
  const position = (Math.log(Math.max(lengthOverKolmogorov, 1e-30)) - firstLogRe) / stepLogRe;
  if (position >= finiteRows - 1) return { row: finiteRows, weight: 0 };
  if (position <= 0) return { row: 0, weight: 0 };
  const row = Math.floor(position);
  return { row, weight: position - row };
}

function entry(model: ShareModel, row: number, weight: number, column: number): number {
  const at = row * columns + column;
  const low = model.table[at] as number;
  return weight === 0 ? low : low + weight * ((model.table[at + columns] as number) - low);
}

/**
 * Share of k that lies below the wave number kappa.
 *
 * @param waveTimesLength  kappa L, L = k^(3/2) / epsilon
 * @param lengthOverKolmogorov  L / eta; Infinity where the viscosity is not known
 * @returns 0 to 1
 */
export function resolvedShare(
  model: ShareModel,
  waveTimesLength: number,
  lengthOverKolmogorov: number = Number.POSITIVE_INFINITY,
): number {
  if (!(waveTimesLength > 0)) return 0;
  const { row, weight } = rowOf(lengthOverKolmogorov);
  const position = (Math.log(waveTimesLength) - firstLogK) / stepLogK;
  if (position <= 0) return 0;
  if (position >= columns - 1) return 1;
  const column = Math.floor(position);
  const low = entry(model, row, weight, column);
  return low + (position - column) * (entry(model, row, weight, column + 1) - low);
}

/**
 * Wave number below which a wanted share of k lies; the inverse of `resolvedShare`.
 *
 * @param share  0 to 1, both excluded
 * @returns kappa L
 */
export function waveForShare(
  model: ShareModel,
  share: number,
  lengthOverKolmogorov: number = Number.POSITIVE_INFINITY,
): number {
  const { row, weight } = rowOf(lengthOverKolmogorov);
  let low = 0;
  let high = columns - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (entry(model, row, weight, middle) <= share) low = middle;
    else high = middle;
  }
  const before = entry(model, row, weight, low);
  const after = entry(model, row, weight, high);
  const part = after > before ? Math.min(1, Math.max(0, (share - before) / (after - before))) : 0;
  return Math.exp(firstLogK + (low + part) * stepLogK);
}

/** L11 / L that the model takes for L / eta (dissipation-consistent for `von-karman-pao`). */
export function longitudinalLengthRatio(model: ShareModel, lengthOverKolmogorov: number): number {
  const { row, weight } = rowOf(lengthOverKolmogorov);
  const low = model.lengthRatios[row] as number;
  return weight === 0 ? low : low + weight * ((model.lengthRatios[row + 1] as number) - low);
}
