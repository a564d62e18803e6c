import { sharedFloat64, sharedInt32 } from '../basis/fields.js';

/**
 * Bounding-volume tree over axis-aligned boxes, all in flat shared arrays. Nodes stand in depth-first order: the left
 * child of node n is n + 1, the right one `right[n]`; a leaf has `right[n] = -1` and the items
 * `items[first[n]] ... items[first[n] + count[n] - 1]`.
 */
export interface BoxTree {
  readonly nodeCount: number;
  /** 6 x nodes: low x y z, high x y z. */
  readonly bounds: Float64Array;
  readonly right: Int32Array;
  readonly first: Int32Array;
  readonly count: Int32Array;
  readonly items: Int32Array;
}

/** Items found by a query; grows as needed and is used again. */
export interface FoundItems {
  count: number;
  items: Int32Array;
}

export function createFoundItems(): FoundItems {
  return { count: 0, items: new Int32Array(64) };
}

const leafItems = 4;
// Splits halve the items, so the depth stays below 32 and a stack of 64 suffices.
const stack = new Int32Array(64);

/** Orders `items[begin ... end)` so that the keys before `middle` are not above those after (Hoare's selection). */
function select(items: Int32Array, keys: Float64Array, axis: number, begin: number, end: number, middle: number): void {
  let low = begin;
  let high = end - 1;
  while (low < high) {
    const pivot = keys[3 * items[(low + high) >> 1]! + axis]!;
    let i = low;
    let j = high;
    while (i <= j) {
      while (keys[3 * items[i]! + axis]! < pivot) i++;
      while (keys[3 * items[j]! + axis]! > pivot) j--;
      if (i <= j) {
        const held = items[i]!;
        items[i++] = items[j]!;
        items[j--] = held;
      }
    }
    if (middle <= j) high = j;
    else if (middle >= i) low = i;
    else return;
  }
}

/**
 * Builds the tree by halving along the longest side of the middles' extent.
 *
 * @param boxes  6 x n: low x y z, high x y z
 */
export function buildBoxTree(boxes: Float64Array): BoxTree {
  const n = boxes.length / 6;
  const items = sharedInt32(n);
  const middles = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) {
    items[i] = i;
    for (let a = 0; a < 3; a++) middles[3 * i + a] = 0.5 * (boxes[6 * i + a]! + boxes[6 * i + 3 + a]!);
  }
  // Leaves hold at least leafItems / 2 items, inner nodes are one fewer.
  const bound = Math.max(1, Math.ceil((4 * n) / leafItems) + 1);
  const bounds = sharedFloat64(6 * bound);
  const right = sharedInt32(bound);
  const first = sharedInt32(bound);
  const count = sharedInt32(bound);
  let nodeCount = 0;
  const extent = new Float64Array(6);
  const build = (begin: number, end: number): void => {
    const node = nodeCount++;
    const o = 6 * node;
    for (let a = 0; a < 3; a++) {
      bounds[o + a] = Infinity;
      bounds[o + 3 + a] = -Infinity;
      extent[a] = Infinity;
      extent[3 + a] = -Infinity;
    }
    for (let i = begin; i < end; i++) {
      const item = items[i]!;
      for (let a = 0; a < 3; a++) {
        const l = boxes[6 * item + a]!;
        const h = boxes[6 * item + 3 + a]!;
        const m = middles[3 * item + a]!;
        if (l < bounds[o + a]!) bounds[o + a] = l;
        if (h > bounds[o + 3 + a]!) bounds[o + 3 + a] = h;
        if (m < extent[a]!) extent[a] = m;
        if (m > extent[3 + a]!) extent[3 + a] = m;
      }
    }
    if (end - begin <= leafItems) {
      right[node] = -1;
      first[node] = begin;
      count[node] = end - begin;
      return;
    }
    let axis = 0;
    for (let a = 1; a < 3; a++) if (extent[3 + a]! - extent[a]! > extent[3 + axis]! - extent[axis]!) axis = a;
    const middle = (begin + end) >> 1;
    select(items, middles, axis, begin, end, middle);
    build(begin, middle);
    right[node] = nodeCount;
    build(middle, end);
  };
  build(0, n);
  return { nodeCount, bounds, right, first, count, items };
}

/**
 * Items of all leaves whose bounds touch the box; the caller tests the items themselves.
 *
 * @param box  low x y z, high x y z
 */
export function itemsNear(tree: BoxTree, box: ArrayLike<number>, found: FoundItems): void {
  const { bounds, right, first, count, items } = tree;
  const lx = box[0]!;
  const ly = box[1]!;
  const lz = box[2]!;
  const hx = box[3]!;
  const hy = box[4]!;
  const hz = box[5]!;
  found.count = 0;
  let top = 0;
  stack[top++] = 0;
  while (top > 0) {
    const node = stack[--top]!;
    const o = 6 * node;
    if (
      bounds[o]! > hx ||
      bounds[o + 3]! < lx ||
      bounds[o + 1]! > hy ||
      bounds[o + 4]! < ly ||
      bounds[o + 2]! > hz ||
      bounds[o + 5]! < lz
    )
      continue;
    if (right[node]! >= 0) {
      stack[top++] = right[node]!;
      stack[top++] = node + 1;
      continue;
    }
    const n = count[node]!;
    if (found.count + n > found.items.length) {
      const larger = new Int32Array(2 * (found.count + n));
      larger.set(found.items);
      found.items = larger;
    }
    for (let i = 0; i < n; i++) found.items[found.count++] = items[first[node]! + i]!;
  }
}
