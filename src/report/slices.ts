import ndarray from 'ndarray';
import { InputError } from '../basis/errors.js';
import type { CellMesh } from '../mesh/cell-mesh.js';

export type SliceAxis = 'x' | 'y' | 'z';

/** Which cell is seen at each pixel of a plane cut. */
export interface SliceRaster {
  readonly axis: SliceAxis;
  readonly position: number;
  readonly width: number;
  readonly height: number;
  /** width x height, row 0 on top; -1 outside the mesh. */
  readonly cells: Int32Array;
  /** Names and corners of the two axes in the plane, metres. */
  readonly axes: readonly [SliceAxis, SliceAxis];
  readonly low: readonly [number, number];
  readonly high: readonly [number, number];
}

const axisNumber = { x: 0, y: 1, z: 2 } as const;
const inPlane: Readonly<Record<SliceAxis, readonly [SliceAxis, SliceAxis]>> = {
  x: ['z', 'y'],
  y: ['x', 'z'],
  z: ['x', 'y'],
};

function pointBounds(points: Float64Array): { low: number[]; high: number[] } {
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  for (let i = 0; i < points.length; i += 3) {
    for (let a = 0; a < 3; a++) {
      const x = points[i + a] as number;
      if (x < (low[a] as number)) low[a] = x;
      if (x > (high[a] as number)) high[a] = x;
    }
  }
  return { low, high };
}

/** The axis along which the mesh is shortest and the middle of it: the slice that shows most. */
export function widestSlice(mesh: CellMesh): { axis: SliceAxis; position: number } {
  const { low, high } = pointBounds(mesh.points);
  const sides = [0, 1, 2].map((a) => (high[a] as number) - (low[a] as number));
  // z first among equals.
  const a = [2, 1, 0].reduce((best, x) => ((sides[x] as number) < (sides[best] as number) * (1 - 1e-9) ? x : best), 2);
  return {
    axis: (['x', 'y', 'z'] as const)[a] as SliceAxis,
    position: 0.5 * ((low[a] as number) + (high[a] as number)),
  };
}

/**
 * The slice that shows most of a field: normal to the axis along which the means over twelve slabs vary least, the shortest
 * side among equals, through the middle.
 *
 * @param centroids  3 x cells, metres
 * @param values  cells
 */
export function tellingSlice(
  mesh: CellMesh,
  centroids: Float64Array,
  values: Float64Array,
): { axis: SliceAxis; position: number } {
  const bins = 12;
  const { low, high } = pointBounds(mesh.points);
  const sides = [0, 1, 2].map((a) => (high[a] as number) - (low[a] as number));
  const spread = [0, 1, 2].map((a) => {
    const counts = new Float64Array(bins);
    const sums = new Float64Array(bins);
    for (let i = 0; i < values.length; i++) {
      const part = ((centroids[3 * i + a] as number) - (low[a] as number)) / (sides[a] as number);
      const bin = Math.min(bins - 1, Math.max(0, Math.floor(part * bins)));
      counts[bin] = (counts[bin] as number) + 1;
      sums[bin] = (sums[bin] as number) + (values[i] as number);
    }
    const means = Array.from(sums, (sum, b) => sum / (counts[b] as number)).filter(Number.isFinite);
    return Math.max(...means) - Math.min(...means);
  });
  const tolerance = 0.02 * Math.max(...spread);
  const least = Math.min(...spread);
  const candidates = [2, 1, 0].filter((a) => (spread[a] as number) <= least + tolerance);
  const a = candidates.reduce((best, x) => ((sides[x] as number) < (sides[best] as number) * (1 - 1e-9) ? x : best));
  return {
    axis: (['x', 'y', 'z'] as const)[a] as SliceAxis,
    position: 0.5 * ((low[a] as number) + (high[a] as number)),
  };
}

/** Points where the edges of a face cross the plane: pairs a b, in the order of the edges. */
function crossFace(
  mesh: CellMesh,
  face: number,
  normal: number,
  first: number,
  second: number,
  position: number,
  out: number[],
): void {
  const begin = mesh.faceOffsets[face] as number;
  const end = mesh.faceOffsets[face + 1] as number;
  for (let i = begin; i < end; i++) {
    let p = mesh.facePoints[i] as number;
    let q = mesh.facePoints[i + 1 < end ? i + 1 : begin] as number;
    // The same edge gives the same bits from either side.
    if (p > q) [p, q] = [q, p];
    const sp = (mesh.points[3 * p + normal] as number) - position;
    const sq = (mesh.points[3 * q + normal] as number) - position;
    if (sp < 0 === sq < 0) continue;
    const t = sp / (sp - sq);
    for (const axis of [first, second]) {
      const a = mesh.points[3 * p + axis] as number;
      out.push(a + t * ((mesh.points[3 * q + axis] as number) - a));
    }
  }
}

/** Convex hull of points a b (monotone chain, Andrew 1979), counter-clockwise. */
function hull(points: readonly number[]): number[] {
  const order = Array.from({ length: points.length / 2 }, (_, i) => i).sort(
    (i, j) =>
      (points[2 * i] as number) - (points[2 * j] as number) ||
      (points[2 * i + 1] as number) - (points[2 * j + 1] as number),
  );
  const turn = (o: number, p: number, q: number): number =>
    ((points[2 * p] as number) - (points[2 * o] as number)) *
      ((points[2 * q + 1] as number) - (points[2 * o + 1] as number)) -
    ((points[2 * p + 1] as number) - (points[2 * o + 1] as number)) *
      ((points[2 * q] as number) - (points[2 * o] as number));
  const chain = (indices: readonly number[]): number[] => {
    const result: number[] = [];
    for (const i of indices) {
      while (
        result.length >= 2 &&
        turn(result[result.length - 2] as number, result[result.length - 1] as number, i) <= 0
      ) {
        result.pop();
      }
      result.push(i);
    }
    result.pop();
    return result;
  };
  return [...chain(order), ...chain([...order].reverse())].flatMap((i) => [
    points[2 * i] as number,
    points[2 * i + 1] as number,
  ]);
}

/**
 * Cuts the mesh with a plane and paints every cut cell (its cross-section's convex hull) on a raster; pixels that no cell
 * covers lie outside the mesh. A plane through a layer of points shows the cells on its low side.
 *
 * @param pixels  along the longer side
 * @throws InputError when the plane misses the mesh
 */
export function sliceMesh(mesh: CellMesh, axis: SliceAxis, position: number, pixels = 480): SliceRaster {
  const normal = axisNumber[axis];
  const axes = inPlane[axis];
  const first = axisNumber[axes[0]];
  const second = axisNumber[axes[1]];
  const bounds = pointBounds(mesh.points);
  if (!(position > (bounds.low[normal] as number) && position <= (bounds.high[normal] as number))) {
    throw new InputError({
      place: `slice ${axis} = ${position}`,
      cause: `the plane misses the mesh, which reaches from ${bounds.low[normal]} to ${bounds.high[normal]}`,
      remedy: 'choose a position between the two',
    });
  }
  const low: [number, number] = [bounds.low[first] as number, bounds.low[second] as number];
  const high: [number, number] = [bounds.high[first] as number, bounds.high[second] as number];
  const sides = [high[0] - low[0], high[1] - low[1]] as const;
  // Very long domains are stretched so that the short side stays readable.
  const ratio = Math.min(6, Math.max(1 / 2, sides[0] / sides[1]));
  const width = Math.max(16, Math.round(ratio >= 1 ? pixels : pixels * ratio));
  const height = Math.max(16, Math.round(ratio >= 1 ? pixels / ratio : pixels));
  const negative = new Uint8Array(mesh.points.length / 3);
  for (let p = 0; p < negative.length; p++) negative[p] = (mesh.points[3 * p + normal] as number) < position ? 1 : 0;
  const cut = new Uint8Array(mesh.cellCount);
  for (let face = 0; face < mesh.faceCount; face++) {
    const begin = mesh.faceOffsets[face] as number;
    const end = mesh.faceOffsets[face + 1] as number;
    const side = negative[mesh.facePoints[begin] as number] as number;
    for (let i = begin + 1; i < end; i++) {
      if (negative[mesh.facePoints[i] as number] === side) continue;
      cut[mesh.owner[face] as number] = 1;
      if (face < mesh.innerFaceCount) cut[mesh.neighbour[face] as number] = 1;
      break;
    }
  }
  const cells = new Int32Array(width * height).fill(-1);
  // Rows counted from below while painting, from above when stored.
  const view = ndarray(cells, [height, width], [-width, 1], width * (height - 1));
  const crossings: number[] = [];
  for (let cell = 0; cell < mesh.cellCount; cell++) {
    if (cut[cell] === 0) continue;
    crossings.length = 0;
    for (let i = mesh.cellFaceOffsets[cell] as number; i < (mesh.cellFaceOffsets[cell + 1] as number); i++) {
      crossFace(mesh, mesh.cellFaces[i] as number, normal, first, second, position, crossings);
    }
    if (crossings.length >= 6)
      paint(hull(crossings), low, sides, width, height, (row, column) => view.set(row, column, cell));
  }
  return { axis, position, width, height, cells, axes, low, high };
}

function paint(
  polygon: readonly number[],
  low: readonly [number, number],
  sides: readonly [number, number],
  width: number,
  height: number,
  set: (row: number, column: number) => void,
): void {
  const n = polygon.length / 2;
  let bottom = Infinity;
  let top = -Infinity;
  for (let i = 0; i < n; i++) {
    bottom = Math.min(bottom, polygon[2 * i + 1] as number);
    top = Math.max(top, polygon[2 * i + 1] as number);
  }
  const rowOf = (b: number): number => ((b - low[1]) / sides[1]) * height - 0.5;
  for (let row = Math.max(0, Math.ceil(rowOf(bottom))); row < height && row < rowOf(top); row++) {
    const b = low[1] + ((row + 0.5) / height) * sides[1];
    let from = Infinity;
    let to = -Infinity;
    for (let i = 0; i < n; i++) {
      const j = (i + 1) % n;
      let [a0, b0, a1, b1] = [polygon[2 * i], polygon[2 * i + 1], polygon[2 * j], polygon[2 * j + 1]] as [
        number,
        number,
        number,
        number,
      ];
      // Shared edges are walked the same way round by both cells, so that no pixel is lost or taken twice.
      if (b0 > b1) [a0, b0, a1, b1] = [a1, b1, a0, b0];
      if (!(b0 <= b && b < b1)) continue;
      const a = a0 + ((b - b0) / (b1 - b0)) * (a1 - a0);
      if (a < from) from = a;
      if (a > to) to = a;
    }
    const columnOf = (a: number): number => ((a - low[0]) / sides[0]) * width - 0.5;
    for (let column = Math.max(0, Math.ceil(columnOf(from))); column < width && column < columnOf(to); column++)
      set(row, column);
  }
}

/**
 * Cross-sections of boundary faces with the plane of a slice: segments a0 b0 a1 b1, metres.
 *
 * @param faces  boundary faces, or all of them when left out
 */
export function sliceOutline(mesh: CellMesh, slice: SliceRaster, faces?: Int32Array): Float32Array {
  const normal = axisNumber[slice.axis];
  const first = axisNumber[slice.axes[0]];
  const second = axisNumber[slice.axes[1]];
  const segments: number[] = [];
  const crossings: number[] = [];
  const count = faces === undefined ? mesh.faceCount - mesh.innerFaceCount : faces.length;
  for (let i = 0; i < count; i++) {
    const face = faces === undefined ? mesh.innerFaceCount + i : (faces[i] as number);
    crossings.length = 0;
    crossFace(mesh, face, normal, first, second, slice.position, crossings);
    for (let c = 0; c + 3 < crossings.length; c += 4) {
      segments.push(...(crossings.slice(c, c + 4) as [number, number, number, number]));
    }
  }
  return Float32Array.from(segments);
}

/** Values of cells on the pixels of a slice; NaN outside the mesh. `component` picks one of several. */
export function sampleSlice(
  slice: SliceRaster,
  values: ArrayLike<number>,
  components = 1,
  component = 0,
): Float32Array {
  return Float32Array.from(slice.cells, (cell) =>
    cell < 0 ? Number.NaN : (values[components * cell + component] as number),
  );
}
