import {
  blockPoints,
  type ModeKernel,
  type ModeTable,
  phaseNumbers,
  rows,
  shaped,
  vectorNumbers,
} from './mode-block.js';

/** Products of a vector as the tables hold them, against a symmetric tensor in rows `first` ... `first + 5`. */
function form(block: readonly Float64Array[], first: number, i: number, v: Float32Array, at: number): number {
  let sum = 0;
  for (let c = 0; c < 6; c++) sum += v[at + c]! * block[first + c]![i]!;
  return sum;
}

interface ModeFactor {
  /** Cut-off times polarisation. */
  factor: number;
  /** Gradient of `factor`. */
  gradient: [number, number, number];
}

/**
 * Cut-off g = v^2 (3 - 2 v), v = clamp((1 - t2) taper, 0, 1), times exp(a . L a), with its gradient.
 */
function modeFactor(b: readonly Float64Array[], i: number, v: Float32Array, at: number, flags: number, taper: number) {
  const out: ModeFactor = { factor: 1, gradient: [0, 0, 0] };
  let polar = 1;
  let cut = 1;
  let slope = 0;
  if (flags & shaped.cut) {
    const t2 = form(b, rows.width, i, v, at + 6);
    const s = Math.min(1, Math.max(0, (1 - t2) * taper));
    cut = s * s * (3 - 2 * s);
    slope = -6 * s * (1 - s) * taper;
  }
  if (flags & shaped.stress) polar = Math.exp(form(b, rows.polarisation, i, v, at + 12));
  out.factor = cut * polar;
  for (let j = 0; j < 3; j++) {
    if (flags & shaped.stress) out.gradient[j] = out.factor * form(b, rows.polarisationGradient + 6 * j, i, v, at + 12);
    if (flags & shaped.cut) out.gradient[j]! += slope * polar * form(b, rows.widthGradient + 6 * j, i, v, at + 6);
  }
  return out;
}

const cross = (p: readonly number[], q: readonly number[]): [number, number, number] => [
  p[1]! * q[2]! - p[2]! * q[1]!,
  p[2]! * q[0]! - p[0]! * q[2]!,
  p[0]! * q[1]! - p[1]! * q[0]!,
];

/** The mode kernels in plain TypeScript and 64-bit numbers: what the WebAssembly kernel is tested against. */
export function openPlainKernel(table: ModeTable): ModeKernel {
  const x = new Float64Array(blockPoints);
  const y = new Float64Array(blockPoints);
  const z = new Float64Array(blockPoints);
  const b = Array.from({ length: rows.count }, () => new Float64Array(blockPoints));
  const { phases, vectors } = table;

  const shapedShell = (points: number, firstMode: number, modes: number, flags: number, taper: number): void => {
    const withSlopes = (flags & shaped.slopes) !== 0;
    for (let i = 0; i < points; i++) {
      const w = b[rows.weight]![i]!;
      for (let n = firstMode; n < firstMode + modes; n++) {
        const q = n * phaseNumbers;
        const m = n * vectorNumbers;
        const turns = x[i]! * phases[q]! + y[i]! * phases[q + 1]! + z[i]! * phases[q + 2]! + phases[q + 3]!;
        const angle = 2 * Math.PI * (turns - Math.round(turns));
        const { factor, gradient } = modeFactor(b, i, vectors, m, flags, taper);
        const potential = [vectors[m + 3]!, vectors[m + 4]!, vectors[m + 5]!];
        const slope = [0, 1, 2].map(
          (j) => b[rows.weightGradient + j]![i]! * factor + (withSlopes ? w * gradient[j]! : 0),
        );
        const turned = cross(slope, potential);
        for (let j = 0; j < 3; j++) {
          b[rows.potential + j]![i]! += w * factor * potential[j]! * Math.cos(angle);
          b[rows.velocity + j]![i]! += w * factor * vectors[m + j]! * Math.sin(angle) + turned[j]! * Math.cos(angle);
        }
      }
    }
  };

  const moments = (
    points: number,
    firstMode: number,
    modes: number,
    flags: number,
    taper: number,
    ratio: number,
  ): void => {
    for (let i = 0; i < points; i++) {
      const w = b[rows.weight]![i]!;
      for (let n = firstMode; n < firstMode + modes; n++) {
        const m = n * vectorNumbers;
        const a = [vectors[m]!, vectors[m + 1]!, vectors[m + 2]!];
        const a2 = a[0]! * a[0]! + a[1]! * a[1]! + a[2]! * a[2]!;
        const { factor } = modeFactor(b, i, vectors, m, flags, taper);
        const polar = modeFactor(b, i, vectors, m, flags & shaped.stress, taper).factor;
        let carried = 1;
        if (flags & shaped.cut) {
          const s = Math.min(1, Math.max(0, (1 - ratio * form(b, rows.width, i, vectors, m + 6)) * taper + 0.5));
          carried = s * s * (3 - 2 * s);
        }
        const e = w * factor * factor;
        b[rows.moments]![i]! += e * a2;
        b[rows.moments + 1]![i]! += w * polar * polar * carried * a2;
        if (flags & shaped.stress) {
          b[rows.moments + 2]![i]! += e * a[0]! * a[0]!;
          b[rows.moments + 3]![i]! += e * a[0]! * a[1]!;
          b[rows.moments + 4]![i]! += e * a[0]! * a[2]!;
          b[rows.moments + 5]![i]! += e * a[1]! * a[1]!;
          b[rows.moments + 6]![i]! += e * a[1]! * a[2]!;
          b[rows.moments + 7]![i]! += e * a[2]! * a[2]!;
        }
      }
    }
  };

  const expected = (points: number, firstMode: number, modes: number, flags: number, taper: number): void => {
    const at = rows.expected;
    for (let i = 0; i < points; i++) {
      const w0 = b[rows.weight]![i]!;
      for (let n = firstMode; n < firstMode + modes; n++) {
        const m = n * vectorNumbers;
        const { factor, gradient } = modeFactor(b, i, vectors, m, flags, taper);
        const p = [vectors[m + 3]!, vectors[m + 4]!, vectors[m + 5]!];
        const w = w0 * factor;
        const slope = [0, 1, 2].map((j) => b[rows.weightGradient + j]![i]! * factor + w0 * gradient[j]!);
        const p2 = p[0]! * p[0]! + p[1]! * p[1]! + p[2]! * p[2]!;
        const a2 = vectors[m]! ** 2 + vectors[m + 1]! ** 2 + vectors[m + 2]! ** 2;
        const turned = cross(slope, p);
        const along = slope[0]! * p[0]! + slope[1]! * p[1]! + slope[2]! * p[2]!;
        b[at]![i]! += 0.25 * (w * w * a2 + turned[0] ** 2 + turned[1] ** 2 + turned[2] ** 2);
        let component = at + 4;
        for (let j = 0; j < 3; j++) {
          b[at + 1 + j]![i]! += 0.5 * w * (slope[j]! * p2 - p[j]! * along);
          for (let l = j; l < 3; l++) {
            b[component++]![i]! += 0.25 * w * w * ((j === l ? p2 : 0) - p[j]! * p[l]!);
          }
        }
      }
    }
  };

  return {
    x,
    y,
    z,
    rows: b,
    clear: (first, count) => {
      for (let row = first; row < first + count; row++) b[row]!.fill(0);
    },
    plainShell: (points, first, modes) => shapedShell(points, first, modes, 0, 1),
    shapedShell,
    moments,
    expected,
  };
}
