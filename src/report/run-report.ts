import type { RunReportData } from './audit-data.js';
import { energyBlocks, proofSections, subtitled } from './audit-report.js';
import { figure, type ReportPage, type Section, type TableBlock } from './page.js';
import { monitorsTable, planTable } from './plan-tables.js';

function runVerdict(data: RunReportData): NonNullable<ReportPage['verdict']> {
  const failed = data.checks.filter((check) => !check.passed);
  if (failed.length === 0) {
    const words =
      data.checks.length === 0
        ? 'The start is written; the case asks for no checks.'
        : 'The start is written and every check of the case is passed.';
    return { level: data.checks.length === 0 ? 'watch' : 'good', words };
  }
  return {
    level: 'bad',
    words: `The start is written, but it fails ${failed.map((c) => `${c.name} (${figure(c.value, 3)}, allowed ${figure(c.limit, 3)})`).join(' and ')}.`,
  };
}

/** Page of `run`. */
export function runReport(data: RunReportData): ReportPage {
  const checks: TableBlock = {
    type: 'table',
    title: 'Checks of the case',
    terminal: true,
    columns: [{ label: 'check' }, { label: 'value' }, { label: 'limit' }, { label: 'result' }, { label: 'meaning' }],
    rows: data.checks.map((c) => [c.name, c.value, c.limit, c.passed ? 'passed' : 'FAILED', c.meaning]),
  };
  const files: TableBlock = {
    type: 'table',
    title: 'Files',
    columns: [{ label: 'role' }, { label: 'path' }, { label: 'SHA-256' }],
    rows: data.files.map((f) => [f.role, f.path, f.sha256 ?? null]),
  };
  const sections: Section[] = [
    {
      title: 'What was done',
      blocks: [
        { type: 'list', items: data.steps },
        ...(data.checks.length === 0 ? [] : [checks]),
        ...energyBlocks(data),
        ...(data.tables ?? []),
      ],
    },
    { title: 'Every assumption', blocks: [{ type: 'list', items: [...data.assumptions, ...data.remarks] }] },
    ...(data.before.length + data.pictures.length === 0
      ? []
      : [{ title: 'Fields before and after', blocks: [...data.before, ...data.pictures] }]),
    ...proofSections(data),
  ];
  if (data.plan !== undefined)
    sections.push({
      title: 'Time step, length and cost',
      blocks: [planTable(data.plan), { type: 'list', items: data.plan.assumptions }],
    });
  if (data.monitors !== undefined && data.monitors.length > 0) {
    sections.push({
      title: 'Where to listen',
      blocks: [...(data.monitorMap === undefined ? [] : [data.monitorMap]), monitorsTable(data.monitors)],
    });
  }
  const seconds = Object.entries(data.seconds ?? {});
  sections.push({
    title: 'Files and times',
    blocks: [
      files,
      ...(seconds.length === 0
        ? []
        : [
            {
              type: 'table' as const,
              title: 'Wall time',
              columns: [{ label: 'stage' }, { label: 'time', unit: 's' }],
              rows: seconds.map(([stage, s]) => [stage, Number(s.toPrecision(3))]),
            },
          ]),
    ],
  });
  return {
    title: data.title,
    kind: 'run',
    ...subtitled(data),
    verdict: runVerdict(data),
    footer: data.footer,
    sections,
  };
}
