import { weightedHistogram } from '../appraisal/histogram.js';
import { type AuditFigures, courantRates } from '../audit/audit.js';
import type { AuditReportData, AuditReportFigures, ProfileFigures, RunReportData } from '../report/audit-data.js';
import type { ReportPage } from '../report/page.js';
import { runReport } from '../report/run-report.js';
import { slabProfiles, startPictures } from '../report/start-pictures.js';
import { type RunResult, resolvableCovariance, scaledFields } from './run.js';

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
    ...(audit.covarianceWanted === null ? {} : { covarianceWanted: audit.covarianceWanted }),
    velocityMax: audit.velocityMax,
    timeStepForCourantOne: audit.timeStepForCourantOne ?? Number.POSITIVE_INFINITY,
  };
}

/** Axis along which the wanted energy varies most: the slabs of the profiles are normal to it. */
function variedAxis(result: RunResult, values: Float64Array): 'x' | 'y' | 'z' {
  const { cellCentroids, cellVolumes } = result.target.geometry;
  const zero = new Float64Array(3 * values.length);
  const spreads = (['x', 'y', 'z'] as const).map((axis) => {
    const wanted = slabProfiles(cellCentroids, cellVolumes, axis, values, zero, undefined, 12).curves[0]?.wanted ?? [];
    const list = Array.from(wanted);
    return { axis, spread: Math.max(...list) - Math.min(...list) };
  });
  return spreads.reduce((most, entry) => (entry.spread > most.spread ? entry : most)).axis;
}

function profilesOf(result: RunResult): ProfileFigures[] {
  const { fluctuations, controlled, target } = result;
  if (fluctuations === undefined || controlled === undefined) return [];
  const { wanted, total } = fluctuations;
  const { cellCentroids, cellVolumes } = target.geometry;
  const axis = variedAxis(result, total);
  return [
    slabProfiles(cellCentroids, cellVolumes, axis, wanted, controlled.fluctuation, resolvableCovariance(fluctuations)),
  ];
}

function picturesOf(result: RunResult): ReturnType<typeof startPictures> {
  const { target, fields, transferred, controlled, fluctuations } = result;
  const velocity = fields.get('Velocity')?.values;
  const mean = fields.get('VelocityMean')?.values ?? transferred.fields.get('Velocity')?.values;
  const pictures = startPictures({
    mesh: target.mesh,
    centroids: target.geometry.cellCentroids,
    wallFaces: result.walls,
    ...(mean === undefined ? {} : { mean }),
    ...(velocity === undefined || controlled === undefined ? {} : { velocity }),
    ...(controlled === undefined ? {} : { fluctuation: controlled.fluctuation }),
    ...(fluctuations === undefined
      ? {}
      : { k: fluctuations.total, share: fluctuations.resolvableShare, gridRatio: gridRatios(result) }),
  });
  return pictures;
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

/** One-dimensional spectrum and correlation lengths along the first periodic direction with evenly spaced cells. */
export function alongPeriods(audit: AuditFigures): Pick<AuditReportData, 'spectrum' | 'correlations'> {
  const [first] = audit.alongPeriods;
  if (first === undefined) return {};
  const nameOf = (direction: readonly number[]): string => {
    const axis = direction.findIndex((value) => Math.abs(value) > 0.999);
    return axis < 0 ? `(${direction.map((value) => value.toPrecision(3)).join(' ')})` : ('xyz'[axis] as string);
  };
  const cutoff = Math.PI / first.spacing;
  return {
    spectrum: {
      waveNumber: first.waveNumber,
      measured: first.longitudinalSpectrum,
      cutoffs: [
        { value: cutoff, label: 'pi / spacing' },
        { value: (2 * cutoff) / 3, label: '3 cells' },
      ],
      caption: `Spectrum of the component along ${nameOf(first.direction)} on ${first.lines} lines of ${first.samples} cells.`,
    },
    correlations: audit.alongPeriods.flatMap((entry) =>
      entry.longitudinalLength === null || entry.transverseLength === null
        ? []
        : [
            {
              name: `along ${nameOf(entry.direction)}`,
              longitudinal: entry.longitudinalLength,
              transverse: entry.transverseLength,
            },
          ],
    ),
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
  const pictures = withPictures ? picturesOf(result) : { before: [], pictures: [] };
  return {
    title: String((manifest.case as { readonly title: string }).title),
    subtitle: `${precursor.file} on ${target.file}`,
    audit: reportFigures(result.audit),
    operator: result.audit.divergence.operator,
    pictures: pictures.pictures,
    before: pictures.before,
    ...(withPictures ? { profiles: profilesOf(result), ...histogramsOf(result), ...alongPeriods(result.audit) } : {}),
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
