/**
 * Static k-d tree over points in three dimensions, in the manner of a flat index: the points are reordered in place so
 * that the median of every range splits it along the range's longest side. All data lie in one shared buffer, from
 * which the tree is rebuilt in another thread without copying.
 *
 * @see Bentley 1975, Communications of the ACM 18:509 (k-d trees); Friedman, Bentley & Finkel 1977, ACM TOMS 3:209
 * (splitting the longest side, search with bounds)
 */
export interface KdTree {
  readonly count: number;
  /** Points in tree order, 3 x n. */
  readonly coordinates: Float64Array;
  /** Number of each point in the caller's order. */
  readonly numbers: Int32Array;
  /** Axis of the split of each inner node (heap order). */
  readonly axes: Uint8Array;
  /** Coordinate of the split of each inner node (heap order). */
  readonly splits: Float64Array;
  /** Levels of inner nodes; leaves are the ranges below. */
  readonly depth: number;
}

const leafPoints = 12;

function longestSide(points: Float64Array, begin: number, end: number): number {
  let [lowX, lowY, lowZ] = [Infinity, Infinity, Infinity];
  let [highX, highY, highZ] = [-Infinity, -Infinity, -Infinity];
  for (let i = 3 * begin; i < 3 * end; i += 3) {
    const x = points[i] as number;
    const y = points[i + 1] as number;
    const z = points[i + 2] as number;
    if (x < lowX) lowX = x;
    if (x > highX) highX = x;
    if (y < lowY) lowY = y;
    if (y > highY) highY = y;
    if (z < lowZ) lowZ = z;
    if (z > highZ) highZ = z;
  }
  const [dx, dy, dz] = [highX - lowX, highY - lowY, highZ - lowZ];
  if (dx >= dy && dx >= dz) return 0;
  return dy >= dz ? 1 : 2;
}

function exchange(points: Float64Array, numbers: Int32Array, i: number, j: number): void {
  const n = numbers[i] as number;
  numbers[i] = numbers[j] as number;
  numbers[j] = n;
  for (let c = 0; c < 3; c += 1) {
    const value = points[3 * i + c] as number;
    points[3 * i + c] = points[3 * j + c] as number;
    points[3 * j + c] = value;
  }
}

/** Floyd & Rivest 1975, Communications of the ACM 18:173: puts the k-th smallest in its place. */
function select(points: Float64Array, numbers: Int32Array, k: number, first: number, last: number, axis: number): void {
  let left = first;
  let right = last;
  while (right > left) {
    if (right - left > 600) {
      const n = right - left + 1;
      const m = k - left + 1;
      const z = Math.log(n);
      const s = 0.5 * Math.exp((2 * z) / 3);
      const sd = 0.5 * Math.sqrt((z * s * (n - s)) / n) * (m - n / 2 < 0 ? -1 : 1);
      select(
        points,
        numbers,
        k,
        Math.max(left, Math.floor(k - (m * s) / n + sd)),
        Math.min(right, Math.floor(k + ((n - m) * s) / n + sd)),
        axis,
      );
    }
    const pivot = points[3 * k + axis] as number;
    let i = left;
    let j = right;
    exchange(points, numbers, left, k);
    if ((points[3 * right + axis] as number) > pivot) exchange(points, numbers, left, right);
    while (i < j) {
      exchange(points, numbers, i, j);
      i += 1;
      j -= 1;
      while ((points[3 * i + axis] as number) < pivot) i += 1;
      while ((points[3 * j + axis] as number) > pivot) j -= 1;
    }
    if (points[3 * left + axis] === pivot) exchange(points, numbers, left, j);
    else {
      j += 1;
      exchange(points, numbers, j, right);
    }
    if (j <= k) left = j + 1;
    if (k <= j) right = j - 1;
  }
}

function levelsFor(count: number): number {
  let depth = 0;
  while (count / 2 ** depth > leafPoints) depth += 1;
  return depth;
}

function layout(count: number, depth: number) {
  const nodes = 2 ** depth;
  const bytes = { coordinates: 24 * count, splits: 8 * nodes, numbers: 4 * count, axes: nodes };
  const total = 16 + bytes.coordinates + bytes.splits + bytes.numbers + bytes.axes;
  return { nodes, bytes, total };
}

function onBuffer(buffer: SharedArrayBuffer, count: number): KdTree {
  const depth = levelsFor(count);
  const { nodes, bytes } = layout(count, depth);
  let at = 0;
  const coordinates = new Float64Array(buffer, at, 3 * count);
  at += bytes.coordinates;
  const splits = new Float64Array(buffer, at, nodes);
  at += bytes.splits;
  const numbers = new Int32Array(buffer, at, count);
  at += bytes.numbers;
  return { count, coordinates, splits, numbers, axes: new Uint8Array(buffer, at, nodes), depth };
}

/**
 * Builds the tree.
 *
 * @param points  3 x n, finite
 */
export function buildKdTree(points: Float64Array): KdTree {
  const count = points.length / 3;
  const tree = onBuffer(new SharedArrayBuffer(layout(count, levelsFor(count)).total), count);
  const { coordinates, numbers, splits, axes, depth } = tree;
  coordinates.set(points);
  for (let i = 0; i < count; i += 1) numbers[i] = i;
  const build = (node: number, begin: number, end: number, level: number): void => {
    if (level === depth) return;
    const middle = (begin + end) >> 1;
    const axis = longestSide(coordinates, begin, end);
    select(coordinates, numbers, middle, begin, end - 1, axis);
    axes[node] = axis;
    splits[node] = coordinates[3 * middle + axis] as number;
    build(2 * node, begin, middle, level + 1);
    build(2 * node + 1, middle, end, level + 1);
  };
  if (count > 0) build(1, 0, count, 0);
  return tree;
}

/** Working memory of a search; one a thread. */
export interface KdSearch {
  readonly nodes: Int32Array;
  readonly begins: Int32Array;
  readonly ends: Int32Array;
  readonly bounds: Float64Array;
  readonly offsets: Float64Array;
}

const deepestStack = 64;

export function createKdSearch(): KdSearch {
  return {
    nodes: new Int32Array(deepestStack),
    begins: new Int32Array(deepestStack),
    ends: new Int32Array(deepestStack),
    bounds: new Float64Array(deepestStack),
    offsets: new Float64Array(3 * deepestStack),
  };
}

/**
 * The nearest points of a place, nearest first; of points equally far the one with the lower number comes first.
 *
 * @param wanted     how many; at most the number of points
 * @param outIndex   gets their numbers, at least `wanted` long
 * @param outSquared gets their squared distances, ascending
 * @returns how many were found: the smaller of `wanted` and the number of points
 */
export function nearestNeighbours(
  tree: KdTree,
  x: number,
  y: number,
  z: number,
  wanted: number,
  outIndex: Int32Array,
  outSquared: Float64Array,
  search: KdSearch,
): number {
  const { coordinates, numbers, splits, axes, depth, count } = tree;
  const { nodes, begins, ends, bounds, offsets } = search;
  const limit = Math.min(wanted, count);
  if (limit === 0) return 0;
  let found = 0;
  let worst = Infinity;
  const leafNode = 2 ** depth;
  let top = 0;
  nodes[0] = 1;
  begins[0] = 0;
  ends[0] = count;
  bounds[0] = 0;
  offsets[0] = 0;
  offsets[1] = 0;
  offsets[2] = 0;
  while (top >= 0) {
    const bound = bounds[top] as number;
    if (bound > worst) {
      top -= 1;
      continue;
    }
    let node = nodes[top] as number;
    let begin = begins[top] as number;
    let end = ends[top] as number;
    const ox = offsets[3 * top] as number;
    const oy = offsets[3 * top + 1] as number;
    const oz = offsets[3 * top + 2] as number;
    top -= 1;
    // Descends to the leaf on the place's side and leaves the far sides on the stack with their lower bounds.
    while (node < leafNode) {
      const axis = axes[node] as number;
      const split = splits[node] as number;
      const middle = (begin + end) >> 1;
      const distance = (axis === 0 ? x : axis === 1 ? y : z) - split;
      const before = axis === 0 ? ox : axis === 1 ? oy : oz;
      const farBound = bound - before * before + distance * distance;
      const lower = distance < 0;
      if (farBound <= worst) {
        top += 1;
        nodes[top] = lower ? 2 * node + 1 : 2 * node;
        begins[top] = lower ? middle : begin;
        ends[top] = lower ? end : middle;
        bounds[top] = farBound;
        offsets[3 * top] = axis === 0 ? distance : ox;
        offsets[3 * top + 1] = axis === 1 ? distance : oy;
        offsets[3 * top + 2] = axis === 2 ? distance : oz;
      }
      if (lower) {
        node = 2 * node;
        end = middle;
      } else {
        node = 2 * node + 1;
        begin = middle;
      }
    }
    for (let i = begin; i < end; i += 1) {
      const dx = (coordinates[3 * i] as number) - x;
      const dy = (coordinates[3 * i + 1] as number) - y;
      const dz = (coordinates[3 * i + 2] as number) - z;
      const squared = dx * dx + dy * dy + dz * dz;
      if (squared > worst) continue;
      const number = numbers[i] as number;
      if (found === limit && squared === worst && number > (outIndex[limit - 1] as number)) continue;
      let place = found < limit ? found : limit - 1;
      while (place > 0) {
        const other = outSquared[place - 1] as number;
        if (other < squared || (other === squared && (outIndex[place - 1] as number) < number)) break;
        outSquared[place] = other;
        outIndex[place] = outIndex[place - 1] as number;
        place -= 1;
      }
      outSquared[place] = squared;
      outIndex[place] = number;
      if (found < limit) found += 1;
      if (found === limit) worst = outSquared[limit - 1] as number;
    }
  }
  return found;
}
