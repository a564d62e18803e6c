import type { Dataset } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { type Field, sharedFloat64 } from '../basis/fields.js';
import { findQuantity } from '../basis/quantities.js';
import { buildMesh } from '../mesh/build.js';
import type { CellMesh, MeshGeometry } from '../mesh/cell-mesh.js';
import { measureMesh } from '../mesh/geometry.js';
import { requirePositiveVolumes } from '../mesh/quality.js';
import { type OutsideRule, prepareCellLinear } from '../transfer/cell-linear.js';
import { preparePointLinear } from '../transfer/cell-linear-points.js';
import { type CloudField, type CloudMethod, prepareCloudTransfer } from '../transfer/cloud.js';
import { prepareConservative } from '../transfer/conservative.js';
import { withPeriodicMargins, withWalls } from './extended-cloud.js';
import type { Precursor, PrecursorCloud } from './precursor.js';
import { type Progress, timed } from './progress.js';
import type { Target } from './target.js';
import type { Workers } from './workers.js';

export interface TransferOptions {
  readonly method: CloudMethod | 'conservative';
  readonly neighbours: number;
  readonly power: number;
  readonly outside: 'nearest' | 'extrapolate' | 'fail' | number;
  readonly logarithmic: boolean;
  readonly limited: boolean;
  /** Places where the velocity and k are zero: centres (3 x n, m) and area vectors (3 x n) of no-slip wall faces. */
  readonly wallPoints?: { readonly points: Float64Array; readonly areas: Float64Array };
}

export interface Transferred {
  /** Fields at the target's cells, by standard name. */
  readonly fields: Map<string, Field>;
  /** cells: codes of the `Outside` array. */
  readonly outside: Uint8Array;
  /** cells: distance to the precursor for cells outside, m. */
  readonly distance: Float64Array;
  readonly method: string;
  readonly counts: {
    readonly inside: number;
    readonly nearest: number;
    readonly extrapolated: number;
    readonly constant: number;
  };
  readonly assumptions: readonly string[];
}

function sharedUint8(length: number): Uint8Array {
  return new Uint8Array(new SharedArrayBuffer(length));
}

function asShared(values: Float64Array): Float64Array {
  if (values.buffer instanceof SharedArrayBuffer) return values;
  const copy = sharedFloat64(values.length);
  copy.set(values);
  return copy;
}

function describeField(name: string, field: Field, logarithmic: boolean): CloudField {
  const known = findQuantity(name);
  return {
    components: field.components,
    values: asShared(field.values),
    nonNegative: known?.nonNegative === true && field.components === 1,
    logarithmic: logarithmic && known?.logInterpolated === true,
  };
}

interface Output {
  readonly fields: readonly Float64Array[];
  readonly outside: Uint8Array;
  readonly distance: Float64Array;
}

function hasVolumeCells(mesh: Dataset | undefined): boolean {
  const types = mesh?.cells?.types;
  // Numbers of volume cells: 10 to 16, quadratic 24 to 27 and their kin, 42.
  return types?.some((type) => (type >= 10 && type <= 16) || (type >= 24 && type !== 28 && type !== 30)) === true;
}

function measured(dataset: Dataset): { readonly mesh: CellMesh; readonly geometry: MeshGeometry } {
  const mesh = buildMesh(dataset);
  const geometry = measureMesh(mesh);
  requirePositiveVolumes(mesh, geometry, dataset.file);
  return { mesh, geometry };
}

/** Values at the points of a mesh, by the shape functions of the cell that holds the target. */
async function transferFromPoints(
  dataset: Dataset,
  cloud: PrecursorCloud,
  target: Target,
  options: TransferOptions,
  out: Output,
  workers: Workers,
  progress: Progress,
): Promise<void> {
  const { mesh, geometry } = measured(dataset);
  const logs: boolean[] = [];
  const fields = [...cloud.fields].map(([name, field]) => {
    const inLogarithm =
      options.logarithmic && findQuantity(name)?.logInterpolated === true && field.values.every((value) => value > 0);
    logs.push(inLogarithm);
    return { components: field.components, values: inLogarithm ? field.values.map(Math.log) : field.values };
  });
  const plan = preparePointLinear(dataset, mesh, geometry, fields, {
    outside: options.outside === 'fail' ? 'nearest' : options.outside,
  });
  const targets = target.geometry.cellCentroids;
  await workers.overRanges('points', { plan, targets, out }, target.mesh.cellCount, progress);
  undoLogarithms(logs, out);
}

function undoLogarithms(logs: readonly boolean[], out: Output): void {
  logs.forEach((log, i) => {
    const values = out.fields[i] as Float64Array;
    if (log) for (let c = 0; c < values.length; c += 1) values[c] = Math.exp(values[c] as number);
  });
}

/** Cell values of a mesh may be reconstructed with their slopes; logarithms are taken before and undone after. */
async function transferFromCells(
  dataset: Dataset,
  cloud: PrecursorCloud,
  target: Target,
  options: TransferOptions,
  out: Output,
  workers: Workers,
  progress: Progress,
): Promise<void> {
  const { mesh, geometry } = measured(dataset);
  const names = [...cloud.fields.keys()];
  const onVolumes = (field: Field): Float64Array => {
    const values = new Float64Array(mesh.cellCount * field.components);
    for (let c = 0; c < mesh.cellCount; c += 1) {
      const from = (mesh.datasetCell[c] as number) * field.components;
      for (let i = 0; i < field.components; i += 1) values[c * field.components + i] = field.values[from + i] as number;
    }
    return values;
  };
  // Conservation is of the quantity itself, not of its logarithm.
  const mayLog = options.logarithmic && options.method !== 'conservative';
  const logs = names.map((name) => mayLog && findQuantity(name)?.logInterpolated === true);
  const fields = names.map((name, i) => {
    const field = cloud.fields.get(name) as Field;
    let values = onVolumes(field);
    const inLogarithm = logs[i] === true && values.every((value) => value > 0);
    logs[i] = inLogarithm;
    if (inLogarithm) values = values.map(Math.log);
    const nonNegative = !inLogarithm && findQuantity(name)?.nonNegative === true && field.components === 1;
    return { components: field.components, values, nonNegative };
  });
  const outside: OutsideRule = options.outside === 'fail' ? 'nearest' : options.outside;
  const common = { limited: options.limited, outside };
  if (options.method === 'conservative') {
    // Momentum is what is conserved: velocities travel as density times velocity where there is a density.
    const density = names.indexOf('Density');
    const velocity = names.indexOf('Velocity');
    const withMomentum = density >= 0 && velocity >= 0;
    if (withMomentum) {
      const rho = (fields[density] as (typeof fields)[number]).values;
      const u = (fields[velocity] as (typeof fields)[number]).values;
      for (let i = 0; i < u.length; i += 1) u[i] = (u[i] as number) * (rho[Math.floor(i / 3)] as number);
    }
    const plan = prepareConservative({ mesh, geometry }, target, fields, common);
    const covered = sharedFloat64(target.mesh.cellCount);
    await workers.overRanges('conservative', { plan, out: { ...out, covered } }, target.mesh.cellCount, progress);
    if (withMomentum) {
      const rho = out.fields[density] as Float64Array;
      const u = out.fields[velocity] as Float64Array;
      for (let i = 0; i < u.length; i += 1) {
        const local = rho[Math.floor(i / 3)] as number;
        u[i] = local > 0 ? (u[i] as number) / local : 0;
      }
    }
  } else {
    const plan = prepareCellLinear(mesh, geometry, fields, common);
    const targets = target.geometry.cellCentroids;
    await workers.overRanges('cells', { plan, targets, out }, target.mesh.cellCount, progress);
  }
  undoLogarithms(logs, out);
}

function checkOutside(options: TransferOptions, outside: Uint8Array, precursor: Precursor, target: Target): void {
  if (options.outside !== 'fail') return;
  const first = outside.findIndex((code) => code !== 0);
  if (first < 0) return;
  const count = outside.reduce((sum, code) => sum + (code === 0 ? 0 : 1), 0);
  const [x, y, z] = target.geometry.cellCentroids.subarray(3 * first, 3 * first + 3);
  throw new InputError({
    file: target.file,
    place: `cell ${first} at ${[x, y, z].map((v) => (v as number).toPrecision(6)).join(' ')}`,
    cause: `${count} target cells lie outside the precursor ${precursor.file}`,
    remedy: 'choose --outside nearest, extrapolate or a number, or mend the placement',
  });
}

/**
 * Carries every field of the precursor to the target's cell centres.
 *
 * @throws InputError for too few points, conservative without cells, or targets outside where that is refused
 */
export async function transferFields(
  precursor: Precursor,
  target: Target,
  options: TransferOptions,
  workers: Workers,
  progress: Progress,
  timings: Map<string, number>,
): Promise<Transferred> {
  const cells = target.mesh.cellCount;
  const fields = new Map<string, Field>();
  const outside = sharedUint8(cells);
  const distance = sharedFloat64(cells);
  const assumptions: string[] = [];
  const used: string[] = [];
  const { constantAxes } = precursor;
  const mesh = constantAxes.length === 0 && hasVolumeCells(precursor.mesh) ? precursor.mesh : undefined;
  for (const cloud of precursor.clouds) {
    const names = [...cloud.fields.keys()];
    const out: Output = {
      fields: names.map((name) => sharedFloat64(cells * (cloud.fields.get(name) as Field).components)),
      outside: sharedUint8(cells),
      distance: sharedFloat64(cells),
    };
    const byCells = cloud.place === 'cells' && mesh !== undefined;
    if (options.method === 'conservative' && !byCells) {
      throw new InputError({
        file: precursor.file,
        cause: 'conservative transfer needs a precursor with volume cells and values on them',
        remedy: 'choose --method linear',
      });
    }
    const walls = options.wallPoints;
    const useWalls = walls !== undefined && walls.points.length > 0 && options.method !== 'conservative';
    if (mesh !== undefined && options.method === 'linear' && cloud.place === 'points') {
      used.push('linear (shape functions)');
      await timed(progress, timings, 'transfer', cells, () =>
        transferFromPoints(mesh, cloud, target, options, out, workers, progress),
      );
    } else if (
      mesh !== undefined &&
      (options.method === 'conservative' || (options.method === 'linear' && !useWalls))
    ) {
      used.push(options.method === 'conservative' ? 'conservative' : 'linear (cells)');
      await timed(progress, timings, 'transfer', cells, () =>
        transferFromCells(mesh, cloud, target, options, out, workers, progress),
      );
    } else {
      const method = options.method as CloudMethod;
      used.push(`${method} (${cloud.place})`);
      const whole =
        constantAxes.length === 0 && method !== 'nearest' ? withPeriodicMargins(cloud, target, assumptions) : cloud;
      const source = useWalls ? withWalls(whole, walls, constantAxes) : whole;
      const rule: OutsideRule = options.outside === 'fail' ? 'nearest' : options.outside;
      const plan = await timed(progress, timings, 'index precursor', 0, () =>
        prepareCloudTransfer(source.points, {
          method,
          neighbours: options.neighbours,
          power: options.power,
          outside: rule,
          constantAxes,
          own: whole.points.length / 3,
          file: precursor.file,
        }),
      );
      const payload = {
        plan,
        fields: names.map((name) => describeField(name, source.fields.get(name) as Field, options.logarithmic)),
        targets: target.geometry.cellCentroids,
        out,
      };
      await timed(progress, timings, 'transfer', cells, () => workers.overRanges('cloud', payload, cells, progress));
      if (useWalls) assumptions.push('No-slip walls entered the precursor as points of zero velocity and zero k.');
    }
    names.forEach((name, i) => {
      const { components } = cloud.fields.get(name) as Field;
      fields.set(name, { components, values: out.fields[i] as Float64Array });
    });
    for (let c = 0; c < cells; c += 1) {
      outside[c] = Math.max(outside[c] as number, out.outside[c] as number);
      distance[c] = Math.max(distance[c] as number, out.distance[c] as number);
    }
  }
  checkOutside(options, outside, precursor, target);
  for (const [name, value] of Object.entries(precursor.constants)) {
    fields.set(name, { components: 1, values: sharedFloat64(cells).fill(value) });
    assumptions.push(`${name} = ${value} everywhere, as the case says.`);
  }
  const counts = [0, 0, 0, 0];
  for (const code of outside) counts[code] = (counts[code] as number) + 1;
  const [inside = 0, nearest = 0, extrapolated = 0, constant = 0] = counts;
  if (options.logarithmic) {
    const logarithmic = [...fields.keys()].filter((name) => findQuantity(name)?.logInterpolated === true);
    if (logarithmic.length > 0) assumptions.push(`${logarithmic.join(', ')} interpolated in the logarithm.`);
  }
  return {
    fields,
    outside,
    distance,
    method: [...new Set(used)].join(', '),
    counts: { inside, nearest, extrapolated, constant },
    assumptions,
  };
}
