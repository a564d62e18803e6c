import type { GradientOperator } from '../mesh/gradient.js';
import { eigenSymmetric } from './symmetric.js';

/**
 * Gradient of a cell as coefficients of its neighbours' differences: grad f = sum_j c_j (f_j - f_cell). The same least
 * squares as mesh/gradient.ts, in the form that a solver with the transposed operator and blocks of cells need.
 */
export interface Stencil {
  count: number;
  /** Neighbouring cells. */
  others: Int32Array;
  /** 3 x neighbours, 1/m. */
  coefficients: Float64Array;
}

export function createStencil(): Stencil {
  return { count: 0, others: new Int32Array(64), coefficients: new Float64Array(192) };
}

function append(s: Stencil, cell: number, x: number, y: number, z: number): void {
  if (s.count === s.others.length) {
    const others = new Int32Array(2 * s.count);
    others.set(s.others);
    s.others = others;
    const coefficients = new Float64Array(6 * s.count);
    coefficients.set(s.coefficients);
    s.coefficients = coefficients;
  }
  s.others[s.count] = cell;
  s.coefficients[3 * s.count] = x;
  s.coefficients[3 * s.count + 1] = y;
  s.coefficients[3 * s.count + 2] = z;
  s.count++;
}

/** Adds the cells across the faces of `cell`, which itself stands at the distance (x, y, z) from the stencil's cell. */
function addRing(op: GradientOperator, s: Stencil, cell: number, x: number, y: number, z: number): void {
  const c = op.centroids;
  for (let j = op.cellFaceOffsets[cell]!; j < op.cellFaceOffsets[cell + 1]!; j++) {
    const face = op.cellFaces[j]!;
    let other = -1;
    let sx = 0;
    let sy = 0;
    let sz = 0;
    if (face < op.innerFaceCount) {
      other = op.owner[face] === cell ? op.neighbour[face]! : op.owner[face]!;
    } else if (op.mates.length > 0) {
      other = op.mates[face - op.innerFaceCount]!;
      const shift = op.mateShifts[face - op.innerFaceCount]!;
      if (other >= 0) {
        sx = op.shifts[shift]!;
        sy = op.shifts[shift + 1]!;
        sz = op.shifts[shift + 2]!;
      }
    }
    if (other < 0) continue;
    append(
      s,
      other,
      x + sx + c[3 * other]! - c[3 * cell]!,
      y + sy + c[3 * other + 1]! - c[3 * cell + 1]!,
      z + sz + c[3 * other + 2]! - c[3 * cell + 2]!,
    );
  }
}

const moment = new Float64Array(6);
const inverse = new Float64Array(6);
const values = new Float64Array(3);
const vectors = new Float64Array(9);

function gatherMoment(s: Stencil): void {
  moment.fill(0);
  for (let i = 0; i < s.count; i++) {
    const x = s.coefficients[3 * i]!;
    const y = s.coefficients[3 * i + 1]!;
    const z = s.coefficients[3 * i + 2]!;
    const d2 = x * x + y * y + z * z;
    if (!(d2 > 0)) continue;
    moment[0]! += (x * x) / d2;
    moment[1]! += (x * y) / d2;
    moment[2]! += (x * z) / d2;
    moment[3]! += (y * y) / d2;
    moment[4]! += (y * z) / d2;
    moment[5]! += (z * z) / d2;
  }
}

function invert(): boolean {
  const [xx, xy, xz, yy, yz, zz] = moment as unknown as [number, number, number, number, number, number];
  const cxx = yy * zz - yz * yz;
  const cxy = xz * yz - xy * zz;
  const cxz = xy * yz - xz * yy;
  const det = xx * cxx + xy * cxy + xz * cxz;
  const trace = xx + yy + zz;
  if (!(det > 1e-4 * trace * trace * trace)) return false;
  inverse[0] = cxx / det;
  inverse[1] = cxy / det;
  inverse[2] = cxz / det;
  inverse[3] = (xx * zz - xz * xz) / det;
  inverse[4] = (xy * xz - xx * yz) / det;
  inverse[5] = (xx * yy - xy * xy) / det;
  return true;
}

/** No gradient along directions without neighbours (meshes one cell thick). */
function pseudoInvert(): void {
  eigenSymmetric(moment, 0, values, vectors);
  const trace = values[0]! + values[1]! + values[2]!;
  inverse.fill(0);
  for (let e = 0; e < 3; e++) {
    if (!(values[e]! > 1e-6 * trace)) continue;
    let c = 0;
    for (let i = 0; i < 3; i++)
      for (let j = i; j < 3; j++) inverse[c++]! += (vectors[3 * e + i]! * vectors[3 * e + j]!) / values[e]!;
  }
}

/** Fills `s` with the stencil of `cell`. */
export function cellStencil(op: GradientOperator, cell: number, s: Stencil): void {
  s.count = 0;
  addRing(op, s, cell, 0, 0, 0);
  gatherMoment(s);
  if (!invert()) {
    const ring = s.count;
    for (let i = 0; i < ring; i++) {
      addRing(op, s, s.others[i]!, s.coefficients[3 * i]!, s.coefficients[3 * i + 1]!, s.coefficients[3 * i + 2]!);
    }
    gatherMoment(s);
    if (!invert()) pseudoInvert();
  }
  for (let i = 0; i < s.count; i++) {
    const x = s.coefficients[3 * i]!;
    const y = s.coefficients[3 * i + 1]!;
    const z = s.coefficients[3 * i + 2]!;
    const d2 = x * x + y * y + z * z;
    const w = d2 > 0 ? 1 / d2 : 0;
    s.coefficients[3 * i] = w * (inverse[0]! * x + inverse[1]! * y + inverse[2]! * z);
    s.coefficients[3 * i + 1] = w * (inverse[1]! * x + inverse[3]! * y + inverse[4]! * z);
    s.coefficients[3 * i + 2] = w * (inverse[2]! * x + inverse[4]! * y + inverse[5]! * z);
  }
}
