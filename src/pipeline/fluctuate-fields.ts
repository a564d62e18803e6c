import { InputError } from '../basis/errors.js';
import { type Field, type Fields, sharedFloat64 } from '../basis/fields.js';
import type { FluctuationSettings } from '../case/schema.js';
import type { Zone as ZoneSettings } from '../case/zones.js';
import { readDataset } from '../formats/registry.js';
import { createGradient } from '../mesh/gradient.js';
import { prepareWallDistance } from '../mesh/wall-distance.js';
import { calibrate } from '../turbulence/calibrate.js';
import { compensate } from '../turbulence/compensate.js';
import type { MultiplierField } from '../turbulence/multiplier-field.js';
import { cellFlag, type FluctuationPlan } from '../turbulence/plan.js';
import { prepareFluctuations } from '../turbulence/prepare.js';
import { type CellValue, type LocalScales, localScales, type ScaleInput } from '../turbulence/scales.js';
import { pope, type Spectrum, tabulatedSpectrum, vonKarmanPao } from '../turbulence/spectra.js';
import { eddyViscosityCovariance, energyOfCovariance } from '../turbulence/stress.js';
import { wallRamp, type Zone, zoneWeight } from '../turbulence/zones.js';
import { type Progress, timed } from './progress.js';
import { facesOf } from './selections.js';
import { shareDeep } from './shared.js';
import type { Target } from './target.js';
import type { Workers } from './workers.js';

/**
 * c_w of L <= c_w WallDistance. The mixing length over C_mu^(3/4) gives 2.5; with 1.5 the stresses next to a channel's
 * wall come out nearer to the wanted ones (src/turbulence/README.md).
 */
const wallLengthFactor = 1.5;

export interface FluctuationRequest {
  readonly target: Target;
  /** Mean fields at the target's cells. */
  readonly fields: Fields;
  readonly walls: Int32Array;
  readonly settings: FluctuationSettings;
  readonly omega: 'two-equation' | 'epsilon-over-k';
}

export interface FluctuationResult {
  readonly plan: FluctuationPlan;
  readonly scales: LocalScales;
  /** 3 x cells: the superimposed velocity before a discrete projection, m/s. */
  readonly velocity: Float64Array;
  /** 3 x cells: its vector potential, m2/s. */
  readonly potential: Float64Array;
  /** cells, m2/s2: k of the precursor, what is wanted on the mesh, what is left to the model. */
  readonly total: Float64Array;
  readonly wanted: Float64Array;
  readonly modelled: Float64Array;
  readonly resolvableShare: Float64Array;
  readonly wallDistance?: Float64Array;
  /** The multiplier of the potential, when this realisation was calibrated. */
  readonly multiplier?: MultiplierField;
  readonly assumptions: readonly string[];
  readonly figures: Readonly<Record<string, unknown>>;
}

function scalar(fields: Fields, name: string): Float64Array | undefined {
  return fields.get(name)?.values;
}

async function openSpectrum(settings: FluctuationSettings['spectrum']): Promise<Spectrum> {
  if (settings === 'von-karman-pao') return vonKarmanPao;
  if (settings === 'pope') return pope;
  const table = await readDataset(settings.table);
  const columns = [...table.pointArrays, ...table.cellArrays];
  const [wave, energy] = columns;
  if (wave === undefined || energy === undefined) {
    throw new InputError({
      file: settings.table,
      cause: 'a spectrum needs two columns, wave number (1/m) and E (m3/s2)',
      remedy: 'name them with a header line',
    });
  }
  const numbers = (array: typeof wave): Float64Array => Float64Array.from(array.load() as Float64Array, Number);
  return tabulatedSpectrum(numbers(wave), numbers(energy), settings.table);
}

/** Energy, length and what decides them, as the case wants it. */
function scaleInput(
  request: FluctuationRequest,
  wallDistance: Float64Array | undefined,
  velocityGradient: Float64Array | undefined,
  assumptions: string[],
): ScaleInput {
  const { fields, settings, omega, target } = request;
  const cells = target.mesh.cellCount;
  const input: { -readonly [K in keyof ScaleInput]: ScaleInput[K] } = { cells, omegaMeans: omega };
  const covariance = scalar(fields, 'VelocityCovariance');
  const { energy, length } = settings;
  if (energy === 'precursor') {
    const k = scalar(fields, 'TurbulentEnergyKinetic');
    if (k !== undefined) input.k = k;
    else if (covariance !== undefined) {
      input.k = energyOfCovariance(covariance);
      assumptions.push('k is half the trace of the covariances.');
    }
  } else if ('intensity' in energy) {
    input.intensity = energy.intensity;
    if (energy.speed !== undefined) input.speed = energy.speed;
    else input.speed = speedOf(fields, target.file);
    assumptions.push(
      `k = 3/2 (${energy.intensity} x ${energy.speed === undefined ? 'the local mean speed' : `${energy.speed} m/s`})^2.`,
    );
  } else {
    input.k = energy.constant;
    assumptions.push(`k = ${energy.constant} m2/s2 everywhere.`);
  }
  if (length === 'precursor') {
    const add = (name: string, key: 'epsilon' | 'omega' | 'eddyViscosity'): void => {
      const values = scalar(fields, name);
      if (values !== undefined) input[key] = values;
    };
    add('TurbulentDissipation', 'epsilon');
    add('TurbulentDissipationRate', 'omega');
    add('ViscosityEddyKinematic', 'eddyViscosity');
  } else {
    input.epsilon = epsilonOfLength(input, length.constant, cells);
    assumptions.push(`k^(3/2) / epsilon = ${length.constant} m everywhere.`);
  }
  const viscosity = scalar(fields, 'ViscosityKinematic');
  if (viscosity !== undefined) input.viscosity = viscosity;
  if (wallDistance !== undefined) input.wallDistance = wallDistance;
  if (velocityGradient !== undefined) input.velocityGradient = velocityGradient;
  return input;
}

function speedOf(fields: Fields, file: string): Float64Array {
  const velocity = scalar(fields, 'Velocity');
  if (velocity === undefined) {
    throw new InputError({
      file,
      place: 'Velocity',
      cause: 'an intensity needs a mean velocity and there is none',
      remedy: 'supply Velocity, or give the speed (case key fluctuations.energy.speed)',
    });
  }
  return Float64Array.from({ length: velocity.length / 3 }, (_, c) =>
    Math.hypot(velocity[3 * c] as number, velocity[3 * c + 1] as number, velocity[3 * c + 2] as number),
  );
}

function epsilonOfLength(input: ScaleInput, length: number, cells: number): Float64Array {
  const at = (value: CellValue, c: number): number => (typeof value === 'number' ? value : (value[c] as number));
  return Float64Array.from({ length: cells }, (_, c) => {
    let k = 0;
    if (input.k !== undefined) k = at(input.k, c);
    else if (input.intensity !== undefined && input.speed !== undefined) {
      k = 1.5 * (at(input.intensity, c) * at(input.speed, c)) ** 2;
    }
    return Math.max(k, 0) ** 1.5 / length;
  });
}

async function openZones(
  zones: readonly ZoneSettings[],
  request: FluctuationRequest,
  workers: Workers,
  progress: Progress,
): Promise<{ readonly seeds: Zone[]; readonly excludes: Zone[] }> {
  const seeds: Zone[] = [];
  const excludes: Zone[] = [];
  for (const zone of zones) {
    const { fade } = zone;
    let opened: Zone;
    if ('box' in zone) opened = { kind: 'box', low: zone.box[0], high: zone.box[1], fade };
    else if ('sphere' in zone) opened = { kind: 'sphere', ...zone.sphere, fade };
    else if ('cylinder' in zone) opened = { kind: 'cylinder', ...zone.cylinder, fade };
    else if ('boundary' in zone) {
      const faces = await facesOf(request.target, zone.boundary);
      const distance = await distanceFrom(request.target, faces, workers, progress);
      opened = { kind: 'near', distance, within: zone.within, fade };
    } else {
      const values = scalar(request.fields, zone.field);
      if (values === undefined || values.length !== request.target.mesh.cellCount) {
        throw new InputError({
          file: request.target.file,
          place: `zone field ${zone.field}`,
          cause: 'there is no such scalar among the transferred quantities',
          remedy: `name one of ${[...request.fields.keys()].join(', ')}`,
        });
      }
      opened = { kind: 'exceeds', values, above: zone.above, fade };
    }
    (zone.exclude ? excludes : seeds).push(opened);
  }
  return { seeds, excludes };
}

async function distanceFrom(
  target: Target,
  faces: Int32Array,
  workers: Workers,
  progress: Progress,
): Promise<Float64Array> {
  const out = sharedFloat64(target.mesh.cellCount);
  const plan = prepareWallDistance(target.mesh, target.geometry, faces, target.periodic);
  await workers.overRanges('wallDistance', { plan, out }, target.mesh.cellCount, progress);
  return out;
}

/** Amplitude left by zones and by the ramp at walls. */
async function seedingOf(
  request: FluctuationRequest,
  scales: LocalScales,
  wallDistance: Float64Array | undefined,
  workers: Workers,
  progress: Progress,
): Promise<Float64Array | undefined> {
  const { settings, target } = request;
  const { seeds, excludes } = await openZones(settings.zones, request, workers, progress);
  const centroids = target.geometry.cellCentroids;
  let seeding: Float64Array | undefined;
  if (seeds.length > 0) seeding = zoneWeight(seeds, centroids);
  if (excludes.length > 0) {
    const excluded = zoneWeight(excludes, centroids);
    seeding ??= new Float64Array(target.mesh.cellCount).fill(1);
    for (let c = 0; c < seeding.length; c += 1) seeding[c] = (seeding[c] as number) * (1 - (excluded[c] as number));
  }
  if (wallDistance !== undefined) {
    const ramp = wallRamp(wallDistance, scales.integralScale);
    if (seeding === undefined) return ramp;
    for (let c = 0; c < ramp.length; c += 1) seeding[c] = (seeding[c] as number) * (ramp[c] as number);
  }
  return seeding;
}

function wantedCovariance(
  request: FluctuationRequest,
  scales: LocalScales,
  velocityGradient: Float64Array | undefined,
): Float64Array | undefined {
  const { settings, fields, target } = request;
  if (settings.stress === 'isotropic') return undefined;
  if (settings.stress === 'precursor') {
    const covariance = scalar(fields, 'VelocityCovariance');
    if (covariance === undefined) {
      throw new InputError({
        file: target.file,
        place: 'VelocityCovariance',
        cause: 'stress: precursor needs the covariances XX, YY, ZZ (and XY, XZ, YZ) and there are none',
        remedy: 'supply them, or choose stress: eddy-viscosity or isotropic',
      });
    }
    return covariance;
  }
  if (velocityGradient === undefined) {
    throw new InputError({
      file: target.file,
      place: 'Velocity',
      cause: 'stress: eddy-viscosity needs a mean velocity and there is none',
      remedy: 'supply Velocity, or choose stress: isotropic',
    });
  }
  return eddyViscosityCovariance(scales.k, scales.epsilon, velocityGradient, scalar(fields, 'ViscosityEddyKinematic'));
}

function countFlag(flags: Uint8Array, flag: number): number {
  let count = 0;
  for (const value of flags) if ((value & flag) !== 0) count += 1;
  return count;
}

/**
 * Superimposed turbulence for mean fields on the target's cells: scales, modes, local weights, potential and velocity,
 * multiplier. The discrete projection is a step of its own.
 *
 * @throws InputError when k, a length or the stresses that the settings ask for are missing
 */
export async function fluctuateFields(
  request: FluctuationRequest,
  workers: Workers,
  progress: Progress,
  timings: Map<string, number>,
): Promise<FluctuationResult> {
  const { target, fields, settings } = request;
  const { mesh, geometry } = target;
  const cells = mesh.cellCount;
  const assumptions: string[] = [];
  let wallDistance = scalar(fields, 'WallDistance');
  if (request.walls.length > 0) {
    wallDistance = await timed(progress, timings, 'wall distance', cells, () =>
      distanceFrom(target, request.walls, workers, progress),
    );
  }
  const velocity = scalar(fields, 'Velocity');
  let velocityGradient: Float64Array | undefined;
  if (velocity !== undefined) {
    velocityGradient = sharedFloat64(9 * cells);
    const operator = createGradient(mesh, geometry, target.periodic);
    const payload = { operator, values: velocity, components: 3, out: velocityGradient };
    await timed(progress, timings, 'velocity gradient', cells, () =>
      workers.overRanges('gradient', payload, cells, progress),
    );
  } else {
    assumptions.push('No mean velocity: the rule that shortens lengths under shear is not applied.');
  }
  const spectrum = await openSpectrum(settings.spectrum);
  const scales = localScales(scaleInput(request, wallDistance, velocityGradient, assumptions), {
    spectrum,
    subgrid: settings.subgrid,
    wallLengthFactor,
  });
  assumptions.push(...scales.remarks);
  const covariance = wantedCovariance(request, scales, velocityGradient);
  const seeding = await seedingOf(request, scales, wallDistance, workers, progress);
  const plan = await timed(progress, timings, 'prepare modes', 0, () =>
    shareDeep(
      prepareFluctuations({
        mesh,
        geometry,
        scales,
        ...(target.periodic === undefined ? {} : { periodic: target.periodic }),
        ...(covariance === undefined ? {} : { covariance }),
        ...(covariance === undefined || wallDistance === undefined ? {} : { wallDistance }),
        ...(seeding === undefined ? {} : { seeding }),
        options: {
          seed: settings.seed,
          shells: settings.shells,
          directions: settings.directions,
          wavelengthCells: settings['wavelength-cells'],
          spectrum,
          grade: settings.control === 'modes' ? 'modes' : 'potential',
          ...stretchOf(settings, fields, geometry.cellVolumes, assumptions),
        },
      }),
    ),
  );
  await timed(progress, timings, 'weights', cells, () => workers.overRanges('weigh', { plan }, cells, progress));
  const figures: Record<string, unknown> = { shells: settings.shells, directions: settings.directions };
  const withMultiplier = settings.calibrate !== 'none' && settings.control !== 'modes';
  // Where layers are homogeneous the calibration below sets every layer's energy, and this step adds nothing.
  const isLayered = (target.periodic?.periods.length ?? 0) >= 2;
  if (withMultiplier && (settings.calibrate === 'expectation' || !isLayered)) {
    const expected = new Float32Array(new SharedArrayBuffer(40 * cells));
    await timed(progress, timings, 'expected energy', cells, () =>
      workers.overRanges('expect', { plan, out: expected }, cells, progress),
    );
    figures.compensation = await timed(progress, timings, 'compensate', 0, () => compensate(plan, expected));
  }
  const out = { potential: sharedFloat64(3 * cells), velocity: sharedFloat64(3 * cells) };
  await timed(progress, timings, 'synthesis', cells, () =>
    workers.overRanges('synthesise', { plan, out }, cells, progress),
  );
  let multiplier: MultiplierField | undefined;
  if (withMultiplier && settings.calibrate === 'realisation') {
    const { field, ...found } = await timed(progress, timings, 'calibrate', 0, () =>
      calibrate({
        plan,
        ...out,
        volumes: geometry.cellVolumes,
        periods: target.periodic?.periods ?? [],
        integralScale: scales.integralScale,
      }),
    );
    multiplier = field;
    figures.calibration = found;
    assumptions.push(`This realisation's energy was set over ${found.averagedOver}.`);
    const payload = { field: shareDeep(field), centroids: geometry.cellCentroids, out };
    await timed(progress, timings, 'multiply', cells, () => workers.overRanges('multiply', payload, cells, progress));
  }
  const clipped = countFlag(plan.flags, cellFlag.clipped);
  const coarse = countFlag(plan.flags, cellFlag.coarse);
  figures.clippedStresses = clipped;
  figures.coarseCells = coarse;
  if (clipped > 0) assumptions.push(`${clipped} stress tensors that no velocity can have were clipped.`);
  if (coarse > 0) {
    assumptions.push(
      `On ${coarse} cells hardly any wave is long enough to be seeded; part of their energy is left to the model.`,
    );
  }
  if (seeding === undefined && request.walls.length === 0) assumptions.push('No walls are named: none is respected.');
  const total = scales.k;
  const modelled = sharedFloat64(cells);
  for (let c = 0; c < cells; c += 1) modelled[c] = Math.max(0, (total[c] as number) - (plan.wanted[c] as number));
  return {
    plan,
    scales,
    ...out,
    total,
    wanted: plan.wanted,
    modelled,
    resolvableShare: plan.resolvableShare,
    ...(wallDistance === undefined ? {} : { wallDistance }),
    ...(multiplier === undefined ? {} : { multiplier }),
    assumptions,
    figures,
  };
}

/** Stretching along x, y, z; along the stream means along the axis nearest to the mean velocity's direction. */
function stretchOf(
  settings: FluctuationSettings,
  fields: Fields,
  volumes: Float64Array,
  assumptions: string[],
): { readonly stretch?: readonly [number, number, number] } {
  const { stretch } = settings;
  if (stretch === undefined) return {};
  let direction: readonly number[];
  if (stretch.along === 'stream') direction = meanDirection(fields.get('Velocity'), volumes);
  else direction = stretch.along;
  const size = Math.hypot(...direction);
  if (size === 0) {
    throw new InputError({
      place: 'fluctuations.stretch',
      cause: 'there is no mean velocity to stretch along',
      remedy: 'give the direction (along: [1, 0, 0])',
    });
  }
  const axis = direction.map(Math.abs).indexOf(Math.max(...direction.map(Math.abs)));
  assumptions.push(`Lengths along ${'xyz'[axis]} are ${stretch.factor} times those across.`);
  const list: [number, number, number] = [1, 1, 1];
  list[axis as 0] = stretch.factor;
  return { stretch: list };
}

function meanDirection(velocity: Field | undefined, volumes: Float64Array): number[] {
  const sum = [0, 0, 0];
  for (let c = 0; velocity !== undefined && c < volumes.length; c += 1) {
    for (let i = 0; i < 3; i += 1) {
      sum[i] = (sum[i] as number) + (volumes[c] as number) * (velocity.values[3 * c + i] as number);
    }
  }
  return sum;
}
