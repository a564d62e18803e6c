import type { AppraisalReportData } from './appraisal-data.js';
import { type HistogramData, histogramChart, type NamedHistogram } from './figures.js';
import { type Block, figure, type ReportPage, type Section, type TableBlock } from './page.js';
import { monitorsTable, planTable } from './plan-tables.js';
import { lengthText, percentText as percent } from './units.js';

const levelOf = { resolves: 'good', quiet: 'good', marginal: 'watch', 'too coarse': 'bad' } as const;

function regionsTable(data: AppraisalReportData): TableBlock {
  const corner = (p: readonly number[]): string => p.map((x) => figure(x, 3)).join(', ');
  return {
    type: 'table',
    title: 'Worst regions',
    terminal: true,
    columns: [
      { label: 'from', unit: 'm' },
      { label: 'to', unit: 'm' },
      { label: 'of the missing energy', unit: '%' },
      { label: 'GridRatio' },
      { label: 'in words' },
    ],
    rows: data.regions.map((r) => [
      corner(r.low),
      corner(r.high),
      Number((100 * r.deficitShare).toPrecision(3)),
      Number(r.summary.meanGridRatio.toPrecision(3)),
      r.summary.words,
    ]),
    note: 'Boxes of about equal sides; the energy that is missing to the wanted share, summed over their cells, decides the order.',
  };
}

function zonesTable(zones: NonNullable<AppraisalReportData['zones']>): TableBlock {
  return {
    type: 'table',
    title: 'Zones',
    terminal: true,
    columns: [
      { label: 'zone' },
      { label: 'cells' },
      { label: 'GridRatio' },
      { label: 'share carried', unit: '%' },
      { label: 'cells for the wanted share' },
      { label: 'in words' },
    ],
    rows: zones.map(({ name, summary }) => [
      name,
      summary.cells,
      Number(summary.meanGridRatio.toPrecision(3)),
      Number((100 * summary.meanShare).toPrecision(3)),
      Math.round(summary.impliedCells),
      summary.words,
    ]),
  };
}

function resolutionSections(data: AppraisalReportData): Section[] {
  const s = data.summary;
  const facts: Block = {
    type: 'facts',
    items: [
      {
        label: 'share of k carried',
        value: percent(s.meanShare),
        note: `energy-weighted; wanted ${percent(data.wantedShare)}`,
      },
      {
        label: 'GridRatio',
        value: figure(s.meanGridRatio, 3),
        note: 'energy-weighted; 5 marginal, 10 good (common practice)',
      },
      {
        label: 'volume below 5 / 5 to 10 / from 10',
        value: [s.ratioBelow5, s.ratio5to10, s.ratioFrom10].map(percent).join(' / '),
        note: `of the turbulent volume; ${percent(s.quietVolume)} of all is quiet`,
      },
      {
        label: 'cells',
        value: figure(s.cells),
        note: `for the wanted share ${figure(Math.round(s.impliedCells))}; refining only, ${figure(Math.round(s.impliedCellsRefineOnly))}`,
      },
      {
        label: 'cell width',
        value: lengthText(s.meanWidth),
        note: `wanted ${lengthText(s.meanWantedWidth)}, both energy-weighted`,
      },
      { label: 'eddy length L', value: lengthText(s.meanLength), note: 'k^(3/2) / epsilon, energy-weighted' },
      ...(s.meanWidthOverKolmogorov === undefined
        ? []
        : [
            {
              label: 'cell width over Kolmogorov length',
              value: figure(s.meanWidthOverKolmogorov, 3),
              note: `over the Taylor length ${figure(s.meanWidthOverTaylor ?? Number.NaN, 3)}`,
            },
          ]),
    ],
  };
  const named = (
    pick: (d: { gridRatioHistogram: HistogramData; shareHistogram: HistogramData }) => HistogramData,
  ): NamedHistogram[] => [
    { name: data.comparison === undefined ? 'precursor' : 'first precursor', histogram: pick(data) },
    ...(data.comparison === undefined ? [] : [{ name: 'second precursor', histogram: pick(data.comparison) }]),
  ];
  const histograms: Block[] = [
    histogramChart(
      'GridRatio by volume',
      'Turbulent cells only.',
      { label: 'GridRatio' },
      named((d) => d.gridRatioHistogram),
      [
        { axis: 'x', value: 5, label: '5 marginal' },
        { axis: 'x', value: 10, label: '10 good' },
      ],
    ),
    histogramChart(
      'Share carried by volume',
      'From the model spectrum at the cut-off pi / CellWidth.',
      { label: 'ResolvableShare' },
      named((d) => d.shareHistogram),
      [{ axis: 'x', value: data.wantedShare, label: `${data.wantedShare} wanted` }],
    ),
  ];
  const sections: Section[] = [
    {
      title: 'Can this mesh carry the eddies',
      blocks: [facts, ...(data.zones === undefined || data.zones.length < 2 ? [] : [zonesTable(data.zones)])],
    },
    {
      title: 'Where not',
      blocks: [
        ...(data.regions.length === 0
          ? [{ type: 'text' as const, text: 'Every box reaches the wanted share.' }]
          : [regionsTable(data)]),
        ...data.pictures,
        ...histograms,
      ],
    },
  ];
  if (data.comparison !== undefined) {
    sections.push({ title: 'Two precursors', blocks: [{ type: 'text', text: `${data.comparison.words}.` }] });
  }
  return sections;
}

/** Page of `appraise`. */
export function appraisalReport(data: AppraisalReportData): ReportPage {
  const sections = resolutionSections(data);
  if (data.wall !== undefined) {
    const { wall } = data;
    const row = (name: string, [median, high]: readonly [number, number], wanted: string) => [
      name,
      Number(median.toPrecision(3)),
      Number(high.toPrecision(3)),
      wanted,
    ];
    sections.push({
      title: 'Next to the walls',
      blocks: [
        { type: 'text', text: `${wall.words}.` },
        {
          type: 'table',
          title: 'Spacings in wall units',
          terminal: true,
          columns: [
            { label: 'spacing' },
            { label: 'median', unit: 'by area' },
            { label: '95th percentile' },
            { label: 'wall-resolved practice' },
          ],
          rows: [
            row('y+ of the first cell centre', wall.yPlus, 'about 1'),
            row('along the flow', wall.along, '50 to 100'),
            row('across the flow', wall.across, '15 to 30'),
          ],
          note: "Friction velocity from the transferred velocity where the precursor has its first values, through Spalding's wall law (1961). Practice: Piomelli & Chasnov 1996 (from memory).",
        },
        histogramChart(
          'y+ of the first cell centre',
          '',
          { label: 'y+' },
          [{ name: 'y+', histogram: wall.yPlusHistogram }],
          [],
          'wall area',
        ),
      ],
    });
  }
  if (data.plan !== undefined) {
    sections.push({
      title: 'Time step, length and cost',
      blocks: [
        planTable(data.plan),
        ...(data.courantHistogram === undefined
          ? []
          : [
              histogramChart(
                'Courant number at the planned time step',
                '',
                { label: 'Courant number' },
                [{ name: 'cells', histogram: data.courantHistogram }],
                [],
                'cells',
              ),
            ]),
        { type: 'list', items: data.plan.assumptions },
      ],
    });
  }
  if (data.monitors !== undefined && data.monitors.length > 0) {
    sections.push({
      title: 'Where to listen',
      blocks: [...(data.monitorMap === undefined ? [] : [data.monitorMap]), monitorsTable(data.monitors)],
    });
  }
  sections.push({
    title: 'Assumptions and remarks',
    blocks: [{ type: 'list', items: [...data.assumptions, ...data.remarks] }],
  });
  return {
    title: data.title,
    kind: 'appraisal',
    ...(data.subtitle === undefined ? {} : { subtitle: data.subtitle }),
    verdict: { level: levelOf[data.summary.verdict], words: `${data.summary.words}.` },
    footer: data.footer,
    sections,
  };
}
