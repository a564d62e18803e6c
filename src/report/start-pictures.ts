import type { CellMesh } from '../mesh/cell-mesh.js';
import type { ProfileFigures } from './audit-data.js';
import { gridRatioPicture, sharePicture, slicePicture } from './figures.js';
import type { PictureBlock } from './page.js';
import { type SliceAxis, sampleSlice, sliceMesh, sliceOutline, tellingSlice } from './slices.js';

export interface StartPicturesInput {
  readonly mesh: CellMesh;
  /** 3 x cells, metres. */
  readonly centroids: Float64Array;
  readonly wallFaces: Int32Array;
  /** cells, the precursor's k. */
  readonly k?: Float64Array;
  /** 3 x cells, m/s. */
  readonly mean?: Float64Array;
  readonly velocity?: Float64Array;
  readonly fluctuation?: Float64Array;
  readonly gridRatio?: Float64Array;
  readonly share?: Float64Array;
  /** Default: the slice that shows most of k (or of the velocity). */
  readonly slice?: { readonly axis: SliceAxis; readonly position: number };
}

function speeds(velocity: Float64Array): Float64Array {
  return Float64Array.from({ length: velocity.length / 3 }, (_, i) =>
    Math.hypot(velocity[3 * i] as number, velocity[3 * i + 1] as number, velocity[3 * i + 2] as number),
  );
}

/** Pictures of a start on one slice: what came from the precursor, what was made of it, what the mesh carries. */
export function startPictures(input: StartPicturesInput): {
  readonly before: readonly PictureBlock[];
  readonly pictures: readonly PictureBlock[];
} {
  const { mesh, mean, velocity, fluctuation, k } = input;
  const telling =
    k ?? (mean === undefined ? undefined : speeds(mean)) ?? (velocity === undefined ? undefined : speeds(velocity));
  if (telling === undefined) return { before: [], pictures: [] };
  const { axis, position } = input.slice ?? tellingSlice(mesh, input.centroids, telling);
  const slice = sliceMesh(mesh, axis, position);
  const outline = {
    boundary: sliceOutline(mesh, slice),
    ...(input.wallFaces.length === 0 ? {} : { walls: sliceOutline(mesh, slice, input.wallFaces) }),
  };
  const speedPicture = (title: string, values: Float64Array): PictureBlock =>
    slicePicture(slice, sampleSlice(slice, speeds(values)), {
      title,
      quantity: 'VelocityMagnitude',
      unit: 'm/s',
      ...outline,
    });
  const before: PictureBlock[] = [];
  if (mean !== undefined) before.push(speedPicture('Before: speed of the transferred mean', mean));
  if (k !== undefined) {
    before.push(
      slicePicture(slice, sampleSlice(slice, k), {
        title: 'Before: k of the precursor',
        quantity: 'TurbulentEnergyKinetic',
        unit: 'm2/s2',
        ...outline,
      }),
    );
  }
  const pictures: PictureBlock[] = [];
  if (velocity !== undefined) pictures.push(speedPicture('After: speed of the start', velocity));
  if (fluctuation !== undefined) {
    ['X', 'Y', 'Z'].forEach((name, component) => {
      pictures.push(
        slicePicture(slice, sampleSlice(slice, fluctuation, 3, component), {
          title: `After: fluctuation along ${name.toLowerCase()}`,
          quantity: `VelocityFluctuation${name}`,
          unit: 'm/s',
          ramp: 'diverging',
          ...outline,
        }),
      );
    });
  }
  if (input.gridRatio !== undefined)
    pictures.push(gridRatioPicture(slice, sampleSlice(slice, input.gridRatio), outline));
  if (input.share !== undefined) pictures.push(sharePicture(slice, sampleSlice(slice, input.share), 0.8, outline));
  return { before, pictures };
}

/**
 * Volume means over slabs across an axis: what was wanted against what the fluctuation holds.
 *
 * @param wantedK  cells, m2/s2: the resolvable part of k
 * @param wantedCovariance  6 x cells (XX XY XZ YY YZ ZZ), m2/s2, where stresses were wanted
 * @param fluctuation  3 x cells, m/s
 * @param slabs  slabs without a cell are left out
 */
export function slabProfiles(
  centroids: Float64Array,
  volumes: Float64Array,
  axis: SliceAxis,
  wantedK: Float64Array,
  fluctuation: Float64Array,
  wantedCovariance?: Float64Array,
  slabs = 40,
): ProfileFigures {
  const a = { x: 0, y: 1, z: 2 }[axis];
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = a; i < centroids.length; i += 3) {
    low = Math.min(low, centroids[i] as number);
    high = Math.max(high, centroids[i] as number);
  }
  const sums = Array.from({ length: 8 }, () => new Float64Array(slabs));
  const add = (which: number, slab: number, value: number): void => {
    const list = sums[which] as Float64Array;
    list[slab] = (list[slab] as number) + value;
  };
  for (let i = 0; i < volumes.length; i++) {
    const at = high > low ? ((centroids[3 * i + a] as number) - low) / (high - low) : 0;
    const slab = Math.min(slabs - 1, Math.floor(at * slabs));
    const v = volumes[i] as number;
    const u = [0, 1, 2].map((c) => fluctuation[3 * i + c] as number) as [number, number, number];
    add(0, slab, v);
    add(1, slab, v * (centroids[3 * i + a] as number));
    add(2, slab, v * (wantedK[i] as number));
    add(3, slab, 0.5 * v * (u[0] ** 2 + u[1] ** 2 + u[2] ** 2));
    if (wantedCovariance === undefined) continue;
    add(4, slab, v * (wantedCovariance[6 * i] as number));
    add(5, slab, v * u[0] ** 2);
    add(6, slab, v * (wantedCovariance[6 * i + 1] as number));
    add(7, slab, v * u[0] * u[1]);
  }
  const filled = Array.from({ length: slabs }, (_, s) => s).filter((s) => (sums[0]?.[s] as number) > 0);
  const means = (which: number): number[] => filled.map((s) => (sums[which]?.[s] as number) / (sums[0]?.[s] as number));
  const x = means(1);
  return {
    title: `Wanted and recovered along ${axis}`,
    caption: 'Volume means over slabs; wanted is the part that the mesh can carry.',
    coordinate: axis,
    unit: 'm',
    quantityUnit: 'm2/s2',
    curves: [
      { name: 'k', x, wanted: means(2), recovered: means(3) },
      ...(wantedCovariance === undefined
        ? []
        : [
            { name: 'VelocityCovarianceXX', x, wanted: means(4), recovered: means(5) },
            { name: 'VelocityCovarianceXY', x, wanted: means(6), recovered: means(7) },
          ]),
    ],
  };
}
