import { integrate } from './quadrature.js';
import { type Spectrum, shapeIntegral } from './spectra.js';

/**
 * Energy shares of the shells as functions of the local kappa_e and eta, by cubic interpolation of logarithms:
 *
 *   ln e_s / k = ln F_s(ln kappa_e) + ln V(kappa_s eta) - ln N(ln kappa_e eta)
 *
 * F_s is the integral of F over the shell (the first one takes all below it), so that shells of any width hold their
 * energy exactly where viscosity plays no part. Values and slopes are tabulated; the interpolant has a continuous slope.
 */
export interface ShellTable {
  readonly shells: number;
  /** First ln kappa_e and step of the columns. */
  readonly start: number;
  readonly step: number;
  readonly columns: number;
  /** shells x columns. */
  readonly lnShare: Float64Array;
  /** shells x columns, d / d ln kappa_e. */
  readonly shareSlope: Float64Array;
  /** kappa_s^(4/3) for Pao's end, kappa_s otherwise. */
  readonly viscousWave: Float64Array;
  /** Shape of the viscous end. */
  readonly viscous: 'pao' | 'pope' | 'none';
  /** First ln(kappa_e eta), step, values and slopes of ln N. */
  readonly normStart: number;
  readonly normStep: number;
  readonly lnNorm: Float64Array;
  readonly normSlope: Float64Array;
}

const viscousOf = (spectrum: Spectrum): 'pao' | 'pope' | 'none' =>
  spectrum.name === 'von-karman-pao' ? 'pao' : spectrum.name === 'pope' ? 'pope' : 'none';

/**
 * @param edges   shells + 1 rising wave numbers, 1/m
 * @param waves   representative wave number of each shell
 * @param lnWave  range of ln kappa_e met on the mesh
 */
export function buildShellTable(
  spectrum: Spectrum,
  edges: Float64Array,
  waves: Float64Array,
  lnWave: readonly [number, number],
): ShellTable {
  const shells = waves.length;
  const step = 0.125;
  const start = lnWave[0] - step;
  const columns = Math.max(4, Math.ceil((lnWave[1] - start) / step) + 3);
  const lnShare = new Float64Array(shells * columns);
  const shareSlope = new Float64Array(shells * columns);
  const f = (l: number): number => Math.exp(l) * spectrum.large(Math.exp(l));
  for (let s = 0; s < shells; s++) {
    for (let c = 0; c < columns; c++) {
      const wave = start + c * step;
      const high = Math.log(edges[s + 1]!) - wave;
      const low = s === 0 ? Math.min(spectrum.range[0], high - 2) : Math.log(edges[s]!) - wave;
      const share = integrate(f, low, high, Math.ceil((high - low) * 2));
      const at = s * columns + c;
      // Shares too small for a number keep a finite logarithm.
      lnShare[at] = Math.log(Math.max(share, 1e-60));
      shareSlope[at] = share > 1e-60 ? -(f(high) - (s === 0 ? 0 : f(low))) / share : 0;
    }
  }
  const normStart = -16;
  const normStep = 0.25;
  const norms = 76;
  const lnNorm = new Float64Array(norms);
  const normSlope = new Float64Array(norms);
  const viscous = viscousOf(spectrum);
  if (viscous !== 'none') {
    for (let i = 0; i < norms; i++) {
      const at = normStart + i * normStep;
      const small = 1e-3;
      lnNorm[i] = Math.log(shapeIntegral(spectrum, Math.exp(at)));
      const above = Math.log(shapeIntegral(spectrum, Math.exp(at + small)));
      const below = Math.log(shapeIntegral(spectrum, Math.exp(at - small)));
      normSlope[i] = (above - below) / (2 * small);
    }
  }
  return {
    shells,
    start,
    step,
    columns,
    lnShare,
    shareSlope,
    viscousWave: waves.map((w) => (viscous === 'pao' ? w ** (4 / 3) : w)),
    viscous,
    normStart,
    normStep,
    lnNorm,
    normSlope,
  };
}

/** Share of one shell and its logarithmic slopes. */
export interface ShellShare {
  share: number;
  /** d ln share / d ln kappa_e. */
  byWave: number;
  /** d ln share / d ln eta. */
  byEta: number;
}

/** State of a cell that all its shells have in common; filled by `openCell`. */
export interface CellSpectrum {
  column: number;
  t: number;
  lnNorm: number;
  normSlope: number;
  /** eta, or eta^(4/3) for Pao's end. */
  eta: number;
}

/** @param lnEta  ln of Kolmogorov's length, -Infinity without viscosity */
export function openCell(table: ShellTable, lnWave: number, lnEta: number, out: CellSpectrum): void {
  const u = Math.min(table.columns - 1.0001, Math.max(0, (lnWave - table.start) / table.step));
  out.column = Math.floor(u);
  out.t = u - out.column;
  out.lnNorm = 0;
  out.normSlope = 0;
  out.eta = 0;
  if (table.viscous === 'none' || lnEta === -Infinity) return;
  out.eta = table.viscous === 'pao' ? Math.exp((4 / 3) * lnEta) : Math.exp(lnEta);
  const v = (lnWave + lnEta - table.normStart) / table.normStep;
  const last = table.lnNorm.length - 1;
  if (v <= 0) return;
  const i = Math.min(last - 1, Math.floor(v));
  const t = Math.min(1, v - i);
  const h = table.normStep;
  out.lnNorm = hermite(table.lnNorm, table.normSlope, i, t, h);
  out.normSlope = hermiteSlope(table.lnNorm, table.normSlope, i, t, h);
}

function hermite(values: Float64Array, slopes: Float64Array, i: number, t: number, h: number): number {
  const s = 1 - t;
  const left = s * s * ((1 + 2 * t) * values[i]! + t * h * slopes[i]!);
  return left + t * t * ((3 - 2 * t) * values[i + 1]! - s * h * slopes[i + 1]!);
}

function hermiteSlope(values: Float64Array, slopes: Float64Array, i: number, t: number, h: number): number {
  const s = 1 - t;
  const rise = (6 * t * s * (values[i + 1]! - values[i]!)) / h;
  return rise + s * (1 - 3 * t) * slopes[i]! + t * (3 * t - 2) * slopes[i + 1]!;
}

const popeBeta = 5.2;
const popeEta4 = 0.4017 ** 4;

/** Share of shell `shell` in the cell opened before. */
export function shellShare(table: ShellTable, cell: CellSpectrum, shell: number, out: ShellShare): void {
  const at = shell * table.columns + cell.column;
  let ln = hermite(table.lnShare, table.shareSlope, at, cell.t, table.step) - cell.lnNorm;
  out.byWave = hermiteSlope(table.lnShare, table.shareSlope, at, cell.t, table.step) - cell.normSlope;
  out.byEta = -cell.normSlope;
  if (cell.eta > 0) {
    if (table.viscous === 'pao') {
      const y = 2.25 * table.viscousWave[shell]! * cell.eta;
      ln -= y;
      out.byEta -= (4 / 3) * y;
    } else {
      const y4 = (table.viscousWave[shell]! * cell.eta) ** 4;
      const root = (y4 + popeEta4) ** 0.25;
      ln -= popeBeta * (root - 0.4017);
      out.byEta -= (popeBeta * y4 * root) / (y4 + popeEta4);
    }
  }
  out.share = Math.exp(ln);
}
