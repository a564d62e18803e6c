import { InputError } from '../basis/errors.js';
import { resolvedShare, type ShareSpectrum, shareModel, waveForShare } from './share.js';

/** What the appraisal of a mesh needs on its n cells. */
export interface ResolutionInput {
  /** n, m3. */
  readonly volumes: Float64Array;
  /** n, m2/s2, the precursor's k transferred to the cells. */
  readonly k: Float64Array;
  /** n, m2/s3. */
  readonly epsilon: Float64Array;
  /** m2/s, one number or n; without it Taylor and Kolmogorov lengths and the viscous end are left out. */
  readonly nu?: number | Float64Array;
  /** Share of k that the run is wanted to resolve, default 0.8 (Pope 2000, section 13.5). */
  readonly wantedShare?: number;
  readonly spectrum?: ShareSpectrum;
  /**
   * Cells whose k is below this part of the largest k count as quiet: no turbulence to be resolved. Default 1e-3. So do
   * cells whose own length falls away next to a wall (k goes to zero there, epsilon does not): L below 10 Kolmogorov lengths,
   * the viscous sublayer (y+ of about 5), or without viscosity L below a fiftieth of the energy-weighted mean.
   */
  readonly quietBelow?: number;
}

/** Per-cell result; all arrays have n entries, NaN where the cell is quiet. */
export interface ResolutionFields {
  /** Cube root of the volume, m; never NaN. */
  readonly cellWidth: Float64Array;
  /** k^(3/2) / epsilon, m. */
  readonly integralLength: Float64Array;
  readonly gridRatio: Float64Array;
  /** Share of k below pi / CellWidth by the model spectrum. */
  readonly share: Float64Array;
  /** CellWidth at which the wanted share is reached, m; quiet cells keep their own width. */
  readonly wantedWidth: Float64Array;
  /** sqrt(10 nu k / epsilon), m. */
  readonly taylorLength?: Float64Array;
  /** (nu^3 / epsilon)^(1/4), m. */
  readonly kolmogorovLength?: Float64Array;
  /** 1 where the cell is quiet. */
  readonly quiet: Uint8Array;
}

/** Limits of GridRatio in words: common practice, no source. */
export const gridRatioMarginal = 5;
export const gridRatioGood = 10;

const sublayerLengths = 10;
const sublayerShare = 1 / 50;

/** Energy-weighted mean of L. */
function meanLengthOf(input: ResolutionInput): number {
  let sum = 0;
  let energy = 0;
  for (let i = 0; i < input.volumes.length; i++) {
    const k = input.k[i] as number;
    const epsilon = input.epsilon[i] as number;
    if (!(k > 0 && epsilon > 0)) continue;
    const weight = k * (input.volumes[i] as number);
    sum += (weight * k ** 1.5) / epsilon;
    energy += weight;
  }
  return energy > 0 ? sum / energy : 0;
}

function requireFinite(name: string, values: Float64Array): void {
  for (let i = 0; i < values.length; i++) {
    const x = values[i] as number;
    if (!(x >= 0) || x === Number.POSITIVE_INFINITY) {
      throw new InputError({
        place: `cell ${i}`,
        cause: `${name} is ${x}`,
        remedy: 'give finite values that are not negative',
      });
    }
  }
}

/**
 * Judges every cell: can it carry the eddies that the precursor's k and epsilon promise?
 *
 * @throws InputError for k or epsilon that is negative or not finite, or a share outside 0 to 1
 * @see Pope 2000, section 13.5 (80 % line); share by the model spectrum, see `shareModel`; Taylor and Kolmogorov lengths
 *   as in Tennekes & Lumley 1972
 */
export function appraiseResolution(input: ResolutionInput): ResolutionFields {
  const n = input.volumes.length;
  const wanted = input.wantedShare ?? 0.8;
  if (!(wanted > 0 && wanted < 1)) {
    throw new InputError({
      place: 'share',
      cause: `the wanted share is ${wanted}`,
      remedy: 'give a number between 0 and 1',
    });
  }
  requireFinite('TurbulentEnergyKinetic', input.k);
  requireFinite('TurbulentDissipation', input.epsilon);
  const model = shareModel(input.spectrum);
  let largest = 0;
  for (const k of input.k) if (k > largest) largest = k;
  const floor = largest * (input.quietBelow ?? 1e-3);
  const shortest = sublayerShare * meanLengthOf(input);
  const cellWidth = new Float64Array(n);
  const integralLength = new Float64Array(n).fill(Number.NaN);
  const gridRatio = new Float64Array(n).fill(Number.NaN);
  const share = new Float64Array(n).fill(Number.NaN);
  const wantedWidth = new Float64Array(n);
  const quiet = new Uint8Array(n);
  const nu = input.nu;
  const taylorLength = nu === undefined ? undefined : new Float64Array(n).fill(Number.NaN);
  const kolmogorovLength = nu === undefined ? undefined : new Float64Array(n).fill(Number.NaN);
  for (let i = 0; i < n; i++) {
    const width = Math.cbrt(input.volumes[i] as number);
    cellWidth[i] = width;
    wantedWidth[i] = width;
    const k = input.k[i] as number;
    const epsilon = input.epsilon[i] as number;
    if (!(k > floor) || !(epsilon > 0)) {
      quiet[i] = 1;
      continue;
    }
    const length = k ** 1.5 / epsilon;
    let reach = Number.POSITIVE_INFINITY;
    if (taylorLength !== undefined && kolmogorovLength !== undefined) {
      const viscosity = typeof nu === 'number' ? nu : ((nu as Float64Array)[i] as number);
      if (viscosity > 0) {
        const eta = (viscosity ** 3 / epsilon) ** 0.25;
        kolmogorovLength[i] = eta;
        taylorLength[i] = Math.sqrt((10 * viscosity * k) / epsilon);
        reach = length / eta;
      }
    }
    if (reach === Number.POSITIVE_INFINITY ? length < shortest : reach < sublayerLengths) {
      quiet[i] = 1;
      continue;
    }
    integralLength[i] = length;
    gridRatio[i] = length / width;
    share[i] = resolvedShare(model, (Math.PI * length) / width, reach);
    wantedWidth[i] = (Math.PI * length) / waveForShare(model, wanted, reach);
  }
  return {
    cellWidth,
    integralLength,
    gridRatio,
    share,
    wantedWidth,
    quiet,
    ...(taylorLength === undefined ? {} : { taylorLength }),
    ...(kolmogorovLength === undefined ? {} : { kolmogorovLength }),
  };
}

export type Verdict = 'resolves' | 'marginal' | 'too coarse' | 'quiet';

/** Figures of a set of cells and what they mean. */
export interface ResolutionSummary {
  readonly cells: number;
  readonly volume: number;
  /** Part of the volume that is quiet. */
  readonly quietVolume: number;
  /** Parts of the turbulent volume with GridRatio below 5, from 5 to 10, from 10. */
  readonly ratioBelow5: number;
  readonly ratio5to10: number;
  readonly ratioFrom10: number;
  /** Energy-weighted means over the turbulent cells. */
  readonly meanShare: number;
  readonly meanGridRatio: number;
  readonly meanLength: number;
  readonly meanWidth: number;
  readonly meanWantedWidth: number;
  /** Part of the energy that lies in cells at or above the wanted share. */
  readonly energyAboveLine: number;
  /** Cells needed when every cell takes the wanted width / only cells that are too wide are refined. */
  readonly impliedCells: number;
  readonly impliedCellsRefineOnly: number;
  readonly meanWidthOverKolmogorov?: number;
  readonly meanWidthOverTaylor?: number;
  readonly verdict: Verdict;
  readonly words: string;
}

function millimetres(metres: number): string {
  const [value, unit] = metres < 1e-3 ? [metres * 1e6, 'um'] : metres < 1 ? [metres * 1e3, 'mm'] : [metres, 'm'];
  return `${Number(value.toPrecision(3))} ${unit}`;
}

const percent = (share: number): string => `${(100 * share).toFixed(0)} %`;

/**
 * A verdict from the energy-weighted share: at or above the wanted share it resolves; above the share that GridRatio 5
 * gives on the same spectrum (0.645 without a viscous end) it is marginal; below it is too coarse.
 */
export function verdictOf(share: number, wanted: number, marginal: number): Verdict {
  if (Number.isNaN(share)) return 'quiet';
  if (share >= wanted) return 'resolves';
  return share >= Math.min(marginal, wanted) ? 'marginal' : 'too coarse';
}

function wordsOf(verdict: Verdict, share: number, width: number, wantedWidth: number, wanted: number): string {
  if (verdict === 'quiet') return 'quiet: no turbulence of its own to be resolved here';
  const cells = `cells of ${millimetres(width)} carry ${percent(share)} of the energy`;
  if (verdict === 'resolves') return `resolves: ${cells} (wanted ${percent(wanted)})`;
  const remedy = `${millimetres(wantedWidth)} would carry ${percent(wanted)}`;
  return verdict === 'marginal' ? `marginal: ${cells}; ${remedy}` : `too coarse: ${cells}; ${remedy}`;
}

/**
 * Sums up the cells for which `member` holds (all by default).
 *
 * @param member  n, cells with the value `code` belong
 */
export function summariseResolution(
  input: ResolutionInput,
  fields: ResolutionFields,
  member?: Int32Array,
  code = 0,
): ResolutionSummary {
  const wanted = input.wantedShare ?? 0.8;
  const marginalShare = resolvedShare(shareModel(input.spectrum), Math.PI * gridRatioMarginal);
  let cells = 0;
  let volume = 0;
  let quietVolume = 0;
  let below = 0;
  let between = 0;
  let above = 0;
  let energy = 0;
  let shareSum = 0;
  let ratioSum = 0;
  let lengthSum = 0;
  let widthSum = 0;
  let wantedSum = 0;
  let aboveLine = 0;
  let implied = 0;
  let impliedRefine = 0;
  let overEta = 0;
  let overTaylor = 0;
  for (let i = 0; i < input.volumes.length; i++) {
    if (member !== undefined && member[i] !== code) continue;
    const v = input.volumes[i] as number;
    cells++;
    volume += v;
    const width = fields.cellWidth[i] as number;
    const want = fields.wantedWidth[i] as number;
    implied += v / want ** 3;
    impliedRefine += v / Math.min(want, width) ** 3;
    if (fields.quiet[i] === 1) {
      quietVolume += v;
      continue;
    }
    const ratio = fields.gridRatio[i] as number;
    if (ratio < gridRatioMarginal) below += v;
    else if (ratio < gridRatioGood) between += v;
    else above += v;
    const weight = v * (input.k[i] as number);
    const share = fields.share[i] as number;
    energy += weight;
    shareSum += weight * share;
    ratioSum += weight * ratio;
    lengthSum += weight * (fields.integralLength[i] as number);
    widthSum += weight * width;
    wantedSum += weight * want;
    if (share >= wanted) aboveLine += weight;
    if (fields.kolmogorovLength !== undefined) overEta += (weight * width) / (fields.kolmogorovLength[i] as number);
    if (fields.taylorLength !== undefined) overTaylor += (weight * width) / (fields.taylorLength[i] as number);
  }
  const turbulent = volume - quietVolume;
  const mean = (sum: number): number => (energy > 0 ? sum / energy : Number.NaN);
  const part = (x: number): number => (turbulent > 0 ? x / turbulent : Number.NaN);
  const meanShare = mean(shareSum);
  const verdict = verdictOf(meanShare, wanted, marginalShare);
  return {
    cells,
    volume,
    quietVolume: volume > 0 ? quietVolume / volume : 0,
    ratioBelow5: part(below),
    ratio5to10: part(between),
    ratioFrom10: part(above),
    meanShare,
    meanGridRatio: mean(ratioSum),
    meanLength: mean(lengthSum),
    meanWidth: mean(widthSum),
    meanWantedWidth: mean(wantedSum),
    energyAboveLine: mean(aboveLine),
    impliedCells: implied,
    impliedCellsRefineOnly: impliedRefine,
    ...(fields.kolmogorovLength === undefined ? {} : { meanWidthOverKolmogorov: mean(overEta) }),
    ...(fields.taylorLength === undefined ? {} : { meanWidthOverTaylor: mean(overTaylor) }),
    verdict,
    words: wordsOf(verdict, meanShare, mean(widthSum), mean(wantedSum), wanted),
  };
}
