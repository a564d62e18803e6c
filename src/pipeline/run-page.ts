import { weightedHistogram } from '../appraisal/histogram.js';
import { type AuditFigures, courantRates } from '../audit/audit.js';
import { slabProfile } from '../audit/slab-profile.js';
import type { AuditReportFigures, ProfileFigures, RunReportData } from '../report/audit-data.js';
import { gridRatioPicture, sharePicture, slicePicture } from '../report/figures.js';
import type { PictureBlock, ReportPage } from '../report/page.js';
import { runReport } from '../report/run-report.js';
import { sampleSlice, sliceMesh, sliceOutline, tellingSlice } from '../report/slices.js';
import { type RunResult, scaledFields } from './run.js';

/** Share of k that a mesh should carry: the 80 % of Pope 2000, section 13.5. */
const wantedShare = 0.8;
const profileSlabs = 40;

/** The audit's figures as the page takes them: what is not known is left out. */
export function reportFigures(audit: AuditFigures): AuditReportFigures {
  const { energy, divergence, projectionLoss } = audit;
  return {
    cells: audit.cells,
    volume: audit.volume,
    energy: {
      wanted: energy.wanted ?? energy.recovered,
      resolvable: energy.resolvable ?? energy.recovered,
      recovered: energy.recovered,
      modelled: energy.modelled ?? 0,
    },
    divergence: { ...(divergence.before === null ? {} : { before: divergence.before }), after: divergence.after },
    ...(projectionLoss === null ? {} : { projectionLoss }),
    covariance: audit.covariance,
    velocityMax: audit.velocityMax,
    timeStepForCourantOne: audit.timeStepForCourantOne ?? Number.POSITIVE_INFINITY,
  };
}

function magnitude(velocity: Float64Array): Float64Array {
  return Float64Array.from({ length: velocity.length / 3 }, (_, c) =>
    Math.hypot(velocity[3 * c] as number, velocity[3 * c + 1] as number, velocity[3 * c + 2] as number),
  );
}

/** Largest absolute value that 99 % of the cells stay below: ends of a colour scale that outliers do not stretch. */
function bulkRange(values: Float64Array): number {
  const sorted = values.map(Math.abs).sort();
  return (sorted[Math.floor(0.99 * (sorted.length - 1))] as number) || 1;
}

/** Axis along which the slab means of a field vary most. */
function variedAxis(result: RunResult, values: Float64Array): number {
  const { cellCentroids, cellVolumes } = result.target.geometry;
  const spreads = [0, 1, 2].map((axis) => {
    const { means } = slabProfile(cellCentroids, cellVolumes, axis, 12, [(c) => values[c] as number]);
    const list = means[0] as Float64Array;
    return Math.max(...list) - Math.min(...list);
  });
  return spreads.indexOf(Math.max(...spreads));
}

function profilesOf(result: RunResult): ProfileFigures[] {
  const { fluctuations, controlled, target } = result;
  if (fluctuations === undefined || controlled === undefined) return [];
  const u = controlled.fluctuation;
  const { wanted, total, plan } = fluctuations;
  const axis = variedAxis(result, total);
  const { covariance } = plan;
  const product = (i: number, j: number) => (c: number) => (u[3 * c + i] as number) * (u[3 * c + j] as number);
  const share = (c: number): number => ((total[c] as number) > 0 ? (wanted[c] as number) / (total[c] as number) : 0);
  const wantedOf = (place: number, isNormal: boolean) => (c: number) => {
    if (covariance !== undefined) return share(c) * (covariance[6 * c + place] as number);
    return isNormal ? (2 / 3) * (wanted[c] as number) : 0;
  };
  const { positions, means } = slabProfile(
    target.geometry.cellCentroids,
    target.geometry.cellVolumes,
    axis,
    profileSlabs,
    [
      (c) => wanted[c] as number,
      (c) => (product(0, 0)(c) + product(1, 1)(c) + product(2, 2)(c)) / 2,
      wantedOf(0, true),
      product(0, 0),
      wantedOf(3, true),
      product(1, 1),
      wantedOf(5, true),
      product(2, 2),
      wantedOf(1, false),
      product(0, 1),
    ],
  );
  const names = ['k', 'VelocityCovarianceXX', 'VelocityCovarianceYY', 'VelocityCovarianceZZ', 'VelocityCovarianceXY'];
  return [
    {
      title: 'Wanted against recovered',
      caption: `Means over slabs normal to ${'xyz'[axis]}; wanted is the resolvable part of the precursor's.`,
      coordinate: `Coordinate${'XYZ'[axis]}`,
      unit: 'm',
      quantityUnit: 'm2/s2',
      curves: names.map((name, i) => ({
        name,
        x: positions,
        wanted: means[2 * i] as Float64Array,
        recovered: means[2 * i + 1] as Float64Array,
      })),
    },
  ];
}

function picturesOf(result: RunResult): { before: PictureBlock[]; after: PictureBlock[] } {
  const { target, fields, transferred, controlled, fluctuations } = result;
  const { mesh } = target;
  const velocity = fields.get('Velocity')?.values;
  const mean = fields.get('VelocityMean')?.values ?? transferred.fields.get('Velocity')?.values;
  const guide = fluctuations?.total ?? (mean === undefined ? undefined : magnitude(mean));
  if (guide === undefined) return { before: [], after: [] };
  const { axis, position } = tellingSlice(mesh, target.geometry.cellCentroids, guide);
  const slice = sliceMesh(mesh, axis, position);
  const outline = {
    boundary: sliceOutline(mesh, slice),
    ...(result.walls.length === 0 ? {} : { walls: sliceOutline(mesh, slice, result.walls) }),
  };
  const show = (values: Float64Array, options: Omit<Parameters<typeof slicePicture>[2], 'walls' | 'boundary'>) =>
    slicePicture(slice, sampleSlice(slice, values), { ...options, ...outline });
  const before: PictureBlock[] = [];
  const after: PictureBlock[] = [];
  const speedRange = velocity === undefined ? undefined : ([0, bulkRange(magnitude(velocity))] as const);
  if (mean !== undefined) {
    before.push(
      show(magnitude(mean), {
        title: 'Before: mean speed',
        quantity: 'VelocityMean, magnitude',
        unit: 'm/s',
        ...(speedRange === undefined ? {} : { range: speedRange }),
      }),
    );
  }
  if (fluctuations !== undefined) {
    before.push(
      show(fluctuations.total, { title: "The precursor's k", quantity: 'TurbulentEnergyKineticTotal', unit: 'm2/s2' }),
    );
  }
  if (velocity !== undefined && speedRange !== undefined && controlled !== undefined) {
    after.push(
      show(magnitude(velocity), {
        title: 'After: speed of the start',
        quantity: 'Velocity, magnitude',
        unit: 'm/s',
        range: speedRange,
      }),
    );
  }
  if (controlled !== undefined && fluctuations !== undefined) {
    const u = controlled.fluctuation;
    const component = Float64Array.from({ length: u.length / 3 }, (_, c) => u[3 * c] as number);
    const span = bulkRange(component);
    after.push(
      show(component, {
        title: 'Superimposed velocity along x',
        quantity: 'VelocityFluctuationX',
        unit: 'm/s',
        ramp: 'diverging',
        range: [-span, span],
      }),
    );
    const ratio = gridRatios(result);
    after.push(
      gridRatioPicture(slice, sampleSlice(slice, ratio), outline),
      sharePicture(slice, sampleSlice(slice, fluctuations.resolvableShare), wantedShare, outline),
    );
    const scaled = scaledFields(result);
    if (scaled !== undefined) {
      after.push(
        show(scaled.after, {
          title: 'Scaled divergence after control',
          quantity: '|div u| CellWidth / u_rms',
          unit: '',
          scale: 'log',
        }),
      );
    }
  }
  return { before, after };
}

/** IntegralLength over CellWidth; not a number where there is no turbulence. */
function gridRatios(result: RunResult): Float64Array {
  const length = result.fields.get('IntegralLength')?.values ?? new Float64Array(0);
  const width = result.fields.get('CellWidth')?.values ?? new Float64Array(0);
  return length.map((l, c) => (l > 0 ? l / (width[c] as number) : Number.NaN));
}

function histogramsOf(result: RunResult): Partial<RunReportData> {
  const { target, fluctuations, audit } = result;
  const volumes = target.geometry.cellVolumes;
  const scaled = scaledFields(result);
  const velocity = result.fields.get('Velocity')?.values;
  const timeStep = audit.courant?.timeStep ?? audit.timeStepForCourantOne;
  const log = { scale: 'log' as const };
  return {
    ...(scaled === undefined
      ? {}
      : {
          divergenceBefore: weightedHistogram(scaled.before, volumes, log),
          divergenceAfter: weightedHistogram(scaled.after, volumes, log),
        }),
    ...(fluctuations === undefined
      ? {}
      : {
          gridRatioHistogram: weightedHistogram(gridRatios(result), volumes, log),
          shareHistogram: weightedHistogram(fluctuations.resolvableShare, volumes, { range: [0, 1] }),
        }),
    ...(velocity === undefined || timeStep === null
      ? {}
      : {
          courant: {
            timeStep,
            histogram: weightedHistogram(
              courantRates(target.mesh, target.geometry, velocity).map((rate) => rate * timeStep),
              volumes,
            ),
          },
        }),
  };
}

/** Everything the page of a run shows, the pictures left out where only the terminal's tables are wanted. */
export function runReportData(result: RunResult, withPictures: boolean): RunReportData {
  const { manifest, transferred, target, precursor } = result;
  const { counts } = transferred;
  const steps = [
    `Fields ${[...transferred.fields.keys()].join(', ')} carried over by ${transferred.method}: ` +
      `${counts.inside} cells inside the precursor, ${counts.nearest} took the nearest value, ` +
      `${counts.extrapolated} were extrapolated, ${counts.constant} got a constant.`,
  ];
  if (result.fluctuations !== undefined) {
    const { modes } = result.fluctuations.plan;
    steps.push(`${modes.shells * modes.directions} Fourier modes superimposed from seed ${manifest.seed}.`);
  }
  const pictures = withPictures ? picturesOf(result) : { before: [], after: [] };
  return {
    title: String((manifest.case as { readonly title: string }).title),
    subtitle: `${precursor.file} on ${target.file}`,
    audit: reportFigures(result.audit),
    operator: result.audit.divergence.operator,
    pictures: pictures.after,
    before: pictures.before,
    ...(withPictures ? { profiles: profilesOf(result), ...histogramsOf(result) } : {}),
    assumptions: manifest.assumptions,
    remarks: manifest.remarks,
    footer: [`eddygraft ${manifest.version}, seed ${manifest.seed ?? 'none'}, ${manifest.finished}`],
    checks: manifest.checks,
    steps,
    files: [
      ...manifest.inputs.map((stamp) => ({ role: 'input', path: stamp.path, sha256: stamp.sha256 })),
      ...manifest.outputs.map((stamp) => ({ role: 'output', path: stamp.path, sha256: stamp.sha256 })),
    ],
    seconds: manifest.seconds,
  };
}

/** The page of a run with all its figures. */
export function runPage(result: RunResult): ReportPage {
  return runReport(runReportData(result, true));
}

/** Its summary for the terminal. */
export function runSummary(result: RunResult): ReportPage {
  return runReport(runReportData(result, false));
}
