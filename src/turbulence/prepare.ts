import { sharedFloat64 } from '../basis/fields.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';
import { createGradient } from '../mesh/gradient.js';
import { createModes, modeTable } from './modes.js';
import { column, type FluctuationPlan, type Grade, plainColumns, stressColumns } from './plan.js';
import { polarisationTable } from './polarisation.js';
import type { LocalScales } from './scales.js';
import { buildShellTable } from './shell-table.js';
import { smoothWidths } from './smooth.js';
import type { Spectrum } from './spectra.js';
import { extremeEigenvalues } from './symmetric.js';

export interface FluctuationOptions {
  readonly seed: number;
  readonly shells: number;
  readonly directions: number;
  /** Shortest wave laid on the mesh, in cells along the wave. */
  readonly wavelengthCells: number;
  readonly spectrum: Spectrum;
  readonly grade: Grade;
  /** Stretching of eddies along x, y, z; default none. */
  readonly stretch?: readonly [number, number, number];
}

export interface FluctuationInput {
  readonly mesh: CellMesh;
  readonly geometry: MeshGeometry;
  readonly periodic?: PeriodicPairs;
  readonly scales: LocalScales;
  /** 6 x cells, wanted u'_i u'_j, m2/s2; only its shape is used, the energy is `scales.k`. Absent: isotropic. */
  readonly covariance?: Float64Array;
  /** cells, 0 to 1: amplitude left by zones, fades and wall ramps; default 1. */
  readonly seeding?: Float64Array;
  readonly options: FluctuationOptions;
}

interface Weighted {
  readonly value: number;
  readonly weight: number;
}

/** Value below which the given share of the weights lies. */
function quantile(items: Weighted[], share: number): number {
  items.sort((a, b) => a.value - b.value);
  const total = items.reduce((sum, item) => sum + item.weight, 0);
  let sum = 0;
  for (const item of items) {
    sum += item.weight;
    if (sum >= share * total) return item.value;
  }
  return items.at(-1)?.value ?? 1;
}

/** Cells whose energy is small do not decide the range of wave numbers. */
function waveRange(input: FluctuationInput): { minimum: number; maximum: number; uniform: boolean } {
  const { geometry, scales, periodic, options } = input;
  const cells = geometry.cellVolumes.length;
  const stride = Math.max(1, Math.floor(cells / 100_000));
  const carried: Weighted[] = [];
  const viscous: Weighted[] = [];
  const energetic: Weighted[] = [];
  const extremes = new Float64Array(2);
  let least = Infinity;
  let most = 0;
  for (let i = 0; i < cells; i++) {
    extremeEigenvalues(geometry.widthTensors, 6 * i, extremes);
    least = Math.min(least, extremes[0]!);
    most = Math.max(most, extremes[1]!);
    if (i % stride !== 0) continue;
    const weight = scales.k[i]! * geometry.cellVolumes[i]! * (input.seeding?.[i] ?? 1) ** 2;
    if (!(weight > 0) || !(scales.energyWave[i]! < Infinity)) continue;
    const shortest = Math.min(2, options.wavelengthCells);
    carried.push({ value: (2 * Math.PI) / (shortest * Math.sqrt(extremes[0]!)), weight });
    energetic.push({ value: scales.energyWave[i]!, weight });
    if (scales.eta !== undefined) viscous.push({ value: 1.5 / scales.eta[i]!, weight });
  }
  let maximum = quantile(carried, 0.995);
  if (viscous.length > 0 && !options.spectrum.fixed) maximum = Math.min(maximum, quantile(viscous, 0.995));
  const units = (periodic?.periods ?? []).map((p) => (2 * Math.PI) / Math.hypot(...p));
  // Half the largest extent of the mesh: longer waves are no turbulence there.
  let extent = 0;
  for (let a = 0; a < 3; a++) {
    let low = Infinity;
    let high = -Infinity;
    for (let i = a; i < geometry.cellCentroids.length; i += 3) {
      low = Math.min(low, geometry.cellCentroids[i]!);
      high = Math.max(high, geometry.cellCentroids[i]!);
    }
    extent = Math.max(extent, high - low);
  }
  const lowest = options.spectrum.fixed ? 0 : 0.25 * quantile(energetic, 0.01);
  const floor = units.length > 0 ? Math.min(...units) * (units.length === 3 ? 0.5 : 1) : Math.PI / extent;
  const minimum = Math.max(lowest, floor);
  return { minimum: Math.min(minimum, maximum / 3), maximum, uniform: most / least < 1.01 };
}

/**
 * Modes, tables and parameter fields for a mesh. What then follows: `weighRange` over all cells (workers), `compensate`
 * where the flow is not homogeneous, `synthesiseRange` over all cells (workers), `calibrate`.
 */
export function prepareFluctuations(input: FluctuationInput): FluctuationPlan {
  const { mesh, geometry, scales, options } = input;
  const cells = mesh.cellCount;
  const { minimum, maximum, uniform } = waveRange(input);
  const modes = createModes({
    seed: options.seed,
    shells: options.shells,
    directions: options.directions,
    minimum,
    maximum,
    periods: input.periodic?.periods ?? [],
    ...(options.stretch === undefined ? {} : { stretch: options.stretch }),
  });
  const bottom = Math.log(minimum / 4);
  const top = Math.log(maximum * 4);
  const columns = input.covariance === undefined ? plainColumns : stressColumns;
  const parameters = sharedFloat64(columns * cells);
  const widths = smoothWidths(mesh, geometry);
  let lowWave = Infinity;
  let highWave = -Infinity;
  for (let i = 0; i < cells; i++) {
    const at = columns * i;
    // Quiet cells have no length; their weights are zero, but neighbours' gradients read them.
    const wave = options.spectrum.fixed ? 0 : Math.min(top, Math.max(bottom, Math.log(scales.energyWave[i]!)));
    lowWave = Math.min(lowWave, wave);
    highWave = Math.max(highWave, wave);
    parameters[at + column.lnWave] = wave;
    const eta = scales.eta?.[i] ?? 0;
    parameters[at + column.lnEta] = scales.eta === undefined ? -40 : Math.log(Math.max(eta, 1e-3 / maximum));
    for (let c = 0; c < 6; c++) parameters[at + column.width + c] = widths[6 * i + c]!;
  }
  const seeding = sharedFloat64(cells).fill(1);
  if (input.seeding !== undefined) seeding.set(input.seeding);
  const k = sharedFloat64(cells);
  k.set(scales.k);
  let covariance: Float64Array | undefined;
  if (input.covariance !== undefined) {
    covariance = sharedFloat64(6 * cells);
    covariance.set(input.covariance);
  }
  const edge = uniform ? 0.98 : 0.8;
  return {
    grade: options.grade,
    modes,
    table: modeTable(modes, options.wavelengthCells),
    shellTable: buildShellTable(options.spectrum, modes.edges, modes.waves, [lowWave, highWave]),
    wavelengthCells: options.wavelengthCells,
    taper: 1 / (1 - edge * edge),
    cells,
    centroids: geometry.cellCentroids,
    columns,
    parameters,
    gradient: createGradient(mesh, geometry, input.periodic),
    k,
    seeding,
    ...(covariance === undefined ? {} : { covariance, polarisationTable: polarisationTable() }),
    wanted: sharedFloat64(cells),
    resolvableShare: sharedFloat64(cells),
    flags: new Uint8Array(new SharedArrayBuffer(cells)),
  };
}
