import type { FaceBuffer } from './cell-faces.js';

/**
 * Faces that still wait for their second cell, in lists by their lowest point. Two faces are the same when their lowest
 * point, its two neighbours along the rim, the number of corners, and the sums of corners and of their squares agree:
 * for triangles and quadrilaterals that is exact.
 */
export interface FaceTable {
  readonly heads: Int32Array;
  next: Int32Array;
  face: Int32Array;
  size: Int32Array;
  near: Int32Array;
  far: Int32Array;
  sum: Float64Array;
  squares: Float64Array;
  /** First slot of the list of free ones, -1 when none. */
  free: number;
  used: number;
}

export function createFaceTable(points: number): FaceTable {
  const start = 1024;
  return {
    heads: new Int32Array(points).fill(-1),
    next: new Int32Array(start),
    face: new Int32Array(start),
    size: new Int32Array(start),
    near: new Int32Array(start),
    far: new Int32Array(start),
    sum: new Float64Array(start),
    squares: new Float64Array(start),
    free: -1,
    used: 0,
  };
}

function enlarge(table: FaceTable): void {
  const length = 2 * table.next.length;
  for (const key of ['next', 'face', 'size', 'near', 'far'] as const) {
    const larger = new Int32Array(length);
    larger.set(table[key]);
    table[key] = larger;
  }
  for (const key of ['sum', 'squares'] as const) {
    const larger = new Float64Array(length);
    larger.set(table[key]);
    table[key] = larger;
  }
}

let keyLow = 0;
let keySize = 0;
let keyNear = 0;
let keyFar = 0;
let keySum = 0;
let keySquares = 0;

/** Sets the key that `find`, `take` and `put` use. */
export function setFaceKey(points: Int32Array, begin: number, end: number): void {
  let low = points[begin]!;
  let at = begin;
  let sum = 0;
  let squares = 0;
  for (let i = begin; i < end; i++) {
    const p = points[i]!;
    if (p < low) {
      low = p;
      at = i;
    }
    sum += p;
    squares += p * p;
  }
  const after = points[at + 1 < end ? at + 1 : begin]!;
  const before = points[at > begin ? at - 1 : end - 1]!;
  keyLow = low;
  keySize = end - begin;
  keyNear = Math.min(after, before);
  keyFar = Math.max(after, before);
  keySum = sum;
  keySquares = squares;
}

export function setKeyOfFace(faces: FaceBuffer, f: number): void {
  setFaceKey(faces.points, faces.starts[f]!, faces.starts[f + 1]!);
}

const matches = (t: FaceTable, s: number): boolean =>
  t.near[s] === keyNear &&
  t.far[s] === keyFar &&
  t.size[s] === keySize &&
  t.sum[s] === keySum &&
  t.squares[s] === keySquares;

/** Face with the key, or -1. */
export function findFace(table: FaceTable): number {
  for (let s = table.heads[keyLow]!; s >= 0; s = table.next[s]!) if (matches(table, s)) return table.face[s]!;
  return -1;
}

/** Face with the key, removed from the table, or -1. */
export function takeFace(table: FaceTable): number {
  let previous = -1;
  for (let s = table.heads[keyLow]!; s >= 0; previous = s, s = table.next[s]!) {
    if (!matches(table, s)) continue;
    if (previous < 0) table.heads[keyLow] = table.next[s]!;
    else table.next[previous] = table.next[s]!;
    table.next[s] = table.free;
    table.free = s;
    return table.face[s]!;
  }
  return -1;
}

/** Puts a face under the key. */
export function putFace(table: FaceTable, face: number): void {
  let s = table.free;
  if (s >= 0) table.free = table.next[s]!;
  else {
    if (table.used === table.next.length) enlarge(table);
    s = table.used++;
  }
  table.next[s] = table.heads[keyLow]!;
  table.heads[keyLow] = s;
  table.face[s] = face;
  table.size[s] = keySize;
  table.near[s] = keyNear;
  table.far[s] = keyFar;
  table.sum[s] = keySum;
  table.squares[s] = keySquares;
}

/** Renames every face in the table (free slots included, which nobody reads). */
export function renumberFaces(table: FaceTable, numbers: Int32Array): void {
  for (let s = 0; s < table.used; s++) table.face[s] = numbers[table.face[s]!]!;
}
