import type { Dataset } from '../basis/dataset.js';

/** Shortest distance between points that follow each other in a cell and do not coincide. */
function shortestEdge(dataset: Dataset): number {
  const cells = dataset.cells!;
  const xyz = dataset.points;
  let shortest = Number.POSITIVE_INFINITY;
  for (let c = 0; c < cells.types.length; c++) {
    for (let i = cells.offsets[c]! + 1; i < cells.offsets[c + 1]!; i++) {
      const p = 3 * cells.connectivity[i - 1]!;
      const q = 3 * cells.connectivity[i]!;
      const dx = xyz[p]! - xyz[q]!;
      const dy = xyz[p + 1]! - xyz[q + 1]!;
      const dz = xyz[p + 2]! - xyz[q + 2]!;
      const d2 = dx * dx + dy * dy + dz * dz;
      if (d2 > 0 && d2 < shortest) shortest = d2;
    }
  }
  return Math.sqrt(shortest);
}

/** Zones may share points only by place, and a curvilinear zone may close on itself (O- and C-shaped grids). */
function mayHaveSeams(dataset: Dataset): boolean {
  const solid = dataset.zones.filter((z) => z.cellEnd > z.cellBegin);
  return solid.length > 1 || solid.some((z) => z.structure?.kind === 'curvilinear');
}

/**
 * Finds points that coincide across zones.
 *
 * Two points coincide when they are closer than 1e-9 of the extent (2e-7 where the file stores single precision), but
 * never farther than a tenth of the shortest edge.
 *
 * @returns for each point the first point at its place; undefined when nothing coincides or there are no seams
 */
export function weldPoints(dataset: Dataset): Int32Array | undefined {
  if (dataset.cells === undefined || !mayHaveSeams(dataset)) return undefined;
  const xyz = dataset.points;
  const n = xyz.length / 3;
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  for (let i = 0; i < xyz.length; i += 3)
    for (let a = 0; a < 3; a++) {
      const v = xyz[i + a]!;
      if (v < low[a]!) low[a] = v;
      if (v > high[a]!) high[a] = v;
    }
  const extent = Math.max(high[0]! - low[0]!, high[1]! - low[1]!, high[2]! - low[2]!);
  const relative = dataset.pointType === 'Float32' ? 2e-7 : 1e-9;
  const edge = shortestEdge(dataset);
  const tolerance = Math.min(relative * extent, 0.1 * edge);
  if (!(tolerance > 0)) return undefined;
  // Buckets at least sixteen tolerances wide: few points lie near the border of one.
  const inverse = 1 / Math.max(16 * tolerance, Math.min(0.5 * edge, extent * 1e-6));
  let size = 16;
  while (size < 2 * n) size *= 2;
  const mask = size - 1;
  const head = new Int32Array(size).fill(-1);
  const next = new Int32Array(n);
  const pointOf = new Int32Array(n);
  const limit = tolerance * tolerance;
  const bucket = (i: number, j: number, k: number): number => {
    let h = Math.imul(i | 0, 0x9e3779b1) ^ Math.imul(j | 0, 0x85ebca6b) ^ Math.imul(k | 0, 0xc2b2ae35);
    h ^= h >>> 15;
    h = Math.imul(h, 0x2c1b3c6d);
    return (h ^ (h >>> 13)) & mask;
  };
  let welded = 0;
  const border = tolerance * inverse;
  for (let p = 0; p < n; p++) {
    const x = xyz[3 * p]!;
    const y = xyz[3 * p + 1]!;
    const z = xyz[3 * p + 2]!;
    const u = (x - low[0]!) * inverse;
    const v = (y - low[1]!) * inverse;
    const w = (z - low[2]!) * inverse;
    const i = Math.floor(u);
    const j = Math.floor(v);
    const k = Math.floor(w);
    const i0 = Math.floor(u - border);
    const i1 = Math.floor(u + border);
    const j0 = Math.floor(v - border);
    const j1 = Math.floor(v + border);
    const k0 = Math.floor(w - border);
    const k1 = Math.floor(w + border);
    let same = -1;
    for (let a = i0; a <= i1 && same < 0; a++)
      for (let b = j0; b <= j1 && same < 0; b++)
        for (let c = k0; c <= k1 && same < 0; c++)
          for (let q = head[bucket(a, b, c)]!; q >= 0; q = next[q]!) {
            const dx = xyz[3 * q]! - x;
            const dy = xyz[3 * q + 1]! - y;
            const dz = xyz[3 * q + 2]! - z;
            if (dx * dx + dy * dy + dz * dz <= limit) {
              same = q;
              break;
            }
          }
    if (same >= 0) {
      pointOf[p] = same;
      welded++;
      continue;
    }
    pointOf[p] = p;
    const h = bucket(i, j, k);
    next[p] = head[h]!;
    head[h] = p;
  }
  return welded === 0 ? undefined : pointOf;
}
