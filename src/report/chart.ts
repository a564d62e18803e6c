import { LineChart, ScatterChart } from 'echarts/charts';
import { GridComponent, MarkLineComponent } from 'echarts/components';
import { init, use } from 'echarts/core';
import { SVGRenderer } from 'echarts/renderers';
import { escapeHtml, prettyUnits } from './escape.js';
import { type Axis, type ChartBlock, figure, type Series } from './page.js';
import { type Role, replaceStandIns, standIn } from './palette.js';
import { linearTicks, logTicks } from './ticks.js';

use([LineChart, ScatterChart, GridComponent, MarkLineComponent, SVGRenderer]);

/** What the page's script needs for hovering and downloading. */
export interface ChartData {
  readonly kind: 'chart';
  readonly width: number;
  readonly height: number;
  /** Left, top, right, bottom of the plotting area in the drawing's units. */
  readonly plot: readonly [number, number, number, number];
  readonly x: { readonly label: string; readonly log: boolean; readonly range: readonly [number, number] };
  readonly y: { readonly label: string; readonly log: boolean; readonly range: readonly [number, number] };
  readonly series: readonly {
    readonly name: string;
    readonly steps: boolean;
    readonly x: readonly (number | null)[];
    readonly y: readonly (number | null)[];
  }[];
}

const seriesRoles: readonly Role[] = ['one', 'two', 'three', 'four', 'soft'];
const dashes: readonly (readonly number[])[] = [[], [9, 4], [2, 3], [10, 3, 2, 3], [5, 2]];
const width = 760;
const height = 334;
const plot = [72, 18, 736, 284] as const;
const mostPoints = 1200;

const toneOf = (series: Series, i: number): number => series.tone ?? i;

/** At most `limit` points of a series: the smallest and the largest of each stretch are kept. */
export function thin(series: Series, limit = mostPoints): { x: number[]; y: number[] } {
  const n = series.y.length;
  if (n <= limit) return { x: Array.from(series.x), y: Array.from(series.y) };
  const x: number[] = [];
  const y: number[] = [];
  const stretches = Math.floor(limit / 2);
  for (let s = 0; s < stretches; s++) {
    const begin = Math.floor((s * n) / stretches);
    const end = Math.floor(((s + 1) * n) / stretches);
    let low = begin;
    let high = begin;
    for (let i = begin; i < end; i++) {
      if ((series.y[i] as number) < (series.y[low] as number)) low = i;
      if ((series.y[i] as number) > (series.y[high] as number)) high = i;
    }
    for (const i of low === high ? [low] : [Math.min(low, high), Math.max(low, high)]) {
      x.push(series.x[i] as number);
      y.push(series.y[i] as number);
    }
  }
  return { x, y };
}

function dataRange(axis: Axis, values: readonly (readonly number[])[], marks: readonly number[]): [number, number] {
  if (axis.range !== undefined) return [axis.range[0], axis.range[1]];
  const log = axis.scale === 'log';
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const list of [...values, marks]) {
    for (const v of list) {
      if (!Number.isFinite(v) || (log && v <= 0)) continue;
      if (v < low) low = v;
      if (v > high) high = v;
    }
  }
  if (!(low <= high)) return log ? [0.1, 10] : [0, 1];
  if (low === high)
    return log ? [low / 2, high * 2] : [low - (Math.abs(low) || 1) / 2, high + (Math.abs(high) || 1) / 2];
  return [low, high];
}

/** Widens a value axis a little, so that nothing lies on the frame. */
function padded(range: [number, number], axis: Axis): [number, number] {
  if (axis.range !== undefined) return range;
  const [low, high] = range;
  if (axis.scale === 'log') {
    const part = (high / low) ** 0.04;
    return [low / part, high * part];
  }
  const part = 0.05 * (high - low);
  return [low === 0 ? 0 : low - part, high + part];
}

export function axisTitle(axis: Axis): string {
  return axis.unit === undefined || axis.unit === '' ? axis.label : `${axis.label}, ${prettyUnits(axis.unit)}`;
}

const shown = (v: number, axis: Axis): boolean => Number.isFinite(v) && (axis.scale === 'linear' || v > 0);

/** Draws a chart without a browser; colours are CSS variables, so that one drawing serves both themes. */
export function drawChart(block: ChartBlock): { svg: string; data: ChartData } {
  const thinned = block.series.map((series) => thin(series));
  const marks = block.marks ?? [];
  const xRange = dataRange(
    block.x,
    thinned.map((t) => t.x),
    marks.filter((m) => m.axis === 'x').map((m) => m.value),
  );
  const yRange = padded(
    dataRange(
      block.y,
      thinned.map((t) => t.y),
      marks.filter((m) => m.axis === 'y').map((m) => m.value),
    ),
    block.y,
  );
  const chart = init(null, null, { renderer: 'svg', ssr: true, width, height });
  try {
    const axisOption = (axis: Axis, range: readonly [number, number]) => ({
      // Logarithms are taken here, so that ticks and marks do not depend on the library's rules.
      type: 'value' as const,
      min: axis.scale === 'log' ? Math.log10(range[0]) : range[0],
      max: axis.scale === 'log' ? Math.log10(range[1]) : range[1],
      axisLabel: { show: false },
      axisTick: { show: false },
      axisLine: { show: false },
      splitLine: { show: false },
    });
    const place = (v: number, axis: Axis): number | null =>
      shown(v, axis) ? (axis.scale === 'log' ? Math.log10(v) : v) : null;
    chart.setOption({
      animation: false,
      grid: { left: plot[0], top: plot[1], right: width - plot[2], bottom: height - plot[3] },
      xAxis: axisOption(block.x, xRange),
      yAxis: axisOption(block.y, yRange),
      series: block.series.map((series, i) => {
        const points = thinned[i] as { x: number[]; y: number[] };
        const tone = toneOf(series, i);
        const colour = standIn(seriesRoles[tone % seriesRoles.length] as Role);
        const values = points.x.map((x, j) => [place(x, block.x), place(points.y[j] as number, block.y)]);
        if (series.kind === 'points') {
          return { type: 'scatter', silent: true, data: values, symbolSize: 5.5, itemStyle: { color: colour } };
        }
        return {
          type: 'line',
          silent: true,
          data: values,
          showSymbol: false,
          clip: true,
          ...(series.kind === 'steps' ? { step: 'end' as const } : {}),
          ...(series.kind === 'steps' && i === 0
            ? { areaStyle: { color: colour, opacity: 0.22, origin: 'start' } }
            : {}),
          lineStyle: {
            color: colour,
            width: series.faint === true || points.x.length > 500 ? 1.2 : 2,
            type: series.faint === true ? [2, 3] : (dashes[tone % dashes.length]?.slice() ?? 'solid'),
          },
        };
      }),
    });
    const drawn = replaceStandIns(chart.renderToSVGString());
    const marksInside = /<svg[^>]*>([\s\S]*)<\/svg>/.exec(drawn)?.[1] ?? '';
    // The library's own style rules and its white background do not belong on this page.
    const body = marksInside
      .replace(/<style[\s\S]*?<\/style>/g, '')
      .replace(/ class="zr[^"]*"| ecmeta_[a-z_]+="[^"]*"/g, '')
      .replace(/<rect [^>]*width="760"[^>]*><\/rect>/g, '')
      .replaceAll(/zr\d+-c(\d+)/g, `clip-@-$1`);
    const range = { x: xRange, y: yRange };
    const svg = frame(block, range) + body + markLines(block, range);
    return {
      svg: `<svg viewBox="0 0 ${width} ${height}" role="img" aria-label="${escapeHtml(spoken(block))}">${svg}</svg>`,
      data: {
        kind: 'chart',
        width,
        height,
        plot,
        x: { label: axisTitle(block.x), log: block.x.scale === 'log', range: xRange },
        y: { label: axisTitle(block.y), log: block.y.scale === 'log', range: yRange },
        series: block.series.map((series, i) => ({
          name: series.name,
          steps: series.kind === 'steps',
          x: (thinned[i] as { x: number[] }).x.map(brief),
          y: (thinned[i] as { y: number[] }).y.map(brief),
        })),
      },
    };
  } finally {
    chart.dispose();
  }
}

function brief(v: number): number | null {
  return Number.isFinite(v) ? Number(v.toPrecision(6)) : null;
}

function spoken(block: ChartBlock): string {
  return `${block.title}. ${axisTitle(block.y)} against ${axisTitle(block.x)}; ${block.series.map((s) => s.name).join(', ')}.`;
}

interface Ranges {
  readonly x: readonly [number, number];
  readonly y: readonly [number, number];
}

function position(v: number, axis: Axis, range: readonly [number, number], from: number, to: number): number {
  const part =
    axis.scale === 'log'
      ? Math.log(v / range[0]) / Math.log(range[1] / range[0])
      : (v - range[0]) / (range[1] - range[0]);
  return Number((from + part * (to - from)).toFixed(1));
}

function frame(block: ChartBlock, range: Ranges): string {
  const [left, top, right, bottom] = plot;
  const ticksOf = (axis: Axis, r: readonly [number, number]): readonly number[] =>
    axis.scale === 'log' ? logTicks(r[0], r[1]) : linearTicks(r[0], r[1]);
  const parts: string[] = [];
  for (const v of ticksOf(block.y, range.y)) {
    const y = position(v, block.y, range.y, bottom, top);
    parts.push(
      `<path class="grid" d="M${left} ${y}H${right}"/><text class="tick" x="${left - 8}" y="${y + 4}" text-anchor="end">${figure(v, 3)}</text>`,
    );
  }
  for (const v of ticksOf(block.x, range.x)) {
    const x = position(v, block.x, range.x, left, right);
    parts.push(
      `<path class="axis" d="M${x} ${bottom}v5"/><text class="tick" x="${x}" y="${bottom + 19}" text-anchor="middle">${figure(v, 3)}</text>`,
    );
  }
  parts.push(`<path class="axis" d="M${left} ${bottom}H${right}"/>`);
  parts.push(
    `<text class="title" x="${right}" y="${bottom + 42}" text-anchor="end">${escapeHtml(axisTitle(block.x))}</text>`,
  );
  parts.push(
    `<text class="title" transform="translate(14 ${top}) rotate(-90)" text-anchor="end">${escapeHtml(axisTitle(block.y))}</text>`,
  );
  return parts.join('');
}

function markLines(block: ChartBlock, range: Ranges): string {
  const [left, top, right, bottom] = plot;
  let rowX = 0;
  return (block.marks ?? [])
    .filter((m) => shown(m.value, m.axis === 'x' ? block.x : block.y))
    .map((m) => {
      const label = escapeHtml(m.label);
      if (m.axis === 'x') {
        const x = position(m.value, block.x, range.x, left, right);
        if (x < left - 1 || x > right + 1) return '';
        const nearEnd = x > right - 150;
        const y = top + 12 + 16 * (rowX++ % 3);
        return `<path class="mark" d="M${x} ${top}V${bottom}"/><text class="mark-label" x="${nearEnd ? x - 6 : x + 6}" y="${y}" text-anchor="${nearEnd ? 'end' : 'start'}">${label}</text>`;
      }
      const y = position(m.value, block.y, range.y, bottom, top);
      if (y < top - 1 || y > bottom + 1) return '';
      return `<path class="mark" d="M${left} ${y}H${right}"/><text class="mark-label" x="${right - 4}" y="${y - 5}" text-anchor="end">${label}</text>`;
    })
    .join('');
}

/** A legend that shows each line's dash as well as its colour. */
export function legend(block: ChartBlock): string {
  if (block.series.length < 2) return '';
  const items = block.series.map((series, i) => {
    const tone = toneOf(series, i);
    const colour = `var(--${seriesRoles[tone % seriesRoles.length]})`;
    const dash = series.faint === true ? '2 3' : (dashes[tone % dashes.length] ?? []).join(' ');
    const sample =
      series.kind === 'points'
        ? `<circle cx="17" cy="6" r="3.5" fill="${colour}"/>`
        : `<path d="M1 6H33" stroke="${colour}" stroke-width="${series.faint === true ? 1.4 : 2.4}"${dash === '' ? '' : ` stroke-dasharray="${dash}"`}/>`;
    return `<li><svg class="key" viewBox="0 0 34 12" aria-hidden="true">${sample}</svg>${escapeHtml(series.name)}</li>`;
  });
  return `<ul class="legend">${items.join('')}</ul>`;
}
