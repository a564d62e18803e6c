import { sharedFloat64, sharedInt32 } from '../basis/fields.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from './cell-mesh.js';

/** What the gradient needs of a mesh; plain data on shared arrays. */
export interface GradientOperator {
  readonly cellCount: number;
  readonly innerFaceCount: number;
  readonly owner: Int32Array;
  readonly neighbour: Int32Array;
  readonly cellFaceOffsets: Int32Array;
  readonly cellFaces: Int32Array;
  /** 3 x cells, m. */
  readonly centroids: Float64Array;
  /** Boundary faces: cell across the period, -1 elsewhere. Empty without periods. */
  readonly mates: Int32Array;
  /** Boundary faces: start of the mate's translation in `shifts`. */
  readonly mateShifts: Int32Array;
  /** 3 x 2 periods: the translation that brings the mate's centroid across the face. */
  readonly shifts: Float64Array;
}

export function createGradient(mesh: CellMesh, geometry: MeshGeometry, periodic?: PeriodicPairs): GradientOperator {
  const boundary = periodic === undefined ? 0 : mesh.faceCount - mesh.innerFaceCount;
  const mates = sharedInt32(boundary).fill(-1);
  const mateShifts = sharedInt32(boundary);
  const shifts = sharedFloat64(6 * (periodic?.periods.length ?? 0));
  periodic?.periods.forEach((p, i) => {
    for (let a = 0; a < 3; a++) {
      shifts[6 * i + a] = -p[a]!;
      shifts[6 * i + 3 + a] = p[a]!;
    }
  });
  if (periodic !== undefined)
    for (let i = 0; i < periodic.lowFaces.length; i++) {
      const low = periodic.lowFaces[i]! - mesh.innerFaceCount;
      const high = periodic.highFaces[i]! - mesh.innerFaceCount;
      mates[low] = mesh.owner[periodic.highFaces[i]!]!;
      mates[high] = mesh.owner[periodic.lowFaces[i]!]!;
      mateShifts[low] = 6 * periodic.periodOf[i]!;
      mateShifts[high] = 6 * periodic.periodOf[i]! + 3;
    }
  return {
    cellCount: mesh.cellCount,
    innerFaceCount: mesh.innerFaceCount,
    owner: mesh.owner,
    neighbour: mesh.neighbour,
    cellFaceOffsets: mesh.cellFaceOffsets,
    cellFaces: mesh.cellFaces,
    centroids: geometry.cellCentroids,
    mates,
    mateShifts,
    shifts,
  };
}

let others = new Int32Array(256);
let offsets = new Float64Array(768);
let found = 0;

function put(cell: number, x: number, y: number, z: number): void {
  if (found === others.length) {
    const moreOthers = new Int32Array(2 * found);
    moreOthers.set(others);
    others = moreOthers;
    const moreOffsets = new Float64Array(6 * found);
    moreOffsets.set(offsets);
    offsets = moreOffsets;
  }
  others[found] = cell;
  offsets[3 * found] = x;
  offsets[3 * found + 1] = y;
  offsets[3 * found + 2] = z;
  found++;
}

/** Puts the cells beside `cell`, which stands at the translation (x, y, z), with their translations. */
function putNeighbours(op: GradientOperator, cell: number, x: number, y: number, z: number): void {
  const { cellFaceOffsets, cellFaces, innerFaceCount, owner, neighbour, mates } = op;
  const end = cellFaceOffsets[cell + 1]!;
  for (let j = cellFaceOffsets[cell]!; j < end; j++) {
    const face = cellFaces[j]!;
    if (face < innerFaceCount) put(owner[face] === cell ? neighbour[face]! : owner[face]!, x, y, z);
    else if (mates.length > 0) {
      const b = face - innerFaceCount;
      const mate = mates[b]!;
      if (mate >= 0) {
        const s = op.mateShifts[b]!;
        put(mate, x + op.shifts[s]!, y + op.shifts[s + 1]!, z + op.shifts[s + 2]!);
      }
    }
  }
}

const moment = new Float64Array(6);
const inverse = new Float64Array(6);

/** Turns translations from `from` on into distance vectors and adds d d / d.d to the moment. */
function addMoments(op: GradientOperator, cell: number, from: number): void {
  const c = op.centroids;
  const x = c[3 * cell]!;
  const y = c[3 * cell + 1]!;
  const z = c[3 * cell + 2]!;
  const nearest = from === 0 ? 0 : 1e-12 * (offsets[0]! ** 2 + offsets[1]! ** 2 + offsets[2]! ** 2);
  for (let i = from; i < found; i++) {
    const o = 3 * others[i]!;
    let dx = c[o]! + offsets[3 * i]! - x;
    let dy = c[o + 1]! + offsets[3 * i + 1]! - y;
    let dz = c[o + 2]! + offsets[3 * i + 2]! - z;
    // A wider ring comes back to the cell itself, but for rounding.
    if (others[i] === cell && dx * dx + dy * dy + dz * dz < nearest) dx = dy = dz = 0;
    offsets[3 * i] = dx;
    offsets[3 * i + 1] = dy;
    offsets[3 * i + 2] = dz;
    const d2 = dx * dx + dy * dy + dz * dz;
    const w = d2 > 0 ? 1 / d2 : 0;
    moment[0] = moment[0]! + w * dx * dx;
    moment[1] = moment[1]! + w * dx * dy;
    moment[2] = moment[2]! + w * dx * dz;
    moment[3] = moment[3]! + w * dy * dy;
    moment[4] = moment[4]! + w * dy * dz;
    moment[5] = moment[5]! + w * dz * dz;
  }
}

/** Inverse of the symmetric moment; false when it is nearly singular (1/27 is a perfect stencil). */
function invert(): boolean {
  const xx = moment[0]!;
  const xy = moment[1]!;
  const xz = moment[2]!;
  const yy = moment[3]!;
  const yz = moment[4]!;
  const zz = moment[5]!;
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

/** Pseudo-inverse of the moment by Jacobi rotations: no gradient along directions without neighbours. */
function pseudoInvert(): void {
  const a = [
    [moment[0]!, moment[1]!, moment[2]!],
    [moment[1]!, moment[3]!, moment[4]!],
    [moment[2]!, moment[4]!, moment[5]!],
  ];
  const v = [
    [1, 0, 0],
    [0, 1, 0],
    [0, 0, 1],
  ];
  for (let sweep = 0; sweep < 30; sweep++) {
    if (Math.abs(a[0]![1]!) + Math.abs(a[0]![2]!) + Math.abs(a[1]![2]!) === 0) break;
    for (const [p, q] of [
      [0, 1],
      [0, 2],
      [1, 2],
    ] as const) {
      const apq = a[p]![q]!;
      if (apq === 0) continue;
      const theta = (a[q]![q]! - a[p]![p]!) / (2 * apq);
      const t = (theta >= 0 ? 1 : -1) / (Math.abs(theta) + Math.hypot(theta, 1));
      const c = 1 / Math.hypot(t, 1);
      const s = t * c;
      for (let k = 0; k < 3; k++) {
        const kp = a[k]![p]!;
        const kq = a[k]![q]!;
        a[k]![p] = c * kp - s * kq;
        a[k]![q] = s * kp + c * kq;
      }
      for (let k = 0; k < 3; k++) {
        const pk = a[p]![k]!;
        const qk = a[q]![k]!;
        a[p]![k] = c * pk - s * qk;
        a[q]![k] = s * pk + c * qk;
        const vp = v[k]![p]!;
        const vq = v[k]![q]!;
        v[k]![p] = c * vp - s * vq;
        v[k]![q] = s * vp + c * vq;
      }
    }
  }
  const trace = a[0]![0]! + a[1]![1]! + a[2]![2]!;
  inverse.fill(0);
  for (let e = 0; e < 3; e++) {
    const lambda = a[e]![e]!;
    if (!(lambda > 1e-6 * trace)) continue;
    let h = 0;
    for (let i = 0; i < 3; i++)
      for (let j = i; j < 3; j++, h++) inverse[h] = inverse[h]! + (v[i]![e]! * v[j]![e]!) / lambda;
  }
}

/** Adds the neighbours of the outermost cells of the stencil, twice if need be, until it fixes the gradient. */
function widenStencil(op: GradientOperator, cell: number): void {
  const c = op.centroids;
  let from = 0;
  for (let ring = 2; ring <= 3; ring++) {
    const end = found;
    for (let i = from; i < end; i++) {
      const o = 3 * others[i]!;
      const x = c[3 * cell]! + offsets[3 * i]! - c[o]!;
      const y = c[3 * cell + 1]! + offsets[3 * i + 1]! - c[o + 1]!;
      const z = c[3 * cell + 2]! + offsets[3 * i + 2]! - c[o + 2]!;
      putNeighbours(op, others[i]!, x, y, z);
    }
    addMoments(op, cell, end);
    from = end;
    if (invert()) return;
  }
  pseudoInvert();
}

/**
 * Gradients in cells [begin, end): least squares over the cells across the faces, weighted with the inverse square of the
 * distance, exact for linear fields. Where these cells do not fix the gradient (corners of tetrahedral meshes) their own
 * neighbours join in, up to the third ring; where these do not either (meshes one cell thick) it is zero along the
 * missing direction.
 *
 * @param values  components x cells, interleaved
 * @param out     3 x components x cells: d(component c)/d(x, y, z) of a cell at (cell * components + c) * 3
 */
export function gradientRange(
  op: GradientOperator,
  values: Float64Array,
  components: number,
  begin: number,
  end: number,
  out: Float64Array,
): void {
  for (let cell = begin; cell < end; cell++) {
    found = 0;
    moment.fill(0);
    putNeighbours(op, cell, 0, 0, 0);
    addMoments(op, cell, 0);
    if (!invert()) widenStencil(op, cell);
    const xx = inverse[0]!;
    const xy = inverse[1]!;
    const xz = inverse[2]!;
    const yy = inverse[3]!;
    const yz = inverse[4]!;
    const zz = inverse[5]!;
    for (let k = 0; k < components; k++) {
      const own = values[cell * components + k]!;
      let sx = 0;
      let sy = 0;
      let sz = 0;
      for (let i = 0; i < found; i++) {
        const dx = offsets[3 * i]!;
        const dy = offsets[3 * i + 1]!;
        const dz = offsets[3 * i + 2]!;
        const d2 = dx * dx + dy * dy + dz * dz;
        const w = d2 > 0 ? (values[others[i]! * components + k]! - own) / d2 : 0;
        sx += w * dx;
        sy += w * dy;
        sz += w * dz;
      }
      const o = 3 * (cell * components + k);
      out[o] = xx * sx + xy * sy + xz * sz;
      out[o + 1] = xy * sx + yy * sy + yz * sz;
      out[o + 2] = xz * sx + yz * sy + zz * sz;
    }
  }
}

/** Gradients in all cells; see `gradientRange`. */
export function applyGradient(
  op: GradientOperator,
  values: Float64Array,
  components: number,
  out: Float64Array = sharedFloat64(3 * components * op.cellCount),
): Float64Array {
  gradientRange(op, values, components, 0, op.cellCount, out);
  return out;
}
