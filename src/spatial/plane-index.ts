import KDBush from 'kdbush';

/** Index of points in a plane; `data` is a shared buffer from which threads rebuild the index. */
export interface PlaneIndex {
  readonly data: SharedArrayBuffer;
  /** 2 x n, in the caller's order. */
  readonly points: Float64Array;
  /** Mean distance between neighbours: where a search begins. */
  readonly spacing: number;
}

/** @param points  2 x n, at least one */
export function buildPlaneIndex(points: Float64Array): PlaneIndex {
  const count = points.length / 2;
  const index = new KDBush(count, 32, Float64Array, SharedArrayBuffer);
  let [lowX, lowY, highX, highY] = [Infinity, Infinity, -Infinity, -Infinity];
  for (let i = 0; i < count; i += 1) {
    const x = points[2 * i] as number;
    const y = points[2 * i + 1] as number;
    index.add(x, y);
    lowX = Math.min(lowX, x);
    highX = Math.max(highX, x);
    lowY = Math.min(lowY, y);
    highY = Math.max(highY, y);
  }
  index.finish();
  const area = (highX - lowX) * (highY - lowY);
  const spacing = area > 0 ? Math.sqrt(area / count) : Math.max(highX - lowX, highY - lowY) / count;
  return { data: index.data as SharedArrayBuffer, points, spacing: spacing > 0 ? spacing : 1 };
}

/** Searches an index from one thread. */
export interface PlaneSearch {
  readonly nearest: (x: number, y: number, wanted: number, outIndex: Int32Array, outSquared: Float64Array) => number;
}

/**
 * Opens an index. `nearest` gives the nearest points, nearest first, ties by the lower number, and returns how many:
 * the circle of the search grows until it holds enough.
 */
export function openPlaneIndex(index: PlaneIndex): PlaneSearch {
  const tree = KDBush.from(index.data);
  const { points, spacing } = index;
  const count = points.length / 2;
  return {
    nearest: (x, y, wanted, outIndex, outSquared) => {
      const limit = Math.min(wanted, count);
      let radius = spacing * Math.sqrt(limit);
      let found = tree.within(x, y, radius);
      while (found.length < limit) {
        radius *= 2;
        found = tree.within(x, y, radius);
      }
      let kept = 0;
      for (const number of found) {
        const dx = (points[2 * number] as number) - x;
        const dy = (points[2 * number + 1] as number) - y;
        const squared = dx * dx + dy * dy;
        let place = Math.min(kept, limit);
        while (place > 0) {
          const other = outSquared[place - 1] as number;
          if (other < squared || (other === squared && (outIndex[place - 1] as number) < number)) break;
          if (place < limit) {
            outSquared[place] = other;
            outIndex[place] = outIndex[place - 1] as number;
          }
          place -= 1;
        }
        if (place < limit) {
          outSquared[place] = squared;
          outIndex[place] = number;
          if (kept < limit) kept += 1;
        }
      }
      return kept;
    },
  };
}
