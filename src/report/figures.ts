import type { Axis, ChartBlock, Mark, PictureBlock, Series } from './page.js';
import type { SliceRaster } from './slices.js';

/** A histogram as plain numbers: n + 1 edges, n shares of the whole. */
export interface HistogramData {
  readonly edges: ArrayLike<number>;
  readonly shares: ArrayLike<number>;
  readonly scale: 'linear' | 'log';
}

export interface NamedHistogram {
  readonly name: string;
  readonly histogram: HistogramData;
}

/** Shares in percent against a quantity, drawn as steps; several sets overlay. */
export function histogramChart(
  title: string,
  caption: string,
  x: { readonly label: string; readonly unit?: string },
  sets: readonly NamedHistogram[],
  marks: readonly Mark[] = [],
  weight = 'volume',
): ChartBlock {
  const first = sets[0]?.histogram;
  const low = Math.min(...sets.map((set) => set.histogram.edges[0] as number));
  const high = Math.max(...sets.map((set) => set.histogram.edges[set.histogram.edges.length - 1] as number));
  let tallest = 0;
  for (const { histogram } of sets) for (const s of Array.from(histogram.shares)) if (s > tallest) tallest = s;
  return {
    type: 'chart',
    title,
    caption,
    x: { ...x, scale: first?.scale ?? 'linear', range: [low, high] },
    y: { label: `share of the ${weight}`, unit: '%', scale: 'linear', range: [0, 108 * tallest || 1] },
    series: sets.map(({ name, histogram }) => {
      const shares = Array.from(histogram.shares, (s) => 100 * s);
      return { name, kind: 'steps', x: Array.from(histogram.edges), y: [...shares, shares[shares.length - 1] ?? 0] };
    }),
    marks,
  };
}

export interface Curve {
  readonly name: string;
  readonly x: ArrayLike<number>;
  readonly y: ArrayLike<number>;
  readonly faint?: boolean;
  readonly tone?: number;
  /** Default `line`. */
  readonly kind?: 'line' | 'points';
}

/** The -5/3 line through the geometric middle of a curve's upper decade below `upTo`. */
export function fiveThirdsLine(curve: Curve, from: number, upTo: number): Curve | undefined {
  let at = -1;
  const middle = Math.sqrt(from * upTo);
  for (let i = 0; i < curve.x.length; i++) {
    if (!((curve.y[i] as number) > 0 && (curve.x[i] as number) > 0)) continue;
    if (
      at < 0 ||
      Math.abs(Math.log((curve.x[i] as number) / middle)) < Math.abs(Math.log((curve.x[at] as number) / middle))
    ) {
      at = i;
    }
  }
  if (at < 0 || !(upTo > from)) return undefined;
  const level = (curve.y[at] as number) * (curve.x[at] as number) ** (5 / 3);
  const x = [from, upTo];
  return { name: 'slope -5/3', x, y: x.map((v) => level * v ** (-5 / 3)), faint: true };
}

/** Spectrum on logarithmic axes with cut-offs marked. Density range is held to ten decades below its top. */
export function spectrumChart(options: {
  readonly title: string;
  readonly caption: string;
  readonly x: { readonly label: string; readonly unit: string };
  readonly y: { readonly label: string; readonly unit: string };
  readonly curves: readonly Curve[];
  readonly cutoffs: readonly { readonly value: number; readonly label: string }[];
}): ChartBlock {
  let top = 0;
  let bottom = Number.POSITIVE_INFINITY;
  for (const curve of options.curves.filter((c) => c.faint !== true)) {
    for (let i = 0; i < curve.y.length; i++) {
      const y = curve.y[i] as number;
      if (y > top) top = y;
      if (y > 0 && y < bottom) bottom = y;
    }
  }
  const range: { range?: readonly [number, number] } =
    top > 0 ? { range: [Math.max(bottom, top * 1e-8) / 2, top * 3] } : {};
  return {
    type: 'chart',
    title: options.title,
    caption: options.caption,
    x: { ...options.x, scale: 'log' },
    y: { ...options.y, scale: 'log', ...range },
    series: options.curves.map((curve) => ({ kind: 'line' as const, ...curve })),
    marks: options.cutoffs.map((cutoff) => ({ axis: 'x' as const, ...cutoff })),
  };
}

/** Curves along a line (wanted against recovered and the like). */
export function profileChart(
  title: string,
  caption: string,
  x: Omit<Axis, 'scale'> & { readonly scale?: 'linear' | 'log' },
  y: Omit<Axis, 'scale'>,
  curves: readonly Curve[],
  marks: readonly Mark[] = [],
): ChartBlock {
  const series: Series[] = curves.map((curve) => ({ kind: 'line', ...curve }));
  return { type: 'chart', title, caption, x: { scale: 'linear', ...x }, y: { scale: 'linear', ...y }, series, marks };
}

export interface PictureOptions {
  readonly title: string;
  readonly caption?: string;
  readonly quantity: string;
  readonly unit: string;
  readonly scale?: 'linear' | 'log';
  readonly ramp?: 'sequential' | 'diverging';
  readonly range?: readonly [number, number];
  readonly walls?: ArrayLike<number>;
  readonly boundary?: ArrayLike<number>;
  readonly points?: NonNullable<PictureBlock['points']>;
  readonly contours?: NonNullable<PictureBlock['contours']>;
}

/** Whole metres of stretching that the raster of a very long or tall slice carries, for its caption. */
function stretch(slice: SliceRaster): string {
  const across = (slice.high[0] - slice.low[0]) / slice.width;
  const up = (slice.high[1] - slice.low[1]) / slice.height;
  const ratio = across / up;
  if (ratio > 0.97 && ratio < 1.03) return '';
  return ratio > 1
    ? ` ${slice.axes[1]} is drawn ${Number(ratio.toPrecision(2))} times larger than ${slice.axes[0]}.`
    : ` ${slice.axes[0]} is drawn ${Number((1 / ratio).toPrecision(2))} times larger than ${slice.axes[1]}.`;
}

/** A picture of values that were sampled on a slice by `sampleSlice`. */
export function slicePicture(slice: SliceRaster, values: ArrayLike<number>, options: PictureOptions): PictureBlock {
  const { caption, scale, ramp, ...rest } = options;
  return {
    type: 'picture',
    width: slice.width,
    height: slice.height,
    values,
    axes: slice.axes,
    low: slice.low,
    high: slice.high,
    scale: scale ?? 'linear',
    ramp: ramp ?? 'sequential',
    ...rest,
    caption: `${caption ?? ''}${caption === undefined || caption === '' ? '' : ' '}Slice at ${slice.axis} = ${Number(slice.position.toPrecision(4))} m.${stretch(slice)}`,
  };
}

/** Positions of probes on the plane of a slice, whatever their distance from it. */
export function pointsOnSlice(
  slice: SliceRaster,
  monitors: readonly { readonly name: string; readonly position: readonly [number, number, number] }[],
): readonly { readonly name: string; readonly at: readonly [number, number] }[] {
  const number = { x: 0, y: 1, z: 2 } as const;
  return monitors.map((m) => ({
    name: m.name,
    at: [m.position[number[slice.axes[0]]] as number, m.position[number[slice.axes[1]]] as number],
  }));
}

const ratioTicks = [
  { value: 5, label: '5 marginal' },
  { value: 10, label: '10 good' },
] as const;

/** GridRatio on a logarithmic scale with the lines of 5 and 10. */
export function gridRatioPicture(
  slice: SliceRaster,
  values: ArrayLike<number>,
  outline: Pick<PictureOptions, 'walls' | 'boundary'> = {},
): PictureBlock {
  return slicePicture(slice, values, {
    title: 'GridRatio: eddy length over cell width',
    caption:
      'Dashed lines part cells below and above 5 and 10; quiet cells (next to no turbulence, or the viscous sublayer) are left blank.',
    quantity: 'GridRatio',
    unit: '',
    scale: 'log',
    contours: ratioTicks,
    ...outline,
  });
}

/** ResolvableShare with the wanted line. */
export function sharePicture(
  slice: SliceRaster,
  values: ArrayLike<number>,
  wanted: number,
  outline: Pick<PictureOptions, 'walls' | 'boundary'> = {},
): PictureBlock {
  return slicePicture(slice, values, {
    title: 'Share of k that the mesh can carry',
    caption: `Dashed line: the wanted ${(100 * wanted).toFixed(0)} %.`,
    quantity: 'ResolvableShare',
    unit: '',
    range: [0, 1],
    contours: [{ value: wanted, label: `${wanted} wanted` }],
    ...outline,
  });
}
