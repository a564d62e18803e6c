import { InputError } from '../basis/errors.js';

type Vector = [number, number, number];

/** Perpendicular axes, the periodic ones first, with the lattice spacing 2 pi / period along those. */
export interface Frame {
  readonly axes: readonly [Vector, Vector, Vector];
  /** Number of periodic axes. */
  readonly periodic: number;
  /** 1/m, one a periodic axis. */
  readonly units: readonly number[];
}

const dot = (a: readonly number[], b: readonly number[]): number => a[0]! * b[0]! + a[1]! * b[1]! + a[2]! * b[2]!;

/** @throws InputError when periods are not perpendicular to each other */
export function latticeFrame(periods: readonly (readonly [number, number, number])[]): Frame {
  const axes: Vector[] = [];
  const units: number[] = [];
  for (const period of periods) {
    const length = Math.hypot(...period);
    const axis: Vector = [period[0] / length, period[1] / length, period[2] / length];
    if (axes.some((other) => Math.abs(dot(other, axis)) > 1e-9)) {
      throw new InputError({
        place: 'target.periodic',
        cause: 'periodic translations that are not perpendicular cannot be matched by the modes',
        remedy: 'name fewer periodic directions',
      });
    }
    axes.push(axis);
    units.push((2 * Math.PI) / length);
  }
  const periodic = axes.length;
  const candidates: Vector[] = [
    [1, 0, 0],
    [0, 1, 0],
    [0, 0, 1],
  ];
  while (axes.length < 3) {
    // The candidate least covered by the axes so far.
    let best: Vector = [0, 0, 0];
    let most = -1;
    for (const c of candidates) {
      const rest = [...c] as Vector;
      for (const a of axes) {
        const along = dot(rest, a);
        for (let i = 0; i < 3; i++) rest[i]! -= along * a[i]!;
      }
      const length = Math.hypot(...rest);
      if (length > most + 1e-9) {
        most = length;
        best = [rest[0] / length, rest[1] / length, rest[2] / length];
      }
    }
    axes.push(best);
  }
  return { axes: axes as [Vector, Vector, Vector], periodic, units };
}

function compose(frame: Frame, c: readonly number[]): Vector {
  const out: Vector = [0, 0, 0];
  for (let a = 0; a < 3; a++) for (let i = 0; i < 3; i++) out[i]! += c[a]! * frame.axes[a]![i]!;
  return out;
}

/**
 * A wave vector of the given length near `direction` whose components along the periodic axes lie on the lattice; the
 * free components make up the length. With two periodic axes waves that are constant along both are left out: they would
 * move the plane mean.
 */
export function snapKeepingLength(frame: Frame, direction: Vector, length: number): Vector {
  const c = frame.axes.map((axis) => dot(axis, direction) * length);
  const { periodic, units } = frame;
  if (periodic === 0) return compose(frame, c);
  const whole = units.map((u, a) => Math.round(c[a]! / u));
  if (periodic === 2 && whole[0] === 0 && whole[1] === 0) {
    const axis = Math.abs(c[0]! / units[0]!) >= Math.abs(c[1]! / units[1]!) ? 0 : 1;
    const chosen = units[axis]! <= length ? axis : 1 - axis;
    whole[chosen] = c[chosen]! < 0 ? -1 : 1;
  }
  const snapped = (): number => whole.reduce((sum, m, a) => sum + (m * units[a]!) ** 2, 0);
  // Lattice components longer than the wave vector itself step back, the longest first.
  while (snapped() > length * length * (1 + 1e-12)) {
    const sizes = whole.map((m, a) => Math.abs(m) * units[a]!);
    const axis = sizes.indexOf(Math.max(...sizes));
    whole[axis]! -= Math.sign(whole[axis]!);
    if (periodic === 2 && whole[0] === 0 && whole[1] === 0) {
      const other = units[1 - axis]! < units[axis]! ? 1 - axis : axis;
      whole[other] = c[other]! < 0 ? -1 : 1;
      if (other === axis) break;
    }
  }
  const free = c.slice(periodic);
  const freeLength = Math.hypot(...free);
  const rest = Math.sqrt(Math.max(0, length * length - snapped()));
  const scaled = free.map((f) => (freeLength > 0 ? (f * rest) / freeLength : rest / Math.sqrt(free.length)));
  return compose(frame, [...whole.map((m, a) => m * units[a]!), ...scaled]);
}

/**
 * With three periodic axes: a lattice vector with low <= |K| < high near `direction`; the length is drawn evenly in its
 * logarithm. Directions are varied until one fits.
 *
 * @param start  number of vectors refused before: the more, the further from `direction` is sought
 *
 * @throws InputError when the shell holds no lattice vector
 */
export function snapInside(
  frame: Frame,
  direction: Vector,
  low: number,
  high: number,
  random: () => number,
  start = 0,
): Vector {
  const d = frame.axes.map((axis) => dot(axis, direction));
  for (let attempt = start; attempt < 2000; attempt++) {
    const length = low * (high / low) ** random();
    // Away from the first few tries the direction spreads: low shells hold few vectors.
    const spread = Math.min(1.5, 0.02 * attempt);
    const whole = frame.units.map((u, a) => Math.round((length * (d[a]! + spread * (random() - 0.5))) / u));
    const c = whole.map((m, a) => m * frame.units[a]!);
    const size = Math.hypot(...c);
    if (size >= low && size < high && size > 0) return compose(frame, c);
  }
  throw new InputError({
    place: 'fluctuations.shells',
    cause: `the periodic box holds no wave between ${low.toPrecision(4)} and ${high.toPrecision(4)} 1/m`,
    remedy: 'give fewer shells',
  });
}
