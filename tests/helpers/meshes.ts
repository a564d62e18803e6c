import seedrandom from 'seedrandom';
import type { BoundaryKind, BoundaryPatch, CellTopology, DataArray, Dataset } from '../../src/basis/dataset.js';
import { cellShape } from '../../src/mesh/cell-types.js';

export type Axis = 'x' | 'y' | 'z';

export interface BoxOptions {
  /** Extents along x, y, z, metres; default 1 1 1. */
  readonly lengths?: readonly [number, number, number];
  readonly origin?: readonly [number, number, number];
  /** Maps [0, 1] onto [0, 1] for each axis (wall refinement); default identity. */
  readonly stretch?: readonly [(s: number) => number, (s: number) => number, (s: number) => number];
  /** Vertices move by at most this share of the uniform spacing; faces warp. Boundary vertices stay on their planes. */
  readonly warp?: number;
  readonly seed?: string;
  /** Axes whose two ends get the same moved vertices. */
  readonly periodic?: readonly Axis[];
  /** Cells (i, j, k) to keep; default all. */
  readonly keep?: (i: number, j: number, k: number) => boolean;
  /** Maps every vertex at the end (bends, curved walls). */
  readonly map?: (x: number, y: number, z: number) => readonly [number, number, number];
  /** Name of the boundary a face belongs to by its centre before `map`; undefined leaves it unnamed. */
  readonly name?: (x: number, y: number, z: number) => string | undefined;
  readonly kinds?: Readonly<Record<string, BoundaryKind>>;
}

/** Cells as they are gathered: type, points, and the faces of polyhedra. */
interface Cells {
  readonly types: number[];
  readonly points: number[][];
  readonly faces: (number[][] | undefined)[];
}

const emptyCells = (): Cells => ({ types: [], points: [], faces: [] });

function add(cells: Cells, type: number, points: number[], faces?: number[][]): void {
  cells.types.push(type);
  cells.points.push(points);
  cells.faces.push(faces);
}

function topologyOf(cells: Cells): CellTopology {
  const offsets = new Int32Array(cells.types.length + 1);
  cells.points.forEach((p, i) => {
    offsets[i + 1] = offsets[i]! + p.length;
  });
  const basic = { types: Uint8Array.from(cells.types), offsets, connectivity: Int32Array.from(cells.points.flat()) };
  if (!cells.faces.some((f) => f !== undefined)) return basic;
  const streams = cells.faces.map((f) => (f === undefined ? [] : [f.length, ...f.flatMap((q) => [q.length, ...q])]));
  const polyhedronOffsets = new Int32Array(cells.types.length + 1);
  streams.forEach((s, i) => {
    polyhedronOffsets[i + 1] = polyhedronOffsets[i]! + s.length;
  });
  return { ...basic, polyhedronFaces: Int32Array.from(streams.flat()), polyhedronOffsets };
}

/** Data set in memory. */
export function makeDataset(
  points: ArrayLike<number>,
  cells?: CellTopology,
  more: Partial<Pick<Dataset, 'boundaries' | 'zones' | 'cellArrays' | 'pointArrays' | 'file'>> = {},
): Dataset {
  const coordinates = Float64Array.from(points);
  return {
    file: 'test.vtu',
    format: 'vtu',
    points: coordinates,
    pointType: 'Float64',
    ...(cells === undefined ? {} : { cells }),
    pointArrays: [],
    cellArrays: [],
    zones: [
      {
        name: 'zone',
        pointBegin: 0,
        pointEnd: coordinates.length / 3,
        cellBegin: 0,
        cellEnd: cells === undefined ? 0 : cells.types.length,
      },
    ],
    boundaries: [],
    missingAxes: [],
    notes: new Map(),
    remarks: [],
    ...more,
  };
}

/** A Float64 array of a data set. */
export function makeArray(name: string, components: number, values: Float64Array): DataArray {
  return { name, components, tuples: values.length / components, type: 'Float64', load: () => values.slice() };
}

function cellFaces(cells: Cells, cell: number): number[][] {
  const own = cells.faces[cell];
  if (own !== undefined) return own;
  const p = cells.points[cell]!;
  return cellShape(cells.types[cell]!)!.faces.map((f) => f.map((v) => p[v]!));
}

/** Boundary faces by the plainest means: point sets that occur once. */
function boundaryPolygons(cells: Cells): number[][] {
  const met = new Map<string, number[] | undefined>();
  for (let c = 0; c < cells.types.length; c++)
    for (const face of cellFaces(cells, c)) {
      const key = [...face].sort((a, b) => a - b).join();
      met.set(key, met.has(key) ? undefined : face);
    }
  return [...met.values()].filter((f) => f !== undefined);
}

function namedBoundaries(cells: Cells, points: readonly number[], options: BoxOptions): BoundaryPatch[] {
  const name = options.name;
  if (name === undefined) return [];
  const groups = new Map<string, number[][]>();
  for (const face of boundaryPolygons(cells)) {
    const mean = [0, 1, 2].map((a) => face.reduce((s, p) => s + points[3 * p + a]!, 0) / face.length);
    const called = name(mean[0]!, mean[1]!, mean[2]!);
    if (called === undefined) continue;
    if (!groups.has(called)) groups.set(called, []);
    groups.get(called)!.push(face);
  }
  return [...groups].map(([called, faces]) => {
    const offsets = new Int32Array(faces.length + 1);
    faces.forEach((f, i) => {
      offsets[i + 1] = offsets[i]! + f.length;
    });
    return { name: called, kind: options.kinds?.[called] ?? 'other', offsets, points: Int32Array.from(faces.flat()) };
  });
}

function finish(cells: Cells, points: readonly number[], options: BoxOptions): Dataset {
  const boundaries = namedBoundaries(cells, points, options);
  const mapped = Float64Array.from(points);
  const map = options.map;
  if (map !== undefined)
    for (let p = 0; p < mapped.length; p += 3) mapped.set(map(mapped[p]!, mapped[p + 1]!, mapped[p + 2]!), p);
  return makeDataset(mapped, topologyOf(cells), { boundaries });
}

/** Vertices of a box of nx x ny x nz bricks, x fastest. */
function boxPoints(n: readonly [number, number, number], options: BoxOptions): number[] {
  const lengths = options.lengths ?? [1, 1, 1];
  const origin = options.origin ?? [0, 0, 0];
  const warp = options.warp ?? 0;
  const draw = seedrandom(options.seed ?? 'mesh');
  const periodic = (['x', 'y', 'z'] as const).map((a) => options.periodic?.includes(a) ?? false);
  const moves = Float64Array.from({ length: 3 * (n[0] + 1) * (n[1] + 1) * (n[2] + 1) }, () => warp * (2 * draw() - 1));
  const index = (i: number, j: number, k: number): number => i + (n[0] + 1) * (j + (n[1] + 1) * k);
  const points: number[] = [];
  for (let k = 0; k <= n[2]; k++)
    for (let j = 0; j <= n[1]; j++)
      for (let i = 0; i <= n[0]; i++) {
        const at = [i, j, k];
        const source = index(
          ...(at.map((v, a) => (periodic[a] && v === n[a] ? 0 : v)) as unknown as [number, number, number]),
        );
        at.forEach((v, a) => {
          const onEnd = v === 0 || v === n[a];
          const s = (options.stretch?.[a] ?? ((t: number) => t))(v / n[a]!);
          points.push(origin[a]! + lengths[a]! * (s + (onEnd ? 0 : moves[3 * source + a]! / n[a]!)));
        });
      }
  return points;
}

const kept = (options: BoxOptions, i: number, j: number, k: number): boolean => options.keep?.(i, j, k) ?? true;

/** The eight corners of brick (i, j, k) in hexahedron order. */
function corners(n: readonly [number, number, number], i: number, j: number, k: number): number[] {
  const at = (di: number, dj: number, dk: number): number => i + di + (n[0] + 1) * (j + dj + (n[1] + 1) * (k + dk));
  return [at(0, 0, 0), at(1, 0, 0), at(1, 1, 0), at(0, 1, 0), at(0, 0, 1), at(1, 0, 1), at(1, 1, 1), at(0, 1, 1)];
}

function box(
  n: readonly [number, number, number],
  options: BoxOptions,
  fill: (cells: Cells, c: number[], i: number, j: number, k: number, points: number[]) => void,
): Dataset {
  const points = boxPoints(n, options);
  const cells = emptyCells();
  for (let k = 0; k < n[2]; k++)
    for (let j = 0; j < n[1]; j++)
      for (let i = 0; i < n[0]; i++) if (kept(options, i, j, k)) fill(cells, corners(n, i, j, k), i, j, k, points);
  return finish(cells, points, options);
}

/** Box of hexahedra. */
export function hexBox(nx: number, ny: number, nz: number, options: BoxOptions = {}): Dataset {
  return box([nx, ny, nz], options, (cells, c) => add(cells, 12, c));
}

/** The same bricks as voxels (corners x fastest). */
export function voxelBox(nx: number, ny: number, nz: number, options: BoxOptions = {}): Dataset {
  return box([nx, ny, nz], options, (cells, c) =>
    add(
      cells,
      11,
      [0, 1, 3, 2, 4, 5, 7, 6].map((v) => c[v]!),
    ),
  );
}

// Six tetrahedra around the diagonal 0-6 (Kuhn's division: conforming between bricks and across periods).
const sixTetrahedra = [
  [0, 1, 2, 6],
  [0, 2, 3, 6],
  [0, 3, 7, 6],
  [0, 7, 4, 6],
  [0, 4, 5, 6],
  [0, 5, 1, 6],
];

/** Box of tetrahedra, six a brick. */
export function tetBox(nx: number, ny: number, nz: number, options: BoxOptions = {}): Dataset {
  return box([nx, ny, nz], options, (cells, c) => {
    for (const t of sixTetrahedra)
      add(
        cells,
        10,
        t.map((v) => c[v]!),
      );
  });
}

/** Box of triangular prisms, two a brick, triangles normal to z. */
export function prismBox(nx: number, ny: number, nz: number, options: BoxOptions = {}): Dataset {
  return box([nx, ny, nz], options, (cells, c) => {
    for (const t of [
      [0, 1, 2, 4, 5, 6],
      [0, 2, 3, 4, 6, 7],
    ])
      add(
        cells,
        13,
        t.map((v) => c[v]!),
      );
  });
}

/** Box of hexahedra, voxels, wedges, pyramids and tetrahedra, changing along x. */
export function mixedBox(nx: number, ny: number, nz: number, options: BoxOptions = {}): Dataset {
  const shape = cellShape(12)!;
  return box([nx, ny, nz], options, (cells, c, i, j, _k, points) => {
    const pick = (t: readonly number[]): number[] => t.map((v) => c[v]!);
    if (i % 4 === 0) add(cells, 12, c);
    else if (i % 4 === 1) add(cells, 11, pick([0, 1, 3, 2, 4, 5, 7, 6]));
    else if (i % 4 === 2) {
      add(cells, 13, pick([0, 1, 2, 4, 5, 6]));
      add(cells, 13, pick([0, 2, 3, 4, 6, 7]));
    } else {
      const centre = points.length / 3;
      for (let a = 0; a < 3; a++) points.push(c.reduce((s, p) => s + points[3 * p + a]!, 0) / 8);
      shape.faces.forEach((face, f) => {
        // Inwards, so that the base looks at the centre.
        const q = pick(face).reverse();
        const split = (f === 2 && j > 0) || (f === 3 && j < ny - 1);
        if (!split) add(cells, 14, [...q, centre]);
        else {
          const first = q.indexOf(Math.min(...q));
          const r = [0, 1, 2, 3].map((s) => q[(first + s) % 4]!);
          add(cells, 10, [r[0]!, r[1]!, r[2]!, centre]);
          add(cells, 10, [r[0]!, r[2]!, r[3]!, centre]);
        }
      });
    }
  });
}

/** The bricks of `hexBox` as polyhedra, every second face turned inwards when `careless`. */
export function brickPolyhedra(
  nx: number,
  ny: number,
  nz: number,
  options: BoxOptions & { readonly careless?: boolean } = {},
): Dataset {
  const shape = cellShape(12)!;
  return box([nx, ny, nz], options, (cells, c) =>
    add(
      cells,
      42,
      c,
      shape.faces.map((f, index) => {
        const face = f.map((v) => c[v]!);
        return options.careless === true && index % 2 === 1 ? face.reverse() : face;
      }),
    ),
  );
}

/** Cuts a convex polygon (pairs) by the half plane a x + b y <= c. */
function cut(polygon: [number, number][], a: number, b: number, c: number): [number, number][] {
  const out: [number, number][] = [];
  polygon.forEach((p, i) => {
    const q = polygon[(i + 1) % polygon.length]!;
    const dp = a * p[0] + b * p[1] - c;
    const dq = a * q[0] + b * q[1] - c;
    if (dp <= 0) out.push(p);
    if ((dp < 0 && dq > 0) || (dp > 0 && dq < 0)) {
      const t = dp / (dp - dq);
      out.push([p[0] + t * (q[0] - p[0]), p[1] + t * (q[1] - p[1])]);
    }
  });
  return out;
}

/**
 * Box of polyhedra: a honeycomb in x-y (about nx cells across), cut at the sides of the box, in nz layers. With `warp`
 * all inner vertices move and all faces become warped.
 */
export function polyBox(nx: number, ny: number, nz: number, options: BoxOptions = {}): Dataset {
  const [lx, ly, lz] = options.lengths ?? [1, 1, 1];
  const origin = options.origin ?? [0, 0, 0];
  const dx = lx / nx;
  const dy = ly / ny;
  const numbers = new Map<string, number>();
  const plane: [number, number][] = [];
  const vertex = (p: [number, number]): number => {
    const key = `${Math.round((p[0] / lx) * 1e7)},${Math.round((p[1] / ly) * 1e7)}`;
    let number = numbers.get(key);
    if (number === undefined) {
      number = plane.length;
      numbers.set(key, number);
      plane.push(p);
    }
    return number;
  };
  const rings: number[][] = [];
  for (let row = 0; row <= ny; row++)
    for (let column = -1; column <= nx; column++) {
      const cx = (column + (row % 2 === 0 ? 0.25 : 0.75)) * dx;
      const cy = row * dy;
      // A hexagon whose vertices are shared by its row and the rows above and below.
      let ring: [number, number][] = [
        [cx + dx / 2, cy - dy / 3],
        [cx + dx / 2, cy + dy / 3],
        [cx, cy + (2 * dy) / 3],
        [cx - dx / 2, cy + dy / 3],
        [cx - dx / 2, cy - dy / 3],
        [cx, cy - (2 * dy) / 3],
      ];
      ring = cut(cut(cut(cut(ring, 1, 0, lx), -1, 0, 0), 0, 1, ly), 0, -1, 0);
      const ids = ring.map(vertex).filter((v, i, all) => v !== all[(i + 1) % all.length]);
      if (ids.length >= 3) rings.push(ids);
    }
  const layer = plane.length;
  const draw = seedrandom(options.seed ?? 'poly');
  const warp = options.warp ?? 0;
  const points: number[] = [];
  for (let k = 0; k <= nz; k++)
    for (const [x, y] of plane) {
      const at = (v: number, length: number, step: number): number => {
        const move = warp * step * (2 * draw() - 1);
        return v < 1e-9 * length || v > length * (1 - 1e-9) ? v : v + move;
      };
      const s = options.stretch ?? [(t: number) => t, (t: number) => t, (t: number) => t];
      points.push(
        origin[0] + lx * s[0](at(x, lx, dx / 3) / lx),
        origin[1] + ly * s[1](at(y, ly, dy / 3) / ly),
        origin[2] + lz * s[2](at((k * lz) / nz, lz, lz / nz / 2) / lz),
      );
    }
  const cells = emptyCells();
  for (let k = 0; k < nz; k++)
    for (const ring of rings) {
      const bottom = ring.map((v) => v + k * layer);
      const top = ring.map((v) => v + (k + 1) * layer);
      const m = ring.length;
      const sides = ring.map((_, i) => [bottom[i]!, bottom[(i + 1) % m]!, top[(i + 1) % m]!, top[i]!]);
      add(cells, 42, [...bottom, ...top], [[...bottom].reverse(), top, ...sides]);
    }
  return finish(cells, points, options);
}

/**
 * Box refined 2:1 at half its length: nx/2 coarse bricks along x, then nx bricks of half the size in all directions.
 * Coarse cells at the joint are polyhedra with four faces there (hanging nodes made explicit).
 */
export function refinedBox(nx: number, ny: number, nz: number, options: BoxOptions = {}): Dataset {
  const fine: [number, number, number] = [2 * nx, 2 * ny, 2 * nz];
  const points = boxPoints(fine, options);
  const at = (i: number, j: number, k: number): number => i + (fine[0] + 1) * (j + (fine[1] + 1) * k);
  const cells = emptyCells();
  const half = Math.floor(nx / 2);
  for (let k = 0; k < nz; k++)
    for (let j = 0; j < ny; j++)
      for (let i = 0; i < half; i++) {
        const p = (di: number, dj: number, dk: number): number => at(2 * i + di, 2 * j + dj, 2 * k + dk);
        const c = [p(0, 0, 0), p(2, 0, 0), p(2, 2, 0), p(0, 2, 0), p(0, 0, 2), p(2, 0, 2), p(2, 2, 2), p(0, 2, 2)];
        if (i < half - 1) {
          add(cells, 12, c);
          continue;
        }
        // Points on the edges of the joint are points of the coarse cell's other faces as well.
        const joint = [0, 1].flatMap((a) =>
          [0, 1].map((b) => [p(2, a, b), p(2, a + 1, b), p(2, a + 1, b + 1), p(2, a, b + 1)]),
        );
        const faces = [
          [c[0]!, c[4]!, c[7]!, c[3]!],
          ...joint,
          [c[0]!, c[1]!, p(2, 0, 1), c[5]!, c[4]!],
          [c[3]!, c[7]!, c[6]!, p(2, 2, 1), c[2]!],
          [c[0]!, c[3]!, c[2]!, p(2, 1, 0), c[1]!],
          [c[4]!, c[5]!, p(2, 1, 2), c[6]!, c[7]!],
        ];
        add(cells, 42, [...new Set(faces.flat())], faces);
      }
  for (let k = 0; k < fine[2]; k++)
    for (let j = 0; j < fine[1]; j++) for (let i = 2 * half; i < fine[0]; i++) add(cells, 12, corners(fine, i, j, k));
  return finish(cells, points, options);
}

/**
 * Channel of height 1 behind a step of height 0.5 at a third of its length 3, width 1 along z, hexahedra. Boundaries:
 * inflow, outflow, wall, side.
 */
export function stepChannel(perHeight: number, layers: number, options: BoxOptions = {}): Dataset {
  const nx = 3 * perHeight;
  return hexBox(nx, perHeight, layers, {
    lengths: [3, 1, 1],
    keep: (i, j) => i >= perHeight || j >= perHeight / 2,
    name: (x, _y, z) => {
      if (z < 1e-9 || z > 1 - 1e-9) return 'side';
      if (x < 1e-9) return 'inflow';
      return x > 3 - 1e-9 ? 'outflow' : 'wall';
    },
    kinds: { inflow: 'inflow', outflow: 'outflow', wall: 'wall', side: 'periodic' },
    ...options,
  });
}

/** Quarter bend of a square duct: inner radius 1, outer radius 2, width 1, hexahedra; inflow, outflow, wall. */
export function bendChannel(along: number, across: number, layers: number, options: BoxOptions = {}): Dataset {
  return hexBox(along, across, layers, {
    name: (x) => (x < 1e-9 ? 'inflow' : x > 1 - 1e-9 ? 'outflow' : 'wall'),
    kinds: { inflow: 'inflow', outflow: 'outflow', wall: 'wall' },
    map: (s, r, z) => {
      const angle = (s * Math.PI) / 2;
      return [(2 - r) * Math.sin(angle), (2 - r) * -Math.cos(angle) + 2, z];
    },
    ...options,
  });
}

/** Plane sheet of quadrilaterals at z = 0. */
export function quadSheet(nx: number, ny: number, lengths: readonly [number, number] = [1, 1]): Dataset {
  const points: number[] = [];
  for (let j = 0; j <= ny; j++)
    for (let i = 0; i <= nx; i++) points.push((i * lengths[0]) / nx, (j * lengths[1]) / ny, 0);
  const cells = emptyCells();
  for (let j = 0; j < ny; j++)
    for (let i = 0; i < nx; i++) {
      const a = i + (nx + 1) * j;
      add(cells, 9, [a, a + 1, a + nx + 2, a + nx + 1]);
    }
  return finish(cells, points, {});
}
