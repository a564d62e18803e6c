import type { CellMesh, PeriodicPairs } from '../mesh/cell-mesh.js';

/** Edges of a mesh, each once, in the order in which the faces meet them. Plain data. */
export interface MeshEdges {
  readonly count: number;
  /** 2 x edges: its two points, the smaller number first; an edge runs from the first to the second. */
  readonly points: Int32Array;
  /** As long as `facePoints`: entry i is the edge from facePoints[i] to the next point of that face. */
  readonly faceEdges: Int32Array;
}

function grown(array: Int32Array, size: number): Int32Array<ArrayBuffer> {
  const more = new Int32Array(size);
  more.set(array);
  return more;
}

/** Finds the edges of a mesh. */
export function meshEdges(mesh: CellMesh): MeshEdges {
  const { faceOffsets, facePoints, faceCount } = mesh;
  // Edges hang in chains from their first point: a point has few edges, so a walk along them is short.
  const head = new Int32Array(mesh.points.length / 3).fill(-1);
  let capacity = Math.max(16, mesh.points.length);
  let next = new Int32Array(capacity);
  let points = new Int32Array(2 * capacity);
  const faceEdges = new Int32Array(facePoints.length);
  let count = 0;
  for (let face = 0; face < faceCount; face += 1) {
    const begin = faceOffsets[face] as number;
    const end = faceOffsets[face + 1] as number;
    for (let i = begin; i < end; i += 1) {
      const a = facePoints[i] as number;
      const b = facePoints[i + 1 < end ? i + 1 : begin] as number;
      const low = Math.min(a, b);
      const high = Math.max(a, b);
      let edge = head[low] as number;
      while (edge >= 0 && points[2 * edge + 1] !== high) edge = next[edge] as number;
      if (edge < 0) {
        if (count === capacity) {
          capacity = Math.ceil(1.5 * capacity);
          next = grown(next, capacity);
          points = grown(points, 2 * capacity);
        }
        edge = count;
        points[2 * edge] = low;
        points[2 * edge + 1] = high;
        next[edge] = head[low] as number;
        head[low] = edge;
        count += 1;
      }
      faceEdges[i] = edge;
    }
  }
  return { count, points: points.slice(0, 2 * count), faceEdges };
}

/** Edges that are one and the same across periods. */
export interface EdgeClasses {
  /** Edges: the edge that stands for it, itself where it has no mate before it. */
  readonly root: Int32Array;
  /** Edges: 1 where it runs as its root does, -1 against it. */
  readonly sign: Int8Array;
}

/** Root of an edge and its direction against it; shortens the way for the next call. */
function resolve(root: Int32Array, sign: Int8Array, edge: number): { readonly root: number; readonly sign: number } {
  let at = edge;
  let direction = 1;
  while (root[at] !== at) {
    direction *= sign[at] as number;
    at = root[at] as number;
  }
  root[edge] = at;
  sign[edge] = direction;
  return { root: at, sign: direction };
}

/** Place in the mate's list of points of the one that is nearest to the first point of the low face, shifted. */
function firstMate(mesh: CellMesh, low: number, high: number, period: readonly [number, number, number]): number {
  const { points, faceOffsets, facePoints } = mesh;
  const p = 3 * (facePoints[faceOffsets[low] as number] as number);
  const begin = faceOffsets[high] as number;
  const end = faceOffsets[high + 1] as number;
  let best = begin;
  let least = Infinity;
  for (let i = begin; i < end; i += 1) {
    const q = 3 * (facePoints[i] as number);
    let distance = 0;
    for (let c = 0; c < 3; c += 1) {
      distance += ((points[q + c] as number) - (points[p + c] as number) - (period[c as 0] as number)) ** 2;
    }
    if (distance < least) {
      least = distance;
      best = i;
    }
  }
  return best - begin;
}

/**
 * Joins the edges of periodic faces to those of their mates, over several periods at once (corners of a periodic box
 * have four of a kind). Faces whose mates have another number of points are left alone.
 */
export function periodicEdgeClasses(mesh: CellMesh, edges: MeshEdges, periodic?: PeriodicPairs): EdgeClasses {
  const root = new Int32Array(edges.count);
  for (let e = 0; e < root.length; e += 1) root[e] = e;
  const sign = new Int8Array(edges.count).fill(1);
  const { faceOffsets, facePoints } = mesh;
  const pairs = periodic?.lowFaces.length ?? 0;
  for (let pair = 0; pair < pairs && periodic !== undefined; pair += 1) {
    const low = periodic.lowFaces[pair] as number;
    const high = periodic.highFaces[pair] as number;
    const lowBegin = faceOffsets[low] as number;
    const highBegin = faceOffsets[high] as number;
    const corners = (faceOffsets[low + 1] as number) - lowBegin;
    if ((faceOffsets[high + 1] as number) - highBegin !== corners) continue;
    const period = periodic.periods[periodic.periodOf[pair] as number];
    if (period === undefined) continue;
    const first = firstMate(mesh, low, high, period);
    for (let i = 0; i < corners; i += 1) {
      // The mate faces the other way: its points run backwards, point i being its point first - i.
      const place = (first - i - 1 + 2 * corners) % corners;
      const a = edges.faceEdges[lowBegin + i] as number;
      const b = edges.faceEdges[highBegin + place] as number;
      const aForward = edges.points[2 * a] === facePoints[lowBegin + i] ? 1 : -1;
      const bForward = edges.points[2 * b] === facePoints[highBegin + place] ? -1 : 1;
      const ra = resolve(root, sign, a);
      const rb = resolve(root, sign, b);
      if (ra.root === rb.root) continue;
      const direction = aForward * bForward * ra.sign * rb.sign;
      const child = Math.max(ra.root, rb.root);
      root[child] = Math.min(ra.root, rb.root);
      sign[child] = direction;
    }
  }
  for (let e = 0; e < root.length; e += 1) resolve(root, sign, e);
  return { root, sign };
}
