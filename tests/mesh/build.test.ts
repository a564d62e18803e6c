import { describe, expect, it } from 'vitest';
import type { Dataset } from '../../src/basis/dataset.js';
import { InputError } from '../../src/basis/errors.js';
import { buildMesh } from '../../src/mesh/build.js';
import type { CellMesh, MeshGeometry } from '../../src/mesh/cell-mesh.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { requirePositiveVolumes } from '../../src/mesh/quality.js';
import {
  bendChannel,
  brickPolyhedra,
  hexBox,
  makeDataset,
  mixedBox,
  polyBox,
  prismBox,
  refinedBox,
  stepChannel,
  tetBox,
  voxelBox,
} from '../helpers/meshes.js';

const warped = { warp: 0.25, lengths: [2, 1, 1.5] as const, origin: [10, -3, 5] as const };

const kinds: readonly [string, Dataset, number][] = [
  ['hexahedra', hexBox(4, 5, 3, warped), 3],
  ['voxels', voxelBox(4, 5, 3, { lengths: [2, 1, 1.5] }), 3],
  ['tetrahedra', tetBox(3, 4, 3, warped), 3],
  ['prisms', prismBox(3, 4, 3, warped), 3],
  ['mixed', mixedBox(8, 4, 3, warped), 3],
  ['bricks as polyhedra', brickPolyhedra(4, 3, 3, warped), 3],
  ['careless polyhedra', brickPolyhedra(4, 3, 3, { ...warped, careless: true }), 3],
  ['honeycomb', polyBox(5, 4, 3, warped), 3],
  ['refined 2:1', refinedBox(4, 2, 2, warped), 3],
];

/** Largest sum of outward face areas over a closed cell, over the sum of their sizes: 0 by the divergence theorem. */
function worstClosure(mesh: CellMesh, geometry: MeshGeometry): number {
  let worst = 0;
  for (let c = 0; c < mesh.cellCount; c++) {
    const sum = [0, 0, 0];
    let size = 0;
    for (let j = mesh.cellFaceOffsets[c]!; j < mesh.cellFaceOffsets[c + 1]!; j++) {
      const f = mesh.cellFaces[j]!;
      const sign = mesh.owner[f] === c ? 1 : -1;
      const area = geometry.faceAreas.subarray(3 * f, 3 * f + 3);
      area.forEach((v, a) => {
        sum[a]! += sign * v;
      });
      size += Math.hypot(...area);
    }
    worst = Math.max(worst, Math.hypot(...sum) / size);
  }
  return worst;
}

describe('mesh of every cell kind', () => {
  it.each(kinds)('%s: faces, closure, volume', (_name, dataset) => {
    const mesh = buildMesh(dataset);
    const geometry = measureMesh(mesh);
    requirePositiveVolumes(mesh, geometry, dataset.file);
    for (let f = 0; f < mesh.innerFaceCount; f++) expect(mesh.owner[f]!).toBeLessThan(mesh.neighbour[f]!);
    expect(worstClosure(mesh, geometry)).toBeLessThan(1e-14);
    // Every face is listed once in each of its cells.
    const seen = new Int32Array(mesh.faceCount);
    for (const f of mesh.cellFaces) seen[f]!++;
    seen.forEach((n, f) => {
      expect(n).toBe(f < mesh.innerFaceCount ? 2 : 1);
    });
    // The box is filled: volumes add up, boundary faces lie on its six sides and cover them.
    const total = geometry.cellVolumes.reduce((s, v) => s + v, 0);
    expect(total).toBeCloseTo(3, 12);
    let surface = 0;
    for (let f = mesh.innerFaceCount; f < mesh.faceCount; f++)
      surface += Math.hypot(...geometry.faceAreas.subarray(3 * f, 3 * f + 3));
    expect(surface).toBeCloseTo(2 * (2 * 1 + 2 * 1.5 + 1 * 1.5), 11);
    // Euler-Poincare: points - edges + faces - cells = 1 for a solid ball divided into cells.
    const edges = new Set<string>();
    const used = new Set<number>();
    for (let f = 0; f < mesh.faceCount; f++) {
      const rim = mesh.facePoints.subarray(mesh.faceOffsets[f]!, mesh.faceOffsets[f + 1]!);
      rim.forEach((p, i) => {
        const q = rim[(i + 1) % rim.length]!;
        used.add(p);
        edges.add(`${Math.min(p, q)},${Math.max(p, q)}`);
      });
    }
    expect(used.size - edges.size + mesh.faceCount - mesh.cellCount).toBe(1);
  });

  it.each(kinds)('%s: whole moments equal the brick', (_name, dataset) => {
    const mesh = buildMesh(dataset);
    const { cellCentroids, cellVolumes, widthTensors } = measureMesh(mesh);
    const low = [0, 1, 2].map((a) => Math.min(...dataset.points.filter((_, i) => i % 3 === a)));
    const centre = [low[0]! + 1, low[1]! + 0.5, low[2]! + 0.75];
    const pairs = [
      [0, 0],
      [0, 1],
      [0, 2],
      [1, 1],
      [1, 2],
      [2, 2],
    ] as const;
    const first = [0, 0, 0];
    const second = [0, 0, 0, 0, 0, 0];
    for (let c = 0; c < mesh.cellCount; c++) {
      const v = cellVolumes[c]!;
      const d = [0, 1, 2].map((a) => cellCentroids[3 * c + a]! - centre[a]!);
      first.forEach((_, a) => {
        first[a]! += v * d[a]!;
      });
      // Parallel-axis theorem.
      pairs.forEach(([a, b], h) => {
        second[h]! += v * (widthTensors[6 * c + h]! / 12 + d[a]! * d[b]!);
      });
    }
    for (const v of first) expect(v).toBeCloseTo(0, 12);
    // Brick of 2 x 1 x 1.5: central second moments V a^2 / 12.
    const expected = [1, 0, 0, 0.25, 0, (3 * 1.5 ** 2) / 12];
    second.forEach((v, h) => {
      expect(v).toBeCloseTo(expected[h]!, 11);
    });
  });
});

describe('special cells', () => {
  it('regular tetrahedron: volume a^3 / (6 sqrt 2), second moment V a^2 / 40', () => {
    // Inertia of a regular tetrahedron about its centroid m a^2 / 20 (standard tables) = twice the second moment.
    const mesh = buildMesh(
      makeDataset([1, 1, 1, 1, -1, -1, -1, 1, -1, -1, -1, 1], {
        types: Uint8Array.of(10),
        offsets: Int32Array.of(0, 4),
        connectivity: Int32Array.of(0, 2, 1, 3),
      }),
    );
    const g = measureMesh(mesh);
    const a = 2 * Math.SQRT2;
    expect(Math.abs(g.cellVolumes[0]!)).toBeCloseTo(a ** 3 / (6 * Math.SQRT2), 13);
    for (const h of [0, 3, 5]) expect(g.widthTensors[h]!).toBeCloseTo((12 * a * a) / 40, 13);
    for (const h of [1, 2, 4]) expect(g.widthTensors[h]!).toBeCloseTo(0, 13);
  });

  it('quadratic cells by their corners, prisms of five and six sides', () => {
    const hex = hexBox(2, 2, 2);
    const cells = hex.cells!;
    // Twelve points more a cell: any, they play no part.
    const connectivity: number[] = [];
    for (let c = 0; c < 8; c++) {
      connectivity.push(...cells.connectivity.subarray(8 * c, 8 * c + 8), ...new Array<number>(12).fill(0));
    }
    const quadratic = makeDataset(hex.points, {
      types: new Uint8Array(8).fill(25),
      offsets: Int32Array.from({ length: 9 }, (_, i) => 20 * i),
      connectivity: Int32Array.from(connectivity),
    });
    expect(buildMesh(quadratic).innerFaceCount).toBe(12);
    for (const [type, n] of [
      [15, 5],
      [16, 6],
    ] as const) {
      const points = [0, 1].flatMap((z) =>
        Array.from({ length: n }, (_, i) => [
          Math.cos((2 * Math.PI * i) / n),
          Math.sin((2 * Math.PI * i) / n),
          z,
        ]).flat(),
      );
      const mesh = buildMesh(
        makeDataset(points, {
          types: Uint8Array.of(type),
          offsets: Int32Array.of(0, 2 * n),
          connectivity: Int32Array.from({ length: 2 * n }, (_, i) => i),
        }),
      );
      const g = measureMesh(mesh);
      // Regular polygon in the unit circle: area n / 2 sin(2 pi / n).
      expect(g.cellVolumes[0]!).toBeCloseTo((n / 2) * Math.sin((2 * Math.PI) / n), 13);
    }
  });

  it('both orders of wedge points are wedges', () => {
    const points = [0, 0, 0, 1, 0, 0, 0, 1, 0, 0, 0, 1, 1, 0, 1, 0, 1, 1];
    for (const order of [
      [0, 1, 2, 3, 4, 5],
      [3, 4, 5, 0, 1, 2],
    ]) {
      const cells = { types: Uint8Array.of(13), offsets: Int32Array.of(0, 6), connectivity: Int32Array.from(order) };
      expect(measureMesh(buildMesh(makeDataset(points, cells))).cellVolumes[0]!).toBeCloseTo(0.5, 14);
    }
  });

  it('a hexahedron with collapsed edges is the wedge it looks like', () => {
    const points = [0, 0, 0, 1, 0, 0, 0, 1, 0, 0, 0, 1, 1, 0, 1, 0, 1, 1];
    const mesh = buildMesh(
      makeDataset(points, {
        types: Uint8Array.of(12),
        offsets: Int32Array.of(0, 8),
        connectivity: Int32Array.of(0, 1, 2, 2, 3, 4, 5, 5),
      }),
    );
    expect(mesh.faceCount).toBe(5);
    expect(measureMesh(mesh).cellVolumes[0]!).toBeCloseTo(0.5, 14);
  });

  it('a left-handed structured zone is turned, a single inverted cell is named', () => {
    const hex = hexBox(3, 3, 3);
    const mirrored = makeDataset(
      hex.points.map((v, i) => (i % 3 === 0 ? -v : v)),
      hex.cells,
    );
    const mesh = buildMesh(mirrored);
    requirePositiveVolumes(mesh, measureMesh(mesh), 'mirrored.vtu');
    const connectivity = hex.cells!.connectivity.slice();
    for (let i = 0; i < 4; i++) {
      const held = connectivity[8 * 13 + i]!;
      connectivity[8 * 13 + i] = connectivity[8 * 13 + 4 + i]!;
      connectivity[8 * 13 + 4 + i] = held;
    }
    expect(() => buildMesh(makeDataset(hex.points, { ...hex.cells!, connectivity }))).toThrow(
      'test.vtu, cell 13: 1 of 27 cells has zero or negative volume',
    );
    const flat = hexBox(2, 1, 1, { map: (x, y, z) => [Math.min(x, 0.5), y, z] });
    const thin = buildMesh(flat);
    expect(() => requirePositiveVolumes(thin, measureMesh(thin), 'flat.vtu')).toThrow(/cell 1: 1 of 2 cells has zero/);
  });
});

describe('joints, patches and errors', () => {
  it('welds coincident points of two zones to rounding', () => {
    const left = hexBox(3, 4, 2);
    const right = hexBox(2, 4, 2, { origin: [1 + 3e-11, 0, 0] });
    const shift = left.points.length / 3;
    const cells = {
      types: new Uint8Array([...left.cells!.types, ...right.cells!.types]),
      offsets: Int32Array.from({ length: 24 + 16 + 1 }, (_, i) => 8 * i),
      connectivity: Int32Array.from([...left.cells!.connectivity, ...right.cells!.connectivity.map((p) => p + shift)]),
    };
    const points = [...left.points, ...right.points];
    const zone = (name: string, pointBegin: number, pointEnd: number, cellBegin: number, cellEnd: number) => ({
      name,
      pointBegin,
      pointEnd,
      cellBegin,
      cellEnd,
    });
    const two = makeDataset(points, cells, {
      zones: [zone('left', 0, shift, 0, 24), zone('right', shift, points.length / 3, 24, 40)],
    });
    const one = makeDataset(points, cells);
    // 5 x 4 x 2 bricks: 4*8 + 5*3*2 + 5*4 inner faces; without the weld the 8 at the joint are missing.
    expect(buildMesh(two).innerFaceCount).toBe(32 + 30 + 20);
    expect(buildMesh(one).innerFaceCount).toBe(32 + 30 + 20 - 8);
  });

  it('takes patches from named boundaries and from 2-D cells', () => {
    const step = stepChannel(4, 2);
    const mesh = buildMesh(step);
    const size = (name: string): number => mesh.patches.find((p) => p.name === name)!.faces.length;
    expect(size('inflow')).toBe(2 * 2);
    expect(size('outflow')).toBe(4 * 2);
    expect(mesh.patches.find((p) => p.name === 'wall')!.kind).toBe('wall');
    expect(size('wall') + size('inflow') + size('outflow') + size('side')).toBe(mesh.faceCount - mesh.innerFaceCount);
    for (const p of mesh.patches) for (const f of p.faces) expect(f).toBeGreaterThanOrEqual(mesh.innerFaceCount);

    const hex = hexBox(1, 1, 1);
    const withQuad = makeDataset(hex.points, {
      types: Uint8Array.of(9, 12, 3),
      offsets: Int32Array.of(0, 4, 12, 14),
      connectivity: Int32Array.of(0, 1, 3, 2, ...hex.cells!.connectivity, 0, 1),
    });
    const small = buildMesh(withQuad);
    expect([...small.datasetCell]).toEqual([1]);
    expect(small.patches[0]!.name).toBe('zone surface');
    expect(small.patches[0]!.faces.length).toBe(1);
  });

  it('a bend has the volume of its polygonal sections', () => {
    const mesh = buildMesh(bendChannel(6, 3, 2));
    const total = measureMesh(mesh).cellVolumes.reduce((s, v) => s + v, 0);
    // Sector of n chords: (R^2 - r^2) / 2 n sin(pi / 2n).
    expect(total).toBeCloseTo(((4 - 1) / 2) * 6 * Math.sin(Math.PI / 12), 12);
  });

  it('names cells that share a face three times, missing points, unknown types, and meshes without volume', () => {
    const hex = hexBox(2, 1, 1);
    const c = hex.cells!;
    const thrice = makeDataset([...hex.points, 0.5, -1, 0, 0.5, -1, 1], {
      types: Uint8Array.of(12, 12, 13),
      offsets: Int32Array.of(0, 8, 16, 22),
      connectivity: Int32Array.of(...c.connectivity, 1, 4, 12, 7, 10, 13),
    });
    expect(() => buildMesh(thrice)).toThrow(/three cells meet at one face/);
    expect(() => buildMesh(makeDataset(hex.points, { ...c, connectivity: c.connectivity.map((p) => p + 1) }))).toThrow(
      /point 12 does not exist/,
    );
    expect(() => buildMesh(makeDataset(hex.points, { ...c, types: Uint8Array.of(12, 99) }))).toThrow(/type 99/);
    expect(() => buildMesh(makeDataset(hex.points))).toThrow(InputError);
    expect(() => buildMesh(makeDataset(hex.points, { ...c, types: Uint8Array.of(8, 8) }))).toThrow(/no volume cells/);
  });
});
