import type { AuditReportData, DivergenceFigures, SpectrumFigures } from './audit-data.js';
import { type Curve, fiveThirdsLine, histogramChart, profileChart, spectrumChart } from './figures.js';
import { type Block, figure, type ReportPage, type Section } from './page.js';
import { percentText as percent, timeText } from './units.js';

/** Figures, covariances and zones. */
export function energyBlocks(data: AuditReportData): Block[] {
  const { energy, divergence, ...audit } = data.audit;
  const blocks: Block[] = [
    {
      type: 'facts',
      items: [
        {
          label: 'energy recovered',
          value: percent(energy.resolvable > 0 ? energy.recovered / energy.resolvable : Number.NaN),
          note: `of the resolvable ${figure(energy.resolvable)} m2/s2`,
        },
        {
          label: "precursor's k",
          value: `${figure(energy.wanted)} m2/s2`,
          note: `volume mean; ${figure(energy.modelled)} m2/s2 is left to the model`,
        },
        {
          label: 'scaled divergence, rms',
          value: figure(divergence.after.scaledRms, 3),
          note:
            divergence.before === undefined
              ? `99th percentile ${figure(divergence.after.scaledP99, 3)}`
              : `before: ${figure(divergence.before.scaledRms, 3)}`,
        },
        ...(audit.projectionLoss === undefined
          ? []
          : [
              {
                label: 'energy that a first projection removes',
                value: `${figure(100 * audit.projectionLoss, 3)} %`,
                note: 'of the fluctuation energy',
              },
            ]),
        { label: 'largest velocity', value: `${figure(audit.velocityMax)} m/s` },
        {
          label: 'time step for Courant number 1',
          value: timeText(audit.timeStepForCourantOne),
          note: 'in the fastest cell',
        },
        { label: 'cells', value: figure(audit.cells), note: `${figure(audit.volume)} m3` },
      ],
    },
  ];
  const names = ['XX', 'XY', 'XZ', 'YY', 'YZ', 'ZZ'];
  const wanted = data.audit.covarianceWanted;
  blocks.push({
    type: 'table',
    title: 'Velocity covariances, volume mean',
    terminal: true,
    columns: [
      { label: 'component' },
      ...(wanted === undefined ? [] : [{ label: 'wanted', unit: 'm2/s2' }]),
      { label: 'recovered', unit: 'm2/s2' },
    ],
    rows: names.map((name, i) => [
      `VelocityCovariance${name}`,
      ...(wanted === undefined ? [] : [wanted[i] ?? null]),
      data.audit.covariance[i] ?? null,
    ]),
  });
  if (data.zones !== undefined && data.zones.length > 1) {
    blocks.push({
      type: 'table',
      title: 'Zones',
      columns: [
        { label: 'zone' },
        { label: 'cells' },
        { label: 'k wanted', unit: 'm2/s2' },
        { label: 'resolvable', unit: 'm2/s2' },
        { label: 'recovered', unit: 'm2/s2' },
        { label: 'scaled divergence, rms' },
      ],
      rows: data.zones.map(({ name, audit: zone }) => [
        name,
        zone.cells,
        zone.energy.wanted,
        zone.energy.resolvable,
        zone.energy.recovered,
        zone.divergence.after.scaledRms,
      ]),
    });
  }
  return blocks;
}

function spectrumBlock(spectrum: SpectrumFigures): Block {
  const measured: Curve = { name: 'measured', x: spectrum.waveNumber, y: spectrum.measured };
  const model: Curve | undefined =
    spectrum.model === undefined
      ? undefined
      : { name: 'model', x: spectrum.model.waveNumber, y: spectrum.model.density };
  const cut = Math.max(...spectrum.cutoffs.map((c) => c.value), 0);
  const first = Array.from(spectrum.waveNumber).find((k) => k > 0) ?? 1;
  const slope = fiveThirdsLine(model ?? measured, first, cut > first ? cut : first * 30);
  return spectrumChart({
    title: 'Energy spectrum',
    caption: spectrum.caption,
    x: { label: 'wave number', unit: 'rad/m' },
    y: { label: 'energy density', unit: 'm3/s2' },
    curves: [measured, ...(model === undefined ? [] : [model]), ...(slope === undefined ? [] : [slope])],
    cutoffs: spectrum.cutoffs,
  });
}

/** Spectrum, stresses, divergence and what the mesh carries. */
export function proofSections(data: AuditReportData): Section[] {
  const spectra: Block[] = data.spectrum === undefined ? [] : [spectrumBlock(data.spectrum)];
  for (const profile of data.profiles ?? []) {
    spectra.push(
      profileChart(
        profile.title,
        profile.caption,
        { label: profile.coordinate, unit: profile.unit },
        { label: 'k and covariances', unit: profile.quantityUnit },
        profile.curves.flatMap((c, tone): Curve[] => [
          { name: `${c.name} wanted`, x: c.x, y: c.wanted, kind: 'points', tone },
          { name: `${c.name} recovered`, x: c.x, y: c.recovered, tone },
        ]),
      ),
    );
  }
  if (data.correlations !== undefined && data.correlations.length > 0) {
    spectra.push({
      type: 'table',
      title: 'Correlation lengths',
      columns: [
        { label: 'direction' },
        { label: 'longitudinal', unit: 'm' },
        { label: 'transverse', unit: 'm' },
        { label: 'ratio' },
      ],
      rows: data.correlations.map((c) => [
        c.name,
        c.longitudinal,
        c.transverse,
        Number((c.longitudinal / c.transverse).toPrecision(3)),
      ]),
      note: 'Isotropic turbulence: 2.',
    });
  }
  const { before, after } = data.audit.divergence;
  const row = (name: string, d: DivergenceFigures) => [name, d.scaledRms, d.scaledP99, d.scaledMax];
  const divergence: Block[] = [
    {
      type: 'table',
      title: 'Scaled divergence',
      terminal: true,
      columns: [{ label: 'field' }, { label: 'rms' }, { label: '99th percentile' }, { label: 'largest' }],
      rows: [
        ...(before === undefined ? [] : [row('before control', before)]),
        row(before === undefined ? 'as found' : 'after control', after),
      ],
      note: `|div u| CellWidth / u_rms; ${data.operator}.`,
    },
  ];
  const sets = [
    ...(data.divergenceBefore === undefined ? [] : [{ name: 'before control', histogram: data.divergenceBefore }]),
    ...(data.divergenceAfter === undefined ? [] : [{ name: 'after control', histogram: data.divergenceAfter }]),
  ];
  if (sets.length > 0)
    divergence.push(
      histogramChart('Divergence before and after', `${data.operator}.`, { label: 'scaled divergence' }, sets),
    );
  const mesh: Block[] = [];
  if (data.gridRatioHistogram !== undefined) {
    mesh.push(
      histogramChart(
        'GridRatio by volume',
        '',
        { label: 'GridRatio' },
        [{ name: 'cells', histogram: data.gridRatioHistogram }],
        [
          { axis: 'x', value: 5, label: '5 marginal' },
          { axis: 'x', value: 10, label: '10 good' },
        ],
      ),
    );
  }
  if (data.shareHistogram !== undefined) {
    mesh.push(
      histogramChart(
        'Share of k that the mesh can carry',
        '',
        { label: 'ResolvableShare' },
        [{ name: 'cells', histogram: data.shareHistogram }],
        [{ axis: 'x', value: 0.8, label: '0.8 (Pope 2000)' }],
      ),
    );
  }
  if (data.courant !== undefined) {
    mesh.push(
      histogramChart(
        'Courant number',
        `At a time step of ${timeText(data.courant.timeStep)}.`,
        { label: 'Courant number' },
        [{ name: 'cells', histogram: data.courant.histogram }],
        [],
        'cells',
      ),
    );
  }
  return [
    ...(spectra.length === 0 ? [] : [{ title: 'Spectrum and stresses', blocks: spectra }]),
    { title: 'Divergence', blocks: divergence },
    ...(mesh.length === 0 ? [] : [{ title: 'What the mesh carries', blocks: mesh }]),
  ];
}

function auditVerdict(data: AuditReportData): NonNullable<ReportPage['verdict']> {
  const { energy, divergence } = data.audit;
  const ratio = energy.resolvable > 0 ? energy.recovered / energy.resolvable : Number.NaN;
  const words = `The start carries ${percent(ratio)} of the resolvable energy; its scaled divergence is ${figure(divergence.after.scaledRms, 3)} (rms).`;
  const close = Number.isNaN(ratio) || Math.abs(ratio - 1) <= 0.05;
  return { level: close ? 'good' : Math.abs(ratio - 1) <= 0.2 ? 'watch' : 'bad', words };
}

export const subtitled = (data: AuditReportData): { subtitle?: string } =>
  data.subtitle === undefined ? {} : { subtitle: data.subtitle };

/** Page of `audit`. */
export function auditReport(data: AuditReportData): ReportPage {
  return {
    title: data.title,
    kind: 'audit',
    ...subtitled(data),
    verdict: auditVerdict(data),
    footer: data.footer,
    sections: [
      { title: 'Figures', blocks: [...energyBlocks(data), ...(data.tables ?? [])] },
      ...(data.pictures.length === 0 ? [] : [{ title: 'Fields', blocks: data.pictures }]),
      ...proofSections(data),
      { title: 'Assumptions and remarks', blocks: [{ type: 'list', items: [...data.assumptions, ...data.remarks] }] },
    ],
  };
}
