import { extname } from 'node:path';
import type { Dataset } from '../basis/dataset.js';
import { isStandardName, quantityOf, type RenameProposal, suggestRenames } from '../basis/quantities.js';
import { extentOf } from './describe-file.js';

type Axis = 'x' | 'y' | 'z';
const axes: readonly Axis[] = ['x', 'y', 'z'];

/** What the files themselves say about the case. */
export interface CaseHints {
  readonly proposals: readonly RenameProposal[];
  /** Gathered standard names in the precursor, proposals not counted. */
  readonly held: ReadonlySet<string>;
  /** The same with the proposals. */
  readonly likely: ReadonlySet<string>;
  /** Factor on coordinates that makes the extents alike, where they differ by a unit. */
  readonly scale?: { readonly factor: number; readonly unit: string };
  /** Axis normal to a plane section. */
  readonly extrude?: Axis;
  readonly walls: readonly string[];
  readonly boundaries: readonly string[];
}

const unitFactors: readonly (readonly [number, string])[] = [
  [0.001, 'millimetres'],
  [0.01, 'centimetres'],
  [0.0254, 'inches'],
  [0.3048, 'feet'],
];

function gathered(name: string): string {
  return quantityOf(name)?.name ?? name;
}

function scaleHint(precursor: Dataset, target: Dataset): CaseHints['scale'] {
  const from = extentOf(precursor.points);
  const to = extentOf(target.points);
  const ratios = axes.flatMap((_, axis) => {
    const mine = from.high[axis]! - from.low[axis]!;
    const theirs = to.high[axis]! - to.low[axis]!;
    return mine > 0 && theirs > 0 ? [theirs / mine] : [];
  });
  // Only extents that all differ by the same unit speak for it.
  const unit = unitFactors.find(([factor]) => ratios.every((ratio) => Math.abs(Math.log(ratio / factor)) < 0.25));
  return ratios.length === 0 || unit === undefined ? undefined : { factor: unit[0], unit: unit[1] };
}

function extrudeHint(precursor: Dataset, target: Dataset): Axis | undefined {
  const from = extentOf(precursor.points);
  const to = extentOf(target.points);
  const sizes = axes.map((_, axis) => from.high[axis]! - from.low[axis]!);
  const largest = Math.max(...sizes);
  const flat = axes.filter(
    (name, axis) =>
      !precursor.missingAxes.includes(name) && sizes[axis]! <= 1e-9 * largest && to.high[axis]! > to.low[axis]!,
  );
  return flat.length === 1 ? flat[0] : undefined;
}

/** Looks at both files for what a case needs to say. */
export function hintsOf(precursor: Dataset, target: Dataset): CaseHints {
  const arrays = [...precursor.cellArrays, ...precursor.pointArrays];
  const proposals = suggestRenames(arrays);
  const standard = arrays.map((array) => array.name).filter(isStandardName);
  const held = new Set(standard.map(gathered));
  const scale = scaleHint(precursor, target);
  const extrude = extrudeHint(precursor, target);
  return {
    proposals,
    held,
    likely: new Set([...held, ...proposals.map((proposal) => gathered(proposal.standard))]),
    ...(scale === undefined ? {} : { scale }),
    ...(extrude === undefined ? {} : { extrude }),
    walls: target.boundaries.filter((patch) => patch.kind === 'wall').map((patch) => patch.name),
    boundaries: target.boundaries.map((patch) => patch.name),
  };
}

/** A scalar that YAML reads back as the same text. */
function yamlText(text: string): string {
  return /^[A-Za-z_./][\w./-]*$/.test(text) && !/^(?:true|false|null|yes|no|on|off|y|n|~)$/i.test(text)
    ? text
    : JSON.stringify(text);
}

function renameLines(hints: CaseHints): string[] {
  if (hints.proposals.length === 0) return ['  rename: {}                        # standard name: name in the file'];
  return [
    '  rename:                           # standard name: name in the file',
    '    # These arrays only look like standard quantities. Take away the mark # where it is true:',
    ...hints.proposals.map(({ standard, inFile }) => `    # ${standard}: ${yamlText(inFile)}`),
  ];
}

function constantsLines(hints: CaseHints): string[] {
  const { likely } = hints;
  const nu = likely.has('ViscosityKinematic') || (likely.has('ViscosityMolecular') && likely.has('Density'));
  return nu
    ? ['  constants: {}                     # quantities that the file does not hold']
    : [
        '  constants: {}                     # quantities that the file does not hold; the viscosity is missing:',
        '  #  ViscosityKinematic: 1.5e-5     # m2/s, air at 20 degrees: improves the length scale of the eddies',
      ];
}

function energyLines(hints: CaseHints): string[] {
  const k = hints.likely.has('TurbulentEnergyKinetic');
  const rate = ['TurbulentDissipation', 'TurbulentDissipationRate', 'IntegralLength'].some((name) =>
    hints.likely.has(name),
  );
  const covariance = hints.likely.has('VelocityCovariance') || hints.likely.has('ReynoldsStress');
  return [
    k || covariance
      ? "  energy: precursor                 # the precursor's k | {intensity: 0.05} | {constant: k in m2/s2}"
      : '  energy: {intensity: 0.05}         # the precursor holds no TurbulentEnergyKinetic: set this',
    rate
      ? '  length: precursor                 # from k and epsilon or omega | {constant: metres}'
      : '  length: {constant: 0.01}          # m, the precursor holds no epsilon or omega: set this',
    covariance
      ? '  stress: precursor                 # its covariances | eddy-viscosity | isotropic'
      : '  stress: isotropic                 # isotropic | eddy-viscosity (from the mean strain) | precursor',
  ];
}

export interface InitFiles {
  /** As they are to stand in the case file. */
  readonly precursor: string;
  readonly target: string;
  readonly start: string;
  readonly title: string;
  /** For the line that editors read. */
  readonly schema: string;
}

function targetLines(files: InitFiles, hints: CaseHints): string[] {
  const lines = ['target:', `  file: ${yamlText(files.target)}`];
  if (hints.boundaries.length > 0) lines.push(`  # boundaries in the file: ${hints.boundaries.join(', ')}`);
  const walls = hints.walls.map(yamlText).join(', ');
  lines.push(
    `  walls: [${walls}]${' '.repeat(Math.max(1, 25 - walls.length))}# names | {plane: y, at: [0, 2]} | {box: [[0, 0, 0], [1, 1, 1]]} | {surface: walls.vtp} | all`,
    '  periodic: []                      # x, y, z, or pairs of boundary names',
  );
  return lines;
}

function placementLines(hints: CaseHints): string[] {
  const parts: string[] = [];
  if (hints.scale !== undefined) parts.push(`scale: ${hints.scale.factor}`);
  if (hints.extrude !== undefined) parts.push(`extrude: ${hints.extrude}`);
  const lines: string[] = [];
  if (hints.scale !== undefined) {
    lines.push(`  # The extents of the two files differ as if the precursor were in ${hints.scale.unit}. Check it:`);
  }
  if (hints.extrude !== undefined) lines.push('  # The precursor is a plane section:');
  lines.push(`  placement: {${parts.join(', ')}}`);
  return lines;
}

/** The text of a case file for two files, commented; it is valid as it stands. */
export function caseText(files: InitFiles, hints: CaseHints): string {
  const start = yamlText(files.start);
  const report = yamlText(`${files.start.slice(0, files.start.length - extname(files.start).length)}.html`);
  return [
    `# yaml-language-server: $schema=${files.schema}`,
    '# Units are SI. Paths are relative to this file. Every key and its default: README.md, "Case file".',
    `title: ${yamlText(files.title)}`,
    '',
    'precursor:',
    `  file: ${yamlText(files.precursor)}`,
    '  snapshot: last                    # first | last | mean | a time in s, for time series',
    ...renameLines(hints),
    ...constantsLines(hints),
    ...(hints.likely.has('TurbulentDissipationRate')
      ? ['  omega: two-equation               # epsilon / (0.09 k) | epsilon-over-k: a factor of 11, check it']
      : []),
    ...placementLines(hints),
    '',
    ...targetLines(files, hints),
    '',
    'transfer:',
    '  method: linear                    # linear | inverse-distance | nearest | conservative',
    '  outside: nearest                  # nearest | extrapolate | fail | a number',
    '',
    'fluctuations:',
    '  seed: 1                           # the same seed gives the same file, bit by bit',
    ...energyLines(hints),
    '  subgrid: model                    # model | none: will a sub-grid model act on the run?',
    '  wavelength-cells: 3               # shortest wave laid on the mesh, in cells',
    '  zones: []                         # where to seed; everywhere by default',
    '  control: projection               # modes | potential | projection',
    '',
    'checks: {divergence: 1.0e-3, energy: 0.05}',
    `output: {file: ${start}, report: ${report}}`,
    '',
  ].join('\n');
}
