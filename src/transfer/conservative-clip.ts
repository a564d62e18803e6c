/**
 * A closed surface of polygons that is cut by half-spaces, one after the other. Arrays are used again and grow as needed.
 *
 * The surface need not be convex: cutting follows the rims of its polygons, every cut closes with the loops that the new
 * edges form, and volume and first moment are sums over the closed surface, so that what overlaps with opposite sign
 * cancels. Signs of vertices decide everything; no tolerance is involved.
 */
export interface Surface {
  vertexCount: number;
  /** 3 x vertices. */
  vertices: Float64Array;
  faceCount: number;
  /** faces + 1 starts into `rims`. */
  starts: Int32Array;
  rims: Int32Array;
}

export function createSurface(): Surface {
  return {
    vertexCount: 0,
    vertices: new Float64Array(3 * 256),
    faceCount: 0,
    starts: new Int32Array(256),
    rims: new Int32Array(1024),
  };
}

/** Makes room for so many vertices, faces and rim entries; what is there is kept. */
export function reserveSurface(s: Surface, vertices: number, faces: number, rims: number): void {
  if (s.vertices.length < 3 * vertices) {
    const larger = new Float64Array(6 * vertices);
    larger.set(s.vertices);
    s.vertices = larger;
  }
  if (s.starts.length < faces + 1) {
    const larger = new Int32Array(2 * faces + 2);
    larger.set(s.starts);
    s.starts = larger;
  }
  if (s.rims.length < rims) {
    const larger = new Int32Array(2 * rims);
    larger.set(s.rims);
    s.rims = larger;
  }
}

let height = new Float64Array(256);
let kept = new Int32Array(256);
let edgeIn = new Int32Array(64);
let edgeOut = new Int32Array(64);
/** For each new vertex: the new vertex that follows it along the cap. */
let follows = new Int32Array(64);
let crossings = 0;

/** Number of the new vertex on the edge between an inner and an outer vertex. */
function crossing(inner: number, outer: number, from: Surface, to: Surface): number {
  for (let e = crossings - 1; e >= 0; e--) if (edgeIn[e] === inner && edgeOut[e] === outer) return e;
  if (crossings === edgeIn.length) {
    const double = (a: Int32Array): Int32Array<ArrayBuffer> => {
      const larger = new Int32Array(2 * a.length);
      larger.set(a);
      return larger;
    };
    edgeIn = double(edgeIn);
    edgeOut = double(edgeOut);
    follows = double(follows);
  }
  edgeIn[crossings] = inner;
  edgeOut[crossings] = outer;
  follows[crossings] = -1;
  const t = height[inner]! / (height[inner]! - height[outer]!);
  const v = 3 * to.vertexCount++;
  for (let a = 0; a < 3; a++) {
    const p = from.vertices[3 * inner + a]!;
    to.vertices[v + a] = p + t * (from.vertices[3 * outer + a]! - p);
  }
  return crossings++;
}

/**
 * Keeps the part of a surface with n.x <= d.
 *
 * @param to  receives the result when the plane cuts the surface
 * @returns 1 when all of it stays (`to` is not written), 0 when nothing does, 2 when it was cut
 */
export function cutSurface(from: Surface, nx: number, ny: number, nz: number, d: number, to: Surface): 0 | 1 | 2 {
  const { vertexCount, faceCount, vertices, starts, rims } = from;
  if (height.length < vertexCount) {
    height = new Float64Array(2 * vertexCount);
    kept = new Int32Array(2 * vertexCount);
  }
  let inside = 0;
  for (let v = 0; v < vertexCount; v++) {
    const h = nx * vertices[3 * v]! + ny * vertices[3 * v + 1]! + nz * vertices[3 * v + 2]! - d;
    height[v] = h;
    if (h <= 0) inside++;
  }
  if (inside === vertexCount) return 1;
  if (inside === 0) return 0;
  const rimTotal = starts[faceCount]!;
  reserveSurface(to, inside + rimTotal, faceCount + rimTotal, 3 * rimTotal);
  let count = 0;
  for (let v = 0; v < vertexCount; v++) {
    if (height[v]! > 0) continue;
    kept[v] = count;
    to.vertices[3 * count] = vertices[3 * v]!;
    to.vertices[3 * count + 1] = vertices[3 * v + 1]!;
    to.vertices[3 * count + 2] = vertices[3 * v + 2]!;
    count++;
  }
  to.vertexCount = count;
  crossings = 0;
  let faces = 0;
  let at = 0;
  for (let f = 0; f < faceCount; f++) {
    const begin = starts[f]!;
    const end = starts[f + 1]!;
    const from0 = at;
    let firstEntry = -1;
    let leaving = -1;
    let a = rims[end - 1]!;
    let aIn = height[a]! <= 0;
    for (let i = begin; i < end; i++) {
      const b = rims[i]!;
      const bIn = height[b]! <= 0;
      if (aIn !== bIn) {
        const c = aIn ? crossing(a, b, from, to) : crossing(b, a, from, to);
        to.rims[at++] = count + c;
        if (aIn) leaving = c;
        else if (leaving >= 0) {
          follows[c] = leaving;
          leaving = -1;
        } else firstEntry = c;
      }
      if (bIn) to.rims[at++] = kept[b]!;
      a = b;
      aIn = bIn;
    }
    if (firstEntry >= 0) follows[firstEntry] = leaving;
    if (at > from0) {
      to.starts[faces] = from0;
      faces++;
    }
  }
  for (let c = 0; c < crossings; c++) {
    if (follows[c]! < 0) continue;
    const from0 = at;
    let e = c;
    while (e >= 0 && follows[e]! >= 0) {
      to.rims[at++] = count + e;
      const next = follows[e]!;
      follows[e] = -1;
      e = next;
    }
    if (at - from0 < 3) {
      at = from0;
      continue;
    }
    to.starts[faces] = from0;
    faces++;
  }
  to.starts[faces] = at;
  to.faceCount = faces;
  return 2;
}

/** Adds `sign` times the volume and first moment about the origin to sum[0] and sum[1..3]. */
export function addMoments(s: Surface, sign: number, sum: Float64Array): void {
  const { faceCount, starts, rims, vertices } = s;
  let volume = 0;
  let mx = 0;
  let my = 0;
  let mz = 0;
  for (let f = 0; f < faceCount; f++) {
    const begin = starts[f]!;
    const end = starts[f + 1]!;
    const o = 3 * rims[begin]!;
    const ax = vertices[o]!;
    const ay = vertices[o + 1]!;
    const az = vertices[o + 2]!;
    let p = 3 * rims[begin + 1]!;
    for (let i = begin + 2; i < end; i++) {
      const q = 3 * rims[i]!;
      const bx = vertices[p]!;
      const by = vertices[p + 1]!;
      const bz = vertices[p + 2]!;
      const cx = vertices[q]!;
      const cy = vertices[q + 1]!;
      const cz = vertices[q + 2]!;
      const v = ax * (by * cz - bz * cy) + ay * (bz * cx - bx * cz) + az * (bx * cy - by * cx);
      volume += v;
      mx += v * (ax + bx + cx);
      my += v * (ay + by + cy);
      mz += v * (az + bz + cz);
      p = q;
    }
  }
  sum[0] = sum[0]! + (sign * volume) / 6;
  sum[1] = sum[1]! + (sign * mx) / 24;
  sum[2] = sum[2]! + (sign * my) / 24;
  sum[3] = sum[3]! + (sign * mz) / 24;
}
