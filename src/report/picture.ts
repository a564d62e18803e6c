import { deflateSync } from 'node:zlib';
import { encode } from 'fast-png';
import { escapeHtml, prettyUnits } from './escape.js';
import { figure, type PictureBlock } from './page.js';
import { css, divergingRamp, type Rgb, rampSteps, sequentialRamp } from './palette.js';
import { linearTicks, logTicks } from './ticks.js';

/** What the page's script needs for hovering and downloading a picture. */
export interface PictureData {
  readonly kind: 'picture';
  /** Drawing units, and the picture's place in them (left, top, right, bottom). */
  readonly frame: readonly [number, number];
  readonly plot: readonly [number, number, number, number];
  readonly width: number;
  readonly height: number;
  readonly low: readonly [number, number];
  readonly high: readonly [number, number];
  readonly axes: readonly [string, string];
  readonly quantity: string;
  readonly unit: string;
  readonly log: boolean;
  /** Values between these are coded 1 to 65535; 0 is outside the mesh. */
  readonly range: readonly [number, number];
  /** Base64 of zlib data: high bytes of all pixels, then low bytes. */
  readonly codes: string;
}

const drawingWidth = 900;
const left = 64;
const right = 770;
const top = 30;

function finiteRange(block: PictureBlock, share: number): [number, number] {
  const values = Float64Array.from(block.values).filter(
    (v) => Number.isFinite(v) && (block.scale === 'linear' || v > 0),
  );
  if (values.length === 0) return block.scale === 'log' ? [0.1, 1] : [0, 1];
  values.sort();
  const at = (part: number): number => values[Math.round(part * (values.length - 1))] as number;
  return [at(share), at(1 - share)];
}

function shownRange(block: PictureBlock): [number, number] {
  let [low, high] = block.range ?? finiteRange(block, 0.01);
  if (block.ramp === 'diverging' && block.range === undefined) {
    const size = Math.max(Math.abs(low), Math.abs(high)) || 1;
    [low, high] = [-size, size];
  }
  if (!(high > low)) {
    if (block.scale === 'log') [low, high] = [low / 2, low * 2];
    else [low, high] = [low - (Math.abs(low) || 1) / 2, low + (Math.abs(low) || 1) / 2];
  }
  return [low, high];
}

/** Part of the way from `low` to `high`; 0 and 1 beyond, NaN for no number. */
function partOf(v: number, low: number, high: number, log: boolean): number {
  if (Number.isNaN(v)) return Number.NaN;
  if (log && v <= 0) return 0;
  const t = log ? Math.log(v / low) / Math.log(high / low) : (v - low) / (high - low);
  return Math.min(1, Math.max(0, t));
}

function encodePng(block: PictureBlock, range: readonly [number, number], ramp: readonly Rgb[]): string {
  const n = block.width * block.height;
  const data = new Uint8Array(n);
  for (let i = 0; i < n; i++) {
    const t = partOf(block.values[i] as number, range[0], range[1], block.scale === 'log');
    // Entry 0 is transparent: outside the mesh.
    data[i] = Number.isNaN(t) ? 0 : 1 + Math.min(rampSteps - 1, Math.floor(t * rampSteps));
  }
  const palette = [[0, 0, 0, 0], ...ramp.map((c) => [...c, 255])];
  const png = encode(
    { width: block.width, height: block.height, data, depth: 8, channels: 1, palette },
    { zlib: { level: 9 } },
  );
  return Buffer.from(png).toString('base64');
}

function encodeValues(block: PictureBlock): { range: readonly [number, number]; codes: string } {
  const log = block.scale === 'log';
  const [low, high] = finiteRange(block, 0);
  const range: [number, number] = high > low ? [low, high] : log ? [low / 2, low * 2] : [low - 1, low + 1];
  const n = block.width * block.height;
  const bytes = new Uint8Array(2 * n);
  for (let i = 0; i < n; i++) {
    const t = partOf(block.values[i] as number, range[0], range[1], log);
    const code = Number.isNaN(t) ? 0 : 1 + Math.round(t * 65534);
    bytes[i] = code >> 8;
    bytes[n + i] = code & 255;
  }
  return { range, codes: deflateSync(bytes, { level: 9 }).toString('base64') };
}

/** Path between pixels on either side of a value, in pixel units; runs of equal direction are joined. */
export function contourPath(values: ArrayLike<number>, width: number, height: number, level: number): string {
  const parts: string[] = [];
  const above = (row: number, column: number): number => {
    const v = values[row * width + column] as number;
    return Number.isNaN(v) ? -1 : v >= level ? 1 : 0;
  };
  for (let row = 1; row < height; row++) {
    let begin = -1;
    for (let column = 0; column <= width; column++) {
      const a = column < width ? above(row - 1, column) : -1;
      const b = column < width ? above(row, column) : -1;
      const edge = a >= 0 && b >= 0 && a !== b;
      if (edge && begin < 0) begin = column;
      if (!edge && begin >= 0) {
        parts.push(`M${begin} ${row}H${column}`);
        begin = -1;
      }
    }
  }
  for (let column = 1; column < width; column++) {
    let begin = -1;
    for (let row = 0; row <= height; row++) {
      const a = row < height ? above(row, column - 1) : -1;
      const b = row < height ? above(row, column) : -1;
      const edge = a >= 0 && b >= 0 && a !== b;
      if (edge && begin < 0) begin = row;
      if (!edge && begin >= 0) {
        parts.push(`M${column} ${begin}V${row}`);
        begin = -1;
      }
    }
  }
  return parts.join('');
}

/** Segments as a path; consecutive ones that touch are joined, ends rounded to tenths of a drawing unit. */
function segmentPath(segments: ArrayLike<number>, x: (a: number) => number, y: (b: number) => number): string {
  const parts: string[] = [];
  let lastX = Number.NaN;
  let lastY = Number.NaN;
  for (let i = 0; i + 3 < segments.length; i += 4) {
    const x0 = Number(x(segments[i] as number).toFixed(1));
    const y0 = Number(y(segments[i + 1] as number).toFixed(1));
    const x1 = Number(x(segments[i + 2] as number).toFixed(1));
    const y1 = Number(y(segments[i + 3] as number).toFixed(1));
    if (x0 === x1 && y0 === y1) continue;
    parts.push(x0 === lastX && y0 === lastY ? `L${x1} ${y1}` : `M${x0} ${y0}L${x1} ${y1}`);
    lastX = x1;
    lastY = y1;
  }
  return parts.join('');
}

function colourBar(
  block: PictureBlock,
  range: readonly [number, number],
  ramp: readonly Rgb[],
  bottom: number,
): string {
  const x = right + 26;
  const barTop = top;
  const barHeight = Math.max(60, bottom - barTop);
  const log = block.scale === 'log';
  const steps = 32;
  const parts: string[] = [
    `<text class="title" x="${drawingWidth - 4}" y="16" text-anchor="end">${escapeHtml(block.unit === '' ? block.quantity : `${block.quantity}, ${prettyUnits(block.unit)}`)}</text>`,
  ];
  for (let i = 0; i < steps; i++) {
    const colour = css(ramp[Math.round(((i + 0.5) / steps) * (rampSteps - 1))] as Rgb);
    const y = barTop + barHeight * (1 - (i + 1) / steps);
    parts.push(
      `<rect x="${x}" y="${y.toFixed(2)}" width="16" height="${(barHeight / steps + 0.4).toFixed(2)}" fill="${colour}"/>`,
    );
  }
  parts.push(`<rect class="axis" fill="none" x="${x}" y="${barTop}" width="16" height="${barHeight}"/>`);
  const ticks = (log ? logTicks(range[0], range[1]) : linearTicks(range[0], range[1], 4)).filter((v) =>
    (block.contours ?? []).every(
      (c) => Math.abs(partOf(v, range[0], range[1], log) - partOf(c.value, range[0], range[1], log)) * barHeight > 11,
    ),
  );
  const level = (v: number): number => barTop + barHeight * (1 - partOf(v, range[0], range[1], log));
  for (const v of ticks) {
    parts.push(
      `<path class="axis" d="M${x + 16} ${level(v).toFixed(1)}h4"/><text class="tick" x="${x + 24}" y="${(level(v) + 4).toFixed(1)}">${figure(v, 3)}</text>`,
    );
  }
  for (const contour of block.contours ?? []) {
    const t = partOf(contour.value, range[0], range[1], log);
    if (t <= 0 || t >= 1) continue;
    parts.push(
      `<path class="contour-key" d="M${x - 5} ${level(contour.value).toFixed(1)}h27"/><text class="mark-label" x="${x + 25}" y="${(level(contour.value) + 4).toFixed(1)}">${escapeHtml(contour.label)}</text>`,
    );
  }
  return parts.join('');
}

function spoken(block: PictureBlock, range: readonly [number, number]): string {
  return `${block.title}. ${block.quantity} from ${figure(range[0], 3)} to ${figure(range[1], 3)} ${block.unit} over ${block.axes.join(' and ')}.`;
}

/** Draws a field on a plane with axes, outlines, contours, points and a colour bar. */
export function drawPicture(block: PictureBlock): { svg: string; data: PictureData } {
  const ramp = block.ramp === 'diverging' ? divergingRamp() : sequentialRamp();
  const range = shownRange(block);
  const plotWidth = right - left;
  const plotHeight = Math.round((plotWidth * block.height) / block.width);
  // Tall slices are kept to a readable height and centred less wide.
  const scale = Math.min(1, 620 / plotHeight);
  const pictureRight = left + plotWidth * scale;
  const bottom = top + Math.max(1, plotHeight * scale);
  const frameHeight = Math.max(bottom, top + 70) + 52;
  const x = (a: number): number => left + ((a - block.low[0]) / (block.high[0] - block.low[0])) * (pictureRight - left);
  const y = (b: number): number => bottom - ((b - block.low[1]) / (block.high[1] - block.low[1])) * (bottom - top);
  const parts: string[] = [
    `<image x="${left}" y="${top}" width="${pictureRight - left}" height="${(bottom - top).toFixed(2)}" preserveAspectRatio="none" href="data:image/png;base64,${encodePng(block, range, ramp)}"/>`,
  ];
  for (const contour of block.contours ?? []) {
    const path = contourPath(block.values, block.width, block.height, contour.value);
    if (path === '' || path.length > 400_000) continue;
    const sx = (pictureRight - left) / block.width;
    const sy = (bottom - top) / block.height;
    for (const kind of ['under', 'over']) {
      parts.push(
        `<path class="contour ${kind}" transform="translate(${left} ${top}) scale(${sx} ${sy})" d="${path}"/>`,
      );
    }
  }
  if (block.boundary !== undefined) parts.push(`<path class="boundary" d="${segmentPath(block.boundary, x, y)}"/>`);
  if (block.walls !== undefined) parts.push(`<path class="wall" d="${segmentPath(block.walls, x, y)}"/>`);
  for (const v of linearTicks(block.low[0], block.high[0], 6)) {
    parts.push(
      `<path class="axis" d="M${x(v).toFixed(1)} ${bottom + 4}v5"/><text class="tick" x="${x(v).toFixed(1)}" y="${bottom + 22}" text-anchor="middle">${figure(v, 3)}</text>`,
    );
  }
  for (const v of linearTicks(block.low[1], block.high[1], Math.max(2, Math.round((bottom - top) / 70)))) {
    parts.push(
      `<path class="axis" d="M${left - 4} ${y(v).toFixed(1)}h-5"/><text class="tick" x="${left - 12}" y="${(y(v) + 4).toFixed(1)}" text-anchor="end">${figure(v, 3)}</text>`,
    );
  }
  parts.push(`<text class="title" x="${pictureRight}" y="${bottom + 40}" text-anchor="end">${block.axes[0]}, m</text>`);
  parts.push(
    `<text class="title" transform="translate(14 ${top}) rotate(-90)" text-anchor="end">${block.axes[1]}, m</text>`,
  );
  const labelled: (readonly [number, number, number])[] = [];
  for (const point of block.points ?? []) {
    const px = x(point.at[0]);
    const py = y(point.at[1]);
    const wide = 7 * point.name.length + 8;
    // Labels that would lie over one another are left out; the table names every probe.
    const free = labelled.every(([lx, ly, lw]) => Math.abs(py - ly) > 14 || px > lx + lw || px + wide < lx);
    parts.push(`<circle class="probe" cx="${px.toFixed(1)}" cy="${py.toFixed(1)}" r="4.5"/>`);
    if (!free) continue;
    labelled.push([px, py, wide]);
    const side = px + wide > pictureRight ? 'end' : 'start';
    parts.push(
      `<text class="probe-label" x="${(px + (side === 'end' ? -7 : 7)).toFixed(1)}" y="${(py - 5).toFixed(1)}" text-anchor="${side}">${escapeHtml(point.name)}</text>`,
    );
  }
  parts.push(colourBar(block, range, ramp, bottom));
  const { range: coded, codes } = encodeValues(block);
  return {
    svg: `<svg viewBox="0 0 ${drawingWidth} ${Math.ceil(frameHeight)}" role="img" aria-label="${escapeHtml(spoken(block, range))}">${parts.join('')}</svg>`,
    data: {
      kind: 'picture',
      frame: [drawingWidth, Math.ceil(frameHeight)],
      plot: [left, top, pictureRight, bottom],
      width: block.width,
      height: block.height,
      low: block.low,
      high: block.high,
      axes: block.axes,
      quantity: block.quantity,
      unit: prettyUnits(block.unit),
      log: block.scale === 'log',
      range: coded,
      codes,
    },
  };
}
