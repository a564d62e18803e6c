import { type FaceBuffer, facePyramid, reverseFace } from './cell-faces.js';

let parent = new Int32Array(64);
let parity = new Uint8Array(64);
let volume = new Float64Array(64);
let table = new Int32Array(1024);
let edgeLow = new Int32Array(512);
let edgeHigh = new Int32Array(512);
let edgeFace = new Int32Array(512);
let edgeSide = new Uint8Array(512);

/** Root of a face; `found` is the parity between the face and the root. */
let found = 0;
function rootOf(face: number): number {
  let f = face;
  let p = 0;
  while (parent[f] !== f) {
    p ^= parity[f]!;
    f = parent[f]!;
  }
  found = p;
  return f;
}

function reserve(faces: number, edges: number): void {
  if (parent.length < faces) {
    parent = new Int32Array(2 * faces);
    parity = new Uint8Array(2 * faces);
    volume = new Float64Array(2 * faces);
  }
  if (edgeLow.length < edges) {
    edgeLow = new Int32Array(2 * edges);
    edgeHigh = new Int32Array(2 * edges);
    edgeFace = new Int32Array(2 * edges);
    edgeSide = new Uint8Array(2 * edges);
  }
  let size = 64;
  while (size < 2 * edges) size *= 2;
  if (table.length < size || table.length > 8 * size) table = new Int32Array(size);
  table.fill(-1);
}

/**
 * Turns the faces of a polyhedron so that all area vectors point outwards, whatever way they were written. Two faces that
 * share an edge must run along it in opposite directions; that fixes all faces relative to each other (also in cells that
 * are not convex), and the sign of the volume fixes the whole.
 */
export function orientPolyhedron(faces: FaceBuffer, xyz: Float64Array): void {
  const { starts, points, count } = faces;
  reserve(count, starts[count]!);
  for (let f = 0; f < count; f++) {
    parent[f] = f;
    parity[f] = 0;
    volume[f] = 0;
  }
  const mask = table.length - 1;
  let edges = 0;
  for (let f = 0; f < count; f++) {
    let a = points[starts[f + 1]! - 1]!;
    for (let i = starts[f]!; i < starts[f + 1]!; i++) {
      const b = points[i]!;
      const low = Math.min(a, b);
      const high = Math.max(a, b);
      const side = a < b ? 0 : 1;
      let h = (Math.imul(low, 0x9e3779b1) ^ Math.imul(high, 0x85ebca6b)) >>> 0;
      h = (h ^ (h >>> 15)) & mask;
      let e = table[h]!;
      while (e >= 0 && (edgeLow[e] !== low || edgeHigh[e] !== high)) {
        h = (h + 1) & mask;
        e = table[h]!;
      }
      if (e < 0) {
        table[h] = edges;
        edgeLow[edges] = low;
        edgeHigh[edges] = high;
        edgeFace[edges] = f;
        edgeSide[edges++] = side;
      } else {
        const r = rootOf(edgeFace[e]!);
        const pr = found;
        const s = rootOf(f);
        const ps = found;
        if (r !== s) {
          parent[s] = r;
          // Same direction along the edge: one of the two has to turn.
          parity[s] = pr ^ ps ^ (edgeSide[e] === side ? 1 : 0);
        }
      }
      a = b;
    }
  }
  let x = 0;
  let y = 0;
  let z = 0;
  const total = starts[count]!;
  for (let i = 0; i < total; i++) {
    const p = 3 * points[i]!;
    x += xyz[p]!;
    y += xyz[p + 1]!;
    z += xyz[p + 2]!;
  }
  x /= total;
  y /= total;
  z /= total;
  for (let f = 0; f < count; f++) {
    const v = facePyramid(faces, f, xyz, x, y, z);
    const r = rootOf(f);
    volume[r] = volume[r]! + (found === 1 ? -v : v);
  }
  for (let f = 0; f < count; f++) {
    const r = rootOf(f);
    if ((found === 1) !== volume[r]! < 0) reverseFace(faces, f);
  }
}
