import { InputError } from '../basis/errors.js';
import { buildKdTree, createKdSearch, type KdTree, nearestNeighbours } from '../spatial/kd-tree.js';
import { buildPlaneIndex, openPlaneIndex, type PlaneIndex } from '../spatial/plane-index.js';
import { locateTriangle, type PlaneTriangulation, triangulatePlane } from '../spatial/plane-triangulation.js';
import { ghost, locateTetrahedron, type Tetrahedralisation, tetrahedralise } from '../spatial/tetrahedralisation.js';
import {
  type CellLinearOutput,
  constantCode,
  extrapolatedCode,
  insideCode,
  nearestCode,
  type OutsideRule,
} from './cell-linear.js';
import type { SourceField } from './cell-linear-slopes.js';
import { createStencil, type Stencil } from './stencil.js';

export type CloudMethod = 'nearest' | 'inverse-distance' | 'linear';

export interface CloudOptions {
  readonly method: CloudMethod;
  /** Points used by inverse-distance; default 8. */
  readonly neighbours?: number;
  /** Exponent of inverse-distance; default 2. */
  readonly power?: number;
  /** Default `nearest`. */
  readonly outside?: OutsideRule;
  /** Axes (0 x, 1 y, 2 z) along which the cloud is constant: a profile has two, a plane section one. */
  readonly constantAxes?: readonly number[];
  /**
   * Points before this number are the cloud's own; those from it on are wall points, which extend the hull but are never
   * taken as the nearest point of a target outside. Default: all are the cloud's own.
   */
  readonly own?: number;
  /** For the text of errors. */
  readonly file?: string;
}

/** A field for clouds: besides its sign, whether it is interpolated in the logarithm. */
export interface CloudField extends SourceField {
  readonly logarithmic?: boolean;
}

interface SpaceSource {
  readonly kind: 'space';
  readonly tree: KdTree;
  readonly solid?: Tetrahedralisation;
  /** Wall points are among the points. */
  readonly walled: boolean;
}

interface PlaneSource {
  readonly kind: 'plane';
  readonly axes: readonly [number, number];
  readonly index: PlaneIndex;
  readonly triangulation?: PlaneTriangulation;
  /** A triangle at every point; -1 at none. */
  readonly triangleOf?: Int32Array;
  readonly walled: boolean;
}

interface LineSource {
  readonly kind: 'line';
  readonly axis: number;
  /** Coordinates in ascending order and the points they belong to. */
  readonly places: Float64Array;
  readonly numbers: Int32Array;
}

/** All that `cloudTransferRange` reads besides the fields; plain data. */
export interface CloudPlan {
  readonly options: Required<Pick<CloudOptions, 'method' | 'neighbours' | 'power' | 'outside'>>;
  readonly source: SpaceSource | PlaneSource | LineSource;
}

/** Targets in one run of the walk: results must not depend on where a range begins. */
const walkRun = 512;

function tooFew(file: string | undefined, count: number, needed: number, what: string): InputError {
  return new InputError({
    ...(file === undefined ? {} : { file }),
    cause: `the precursor has ${count} point${count === 1 ? '' : 's'} and ${what} needs ${needed}`,
    remedy: 'give a finer precursor or choose the method nearest',
  });
}

function lineSource(points: Float64Array, axis: number, options: CloudOptions): LineSource {
  const count = points.length / 3;
  const numbers = Int32Array.from({ length: count }, (_, i) => i).sort(
    (a, b) => (points[3 * a + axis] as number) - (points[3 * b + axis] as number) || a - b,
  );
  const places = Float64Array.from(numbers, (i) => points[3 * i + axis] as number);
  for (let i = 1; i < count; i += 1) {
    if (places[i] === places[i - 1]) {
      throw new InputError({
        ...(options.file === undefined ? {} : { file: options.file }),
        place: `points ${numbers[i - 1]} and ${numbers[i]} (counted from 0)`,
        cause: `both lie at ${'xyz'[axis]} = ${places[i]} in a profile along ${'xyz'[axis]}`,
        remedy: 'give one value a place',
      });
    }
  }
  const own = Math.min(options.own ?? count, count);
  if (options.method === 'linear' && own < 2) throw tooFew(options.file, own, 2, 'linear along a profile');
  return { kind: 'line', axis, places, numbers };
}

function planeSource(points: Float64Array, axes: readonly [number, number], options: CloudOptions): PlaneSource {
  const count = points.length / 3;
  const flat = new Float64Array(new SharedArrayBuffer(16 * count));
  for (let i = 0; i < count; i += 1) {
    flat[2 * i] = points[3 * i + axes[0]] as number;
    flat[2 * i + 1] = points[3 * i + axes[1]] as number;
  }
  const own = options.method === 'linear' ? Math.min(options.own ?? count, count) : count;
  const walled = own < count;
  const index = buildPlaneIndex(flat.subarray(0, 2 * own));
  if (options.method !== 'linear') return { kind: 'plane', axes, index, walled };
  if (own < 3) throw tooFew(options.file, own, 3, 'linear in a plane');
  const triangulation = triangulatePlane(flat);
  if (triangulation === undefined) {
    throw new InputError({
      ...(options.file === undefined ? {} : { file: options.file }),
      cause: 'all points of the plane section lie on one line',
      remedy: 'give a profile with one coordinate column, or a section that fills the plane',
    });
  }
  const triangleOf = new Int32Array(count).fill(-1);
  for (let e = triangulation.triangles.length - 1; e >= 0; e -= 1) {
    triangleOf[triangulation.triangles[e] as number] = Math.floor(e / 3);
  }
  return { kind: 'plane', axes, index, triangulation, triangleOf, walled };
}

function spaceSource(points: Float64Array, options: CloudOptions): SpaceSource {
  const count = points.length / 3;
  const own = options.method === 'linear' ? Math.min(options.own ?? count, count) : count;
  const walled = own < count;
  const tree = buildKdTree(points.subarray(0, 3 * own));
  if (options.method !== 'linear') return { kind: 'space', tree, walled };
  if (own < 4) throw tooFew(options.file, own, 4, 'linear');
  const solid = tetrahedralise(points);
  if (typeof solid === 'string') {
    const remedies = {
      'one point': 'give more points or choose the method nearest',
      'on a line': 'give a profile: a CSV file with one coordinate column, constant along the other axes',
      'in a plane': 'say along which axis the section is constant (placement.extrude or --extrude)',
    } as const;
    throw new InputError({
      ...(options.file === undefined ? {} : { file: options.file }),
      cause: `all points of the precursor lie ${solid === 'one point' ? 'at one place' : solid}`,
      remedy: remedies[solid],
    });
  }
  return { kind: 'space', tree, solid, walled };
}

/**
 * Builds the search structures of a cloud: once a precursor, for any number of fields and targets.
 *
 * @param points  3 x n, metres, finite
 * @throws InputError for no points, fewer than the method needs, points that span too few directions
 */
export function prepareCloudTransfer(points: Float64Array, options: CloudOptions): CloudPlan {
  const count = points.length / 3;
  if (count === 0) throw tooFew(options.file, 0, 1, 'a transfer');
  const neighbours = options.neighbours ?? 8;
  if (options.method === 'inverse-distance' && count < neighbours) {
    throw tooFew(options.file, count, neighbours, `inverse-distance with ${neighbours} neighbours`);
  }
  const constant = options.constantAxes ?? [];
  const axes = [0, 1, 2].filter((axis) => !constant.includes(axis));
  const filled = {
    method: options.method,
    neighbours,
    power: options.power ?? 2,
    outside: options.outside ?? 'nearest',
  };
  const [a = 0, b = 0] = axes;
  if (axes.length === 0) throw new InputError({ cause: 'a cloud cannot be constant along all three axes' });
  if (axes.length === 1) return { options: filled, source: lineSource(points, a, options) };
  if (axes.length === 2) return { options: filled, source: planeSource(points, [a, b], options) };
  return { options: filled, source: spaceSource(points, options) };
}

/** Finds the stencil of a place. */
type Finder = (x: number, y: number, z: number, stencil: Stencil, fresh: boolean) => void;

/** Shepard 1968, ACM National Conference, 517: weights 1 / distance^power; a coincident point counts alone. */
function inverseDistanceWeights(stencil: Stencil, squared: Float64Array, power: number): void {
  if (squared[0] === 0) {
    stencil.count = 1;
    stencil.weights[0] = 1;
    return;
  }
  let sum = 0;
  // Distances are taken relative to the nearest one, so that powers of tiny distances stay in range.
  const nearest = squared[0] as number;
  for (let i = 0; i < stencil.count; i += 1) {
    const weight = ((squared[i] as number) / nearest) ** (-0.5 * power);
    stencil.weights[i] = weight;
    sum += weight;
  }
  for (let i = 0; i < stencil.count; i += 1) stencil.weights[i] = (stencil.weights[i] as number) / sum;
}

/** Nearest and inverse-distance alike: `nearest` is the latter with one neighbour. */
function neighbourFinder(
  wanted: number,
  power: number,
  nearest: (x: number, y: number, z: number, wanted: number, out: Int32Array, squared: Float64Array) => number,
): Finder {
  const squared = new Float64Array(Math.max(1, wanted));
  return (x, y, z, stencil) => {
    stencil.count = nearest(x, y, z, wanted, stencil.sources, squared);
    stencil.outside = insideCode;
    stencil.distance = 0;
    inverseDistanceWeights(stencil, squared, power);
  };
}

/** Takes the nearest point for a target outside. */
function takeNearest(stencil: Stencil, squared: number): void {
  stencil.count = 1;
  stencil.weights[0] = 1;
  stencil.outside = nearestCode;
  stencil.distance = Math.sqrt(squared);
}

/**
 * Barycentric weights of a place in the simplex whose corners stand in the stencil's sources; negative outside it.
 */
function barycentric(points: Float64Array, stencil: Stencil, x: number, y: number, z: number): void {
  const [a, b, c, d] = stencil.sources as unknown as [number, number, number, number];
  const dx = points[3 * d] as number;
  const dy = points[3 * d + 1] as number;
  const dz = points[3 * d + 2] as number;
  const ax = (points[3 * a] as number) - dx;
  const ay = (points[3 * a + 1] as number) - dy;
  const az = (points[3 * a + 2] as number) - dz;
  const bx = (points[3 * b] as number) - dx;
  const by = (points[3 * b + 1] as number) - dy;
  const bz = (points[3 * b + 2] as number) - dz;
  const cx = (points[3 * c] as number) - dx;
  const cy = (points[3 * c + 1] as number) - dy;
  const cz = (points[3 * c + 2] as number) - dz;
  const px = x - dx;
  const py = y - dy;
  const pz = z - dz;
  const ux = by * cz - bz * cy;
  const uy = bz * cx - bx * cz;
  const uz = bx * cy - by * cx;
  const volume = ax * ux + ay * uy + az * uz;
  const wa = (px * ux + py * uy + pz * uz) / volume;
  const wb = (ax * (py * cz - pz * cy) + ay * (pz * cx - px * cz) + az * (px * cy - py * cx)) / volume;
  const wc = (ax * (by * pz - bz * py) + ay * (bz * px - bx * pz) + az * (bx * py - by * px)) / volume;
  stencil.weights[0] = wa;
  stencil.weights[1] = wb;
  stencil.weights[2] = wc;
  stencil.weights[3] = 1 - wa - wb - wc;
  stencil.count = 4;
}

/** Longest edge of a simplex: the width beyond which nothing is extrapolated. */
function longestEdge(points: Float64Array, corners: Int32Array, count: number, dimension: number): number {
  let longest = 0;
  for (let i = 0; i < count; i += 1) {
    for (let j = i + 1; j < count; j += 1) {
      let squared = 0;
      for (let c = 0; c < dimension; c += 1) {
        const difference =
          (points[dimension * (corners[i] as number) + c] as number) -
          (points[dimension * (corners[j] as number) + c] as number);
        squared += difference * difference;
      }
      longest = Math.max(longest, squared);
    }
  }
  return Math.sqrt(longest);
}

/** Lowest coordinates, then highest. */
function boxOf(points: Float64Array, dimension: number): number[] {
  const box = [...new Array(dimension).fill(Infinity), ...new Array(dimension).fill(-Infinity)] as number[];
  for (let i = 0; i < points.length; i += 1) {
    const c = i % dimension;
    box[c] = Math.min(box[c] as number, points[i] as number);
    box[dimension + c] = Math.max(box[dimension + c] as number, points[i] as number);
  }
  return box;
}

/** Steps of halving on the way from a target outside to the hull. */
const hullSteps = 30;

function linearInSpace(solid: Tetrahedralisation, tree: KdTree, walled: boolean, outside: OutsideRule): Finder {
  const search = createKdSearch();
  const squared = new Float64Array(1);
  const nearestOne = new Int32Array(1);
  const { points, vertices, neighbours } = solid;
  const box = walled ? boxOf(points, 3) : [];
  let from = 0;
  return (x, y, z, stencil, fresh) => {
    from = locateTetrahedron(solid, x, y, z, fresh ? 0 : from);
    const isOutside = vertices[4 * from + 3] === ghost;
    const holder = isOutside ? (neighbours[4 * from + 3] as number) : from;
    const corners = vertices.subarray(4 * holder, 4 * holder + 4);
    if (!isOutside) {
      stencil.sources.set(corners);
      stencil.outside = insideCode;
      stencil.distance = 0;
      barycentric(points, stencil, x, y, z);
      return;
    }
    nearestNeighbours(tree, x, y, z, 1, nearestOne, squared, search);
    const p = 3 * (nearestOne[0] as number);
    const [px, py, pz] = [points[p] as number, points[p + 1] as number, points[p + 2] as number];
    if (outside !== 'extrapolate') {
      stencil.sources[0] = nearestOne[0] as number;
      takeNearest(stencil, squared[0] as number);
      // Next to a wall the nearest point is too far from it: the nearest place in the box of all points is taken where
      // that is in the hull, else the place where the way to the nearest point enters the hull.
      if (walled) {
        const cx = Math.min(Math.max(x, box[0] as number), box[3] as number);
        const cy = Math.min(Math.max(y, box[1] as number), box[4] as number);
        const cz = Math.min(Math.max(z, box[2] as number), box[5] as number);
        from = locateTetrahedron(solid, cx, cy, cz, from);
        if (vertices[4 * from + 3] !== ghost) {
          stencil.sources.set(vertices.subarray(4 * from, 4 * from + 4));
          barycentric(points, stencil, cx, cy, cz);
          return;
        }
        let [away, inside] = [1, 0];
        for (let step = 0; step < hullSteps; step += 1) {
          const t = (away + inside) / 2;
          from = locateTetrahedron(solid, px + (x - px) * t, py + (y - py) * t, pz + (z - pz) * t, from);
          if (vertices[4 * from + 3] === ghost) away = t;
          else inside = t;
        }
        const [ex, ey, ez] = [px + (x - px) * inside, py + (y - py) * inside, pz + (z - pz) * inside];
        from = locateTetrahedron(solid, ex, ey, ez, from);
        if (inside > 0 && vertices[4 * from + 3] !== ghost) {
          stencil.sources.set(vertices.subarray(4 * from, 4 * from + 4));
          barycentric(points, stencil, ex, ey, ez);
        }
      }
      return;
    }
    stencil.sources.set(corners);
    const distance = Math.sqrt(squared[0] as number);
    const reach = Math.min(1, longestEdge(points, corners, 4, 3) / distance);
    barycentric(points, stencil, px + (x - px) * reach, py + (y - py) * reach, pz + (z - pz) * reach);
    stencil.outside = extrapolatedCode;
    stencil.distance = distance;
  };
}

function planeWeights(t: PlaneTriangulation, triangle: number, x: number, y: number, stencil: Stencil): void {
  const { points, triangles } = t;
  const [a, b, c] = triangles.subarray(3 * triangle, 3 * triangle + 3) as unknown as [number, number, number];
  const cx = points[2 * c] as number;
  const cy = points[2 * c + 1] as number;
  const ax = (points[2 * a] as number) - cx;
  const ay = (points[2 * a + 1] as number) - cy;
  const bx = (points[2 * b] as number) - cx;
  const by = (points[2 * b + 1] as number) - cy;
  const area = ax * by - ay * bx;
  const wa = ((x - cx) * by - (y - cy) * bx) / area;
  const wb = (ax * (y - cy) - ay * (x - cx)) / area;
  stencil.sources[0] = a;
  stencil.sources[1] = b;
  stencil.sources[2] = c;
  stencil.weights[0] = wa;
  stencil.weights[1] = wb;
  stencil.weights[2] = 1 - wa - wb;
  stencil.count = 3;
}

/**
 * Weights for a target outside: at the nearest place in the box of all points where that is in the hull, else where the
 * way to the nearest point enters the hull.
 */
function enterPlane(
  t: PlaneTriangulation,
  home: number,
  nearest: number,
  u: number,
  v: number,
  box: readonly number[],
  stencil: Stencil,
): void {
  const cu = Math.min(Math.max(u, box[0] as number), box[2] as number);
  const cv = Math.min(Math.max(v, box[1] as number), box[3] as number);
  const clamped = locateTriangle(t, cu, cv, home);
  if (clamped >= 0) {
    planeWeights(t, clamped, cu, cv, stencil);
    return;
  }
  const pu = t.points[2 * nearest] as number;
  const pv = t.points[2 * nearest + 1] as number;
  let [away, inside] = [1, 0];
  for (let step = 0; step < hullSteps; step += 1) {
    const middle = (away + inside) / 2;
    if (locateTriangle(t, pu + (u - pu) * middle, pv + (v - pv) * middle, home) < 0) away = middle;
    else inside = middle;
  }
  const [eu, ev] = [pu + (u - pu) * inside, pv + (v - pv) * inside];
  const found = locateTriangle(t, eu, ev, home);
  if (inside > 0 && found >= 0) planeWeights(t, found, eu, ev, stencil);
}

function planeFinder(source: PlaneSource, options: CloudPlan['options']): Finder {
  const [i, j] = source.axes;
  const search = openPlaneIndex(source.index);
  const pick = (x: number, y: number, z: number): readonly [number, number] => {
    const place = [x, y, z] as const;
    return [place[i as 0] as number, place[j as 0] as number];
  };
  const { triangulation, triangleOf } = source;
  if (triangulation === undefined || triangleOf === undefined) {
    const wanted = options.method === 'nearest' ? 1 : options.neighbours;
    return neighbourFinder(wanted, options.power, (x, y, z, count, out, squared) => {
      const [u, v] = pick(x, y, z);
      return search.nearest(u, v, count, out, squared);
    });
  }
  const one = new Int32Array(1);
  const squared = new Float64Array(1);
  const box = source.walled ? boxOf(triangulation.points, 2) : [];
  return (x, y, z, stencil) => {
    const [u, v] = pick(x, y, z);
    search.nearest(u, v, 1, one, squared);
    const home = Math.max(0, triangleOf[one[0] as number] as number);
    const found = locateTriangle(triangulation, u, v, home);
    if (found >= 0) {
      planeWeights(triangulation, found, u, v, stencil);
      stencil.outside = insideCode;
      stencil.distance = 0;
      return;
    }
    if (options.outside !== 'extrapolate') {
      stencil.sources[0] = one[0] as number;
      takeNearest(stencil, squared[0] as number);
      if (source.walled) enterPlane(triangulation, home, one[0] as number, u, v, box, stencil);
      return;
    }
    const triangle = Math.floor((-1 - found) / 3);
    const distance = Math.sqrt(squared[0] as number);
    const corners = triangulation.triangles.subarray(3 * triangle, 3 * triangle + 3);
    const reach = Math.min(1, longestEdge(triangulation.points, corners, 3, 2) / distance);
    const p = 2 * (one[0] as number);
    const pu = triangulation.points[p] as number;
    const pv = triangulation.points[p + 1] as number;
    planeWeights(triangulation, triangle, pu + (u - pu) * reach, pv + (v - pv) * reach, stencil);
    stencil.outside = extrapolatedCode;
    stencil.distance = distance;
  };
}

function lineFinder(source: LineSource, options: CloudPlan['options']): Finder {
  const { places, numbers, axis } = source;
  const count = places.length;
  const below = (value: number): number => {
    let low = 0;
    let high = count;
    while (low < high) {
      const middle = (low + high) >> 1;
      if ((places[middle] as number) <= value) low = middle + 1;
      else high = middle;
    }
    return low - 1;
  };
  if (options.method !== 'linear') {
    const wanted = options.method === 'nearest' ? 1 : options.neighbours;
    return neighbourFinder(wanted, options.power, (x, y, z, limit, out, squared) => {
      const value = [x, y, z][axis] as number;
      let low = below(value);
      let high = low + 1;
      let found = 0;
      while (found < Math.min(limit, count)) {
        const left = low >= 0 ? value - (places[low] as number) : Infinity;
        const right = high < count ? (places[high] as number) - value : Infinity;
        const take = left <= right ? low-- : high++;
        out[found] = numbers[take] as number;
        squared[found] = Math.min(left, right) ** 2;
        found += 1;
      }
      return found;
    });
  }
  return (x, y, z, stencil) => {
    const value = [x, y, z][axis] as number;
    const first = places[0] as number;
    const last = places[count - 1] as number;
    const beyond = Math.max(first - value, value - last, 0);
    const cell = Math.min(Math.max(below(value), 0), count - 2);
    const [low, high] = [places[cell] as number, places[cell + 1] as number];
    stencil.outside = insideCode;
    stencil.distance = 0;
    let place = value;
    if (beyond > 0) {
      const edge = value < first ? first : last;
      stencil.outside = options.outside === 'extrapolate' ? extrapolatedCode : nearestCode;
      stencil.distance = beyond;
      const reach = options.outside === 'extrapolate' ? Math.min(beyond, high - low) : 0;
      place = value < first ? edge - reach : edge + reach;
    }
    const weight = (place - low) / (high - low);
    stencil.sources[0] = numbers[cell] as number;
    stencil.sources[1] = numbers[cell + 1] as number;
    stencil.weights[0] = 1 - weight;
    stencil.weights[1] = weight;
    stencil.count = 2;
  };
}

function finderOf(plan: CloudPlan): Finder {
  const { source, options } = plan;
  if (source.kind === 'line') return lineFinder(source, options);
  if (source.kind === 'plane') return planeFinder(source, options);
  if (source.solid !== undefined) return linearInSpace(source.solid, source.tree, source.walled, options.outside);
  const search = createKdSearch();
  const wanted = options.method === 'nearest' ? 1 : options.neighbours;
  return neighbourFinder(wanted, options.power, (x, y, z, count, out, squared) =>
    nearestNeighbours(source.tree, x, y, z, count, out, squared, search),
  );
}

/** One component of a field by a stencil. */
function blend(field: CloudField, component: number, stencil: Stencil): number {
  const { values, components } = field;
  let sum = 0;
  if (field.logarithmic === true) {
    let positive = true;
    for (let i = 0; i < stencil.count; i += 1) {
      const value = values[(stencil.sources[i] as number) * components + component] as number;
      if (value > 0) sum += (stencil.weights[i] as number) * Math.log(value);
      else positive = false;
    }
    if (positive) return Math.exp(sum);
    sum = 0;
  }
  for (let i = 0; i < stencil.count; i += 1) {
    const value = values[(stencil.sources[i] as number) * components + component] as number;
    sum += (stencil.weights[i] as number) * value;
  }
  return field.nonNegative === true && sum < 0 ? 0 : sum;
}

/**
 * Transfers fields to a range of targets. The result for a target does not depend on the range it is computed in when
 * ranges begin on multiples of 512.
 *
 * @param fields   values at the cloud's points
 * @param targets  3 x m, metres
 * @param out      one array a field, flags and distances; written for [begin, end)
 */
export function cloudTransferRange(
  plan: CloudPlan,
  fields: readonly CloudField[],
  targets: Float64Array,
  begin: number,
  end: number,
  out: CellLinearOutput,
): void {
  const find = finderOf(plan);
  const stencil = createStencil(Math.max(4, plan.options.neighbours));
  const { outside } = plan.options;
  for (let i = begin; i < end; i += 1) {
    const x = targets[3 * i] as number;
    const y = targets[3 * i + 1] as number;
    const z = targets[3 * i + 2] as number;
    find(x, y, z, stencil, i === begin || i % walkRun === 0);
    out.distance[i] = stencil.distance;
    if (stencil.outside === nearestCode && typeof outside === 'number') {
      out.outside[i] = constantCode;
      fields.forEach((field, f) => {
        const target = out.fields[f] as Float64Array;
        target.fill(outside, i * field.components, (i + 1) * field.components);
      });
      continue;
    }
    out.outside[i] = stencil.outside;
    for (let f = 0; f < fields.length; f += 1) {
      const field = fields[f] as CloudField;
      const target = out.fields[f] as Float64Array;
      for (let c = 0; c < field.components; c += 1) target[i * field.components + c] = blend(field, c, stencil);
    }
  }
}
