import { InputError } from '../basis/errors.js';
import { sharedFloat64, sharedInt32 } from '../basis/fields.js';
import { randomStream } from '../basis/random.js';
import { hilbertKeys, orderByKey } from './hilbert.js';
import { inSphere, orientation, orientationAt } from './predicates.js';

/**
 * Delaunay tetrahedralisation of a cloud. The hull is closed by tetrahedra with a vertex at infinity (`ghost`), so
 * that every face has two tetrahedra. All arrays lie on shared memory.
 */
export interface Tetrahedralisation {
  /** 3 x n, as given. */
  readonly points: Float64Array;
  /** Tetrahedra, those at infinity included. */
  readonly count: number;
  /** 4 x count point numbers; positive orientation; `ghost` for the vertex at infinity. */
  readonly vertices: Int32Array;
  /** 4 x count: the tetrahedron across the face opposite each vertex. */
  readonly neighbours: Int32Array;
  /** For every point the first point with the same coordinates (itself when there is none before it). */
  readonly firstOf: Int32Array;
  /** Number of distinct points. */
  readonly distinct: number;
}

/** Vertex at infinity. */
export const ghost = -1;

// Corners of the face opposite each vertex, in the order in which the vertex in front makes the orientation positive.
const faceA = [1, 0, 0, 0] as const;
const faceB = [2, 3, 1, 2] as const;
const faceC = [3, 2, 3, 1] as const;

/** Why a cloud has no tetrahedra. */
export type FlatCloud = 'one point' | 'on a line' | 'in a plane';

/**
 * Finds four points that span space.
 *
 * @returns their numbers, or how the cloud is flat
 */
function firstFour(points: Float64Array, order: Int32Array): readonly [number, number, number, number] | FlatCloud {
  const a = order[0] as number;
  const differs = (i: number): boolean =>
    points[3 * i] !== points[3 * a] ||
    points[3 * i + 1] !== points[3 * a + 1] ||
    points[3 * i + 2] !== points[3 * a + 2];
  const second = order.findIndex((i) => differs(i));
  if (second < 0) return 'one point';
  const b = order[second] as number;
  // Not on the line a b: the exact orientation with one of three far points differs from zero.
  const at = (i: number, c: number): number => points[3 * i + c] as number;
  const span = 1 + Math.max(...[0, 1, 2].map((c) => Math.abs(at(a, c)) + Math.abs(at(b, c))));
  const probes = [
    [at(a, 0) + span, at(a, 1), at(a, 2)],
    [at(a, 0), at(a, 1) + span, at(a, 2)],
    [at(a, 0), at(a, 1), at(a, 2) + span],
  ] as const;
  const third = order.findIndex((i) => probes.some(([x, y, z]) => orientationAt(points, a, b, i, x, y, z) !== 0));
  if (third < 0) return 'on a line';
  const c = order[third] as number;
  const fourth = order.findIndex((i) => orientation(points, a, b, c, i) !== 0);
  if (fourth < 0) return 'in a plane';
  const d = order[fourth] as number;
  return orientation(points, a, b, c, d) > 0 ? [a, b, c, d] : [b, a, c, d];
}

/**
 * Insertion order: rounds of random halving, each along the Hilbert curve.
 *
 * @see Amenta, Choi & Rote 2003, Symposium on Computational Geometry, 211 (biased randomised insertion order)
 */
function insertionOrder(points: Float64Array): Int32Array {
  const keys = hilbertKeys(points);
  const random = randomStream(1, 'insertion order');
  let rounds = 1;
  while (keys.length / 2 ** rounds > 64) rounds += 1;
  const roundOf = new Uint32Array(keys.length);
  for (let i = 0; i < keys.length; i += 1) {
    let round = rounds;
    while (round > 0 && random() < 0.5) round -= 1;
    roundOf[i] = round;
  }
  const curve = orderByKey(keys);
  const along = Uint32Array.from(curve, (number) => roundOf[number] as number);
  return orderByKey(along).map((place) => curve[place] as number);
}

interface Building {
  vertices: Int32Array;
  neighbours: Int32Array;
  stamps: Int32Array;
  capacity: number;
}

function grow(building: Building, needed: number): void {
  if (needed <= building.capacity) return;
  const capacity = Math.ceil(Math.max(needed, building.capacity * 1.5));
  const larger = (from: Int32Array, length: number): Int32Array<ArrayBuffer> => {
    const to = new Int32Array(length);
    to.set(from);
    return to;
  };
  building.vertices = larger(building.vertices, 4 * capacity);
  building.neighbours = larger(building.neighbours, 4 * capacity);
  building.stamps = larger(building.stamps, capacity);
  building.capacity = capacity;
}

/**
 * Delaunay tetrahedralisation by incremental insertion (Bowyer 1981 and Watson 1981, The Computer Journal 24:162 and
 * 24:167) with exact predicates. Points on a common sphere are handled by the strict test: a tetrahedron gives way
 * only when the new point lies strictly inside its sphere, which keeps every cavity star-shaped and every new
 * tetrahedron of positive volume. Points with the coordinates of an earlier one are mapped to it.
 *
 * @param points  3 x n, finite
 * @returns the tetrahedralisation, or how the cloud is flat
 */
export function tetrahedralise(points: Float64Array): Tetrahedralisation | FlatCloud {
  const n = points.length / 3;
  if (n === 0) throw new InputError({ cause: 'the cloud has no points' });
  const order = insertionOrder(points);
  const start = firstFour(points, order);
  if (typeof start === 'string') return start;

  const building: Building = {
    vertices: new Int32Array(0),
    neighbours: new Int32Array(0),
    stamps: new Int32Array(0),
    capacity: 0,
  };
  // Random clouds have about 6.8 tetrahedra a point; lattices 5 to 6.
  grow(building, 8 * n + 64);
  let { vertices, neighbours, stamps } = building;
  let count = 0;
  let free: Int32Array<ArrayBufferLike> = new Int32Array(1024);
  let freeCount = 0;
  const firstOf = sharedInt32(n);
  for (let i = 0; i < n; i += 1) firstOf[i] = i;

  const setTetra = (t: number, a: number, b: number, c: number, d: number): void => {
    vertices[4 * t] = a;
    vertices[4 * t + 1] = b;
    vertices[4 * t + 2] = c;
    vertices[4 * t + 3] = d;
    stamps[t] = 0;
  };

  // The first tetrahedron and its four neighbours at infinity.
  const [a, b, c, d] = start;
  setTetra(0, a, b, c, d);
  count = 5;
  const corner = [a, b, c, d] as const;
  for (let f = 0; f < 4; f += 1) {
    // The face seen from outside, so that a point outside in the place of the ghost has positive orientation.
    setTetra(
      1 + f,
      corner[faceA[f] as 0] as number,
      corner[faceB[f] as 0] as number,
      corner[faceC[f] as 0] as number,
      ghost,
    );
    const [p, q, r] = [vertices[4 * (1 + f)], vertices[4 * (1 + f) + 1], vertices[4 * (1 + f) + 2]] as number[];
    if (orientation(points, p as number, q as number, r as number, corner[f] as number) > 0) {
      setTetra(1 + f, q as number, p as number, r as number, ghost);
    }
    neighbours[f] = 1 + f;
    neighbours[4 * (1 + f) + 3] = 0;
  }
  for (let s = 1; s <= 4; s += 1) {
    for (let f = 0; f < 3; f += 1) {
      const edge = [0, 1, 2].filter((v) => v !== f).map((v) => vertices[4 * s + v] as number);
      for (let t = 1; t <= 4; t += 1) {
        if (t === s) continue;
        const own = [0, 1, 2].map((v) => vertices[4 * t + v] as number);
        if (edge.every((v) => own.includes(v))) neighbours[4 * s + f] = t;
      }
    }
  }

  /** Whether tetrahedron t has to give way to point e. */
  const conflicts = (t: number, e: number): boolean => {
    const v0 = vertices[4 * t] as number;
    const v1 = vertices[4 * t + 1] as number;
    const v2 = vertices[4 * t + 2] as number;
    const v3 = vertices[4 * t + 3] as number;
    if (v3 !== ghost) return inSphere(points, v0, v1, v2, v3, e) > 0;
    const side = orientation(points, v0, v1, v2, e);
    if (side !== 0) return side > 0;
    // In the plane of a hull face the sphere of the tetrahedron behind cuts out the circle of the face.
    const behind = 4 * (neighbours[4 * t + 3] as number);
    return (
      inSphere(
        points,
        vertices[behind] as number,
        vertices[behind + 1] as number,
        vertices[behind + 2] as number,
        vertices[behind + 3] as number,
        e,
      ) > 0
    );
  };

  let stamp = 0;
  let last = 0;
  let stack: Int32Array<ArrayBufferLike> = new Int32Array(1024);
  let cavity: Int32Array<ArrayBufferLike> = new Int32Array(1024);
  // Boundary faces of the cavity: outer tetrahedron and which of its faces.
  let rimOuter: Int32Array<ArrayBufferLike> = new Int32Array(1024);
  let rimInner: Int32Array<ArrayBufferLike> = new Int32Array(1024);
  // Open-addressed table of the rim's edges, emptied by stamps.
  let tableSize = 4096;
  let tableStamp = new Int32Array(tableSize);
  let tableLow = new Int32Array(tableSize);
  let tableHigh = new Int32Array(tableSize);
  let tableFace = new Int32Array(tableSize);
  const doubled = (from: Int32Array): Int32Array => {
    const to = new Int32Array(from.length * 2);
    to.set(from);
    return to;
  };

  /** Meets the face of another new tetrahedron over the edge (p, q), or leaves its own to be met. */
  const meet = (p: number, q: number, face: number): void => {
    const low = Math.min(p, q);
    const high = Math.max(p, q);
    let slot = (Math.imul(low + 2, 0x9e3779b1) ^ Math.imul(high + 2, 0x85ebca6b)) >>> 0;
    slot = (slot ^ (slot >>> 15)) & (tableSize - 1);
    while (tableStamp[slot] === stamp) {
      if (tableLow[slot] === low && tableHigh[slot] === high) {
        const other = tableFace[slot] as number;
        neighbours[face] = other >> 2;
        neighbours[other] = face >> 2;
        return;
      }
      slot = (slot + 1) & (tableSize - 1);
    }
    tableStamp[slot] = stamp;
    tableLow[slot] = low;
    tableHigh[slot] = high;
    tableFace[slot] = face;
  };

  const inserted = new Uint8Array(n);
  for (const v of start) inserted[v] = 1;
  let distinct = 4;
  for (let at = 0; at < n; at += 1) {
    const e = order[at] as number;
    if (inserted[e] === 1) continue;
    const x = points[3 * e] as number;
    const y = points[3 * e + 1] as number;
    const z = points[3 * e + 2] as number;
    const home = walk(points, vertices, neighbours, last, x, y, z);
    // A point that is there already is a corner of the tetrahedron that holds it.
    let same = ghost;
    for (let f = 0; f < 4; f += 1) {
      const v = vertices[4 * home + f] as number;
      if (v !== ghost && points[3 * v] === x && points[3 * v + 1] === y && points[3 * v + 2] === z) same = v;
    }
    if (same !== ghost) {
      firstOf[e] = same;
      continue;
    }
    distinct += 1;
    stamp += 1;
    let cavityCount = 0;
    let rimCount = 0;
    let top = 0;
    stack[0] = home;
    stamps[home] = stamp;
    while (top >= 0) {
      const t = stack[top] as number;
      top -= 1;
      if (cavityCount === cavity.length) cavity = doubled(cavity);
      cavity[cavityCount] = t;
      cavityCount += 1;
      for (let f = 0; f < 4; f += 1) {
        const other = neighbours[4 * t + f] as number;
        if (stamps[other] === stamp) continue;
        if (conflicts(other, e)) {
          stamps[other] = stamp;
          top += 1;
          if (top === stack.length) stack = doubled(stack);
          stack[top] = other;
        } else {
          if (rimCount === rimOuter.length) {
            rimOuter = doubled(rimOuter);
            rimInner = doubled(rimInner);
          }
          rimOuter[rimCount] = other;
          rimInner[rimCount] = 4 * t + f;
          rimCount += 1;
        }
      }
    }
    if (rimCount * 4 > tableSize) {
      while (rimCount * 4 > tableSize) tableSize *= 2;
      tableStamp = new Int32Array(tableSize);
      tableLow = new Int32Array(tableSize);
      tableHigh = new Int32Array(tableSize);
      tableFace = new Int32Array(tableSize);
    }
    if (count + rimCount > building.capacity) {
      grow(building, count + rimCount);
      ({ vertices, neighbours, stamps } = building);
    }
    for (let r = 0; r < rimCount; r += 1) {
      const outer = rimOuter[r] as number;
      const inner = rimInner[r] as number;
      const old = inner >> 2;
      const f = inner & 3;
      let t = count;
      if (freeCount > 0) {
        freeCount -= 1;
        t = free[freeCount] as number;
      } else {
        count += 1;
      }
      // The new tetrahedron is the old one with its vertex f replaced by the point: same orientation.
      let v0 = vertices[4 * old] as number;
      let v1 = vertices[4 * old + 1] as number;
      let v2 = vertices[4 * old + 2] as number;
      let v3 = vertices[4 * old + 3] as number;
      let place = f;
      if (f === 0) v0 = e;
      else if (f === 1) v1 = e;
      else if (f === 2) v2 = e;
      else v3 = e;
      // A ghost is never moved: it stays last, or the point takes its place.
      setTetra(t, v0, v1, v2, v3);
      neighbours[4 * t + place] = outer;
      for (let g = 0; g < 4; g += 1) {
        if (neighbours[4 * outer + g] === old && sharesFace(vertices, outer, g, t, place)) {
          neighbours[4 * outer + g] = t;
          break;
        }
      }
      place = f;
      for (let g = 0; g < 4; g += 1) {
        if (g === place) continue;
        // The face opposite g holds the point and the edge of the two corners that are neither g nor the point.
        let p = 0;
        let q = 0;
        let have = 0;
        for (let h = 0; h < 4; h += 1) {
          if (h === g || h === place) continue;
          if (have === 0) p = vertices[4 * t + h] as number;
          else q = vertices[4 * t + h] as number;
          have += 1;
        }
        meet(p, q, 4 * t + g);
      }
      last = t;
    }
    if (freeCount + cavityCount > free.length) {
      let larger = doubled(free);
      while (freeCount + cavityCount > larger.length) larger = doubled(larger);
      free = larger;
    }
    for (let i = 0; i < cavityCount; i += 1) {
      const t = cavity[i] as number;
      vertices[4 * t] = -2;
      free[freeCount] = t;
      freeCount += 1;
    }
  }
  return compact(points, vertices, neighbours, count, firstOf, distinct);
}

/** True when face g of tetrahedron s and face f of t have the same corners. */
function sharesFace(vertices: Int32Array, s: number, g: number, t: number, f: number): boolean {
  for (let i = 0; i < 4; i += 1) {
    if (i === g) continue;
    const v = vertices[4 * s + i] as number;
    let met = false;
    for (let j = 0; j < 4; j += 1) if (j !== f && vertices[4 * t + j] === v) met = true;
    if (!met) return false;
  }
  return true;
}

function compact(
  points: Float64Array,
  vertices: Int32Array,
  neighbours: Int32Array,
  count: number,
  firstOf: Int32Array,
  distinct: number,
): Tetrahedralisation {
  const numbers = new Int32Array(count);
  let kept = 0;
  for (let t = 0; t < count; t += 1) {
    numbers[t] = kept;
    if (vertices[4 * t] !== -2) kept += 1;
  }
  const finalVertices = sharedInt32(4 * kept);
  const finalNeighbours = sharedInt32(4 * kept);
  for (let t = 0; t < count; t += 1) {
    if (vertices[4 * t] === -2) continue;
    const to = 4 * (numbers[t] as number);
    for (let f = 0; f < 4; f += 1) {
      finalVertices[to + f] = vertices[4 * t + f] as number;
      finalNeighbours[to + f] = numbers[neighbours[4 * t + f] as number] as number;
    }
  }
  let shared = points;
  if (!(points.buffer instanceof SharedArrayBuffer)) {
    shared = sharedFloat64(points.length);
    shared.set(points);
  }
  return { points: shared, count: kept, vertices: finalVertices, neighbours: finalNeighbours, firstOf, distinct };
}

/** Walks towards a place; ends in the tetrahedron that holds it, or in one at infinity whose face it lies beyond. */
function walk(
  points: Float64Array,
  vertices: Int32Array,
  neighbours: Int32Array,
  from: number,
  x: number,
  y: number,
  z: number,
): number {
  let t = from;
  if (vertices[4 * t + 3] === ghost) t = neighbours[4 * t + 3] as number;
  let came = -1;
  for (;;) {
    const v0 = vertices[4 * t] as number;
    const v1 = vertices[4 * t + 1] as number;
    const v2 = vertices[4 * t + 2] as number;
    const v3 = vertices[4 * t + 3] as number;
    if (v3 === ghost) return t;
    // Each vertex in turn is replaced by the place: a negative orientation means that it lies beyond that face.
    const n0 = neighbours[4 * t] as number;
    const n1 = neighbours[4 * t + 1] as number;
    const n2 = neighbours[4 * t + 2] as number;
    const n3 = neighbours[4 * t + 3] as number;
    let next = -1;
    if (n3 !== came && orientationAt(points, v0, v1, v2, x, y, z) < 0) next = n3;
    else if (n2 !== came && orientationAt(points, v0, v3, v1, x, y, z) < 0) next = n2;
    else if (n1 !== came && orientationAt(points, v0, v2, v3, x, y, z) < 0) next = n1;
    else if (n0 !== came && orientationAt(points, v1, v3, v2, x, y, z) < 0) next = n0;
    if (next < 0) return t;
    came = t;
    t = next;
  }
}

/**
 * The tetrahedron that holds a place (a visibility walk, which ends in every Delaunay tetrahedralisation; Edelsbrunner
 * 1990, Combinatorica 10:251).
 *
 * @param from  where the walk starts, for example the answer for a place nearby
 * @returns a tetrahedron; one with the vertex `ghost` last when the place lies outside the hull
 */
export function locateTetrahedron(t: Tetrahedralisation, x: number, y: number, z: number, from: number): number {
  return walk(t.points, t.vertices, t.neighbours, from, x, y, z);
}
