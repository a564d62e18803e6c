import type { Command } from 'commander';
import { appraiseTarget, type TurbulenceOnCells } from '../appraisal/appraise.js';
import { monitorsCsv } from '../appraisal/monitors.js';
import type { ResolutionFields } from '../appraisal/resolution.js';
import { precursorDepth } from '../appraisal/walls.js';
import type { DataArray } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import type { Field } from '../basis/fields.js';
import { requireFree, writeFileBeside } from '../basis/half-written.js';
import { transferDefaults } from '../case/schema.js';
import { writeDataset } from '../formats/registry.js';
import { selectBoundaryFaces } from '../mesh/selection.js';
import { loadPrecursor, type Precursor } from '../pipeline/precursor.js';
import { loadTarget, type Target } from '../pipeline/target.js';
import { transferFields } from '../pipeline/transfer-fields.js';
import { openWorkers, type Workers } from '../pipeline/workers.js';
import { renderReport } from '../report/render.js';
import { summaryTables } from '../report/terminal.js';
import { localScales } from '../turbulence/scales.js';
import { vonKarmanPao } from '../turbulence/spectra.js';
import { type AppraiseOptions, withAppraiseOptions } from './appraise-options.js';
import { appraisalDocument, appraisePage } from './appraise-page.js';
import { withCommonOptions } from './options.js';
import { openTerminal, type Terminal } from './terminal.js';

interface OnTarget {
  readonly turbulence: TurbulenceOnCells;
  readonly velocity: Float64Array | undefined;
  readonly outside: Uint8Array;
  /** m, how deep the precursor's first values off the walls lie. */
  readonly depth: number;
  readonly assumptions: readonly string[];
}

/** k itself, or half the trace of the covariances. */
function energyOf(fields: ReadonlyMap<string, Field>): Float64Array | undefined {
  const k = fields.get('TurbulentEnergyKinetic')?.values;
  if (k !== undefined) return k;
  const covariance = fields.get('VelocityCovariance')?.values;
  if (covariance === undefined) return undefined;
  return Float64Array.from(
    { length: covariance.length / 6 },
    (_, i) =>
      0.5 * ((covariance[6 * i] as number) + (covariance[6 * i + 3] as number) + (covariance[6 * i + 5] as number)),
  );
}

function speedOf(velocity: Float64Array): Float64Array {
  return Float64Array.from({ length: velocity.length / 3 }, (_, i) =>
    Math.hypot(velocity[3 * i] as number, velocity[3 * i + 1] as number, velocity[3 * i + 2] as number),
  );
}

function depthOf(precursor: Precursor, target: Target, wallFaces: Int32Array): number {
  const cloud = precursor.clouds.find((c) => c.fields.has('Velocity'));
  const velocity = cloud?.fields.get('Velocity')?.values;
  if (cloud === undefined || velocity === undefined || wallFaces.length === 0) return 0;
  return precursorDepth(target.geometry, wallFaces, cloud.points, velocity, precursor.constantAxes);
}

/** Reads one precursor, carries its fields over and finds k and epsilon from whatever pair it holds. */
async function bringOver(
  file: string,
  target: Target,
  wallFaces: Int32Array,
  options: AppraiseOptions,
  workers: Workers,
  terminal: Terminal,
  timings: Map<string, number>,
): Promise<OnTarget> {
  const precursor = await loadPrecursor(
    file,
    { rename: options.rename, constants: options.constant, extrude: options.extrude },
    terminal.progress,
    timings,
  );
  const transferred = await transferFields(
    precursor,
    target,
    {
      method: options.method,
      neighbours: transferDefaults.neighbours,
      power: transferDefaults.power,
      outside: options.outside,
      logarithmic: transferDefaults.logarithmic,
      limited: transferDefaults.limited,
    },
    workers,
    terminal.progress,
    timings,
  );
  const { fields } = transferred;
  const values = (name: string): Float64Array | undefined => fields.get(name)?.values;
  const velocity = values('Velocity');
  const k = energyOf(fields);
  const epsilon = values('TurbulentDissipation');
  const omega = values('TurbulentDissipationRate');
  const eddyViscosity = values('ViscosityEddyKinematic');
  const viscosity = values('ViscosityKinematic');
  const scales = localScales(
    {
      cells: target.mesh.cellCount,
      omegaMeans: options.omega,
      ...(k === undefined || options.intensity !== undefined ? {} : { k }),
      ...(options.intensity === undefined ? {} : { intensity: options.intensity }),
      ...(velocity === undefined ? {} : { speed: speedOf(velocity) }),
      ...(epsilon === undefined ? {} : { epsilon }),
      ...(omega === undefined ? {} : { omega }),
      ...(eddyViscosity === undefined ? {} : { eddyViscosity }),
      ...(options.length === undefined ? {} : { integralScale: options.length }),
      ...(viscosity === undefined ? {} : { viscosity }),
    },
    // Only k, epsilon and the plain length are used here; shear and walls shorten the eddies laid on a start.
    { spectrum: vonKarmanPao, subgrid: 'model', wallLengthFactor: 2.5 },
  );
  const { counts } = transferred;
  const cells = target.mesh.cellCount;
  const away = cells - counts.inside;
  return {
    turbulence: { k: scales.k, epsilon: scales.epsilon, ...(viscosity === undefined ? {} : { nu: viscosity }) },
    velocity,
    outside: transferred.outside,
    depth: depthOf(precursor, target, wallFaces),
    assumptions: [
      `${file}: fields were transferred by the method ${transferred.method}; ${away} of ${cells} cells lie outside the precursor (${counts.nearest} take the nearest value, ${counts.extrapolated} are extrapolated, ${counts.constant} take a constant).`,
      ...precursor.assumptions,
      ...precursor.dataset.remarks,
      ...transferred.assumptions,
      scales.counts.negativeK > 0 ? `${file}: negative k in ${scales.counts.negativeK} cells was taken as zero.` : '',
      epsilon === undefined && options.length === undefined
        ? `${file}: epsilon from ${omega === undefined ? 'the eddy viscosity, 0.09 k^2 / nu_t' : `omega (${options.omega})`}.`
        : '',
    ].filter((line) => line !== ''),
  };
}

/** Zones of the target as a number a volume cell; undefined for a single zone. */
function zonesOf(target: Target): { names: string[]; of: Int32Array } | undefined {
  const { zones } = target.dataset;
  if (zones.length < 2) return undefined;
  const of = new Int32Array(target.mesh.cellCount);
  target.mesh.datasetCell.forEach((cell, i) => {
    of[i] = zones.findIndex((zone) => cell >= zone.cellBegin && cell < zone.cellEnd);
  });
  return { names: zones.map((zone) => zone.name), of };
}

/** Arrays on all cells of the file; cells that are no volumes and quiet cells hold 0 and are flagged as quiet. */
function outputArrays(target: Target, fields: ResolutionFields, outside: Uint8Array): DataArray[] {
  const total = target.dataset.cells?.types.length ?? 0;
  const array = (name: string, values: ArrayLike<number>, type: 'Float64' | 'UInt8', fill: number): DataArray => ({
    name,
    components: 1,
    tuples: total,
    type,
    load: () => {
      const out = (type === 'UInt8' ? new Uint8Array(total) : new Float64Array(total)).fill(fill);
      target.mesh.datasetCell.forEach((cell, i) => {
        const value = values[i] as number;
        out[cell] = Number.isNaN(value) ? 0 : value;
      });
      return out;
    },
  });
  const arrays = [
    array('GridRatio', fields.gridRatio, 'Float64', 0),
    array('ResolvableShare', fields.share, 'Float64', 0),
    array('IntegralLength', fields.integralLength, 'Float64', 0),
    array('CellWidth', fields.cellWidth, 'Float64', 0),
    array('CellWidthWanted', fields.wantedWidth, 'Float64', 0),
    array('Quiet', fields.quiet, 'UInt8', 1),
    array('Outside', outside, 'UInt8', 0),
  ];
  if (fields.taylorLength !== undefined) arrays.push(array('TaylorLength', fields.taylorLength, 'Float64', 0));
  if (fields.kolmogorovLength !== undefined) {
    arrays.push(array('KolmogorovLength', fields.kolmogorovLength, 'Float64', 0));
  }
  return arrays;
}

async function runAppraise(
  precursorFile: string,
  targetFile: string,
  options: AppraiseOptions,
  version: string,
): Promise<void> {
  const terminal = openTerminal({ json: options.json === true, quiet: options.quiet === true });
  const outputs = [options.output, options.monitors, options.report].filter((path) => path !== undefined);
  for (const path of outputs) requireFree(path, options.overwrite === true);
  if (new Set(outputs).size !== outputs.length) {
    throw new InputError({ cause: 'two outputs have the same name', remedy: 'name each of them differently' });
  }
  const timings = new Map<string, number>();
  const target = await loadTarget(targetFile, options.periodic, terminal.progress, timings);
  const wallFaces =
    options.walls.length === 0
      ? new Int32Array(0)
      : selectBoundaryFaces(target.mesh, target.geometry, options.walls, {
          periodic: target.periodic,
          file: targetFile,
        });
  const workers = openWorkers(options.workers);
  try {
    const first = await bringOver(precursorFile, target, wallFaces, options, workers, terminal, timings);
    const second =
      options.second === undefined
        ? undefined
        : await bringOver(options.second, target, wallFaces, options, workers, terminal, timings);
    const zones = zonesOf(target);
    const [wake, shear, wall] = options.probes;
    terminal.progress.begin('appraise', 0);
    const appraisal = appraiseTarget(
      {
        mesh: target.mesh,
        geometry: target.geometry,
        wallFaces,
        wallSamplingDistance: first.depth,
        ...first.turbulence,
        ...(target.periodic === undefined ? {} : { periodic: target.periodic }),
        ...(first.velocity === undefined ? {} : { velocity: first.velocity }),
        ...(zones === undefined ? {} : { zones }),
        ...(second === undefined ? {} : { second: second.turbulence }),
      },
      {
        wantedShare: options.share,
        spectrum: options.spectrum,
        plan: {
          courantMax: options.courantMax,
          courantP99: options.courantP99,
          meanError: options.meanError,
          varianceError: options.varianceError,
          ...(options.secondsPerStep === undefined ? {} : { secondsPerStep: options.secondsPerStep }),
        },
        monitors: { wake, shear, wall, points: options.point, lines: options.line },
      },
    );
    terminal.progress.end();
    const page = appraisePage({
      title: `Appraisal of ${targetFile}`,
      subtitle: `by ${precursorFile}${options.second === undefined ? '' : ` and ${options.second}`}`,
      appraisal,
      mesh: target.mesh,
      centroids: target.geometry.cellCentroids,
      k: first.turbulence.k,
      wallFaces,
      ...(options.slice === undefined ? {} : { slices: options.slice }),
      assumptions: assumptionsOf(options, first, second),
      remarks: target.dataset.remarks,
      footer: [`eddygraft ${version}`],
    });
    if (options.dryRun !== true) {
      if (options.output !== undefined) {
        await writeDataset(options.output, {
          mesh: target.dataset,
          cellArrays: outputArrays(target, appraisal.fields, first.outside),
          pointArrays: [],
          notes: new Map([['eddygraft', `appraisal ${version} by ${precursorFile}, wanted share ${options.share}`]]),
        });
      }
      if (options.monitors !== undefined)
        await writeFileBeside(options.monitors, monitorsCsv(appraisal.monitors ?? []));
      if (options.report !== undefined) await writeFileBeside(options.report, renderReport(page));
      for (const path of outputs) terminal.remark(`Written: ${path}`);
    }
    if (first.velocity === undefined) {
      terminal.remark('The precursor holds no Velocity: no time step, no walls, no monitors.');
    }
    terminal.say(summaryTables(page));
    terminal.json({ ...appraisalDocument(appraisal), outside: countCodes(first.outside), verdict: page.verdict });
  } finally {
    await workers.close();
  }
}

function countCodes(outside: Uint8Array): object {
  const counts = [0, 0, 0, 0];
  for (const code of outside) counts[code] = (counts[code] as number) + 1;
  const [inside, nearest, extrapolated, constant] = counts;
  return { inside, nearest, extrapolated, constant };
}

function assumptionsOf(options: AppraiseOptions, first: OnTarget, second: OnTarget | undefined): string[] {
  return [
    ...first.assumptions,
    ...(second?.assumptions ?? []),
    `The share of k comes from the ${options.spectrum} spectrum at the cut-off pi / CellWidth, CellWidth the cube root of the cell's volume; ${100 * options.share} % is wanted (Pope 2000, section 13.5: 80 %).`,
    first.turbulence.nu === undefined
      ? 'ViscosityKinematic is not known (give --constant ViscosityKinematic=NUMBER): spectra have no viscous end, Taylor and Kolmogorov lengths and wall units are left out.'
      : 'Spectra end at the Kolmogorov length.',
    options.walls.length === 0
      ? 'No walls were named (--walls): wall units and monitors near walls are left out.'
      : `Wall units rest on the transferred velocity ${first.depth.toPrecision(3)} m off the walls, where the precursor's first values lie, and on Spalding's wall law.`,
    'GridRatio 5 is called marginal and 10 good (common practice, no source).',
    'Numerical dissipation of the solver is not known and not counted.',
  ];
}

/** Adds `appraise PRECURSOR TARGET`. */
export function addAppraise(program: Command): void {
  const command = program
    .command('appraise')
    .summary('judge a target mesh before the run')
    .description(
      'Judges a target mesh by a precursor: can it carry the eddies, where not, which cell size would, time step, length, cost, and where to place monitors.',
    )
    .argument('<precursor>', 'the result that fields come from')
    .argument('<target>', 'the mesh that is to be judged')
    .addHelpText(
      'after',
      '\nExample:\n  eddygraft appraise louvre-precursor.vtu louvre-les.vtu --walls y=0 --periodic z --constant ViscosityKinematic=1.5e-5 --monitors monitors.csv --report appraisal.html',
    );
  withAppraiseOptions(command);
  withCommonOptions(command);
  command.action((precursor: string, target: string, options: AppraiseOptions) =>
    runAppraise(precursor, target, options, program.version() ?? ''),
  );
}
