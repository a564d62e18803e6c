import type { MeshGeometry } from '../mesh/cell-mesh.js';
import { boundsOf } from './regions.js';

const bins = 12;

/**
 * Axes (0 x, 1 y, 2 z) along which a field does not vary: the volume means over twelve slabs across the axis differ by less
 * than `tolerance` of the field's own standard deviation. A uniform field varies along none of them and gives all three.
 */
export function homogeneousAxes(geometry: MeshGeometry, values: Float64Array, tolerance = 0.02): readonly number[] {
  const { cellCentroids, cellVolumes } = geometry;
  const { low, high } = boundsOf(cellCentroids);
  let volume = 0;
  let sum = 0;
  let squares = 0;
  for (let i = 0; i < values.length; i++) {
    const v = cellVolumes[i] as number;
    volume += v;
    sum += v * (values[i] as number);
    squares += v * (values[i] as number) ** 2;
  }
  const mean = sum / volume;
  const deviation = Math.sqrt(Math.max(0, squares / volume - mean * mean));
  return [0, 1, 2].filter((axis) => {
    const from = low[axis] as number;
    const side = (high[axis] as number) - from;
    const volumes = new Float64Array(bins);
    const sums = new Float64Array(bins);
    for (let i = 0; i < values.length; i++) {
      const at = side > 0 ? ((cellCentroids[3 * i + axis] as number) - from) / side : 0;
      const bin = Math.min(bins - 1, Math.floor(at * bins));
      volumes[bin] = (volumes[bin] as number) + (cellVolumes[i] as number);
      sums[bin] = (sums[bin] as number) + (cellVolumes[i] as number) * (values[i] as number);
    }
    let worst = 0;
    for (let b = 0; b < bins; b++) {
      if ((volumes[b] as number) > 0)
        worst = Math.max(worst, Math.abs((sums[b] as number) / (volumes[b] as number) - mean));
    }
    return worst <= tolerance * deviation || deviation <= 1e-9 * Math.abs(mean);
  });
}

/** 1 for cells that the middle plane of each of the axes cuts or touches. */
export function middleCells(geometry: MeshGeometry, axes: readonly number[]): Uint8Array {
  const { cellCentroids, widthTensors } = geometry;
  const { low, high } = boundsOf(cellCentroids);
  const place = [0, 3, 5] as const;
  const chosen = new Uint8Array(cellCentroids.length / 3).fill(1);
  for (const axis of axes) {
    const middle = 0.5 * ((low[axis] as number) + (high[axis] as number));
    for (let i = 0; i < chosen.length; i++) {
      const width = Math.sqrt(widthTensors[6 * i + (place[axis] as number)] as number);
      if (Math.abs((cellCentroids[3 * i + axis] as number) - middle) > 0.51 * width) chosen[i] = 0;
    }
  }
  return chosen;
}
