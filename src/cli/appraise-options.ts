import { type Command, InvalidArgumentError, Option } from 'commander';
import type { MonitorLine } from '../appraisal/monitors.js';
import type { BoundarySelection } from '../mesh/selection.js';
import type { SliceAxis } from '../report/slices.js';
import {
  axisList,
  type CommonOptions,
  collectConstant,
  collectRename,
  nonNegativeNumber,
  positiveNumber,
  positiveWholeNumber,
  wholeNumber,
} from './options.js';

export type Point = readonly [number, number, number];

export interface AppraiseOptions extends CommonOptions {
  readonly second?: string;
  readonly share: number;
  readonly spectrum: 'von-karman-pao' | 'pope';
  readonly walls: readonly BoundarySelection[];
  readonly periodic: readonly ('x' | 'y' | 'z')[];
  readonly rename: Readonly<Record<string, string>>;
  readonly constant: Readonly<Record<string, number>>;
  readonly omega: 'two-equation' | 'epsilon-over-k';
  readonly intensity?: number;
  readonly length?: number;
  readonly method: 'linear' | 'inverse-distance' | 'nearest' | 'conservative';
  readonly outside: 'nearest' | 'extrapolate' | 'fail' | number;
  readonly extrude?: 'x' | 'y' | 'z';
  readonly courantMax: number;
  readonly courantP99: number;
  readonly meanError: number;
  readonly varianceError: number;
  readonly secondsPerStep?: number;
  readonly probes: readonly [number, number, number];
  readonly point: readonly { readonly name: string; readonly at: Point }[];
  readonly line: readonly MonitorLine[];
  readonly slice?: readonly { readonly axis: SliceAxis; readonly position: number }[];
  readonly output?: string;
  readonly monitors?: string;
  readonly report?: string;
}

function pointOf(text: string): Point {
  const parts = text.split(',').map(Number);
  if (parts.length !== 3 || parts.some((x) => !Number.isFinite(x)) || /,\s*(,|$)|^\s*,/.test(text)) {
    throw new InvalidArgumentError(`'${text}' is not a point; write x,y,z in metres.`);
  }
  return parts as unknown as Point;
}

function named(text: string, example: string): { name: string; rest: string } {
  const at = text.indexOf('=');
  if (at <= 0) throw new InvalidArgumentError(`'${text}' has no name; write ${example}.`);
  return { name: text.slice(0, at).trim(), rest: text.slice(at + 1) };
}

/** `NAME=x,y,z` */
export function collectPoint(text: string, before: AppraiseOptions['point'] = []): AppraiseOptions['point'] {
  const { name, rest } = named(text, 'NAME=x,y,z');
  return [...before, { name, at: pointOf(rest) }];
}

/** `NAME=x,y,z:x,y,z:COUNT` */
export function collectLine(text: string, before: readonly MonitorLine[] = []): readonly MonitorLine[] {
  const { name, rest } = named(text, 'NAME=x,y,z:x,y,z:COUNT');
  const [from, to, count] = rest.split(':');
  if (from === undefined || to === undefined || count === undefined) {
    throw new InvalidArgumentError(`'${text}' is not a line; write NAME=x,y,z:x,y,z:COUNT.`);
  }
  return [...before, { name, from: pointOf(from), to: pointOf(to), count: positiveWholeNumber(count) }];
}

/** `all`, a boundary's name, a plane such as `y=0`, or `box=x,y,z:x,y,z` for faces whose centre is inside. */
export function collectWall(text: string, before: readonly BoundarySelection[] = []): readonly BoundarySelection[] {
  if (text.startsWith('box=')) {
    const [low, high] = text.slice(4).split(':');
    if (low === undefined || high === undefined) {
      throw new InvalidArgumentError(`'${text}' is not a box; write box=x,y,z:x,y,z.`);
    }
    return [...before, { box: [pointOf(low), pointOf(high)] }];
  }
  const match = /^([xyz])=(.+)$/.exec(text);
  if (match === null) return [...before, text];
  const at = Number(match[2]);
  if (!Number.isFinite(at)) throw new InvalidArgumentError(`'${text}' is not a plane; write y=0 with metres.`);
  return [...before, { plane: match[1] as SliceAxis, at }];
}

/** `z=0.2` */
export function collectSlice(
  text: string,
  before: AppraiseOptions['slice'] = [],
): NonNullable<AppraiseOptions['slice']> {
  const match = /^([xyz])=(.+)$/.exec(text);
  const position = Number(match?.[2]);
  if (match === null || !Number.isFinite(position)) {
    throw new InvalidArgumentError(`'${text}' is not a slice; write z=0.2 with metres.`);
  }
  return [...before, { axis: match[1] as SliceAxis, position }];
}

function probeCounts(text: string): readonly [number, number, number] {
  const parts = text.split(',').map((part) => wholeNumber(part.trim()));
  if (parts.length !== 3) throw new InvalidArgumentError(`'${text}' is not three numbers; write WAKE,SHEAR,WALL.`);
  return parts as unknown as readonly [number, number, number];
}

function shareOf(text: string): number {
  const value = positiveNumber(text);
  if (value >= 1) throw new InvalidArgumentError(`'${text}' is not between 0 and 1.`);
  return value;
}

function outsideOf(text: string): AppraiseOptions['outside'] {
  if (text === 'nearest' || text === 'extrapolate' || text === 'fail') return text;
  const value = Number(text);
  if (text.trim() === '' || !Number.isFinite(value)) {
    throw new InvalidArgumentError(`'${text}' is none of nearest, extrapolate, fail or a number.`);
  }
  return value;
}

const option = <T>(flags: string, text: string, parser: (value: string, before: T) => T): Option =>
  new Option(flags, text).argParser(parser);

/** The options of `appraise` besides the common ones. */
export function withAppraiseOptions(command: Command): Command {
  return command
    .option('--second <file>', 'a second precursor to compare the judgement with')
    .addOption(option('--share <share>', 'share of k that is wanted to be resolved', shareOf).default(0.8))
    .addOption(
      new Option('--spectrum <name>', 'model spectrum').choices(['von-karman-pao', 'pope']).default('von-karman-pao'),
    )
    .addOption(
      option(
        '--walls <selection>',
        "walls: all, a boundary's name, a plane such as y=0, or box=x,y,z:x,y,z; repeatable",
        collectWall,
      ).default([]),
    )
    .addOption(option('--periodic <axes>', 'periodic directions of the target, for example x,z', axisList).default([]))
    .addOption(option('--rename <name=standard>', 'FILE_NAME=StandardName; repeatable', collectRename).default({}))
    .addOption(
      option(
        '--constant <standard=number>',
        'for example ViscosityKinematic=1.5e-5; repeatable',
        collectConstant,
      ).default({}),
    )
    .addOption(
      new Option('--omega <meaning>', 'what TurbulentDissipationRate means')
        .choices(['two-equation', 'epsilon-over-k'])
        .default('two-equation'),
    )
    .addOption(option('--intensity <ratio>', 'turbulence intensity where the precursor holds no k', positiveNumber))
    .addOption(
      option('--length <metres>', 'longitudinal integral scale where the precursor gives none', positiveNumber),
    )
    .addOption(
      new Option('--method <name>', 'how fields reach the target')
        .choices(['linear', 'inverse-distance', 'nearest', 'conservative'])
        .default('linear'),
    )
    .addOption(
      option(
        '--outside <rule>',
        'cells outside the precursor: nearest, extrapolate, fail or a number',
        outsideOf,
      ).default('nearest'),
    )
    .addOption(
      new Option('--extrude <axis>', 'the precursor is a section, constant along this axis').choices(['x', 'y', 'z']),
    )
    .addOption(
      option('--courant-max <number>', 'largest Courant number of the planned time step', positiveNumber).default(0.8),
    )
    .addOption(option('--courant-p99 <number>', '99th percentile of the Courant number', positiveNumber).default(0.5))
    .addOption(
      option(
        '--mean-error <error>',
        'wanted standard error of mean velocities over the local speed',
        positiveNumber,
      ).default(0.01),
    )
    .addOption(
      option('--variance-error <error>', 'wanted relative standard error of variances', positiveNumber).default(0.05),
    )
    .addOption(
      option('--seconds-per-step <seconds>', 'wall time of one step on your machine, for the cost', nonNegativeNumber),
    )
    .addOption(
      new Option('--probes <counts>', 'monitors along the wake, in shear layers, near walls')
        .argParser(probeCounts)
        .default([12, 8, 6], '12,8,6'),
    )
    .addOption(option('--point <name=x,y,z>', 'a monitor of your own; repeatable', collectPoint).default([]))
    .addOption(
      option('--line <name=x,y,z:x,y,z:count>', 'a line of monitors of your own; repeatable', collectLine).default([]),
    )
    .addOption(
      option(
        '--slice <plane>',
        'plane of the pictures, for example z=0.2; repeatable (default: the middle of the axis along which k varies least)',
        collectSlice,
      ),
    )
    .option('-o, --output <file>', 'target with GridRatio, ResolvableShare, CellWidth, CellWidthWanted on its cells')
    .option('--monitors <file>', 'monitor plan to write (CSV)')
    .option('--report <file>', 'report page to write (HTML)');
}
