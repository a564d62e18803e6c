import type { AuditFigures } from '../audit/audit.js';
import type { AuditReportFigures, RunReportData } from '../report/audit-data.js';
import type { ReportPage } from '../report/page.js';
import { runReport } from '../report/run-report.js';
import type { RunResult } from './run.js';

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

/** Everything the page of a run shows. */
export function runReportData(result: RunResult): RunReportData {
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
  return {
    title: String((manifest.case as { readonly title: string }).title),
    subtitle: `${precursor.file} on ${target.file}`,
    audit: reportFigures(result.audit),
    operator: result.audit.divergence.operator,
    pictures: [],
    before: [],
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

export function runPage(result: RunResult): ReportPage {
  return runReport(runReportData(result));
}
