/** A report page as plain data: what is on it, not how it looks. */
export interface ReportPage {
  readonly title: string;
  /** The command that made it. */
  readonly kind: 'run' | 'appraisal' | 'audit' | 'follow-up';
  /** One line below the title (files, mesh). */
  readonly subtitle?: string;
  readonly verdict?: { readonly level: 'good' | 'watch' | 'bad'; readonly words: string };
  /** Small print at the end: version, seed, date. */
  readonly footer: readonly string[];
  readonly sections: readonly Section[];
}

export interface Section {
  readonly title: string;
  readonly blocks: readonly Block[];
}

export type Block = TextBlock | ListBlock | FactsBlock | TableBlock | ChartBlock | PictureBlock;

export interface TextBlock {
  readonly type: 'text';
  readonly text: string;
}

export interface ListBlock {
  readonly type: 'list';
  readonly items: readonly string[];
}

/** Key figures. */
export interface FactsBlock {
  readonly type: 'facts';
  readonly items: readonly { readonly label: string; readonly value: string; readonly note?: string }[];
}

export type TableCell = string | number | null;

export interface TableBlock {
  readonly type: 'table';
  readonly title: string;
  readonly columns: readonly { readonly label: string; readonly unit?: string }[];
  readonly rows: readonly (readonly TableCell[])[];
  readonly note?: string;
  /** Printed in the terminal too. */
  readonly terminal?: boolean;
}

export interface Axis {
  readonly label: string;
  readonly unit?: string;
  readonly scale: 'linear' | 'log';
  /** Default: the range of the data. */
  readonly range?: readonly [number, number];
}

export interface Series {
  readonly name: string;
  /** Same length as y, rising. */
  readonly x: ArrayLike<number>;
  /** NaN leaves a gap. */
  readonly y: ArrayLike<number>;
  /** `steps` holds y[i] from x[i] to x[i + 1] (histograms: edges and shares, last share twice). */
  readonly kind: 'line' | 'steps' | 'points';
  /** Thin and dotted: a bound or a model beside the data. */
  readonly faint?: boolean;
  /** Series of equal tone share colour and dash; default: one tone each. */
  readonly tone?: number;
}

export interface Mark {
  readonly axis: 'x' | 'y';
  readonly value: number;
  readonly label: string;
}

export interface ChartBlock {
  readonly type: 'chart';
  readonly title: string;
  readonly caption: string;
  readonly x: Axis;
  readonly y: Axis;
  readonly series: readonly Series[];
  readonly marks?: readonly Mark[];
}

export interface PictureBlock {
  readonly type: 'picture';
  readonly title: string;
  readonly caption: string;
  readonly quantity: string;
  readonly unit: string;
  /** Pixels; row 0 on top; NaN outside the mesh. */
  readonly width: number;
  readonly height: number;
  readonly values: ArrayLike<number>;
  /** Names of the two axes and the corners in metres. */
  readonly axes: readonly [string, string];
  readonly low: readonly [number, number];
  readonly high: readonly [number, number];
  readonly scale: 'linear' | 'log';
  /** `diverging` is symmetrical about zero. */
  readonly ramp: 'sequential' | 'diverging';
  /** Default: 1st to 99th percentile of the values (what lies beyond takes the end colour). */
  readonly range?: readonly [number, number];
  /** Segments a0 b0 a1 b1 of walls (heavy) and of other boundaries (light), metres. */
  readonly walls?: ArrayLike<number>;
  readonly boundary?: ArrayLike<number>;
  readonly points?: readonly { readonly name: string; readonly at: readonly [number, number] }[];
  /** Lines between pixels below and above these values, labelled in the colour bar. */
  readonly contours?: readonly { readonly value: number; readonly label: string }[];
}

/** At most four significant digits, plain exponents beyond 1e-3 ... 1e5. */
export function figure(x: number, digits = 4): string {
  if (Number.isNaN(x)) return '-';
  if (!Number.isFinite(x)) return x > 0 ? 'infinite' : '-infinite';
  if (x === 0) return '0';
  const size = Math.abs(x);
  if (Number.isInteger(x) && size < 1e15) return size >= 1e4 ? grouped(x) : String(x);
  if (size < 1e-3 || size >= 1e6) return Number(x.toPrecision(digits)).toExponential().replace('e+', 'e');
  return String(Number(x.toPrecision(digits)));
}

function grouped(x: number): string {
  return String(x).replace(/\B(?=(\d{3})+$)/g, ' ');
}

/** The caution that stands on every page once. */
export const caution =
  'A start is not a validated result. A qualified engineer verifies the assumptions listed here and the run that follows; ' +
  'local codes and licensed practice prevail.';
