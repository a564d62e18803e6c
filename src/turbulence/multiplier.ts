import { type Basis, basisAt, createBasis, type MultiplierField } from './multiplier-field.js';
import { type SparseRows, solveNormal } from './normal-equations.js';

/**
 * Sums over the boxes in which a realisation is measured: energy of curl(c A0) over a box is
 * c^2 (P + Q . grad v + grad v . T grad v) with v = ln c and both taken at the box's middle.
 */
export interface EnergySums {
  readonly boxes: number;
  /** 3 x boxes, volume-weighted middle. */
  readonly middle: Float64Array;
  /** Boxes: volume integral of |u0|^2 / 2. */
  readonly p: Float64Array;
  /** 3 x boxes: of A0 x u0. */
  readonly q: Float64Array;
  /** 6 x boxes: of (|A0|^2 I - A0 A0) / 2. */
  readonly t: Float64Array;
  /** Boxes: of the wanted energy. */
  readonly wanted: Float64Array;
}

export interface Calibration {
  readonly field: MultiplierField;
  /** Windows in which the energy was set. */
  readonly windows: number;
  readonly iterations: number;
  /** Largest and rms |k_found / k - 1| over the windows, weighted with their wanted energy (rms). */
  readonly before: { readonly rms: number; readonly largest: number };
  readonly after: { readonly rms: number; readonly largest: number };
}

/**
 * Weight of |grad v|^2 (made dimensionless by the grid) against squared residuals. Splines have more unknowns than there
 * are windows: the penalty decides what the windows leave open.
 */
const penalties = { constant: 0, layers: 1e-6, windows: 1e-6 } as const;
/** Ridge of the steps: splines at the rim of the mesh are hardly seen by any window. */
const ridges = { constant: 1e-12, layers: 1e-9, windows: 1e-3 } as const;
const steps = 30;
/** rms residual at which the fit is good enough. */
const fine = 1e-4;

interface Assembled {
  readonly residual: Float64Array;
  readonly rows: SparseRows;
  readonly objective: number;
}

/**
 * Gauss-Newton on the residuals ln(k_found / k) of the windows, with a weak penalty on grad v.
 *
 * @param field    its `values` are the start and are replaced
 * @param windowOf  box -> window over which the energy is averaged; absent: every box is one
 */
export function fitMultiplier(field: MultiplierField, sums: EnergySums, windowOf?: Int32Array): Calibration {
  const bases: Basis[] = [];
  for (let b = 0; b < sums.boxes; b++) {
    const basis = createBasis();
    basisAt(field, sums.middle[3 * b]!, sums.middle[3 * b + 1]!, sums.middle[3 * b + 2]!, basis);
    bases.push(basis);
  }
  const windows = windowOf === undefined ? sums.boxes : windowOf.reduce((m, w) => Math.max(m, w), -1) + 1;
  const wanted = new Float64Array(windows);
  const total = sums.wanted.reduce((a, b) => a + b, 0);
  for (let b = 0; b < sums.boxes; b++) {
    wanted[windowOf?.[b] ?? b]! += sums.wanted[b]!;
  }
  // Windows that hold next to nothing (corners of the grid outside the mesh) have little or no say; layers all have theirs.
  const mean = total / windows;
  const heard = wanted.map((w) =>
    w > 1e-9 * mean ? (windowOf === undefined ? 1 : Math.min(1, (w / (0.3 * mean)) ** 0.5)) : 0,
  );
  const length2 = gridLength2(field);
  const penalty = penalties[field.kind];

  const assemble = (values: Float64Array, withRows: boolean): Assembled => {
    const found = new Float64Array(windows);
    const lists: Map<number, number>[] = withRows ? Array.from({ length: windows }, () => new Map()) : [];
    for (let b = 0; b < sums.boxes; b++) {
      const basis = bases[b]!;
      let v = 0;
      let gx = 0;
      let gy = 0;
      let gz = 0;
      for (let i = 0; i < basis.count; i++) {
        const y = values[basis.index[i]!]!;
        v += basis.value[i]! * y;
        gx += basis.gradient[3 * i]! * y;
        gy += basis.gradient[3 * i + 1]! * y;
        gz += basis.gradient[3 * i + 2]! * y;
      }
      const t = 6 * b;
      const tx = sums.t[t]! * gx + sums.t[t + 1]! * gy + sums.t[t + 2]! * gz;
      const ty = sums.t[t + 1]! * gx + sums.t[t + 3]! * gy + sums.t[t + 4]! * gz;
      const tz = sums.t[t + 2]! * gx + sums.t[t + 4]! * gy + sums.t[t + 5]! * gz;
      const c2 = Math.exp(2 * v);
      const qx = sums.q[3 * b]!;
      const qy = sums.q[3 * b + 1]!;
      const qz = sums.q[3 * b + 2]!;
      const energy = c2 * (sums.p[b]! + qx * gx + qy * gy + qz * gz + tx * gx + ty * gy + tz * gz);
      const dx = c2 * (qx + 2 * tx);
      const dy = c2 * (qy + 2 * ty);
      const dz = c2 * (qz + 2 * tz);
      const window = windowOf?.[b] ?? b;
      found[window]! += energy;
      if (!withRows) continue;
      const list = lists[window]!;
      for (let i = 0; i < basis.count; i++) {
        const slope =
          2 * energy * basis.value[i]! +
          dx * basis.gradient[3 * i]! +
          dy * basis.gradient[3 * i + 1]! +
          dz * basis.gradient[3 * i + 2]!;
        const column = basis.index[i]!;
        list.set(column, (list.get(column) ?? 0) + slope);
      }
    }
    const residual = new Float64Array(windows);
    let objective = 0;
    for (let w = 0; w < windows; w++) {
      if (heard[w] === 0) continue;
      residual[w] = found[w]! > 0 ? Math.log(found[w]! / wanted[w]!) : 0;
      objective += (heard[w]! * residual[w]!) ** 2;
    }
    for (let b = 0; b < sums.boxes; b++) {
      const basis = bases[b]!;
      for (let a = 0; a < 3; a++) {
        let g = 0;
        for (let i = 0; i < basis.count; i++) g += basis.gradient[3 * i + a]! * values[basis.index[i]!]!;
        objective += penalty * length2 * g * g;
      }
    }
    const offsets = new Int32Array(windows + 1);
    if (!withRows)
      return { residual, objective, rows: { offsets, columns: new Int32Array(0), values: new Float64Array(0) } };
    for (let w = 0; w < windows; w++) offsets[w + 1] = offsets[w]! + (heard[w] === 0 ? 0 : lists[w]!.size);
    const columns = new Int32Array(offsets[windows]!);
    const slopes = new Float64Array(offsets[windows]!);
    for (let w = 0; w < windows; w++) {
      if (heard[w] === 0) continue;
      let at = offsets[w]!;
      for (const [column, slope] of lists[w]!) {
        columns[at] = column;
        slopes[at] = found[w]! > 0 ? (heard[w]! * slope) / found[w]! : 0;
        at++;
      }
    }
    return { residual, objective, rows: { offsets, columns, values: slopes } };
  };

  const measure = (residual: Float64Array): { rms: number; largest: number } => {
    let square = 0;
    let weight = 0;
    let largest = 0;
    for (let w = 0; w < windows; w++) {
      if (heard[w] === 0) continue;
      const error = Math.abs(Math.exp(residual[w]!) - 1);
      square += wanted[w]! * error * error;
      weight += wanted[w]!;
      largest = Math.max(largest, error);
    }
    return { rms: weight > 0 ? Math.sqrt(square / weight) : 0, largest };
  };

  let values = field.values.slice();
  let state = assemble(values, true);
  const before = measure(state.residual);
  let iterations = 0;
  for (; iterations < steps && before.largest > 1e-12; iterations++) {
    if (state.objective < fine * fine * windows) break;
    const step = solveNormal(
      state.rows,
      state.residual.map((r, w) => heard[w]! * r),
      bases,
      penalty * length2,
      values,
      ridges[field.kind],
    );
    let length = 1;
    let trial = values;
    let next = state.objective;
    // Steps longer than a factor e^2 in c leave the range in which the quadratic model holds.
    const longest = step.reduce((m, s) => Math.max(m, Math.abs(s)), 0);
    if (longest > 2) length = 2 / longest;
    for (let halving = 0; halving < 12; halving++) {
      trial = values.map((v, i) => v + length * step[i]!);
      next = assemble(trial, false).objective;
      if (next < state.objective) break;
      length *= 0.5;
    }
    if (!(next < state.objective)) break;
    const gain = state.objective - next;
    values = Float64Array.from(trial);
    state = assemble(values, true);
    if (gain < 1e-10 + 1e-5 * state.objective) break;
  }
  return {
    field: { ...field, values },
    windows: heard.reduce((a, h) => a + (h > 0 ? 1 : 0), 0),
    iterations,
    before,
    after: measure(state.residual),
  };
}

/** Square of a typical spacing of the unknowns, so that the penalty has no dimension. */
function gridLength2(field: MultiplierField): number {
  if (field.kind === 'windows') return Math.min(...field.spacing) ** 2;
  if (field.kind === 'layers' && field.knots.length > 1) {
    return ((field.knots.at(-1)! - field.knots[0]!) / (field.knots.length - 1)) ** 2;
  }
  return 1;
}
