import type { ResolutionFields, ResolutionInput, ResolutionSummary } from './resolution.js';

/** How a second precursor changes the judgement of one mesh. */
export interface PrecursorComparison {
  /** Energy-weighted mean length of the second over that of the first. */
  readonly lengthRatio: number;
  readonly energyRatio: number;
  readonly shareDifference: number;
  readonly impliedCellsRatio: number;
  /** Part of the volume (turbulent in both) where the second promises smaller eddies. */
  readonly smallerVolume: number;
  readonly words: string;
}

/**
 * Compares two precursors on the same cells. Unsteady ones usually give the smaller length: part of their energy is
 * carried by the motion that they resolve themselves.
 */
export function comparePrecursors(
  first: { readonly input: ResolutionInput; readonly fields: ResolutionFields; readonly summary: ResolutionSummary },
  second: { readonly input: ResolutionInput; readonly fields: ResolutionFields; readonly summary: ResolutionSummary },
): PrecursorComparison {
  let both = 0;
  let smaller = 0;
  let energy1 = 0;
  let energy2 = 0;
  const { volumes } = first.input;
  for (let i = 0; i < volumes.length; i++) {
    const v = volumes[i] as number;
    energy1 += v * (first.input.k[i] as number);
    energy2 += v * (second.input.k[i] as number);
    if (first.fields.quiet[i] === 1 || second.fields.quiet[i] === 1) continue;
    both += v;
    if ((second.fields.integralLength[i] as number) < (first.fields.integralLength[i] as number)) smaller += v;
  }
  const lengthRatio = second.summary.meanLength / first.summary.meanLength;
  const shareDifference = second.summary.meanShare - first.summary.meanShare;
  const impliedCellsRatio = second.summary.impliedCells / first.summary.impliedCells;
  const more = impliedCellsRatio >= 1 ? 'more' : 'fewer';
  const factor = impliedCellsRatio >= 1 ? impliedCellsRatio : 1 / impliedCellsRatio;
  return {
    lengthRatio,
    energyRatio: energy2 / energy1,
    shareDifference,
    impliedCellsRatio,
    smallerVolume: both > 0 ? smaller / both : Number.NaN,
    words:
      `the second precursor's eddies are ${lengthRatio.toPrecision(3)} times as long; by it the mesh carries ` +
      `${(100 * second.summary.meanShare).toFixed(0)} % instead of ${(100 * first.summary.meanShare).toFixed(0)} % of the ` +
      `energy, and the wanted share needs ${factor.toPrecision(3)} times ${more} cells`,
  };
}
