import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';
import { type CellLines, findLines } from './lines.js';

/** One-dimensional spectra and correlation lengths along one periodic direction. */
export interface LineFigures {
  /** Unit vector. */
  readonly direction: readonly [number, number, number];
  /** Distance of cell centres, m. */
  readonly spacing: number;
  /** Cells a line, lines taken, lines there are. */
  readonly samples: number;
  readonly lines: number;
  readonly linesFound: number;
  /** 2 pi m / period for m = 1 ... samples / 2, rad/m; the last is the cut-off pi / spacing when samples are even. */
  readonly waveNumber: readonly number[];
  /**
   * E11: the spectrum of the component along the line, m3/s2, one-sided: its sum times the wave-number step is the
   * variance about the line's mean, averaged over lines by volume.
   */
  readonly longitudinalSpectrum: readonly number[];
  /** Mean of the two components across. */
  readonly transverseSpectrum: readonly number[];
  /**
   * Integrals of the two-point correlations up to their first zero (common practice), m; 2 : 1 in isotropic turbulence
   * (Pope 2000, Turbulent Flows, eq. 6.50). Null when nothing fluctuates.
   */
  readonly longitudinalLength: number | null;
  readonly transverseLength: number | null;
}

/** Multiplications that the transforms of one direction may take; lines are left out evenly beyond that. */
const budget = 3e8;

/** Unit vectors across a direction. */
function across(d: readonly [number, number, number]): readonly (readonly [number, number, number])[] {
  const least = d.map(Math.abs).indexOf(Math.min(...d.map(Math.abs)));
  const e = [0, 0, 0].map((_, i) => (i === least ? 1 : 0) - d[least as 0] * d[i as 0]);
  const size = Math.hypot(...e);
  const a = e.map((v) => v / size) as unknown as [number, number, number];
  return [a, [d[1] * a[2] - d[2] * a[1], d[2] * a[0] - d[0] * a[2], d[0] * a[1] - d[1] * a[0]]];
}

/** Integral of a normalised correlation from 0 to its first zero, trapezoidal; to half the period when it has none. */
function integralLength(correlation: Float64Array, spacing: number): number | null {
  const own = correlation[0]!;
  if (!(own > 0)) return null;
  let sum = 0;
  const half = Math.floor(correlation.length / 2);
  for (let r = 0; r < half; r++) {
    const a = correlation[r]! / own;
    const b = correlation[r + 1]! / own;
    if (b <= 0) return (sum + (0.5 * a * a) / (a - b)) * spacing;
    sum += (a + b) / 2;
  }
  return sum * spacing;
}

/** Mean |transform|^2 of one component over lines, by volume; entry m is the wave number m. */
function power(
  lines: CellLines,
  stride: number,
  velocity: Float64Array,
  volumes: Float64Array,
  component: readonly [number, number, number],
): Float64Array {
  const { samples: n, cells } = lines;
  const half = Math.floor(n / 2);
  const cosine = Float64Array.from({ length: n }, (_, i) => Math.cos((2 * Math.PI * i) / n));
  const sine = Float64Array.from({ length: n }, (_, i) => Math.sin((2 * Math.PI * i) / n));
  const out = new Float64Array(half + 1);
  const u = new Float64Array(n);
  let total = 0;
  for (let first = 0; first < cells.length; first += stride * n) {
    let volume = 0;
    for (let i = 0; i < n; i++) {
      const c = cells[first + i]!;
      volume += volumes[c]!;
      u[i] =
        component[0] * velocity[3 * c]! + component[1] * velocity[3 * c + 1]! + component[2] * velocity[3 * c + 2]!;
    }
    total += volume;
    for (let m = 0; m <= half; m++) {
      let re = 0;
      let im = 0;
      for (let i = 0, at = 0; i < n; i++) {
        re += u[i]! * cosine[at]!;
        im += u[i]! * sine[at]!;
        at += m;
        if (at >= n) at -= n;
      }
      out[m]! += (volume * (re * re + im * im)) / (n * n);
    }
  }
  return out.map((v) => v / total);
}

/** Two-point correlation at lags 0 ... n - 1 from the power at wave numbers 0 ... n / 2 (Wiener and Khinchin). */
function correlationOf(spectrum: Float64Array, n: number): Float64Array {
  return Float64Array.from({ length: n }, (_, r) => {
    let sum = spectrum[0]!;
    for (let m = 1; m < spectrum.length; m++) {
      sum += (2 * m === n ? 1 : 2) * spectrum[m]! * Math.cos((2 * Math.PI * ((m * r) % n)) / n);
    }
    return sum;
  });
}

/** Figures along every period whose rows of cells are equally spaced; empty when there is none. */
export function lineFigures(
  mesh: CellMesh,
  geometry: MeshGeometry,
  periodic: PeriodicPairs | undefined,
  fluctuation: Float64Array,
): LineFigures[] {
  if (periodic === undefined) return [];
  return periodic.periods.flatMap((_, period): LineFigures[] => {
    const lines = findLines(mesh, geometry, periodic, period);
    if (lines === undefined) return [];
    const { samples: n, spacing, direction } = lines;
    const found = lines.cells.length / n;
    const stride = Math.max(1, Math.ceil((found * 3 * n * n) / budget));
    const powerOf = (component: readonly [number, number, number]): Float64Array =>
      power(lines, stride, fluctuation, geometry.cellVolumes, component);
    const along = powerOf(direction);
    const [a, b] = across(direction).map(powerOf) as [Float64Array, Float64Array];
    const beside = a.map((v, m) => (v + b[m]!) / 2);
    const step = (2 * Math.PI) / (n * spacing);
    const density = (spectrum: Float64Array): number[] =>
      Array.from(spectrum.subarray(1), (v, i) => ((2 * (i + 1) === n ? 1 : 2) * v) / step);
    return [
      {
        direction,
        spacing,
        samples: n,
        lines: Math.ceil(found / stride),
        linesFound: found,
        waveNumber: Array.from(along.subarray(1), (_v, i) => (i + 1) * step),
        longitudinalSpectrum: density(along),
        transverseSpectrum: density(beside),
        longitudinalLength: integralLength(correlationOf(along, n), spacing),
        transverseLength: integralLength(correlationOf(beside, n), spacing),
      },
    ];
  });
}
