import type { MonitorFigures, PlanFigures } from './appraisal-data.js';
import { figure, type TableBlock } from './page.js';
import { timeText } from './units.js';

/** Table of a run plan, shared by the reports that have one. */
export function planTable(plan: PlanFigures): TableBlock {
  const rows: (readonly [string, string, string])[] = [
    [
      'time step',
      timeText(plan.timeStep),
      `by the ${plan.timeStepBy} Courant number; largest ${figure(plan.courantMax, 3)}, 99th percentile ${figure(plan.courantP99, 3)}`,
    ],
    ['flow-through time', timeText(plan.flowThroughTime), `bulk speed ${figure(plan.bulkSpeed, 3)} m/s`],
    ['eddy turnover time k / epsilon', timeText(plan.turnoverTime), 'energy-weighted'],
    ['integral time at a point', timeText(plan.integralTime), 'energy-weighted'],
    ['transient to discard', timeText(plan.transient), 'check with the follow-up'],
    ['averaging for means', timeText(plan.averagingForMean), ''],
    ['averaging for variances', timeText(plan.averagingForVariance), ''],
    ['steps in all', figure(plan.steps), ''],
  ];
  if (plan.costHours !== undefined)
    rows.push(['cost', `${figure(plan.costHours, 3)} h`, 'at the seconds per step that were given']);
  return {
    type: 'table',
    title: 'Run plan',
    terminal: true,
    columns: [{ label: 'what' }, { label: 'value' }, { label: 'note' }],
    rows,
  };
}

/** Table of monitors, shared likewise. */
export function monitorsTable(monitors: readonly MonitorFigures[]): TableBlock {
  return {
    type: 'table',
    title: 'Monitors',
    columns: [
      { label: 'monitor' },
      { label: 'kind' },
      { label: 'x', unit: 'm' },
      { label: 'y', unit: 'm' },
      { label: 'z', unit: 'm' },
      { label: 'mean speed', unit: 'm/s' },
      { label: 'CellWidth', unit: 'm' },
      { label: 'cut-off wave number', unit: 'rad/m' },
      { label: 'cut-off frequency', unit: 'Hz' },
      { label: 'sample every', unit: 's' },
      { label: "Taylor's hypothesis" },
    ],
    rows: monitors.map((m) => [
      m.name,
      m.kind,
      ...m.position.map((x) => Number(x.toPrecision(5))),
      Number(m.meanSpeed.toPrecision(3)),
      Number(m.cellWidth.toPrecision(3)),
      Number(m.cutoffWaveNumber.toPrecision(3)),
      Number(m.cutoffFrequency.toPrecision(3)),
      Number(m.samplingInterval.toPrecision(3)),
      m.taylorHolds ? 'holds' : 'doubtful',
    ]),
    note: "Frequencies by Taylor (1938): pi / CellWidth at the mean speed. Doubtful where u' exceeds a fifth of the mean speed.",
  };
}
