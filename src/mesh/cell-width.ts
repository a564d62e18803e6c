import { sharedFloat64 } from '../basis/fields.js';
import type { MeshGeometry } from './cell-mesh.js';

/** Cube root of each cell's volume, m. */
export function cellWidths(geometry: MeshGeometry): Float64Array {
  const widths = sharedFloat64(geometry.cellVolumes.length);
  for (let c = 0; c < widths.length; c++) widths[c] = Math.cbrt(geometry.cellVolumes[c]!);
  return widths;
}

/**
 * Width of a cell along the unit vector d: sqrt(d.H.d) with the width tensor H; the edge of a brick along its own axes.
 *
 * @returns m
 */
export function widthAlong(geometry: MeshGeometry, cell: number, dx: number, dy: number, dz: number): number {
  const h = geometry.widthTensors;
  const o = 6 * cell;
  const q =
    h[o]! * dx * dx +
    h[o + 3]! * dy * dy +
    h[o + 5]! * dz * dz +
    2 * (h[o + 1]! * dx * dy + h[o + 2]! * dx * dz + h[o + 4]! * dy * dz);
  return Math.sqrt(Math.max(0, q));
}

/** Widths along the three coordinate axes, 3 x cells, m. */
export function axisWidths(geometry: MeshGeometry): Float64Array {
  const cells = geometry.cellVolumes.length;
  const widths = sharedFloat64(3 * cells);
  const h = geometry.widthTensors;
  for (let c = 0; c < cells; c++) {
    widths[3 * c] = Math.sqrt(Math.max(0, h[6 * c]!));
    widths[3 * c + 1] = Math.sqrt(Math.max(0, h[6 * c + 3]!));
    widths[3 * c + 2] = Math.sqrt(Math.max(0, h[6 * c + 5]!));
  }
  return widths;
}
