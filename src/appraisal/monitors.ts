import { InputError } from '../basis/errors.js';
import { quantiles } from './histogram.js';

export type MonitorKind = 'wake' | 'shear' | 'wall' | 'line' | 'point';

/** One probe and what it can be expected to see. */
export interface Monitor {
  readonly name: string;
  readonly kind: MonitorKind;
  readonly position: readonly [number, number, number];
  readonly cell: number;
  /** m/s. */
  readonly meanSpeed: number;
  /** m2/s2, the precursor's k. */
  readonly k: number;
  readonly integralLength: number;
  readonly cellWidth: number;
  /** pi / CellWidth, rad/m. */
  readonly cutoffWaveNumber: number;
  /** Hz: speed / (2 CellWidth), the cut-off as a fixed point sees it (Taylor's hypothesis). */
  readonly cutoffFrequency: number;
  /** s: half of the interval that just reaches the cut-off frequency, CellWidth / (2 speed). */
  readonly samplingInterval: number;
  /** u' / U below 0.2: frequencies may be read as wave numbers. */
  readonly taylorHolds: boolean;
}

export interface MonitorInput {
  /** 3 x n, metres. */
  readonly centroids: Float64Array;
  /** 3 x n, mean velocity, m/s. */
  readonly velocity: Float64Array;
  readonly k: Float64Array;
  readonly epsilon: Float64Array;
  readonly cellWidth: Float64Array;
  /** n, magnitude of the mean velocity gradient, 1/s; without it no probes in shear layers. */
  readonly shearRate?: Float64Array;
  /** n, m; without it no probes near walls. */
  readonly wallDistance?: Float64Array;
  /** Unit vector of the main flow. */
  readonly direction: readonly [number, number, number];
  /** n, 0 for cells that are not to be chosen (away from the middle of a homogeneous direction); default: all may be. */
  readonly eligible?: Uint8Array;
}

export interface MonitorLine {
  readonly name: string;
  readonly from: readonly [number, number, number];
  readonly to: readonly [number, number, number];
  readonly count: number;
}

export interface MonitorOptions {
  /** Probes of each kind; defaults 12 along the wake, 8 in shear layers, 6 near walls. */
  readonly wake?: number;
  readonly shear?: number;
  readonly wall?: number;
  /** Least distance between probes in integral lengths, default 2. */
  readonly spacing?: number;
  readonly lines?: readonly MonitorLine[];
  readonly points?: readonly { readonly name: string; readonly at: readonly [number, number, number] }[];
}

function lengthAt(input: MonitorInput, cell: number): number {
  const k = input.k[cell] as number;
  const epsilon = input.epsilon[cell] as number;
  return k > 0 && epsilon > 0 ? k ** 1.5 / epsilon : 0;
}

function describeMonitor(
  input: MonitorInput,
  name: string,
  kind: MonitorKind,
  cell: number,
  at?: readonly [number, number, number],
): Monitor {
  const c = 3 * cell;
  const meanSpeed = Math.hypot(
    input.velocity[c] as number,
    input.velocity[c + 1] as number,
    input.velocity[c + 2] as number,
  );
  const k = input.k[cell] as number;
  const swing = Math.sqrt((2 / 3) * k);
  const width = input.cellWidth[cell] as number;
  // Where the mean stands still the eddies are carried by the larger ones.
  const passing = Math.max(meanSpeed, swing);
  return {
    name,
    kind,
    position: at ?? [input.centroids[c] as number, input.centroids[c + 1] as number, input.centroids[c + 2] as number],
    cell,
    meanSpeed,
    k,
    integralLength: lengthAt(input, cell),
    cellWidth: width,
    cutoffWaveNumber: Math.PI / width,
    cutoffFrequency: passing / (2 * width),
    samplingInterval: passing > 0 ? width / (2 * passing) : Number.POSITIVE_INFINITY,
    taylorHolds: swing < 0.2 * meanSpeed,
  };
}

function farEnough(input: MonitorInput, cell: number, taken: readonly number[], spacing: number): boolean {
  const reach = spacing * lengthAt(input, cell);
  const c = 3 * cell;
  for (const other of taken) {
    const o = 3 * other;
    const distance = Math.hypot(
      (input.centroids[c] as number) - (input.centroids[o] as number),
      (input.centroids[c + 1] as number) - (input.centroids[o + 1] as number),
      (input.centroids[c + 2] as number) - (input.centroids[o + 2] as number),
    );
    if (distance < reach || distance === 0) return false;
  }
  return true;
}

/** Highest scores first, each at least `spacing` lengths from those taken; cells with score 0 never. */
function pickSpread(input: MonitorInput, score: Float64Array, count: number, spacing: number): readonly number[] {
  if (input.eligible !== undefined) {
    for (let i = 0; i < score.length; i++) if (input.eligible[i] === 0) score[i] = 0;
  }
  const positive = score.filter((s) => s > 0);
  if (positive.length === 0 || count === 0) return [];
  const taken: number[] = [];
  // The best tenth is nearly always enough and saves sorting a million cells.
  for (const part of [0.9, 0]) {
    const limit = quantiles(positive, [part])[0] as number;
    const candidates: number[] = [];
    for (let i = 0; i < score.length; i++)
      if ((score[i] as number) >= limit && (score[i] as number) > 0) candidates.push(i);
    candidates.sort((a, b) => (score[b] as number) - (score[a] as number) || a - b);
    for (const cell of candidates) {
      if (taken.length >= count) return taken;
      if (farEnough(input, cell, taken, spacing)) taken.push(cell);
    }
  }
  return taken;
}

/** The cell of largest k in each of `count` slabs across the main flow, over the stretch where k is high. */
function alongWake(input: MonitorInput, count: number, spacing: number): readonly number[] {
  const n = input.k.length;
  const limit = 0.2 * (quantiles(input.k, [0.999])[0] as number);
  if (!(limit > 0) || count === 0) return [];
  const along = (cell: number): number =>
    input.direction.reduce((sum, d, a) => sum + d * (input.centroids[3 * cell + a] as number), 0);
  const inside = (cell: number): boolean =>
    (input.k[cell] as number) >= limit &&
    input.eligible?.[cell] !== 0 &&
    (input.wallDistance === undefined || (input.wallDistance[cell] as number) > 2 * (input.cellWidth[cell] as number));
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < n; i++) {
    if (!inside(i)) continue;
    const s = along(i);
    if (s < low) low = s;
    if (s > high) high = s;
  }
  if (!(high >= low)) return [];
  const best = new Int32Array(count).fill(-1);
  for (let i = 0; i < n; i++) {
    if (!inside(i)) continue;
    const slab = high > low ? Math.min(count - 1, Math.floor(((along(i) - low) / (high - low)) * count)) : 0;
    const before = best[slab] as number;
    if (before < 0 || (input.k[i] as number) > (input.k[before] as number)) best[slab] = i;
  }
  const taken: number[] = [];
  for (const cell of best) if (cell >= 0 && farEnough(input, cell, taken, 0.5 * spacing)) taken.push(cell);
  return taken;
}

function nearestCell(centroids: Float64Array, at: readonly [number, number, number]): number {
  let best = -1;
  let least = Number.POSITIVE_INFINITY;
  for (let i = 0; i < centroids.length; i += 3) {
    const dx = (centroids[i] as number) - at[0];
    const dy = (centroids[i + 1] as number) - at[1];
    const dz = (centroids[i + 2] as number) - at[2];
    const d = dx * dx + dy * dy + dz * dz;
    if (d < least) {
      least = d;
      best = i / 3;
    }
  }
  return best;
}

/**
 * Chooses probe positions where a history tells most: along the wake of high k, in shear layers (where the production
 * of k, 0.09 k^2 / epsilon S^2, is largest), in the cells next to walls; at cell centres, spread by the local integral
 * length. The user's lines and points are added as they are.
 *
 * @throws InputError for a line of fewer than two probes
 * @see Taylor 1938 (frozen turbulence), valid for u' / U below about 0.2
 */
export function planMonitors(input: MonitorInput, options: MonitorOptions = {}): readonly Monitor[] {
  const spacing = options.spacing ?? 2;
  const n = input.k.length;
  const monitors: Monitor[] = [];
  const number = (prefix: string, i: number): string => `${prefix}${String(i + 1).padStart(2, '0')}`;
  const taken = new Set<number>();
  const add = (cells: readonly number[], prefix: string, kind: MonitorKind): void => {
    cells
      .filter((cell) => !taken.has(cell))
      .forEach((cell, i) => {
        taken.add(cell);
        monitors.push(describeMonitor(input, number(prefix, i), kind, cell));
      });
  };
  add(alongWake(input, options.wake ?? 12, spacing), 'wake', 'wake');
  const { shearRate, wallDistance } = input;
  if (shearRate !== undefined) {
    const score = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      const k = input.k[i] as number;
      const epsilon = input.epsilon[i] as number;
      if (wallDistance !== undefined && (wallDistance[i] as number) < 2 * (input.cellWidth[i] as number)) continue;
      if (epsilon > 0) score[i] = ((0.09 * k * k) / epsilon) * (shearRate[i] as number) ** 2;
    }
    add(pickSpread(input, score, options.shear ?? 8, spacing), 'shear', 'shear');
  }
  if (wallDistance !== undefined) {
    const score = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      if ((wallDistance[i] as number) < 2 * (input.cellWidth[i] as number)) score[i] = input.k[i] as number;
    }
    add(pickSpread(input, score, options.wall ?? 6, spacing), 'wall', 'wall');
  }
  for (const line of options.lines ?? []) {
    if (!(line.count >= 2)) {
      throw new InputError({
        place: line.name,
        cause: `a line of ${line.count} probes`,
        remedy: 'ask for two or more',
      });
    }
    for (let i = 0; i < line.count; i++) {
      const t = i / (line.count - 1);
      const at = [0, 1, 2].map((a) => {
        const from = line.from[a] as number;
        return from + t * ((line.to[a] as number) - from);
      }) as [number, number, number];
      monitors.push(describeMonitor(input, number(`${line.name}-`, i), 'line', nearestCell(input.centroids, at), at));
    }
  }
  for (const point of options.points ?? []) {
    monitors.push(describeMonitor(input, point.name, 'point', nearestCell(input.centroids, point.at), point.at));
  }
  return monitors;
}

function cell(text: string): string {
  return /[",\n\r]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}

/** The monitor plan as CSV (RFC 4180), SI units, one probe a line. */
export function monitorsCsv(monitors: readonly Monitor[]): string {
  const head =
    'Monitor,Kind,CoordinateX,CoordinateY,CoordinateZ,MeanSpeed,TurbulentEnergyKinetic,IntegralLength,CellWidth,' +
    'CutoffWaveNumber,CutoffFrequency,SamplingInterval,TaylorHypothesis';
  const rows = monitors.map((m) =>
    [
      cell(m.name),
      m.kind,
      ...m.position.map(String),
      m.meanSpeed,
      m.k,
      m.integralLength,
      m.cellWidth,
      m.cutoffWaveNumber,
      m.cutoffFrequency,
      m.samplingInterval,
      m.taylorHolds ? 'holds' : 'doubtful',
    ].join(','),
  );
  return `${[head, ...rows].join('\n')}\n`;
}
