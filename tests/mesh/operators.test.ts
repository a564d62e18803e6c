import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import { buildMesh } from '../../src/mesh/build.js';
import { axisWidths, cellWidths, widthAlong } from '../../src/mesh/cell-width.js';
import { datasetCentroids } from '../../src/mesh/centroids.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { applyGradient, createGradient } from '../../src/mesh/gradient.js';
import { matchPeriodic, matchPeriodicPatches } from '../../src/mesh/periodic.js';
import { selectBoundaryFaces } from '../../src/mesh/selection.js';
import { cellView, structuredCells, structuredPoints } from '../../src/mesh/structured.js';
import { faceTriangles, wallDistance } from '../../src/mesh/wall-distance.js';
import {
  bendChannel,
  hexBox,
  makeDataset,
  mixedBox,
  polyBox,
  prismBox,
  quadSheet,
  stepChannel,
  tetBox,
} from '../helpers/meshes.js';

const meshOf = (dataset: ReturnType<typeof hexBox>) => {
  const mesh = buildMesh(dataset);
  return { mesh, geometry: measureMesh(mesh) };
};

describe('gradient', () => {
  const kinds = [
    ['hexahedra', hexBox(5, 5, 5, { warp: 0.3 })],
    ['tetrahedra', tetBox(4, 4, 4, { warp: 0.3 })],
    ['prisms', prismBox(4, 3, 3, { warp: 0.3, seed: 'c' })],
    ['mixed', mixedBox(8, 4, 4, { warp: 0.3 })],
    ['honeycomb', polyBox(5, 5, 4, { warp: 0.3 })],
    ['flat hexahedra 1000:1', hexBox(5, 5, 5, { lengths: [1, 1e-3, 1] })],
    ['bend', bendChannel(8, 4, 3)],
    ['one tetrahedral layer', tetBox(3, 3, 1, { lengths: [1, 1, 0.1] })],
  ] as const;
  it.each(kinds)('%s: exact for linear fields in every cell', (_name, dataset) => {
    const { mesh, geometry } = meshOf(dataset);
    const a = [2, -3, 0.5];
    const b = [-1, 4, 7];
    const values = new Float64Array(2 * mesh.cellCount);
    for (let c = 0; c < mesh.cellCount; c++)
      for (let i = 0; i < 3; i++) {
        values[2 * c]! += a[i]! * geometry.cellCentroids[3 * c + i]!;
        values[2 * c + 1]! += b[i]! * geometry.cellCentroids[3 * c + i]!;
      }
    const g = applyGradient(createGradient(mesh, geometry), values, 2);
    for (let c = 0; c < mesh.cellCount; c++)
      for (let i = 0; i < 3; i++) {
        expect(g[6 * c + i]!).toBeCloseTo(a[i]!, 9);
        expect(g[6 * c + 3 + i]!).toBeCloseTo(b[i]!, 9);
      }
  });

  it('sees through periodic sides: central differences of a sine, (sin(x + h) - sin(x - h)) / 2h', () => {
    const n = 12;
    const { mesh, geometry } = meshOf(hexBox(n, 2, 1));
    const pairs = matchPeriodic(mesh, geometry, ['x', 'y', 'z']);
    const values = new Float64Array(mesh.cellCount);
    for (let c = 0; c < mesh.cellCount; c++) values[c] = Math.sin(2 * Math.PI * geometry.cellCentroids[3 * c]!);
    const g = applyGradient(createGradient(mesh, geometry, pairs), values, 1);
    for (let c = 0; c < mesh.cellCount; c++) {
      const exact = Math.sin((2 * Math.PI) / n) * n * Math.cos(2 * Math.PI * geometry.cellCentroids[3 * c]!);
      expect(g[3 * c]!).toBeCloseTo(exact, 12);
      expect(g[3 * c + 1]!).toBe(0);
      expect(g[3 * c + 2]!).toBe(0);
    }
  });

  it('is zero along the direction in which a mesh is one cell thick', () => {
    const { mesh, geometry } = meshOf(hexBox(4, 4, 1));
    const values = new Float64Array(mesh.cellCount);
    for (let c = 0; c < mesh.cellCount; c++) values[c] = 3 * geometry.cellCentroids[3 * c]!;
    const g = applyGradient(createGradient(mesh, geometry), values, 1);
    for (let c = 0; c < mesh.cellCount; c++) {
      expect(g[3 * c]!).toBeCloseTo(3, 12);
      expect(g[3 * c + 2]!).toBe(0);
    }
  });
});

describe('periodic pairs', () => {
  it.each([
    ['hexahedra', hexBox(4, 3, 5, { warp: 0.3, periodic: ['x', 'y', 'z'], lengths: [2, 1, 3] }), 12 + 20 + 15],
    ['tetrahedra', tetBox(3, 3, 3, { warp: 0.3, periodic: ['x', 'y', 'z'], lengths: [2, 1, 3] }), 3 * 18],
  ])('%s: all faces of all three axes', (_name, dataset, count) => {
    const { mesh, geometry } = meshOf(dataset);
    const pairs = matchPeriodic(mesh, geometry, ['x', 'y', 'z']);
    expect(pairs.periods).toEqual([
      [2, 0, 0],
      [0, 1, 0],
      [0, 0, 3],
    ]);
    expect(pairs.lowFaces.length).toBe(count);
    expect(new Set([...pairs.lowFaces, ...pairs.highFaces]).size).toBe(2 * count);
    for (let i = 0; i < count; i++)
      for (let a = 0; a < 3; a++) {
        const low = geometry.faceCentroids[3 * pairs.lowFaces[i]! + a]!;
        const high = geometry.faceCentroids[3 * pairs.highFaces[i]! + a]!;
        expect(high - low).toBeCloseTo(pairs.periods[pairs.periodOf[i]!]![a]!, 12);
      }
  });

  it('stands the rounding of single precision in thin cells', () => {
    const stretch = (s: number): number => Math.tanh(4 * s - 4) / Math.tanh(4) + 1;
    const box = hexBox(6, 24, 3, { lengths: [6, 1, 2], stretch: [(s) => s, stretch, (s) => s], origin: [0.1, 0.3, 0] });
    const rounded = makeDataset(box.points.map(Math.fround), box.cells);
    const { mesh, geometry } = meshOf(rounded);
    expect(matchPeriodic(mesh, geometry, ['x', 'z']).lowFaces.length).toBe(24 * 3 + 6 * 24);
  });

  it('counts the faces without a mate and says where', () => {
    const { mesh, geometry } = meshOf(stepChannel(4, 2));
    expect(() => matchPeriodic(mesh, geometry, ['x'], 'step.vtu')).toThrow(
      'step.vtu, periodic axis x: 0 of 4 faces on one periodic side and 4 of 8 on the other have no mate',
    );
    expect(matchPeriodic(mesh, geometry, ['z']).lowFaces.length).toBe(40);
    const warped = meshOf(tetBox(3, 3, 3, { warp: 0.3 }));
    expect(() => matchPeriodic(warped.mesh, warped.geometry, ['x'])).toThrow(/18 of 18 .* the first at 0 /);
    const bent = meshOf(bendChannel(4, 2, 2, { map: (s, r, z) => [s, r + s * s * (1 - s) ** 2, z + 0.1 * r * s] }));
    expect(() => matchPeriodic(bent.mesh, bent.geometry, ['z'])).toThrow(/no boundary faces lie on the plane z = /);
  });

  it('pairs named boundaries whichever comes first', () => {
    const name = (x: number): string | undefined => (x < 1e-9 ? 'left' : x > 2 - 1e-9 ? 'right' : undefined);
    const { mesh, geometry } = meshOf(hexBox(3, 2, 2, { lengths: [2, 1, 1], name }));
    for (const names of [
      ['left', 'right'],
      ['right', 'left'],
    ] as const) {
      const pairs = matchPeriodicPatches(mesh, geometry, [names]);
      expect(pairs.periods[0]![0]).toBeCloseTo(2, 14);
      expect(pairs.lowFaces.length).toBe(4);
    }
    expect(() => matchPeriodicPatches(mesh, geometry, [['left', 'top']])).toThrow(/its boundaries are left, right/);
  });
});

describe('selection of boundary faces', () => {
  const { mesh, geometry } = meshOf(stepChannel(4, 2));
  const pairs = matchPeriodic(mesh, geometry, ['z']);
  const size = (selections: Parameters<typeof selectBoundaryFaces>[2]): number =>
    selectBoundaryFaces(mesh, geometry, selections, { periodic: pairs }).length;

  it('by name, plane, box, surface and all', () => {
    expect(size(['inflow'])).toBe(4);
    expect(size([{ plane: 'y', at: [0, 1] }])).toBe(8 * 2 + 12 * 2);
    expect(size([{ plane: 'x', at: 1 }])).toBe(2 * 2);
    // The top of the step and its riser.
    expect(
      size([
        {
          box: [
            [-1, -1, -1],
            [1.01, 0.6, 2],
          ],
        },
      ]),
    ).toBe(4 * 2 + 2 * 2);
    const boundary = mesh.faceCount - mesh.innerFaceCount;
    expect(size(['all'])).toBe(boundary - 2 * pairs.lowFaces.length);
    expect(size(['inflow', 'wall', 'outflow', 'inflow'])).toBe(size(['all']));
    // The floor behind the step, as one triangle pair of a surface file that reaches beyond it.
    const surface = {
      points: Float64Array.of(1, 0, -1, 9, 0, -1, 9, 0, 5, 1, 0, 5),
      offsets: Int32Array.of(0, 4),
      connectivity: Int32Array.of(0, 1, 2, 3),
    };
    expect(size([{ surface }])).toBe(8 * 2);
  });

  it('says what is wrong with a selection that takes nothing', () => {
    expect(() => size(['floor'])).toThrow(/boundary floor: the mesh has no boundary of this name; its boundaries are/);
    expect(() => size([{ plane: 'y', at: 0.1 }])).toThrow(/the mesh reaches from y = 0 to 1/);
    expect(() =>
      size([
        {
          box: [
            [5, 5, 5],
            [6, 6, 6],
          ],
        },
      ]),
    ).toThrow(/no boundary face has its centre inside/);
  });
});

describe('wall distance', () => {
  it('equals the closed form between two plates and in a corner', () => {
    const { mesh, geometry } = meshOf(hexBox(6, 9, 4, { lengths: [2, 1, 1], warp: 0.2 }));
    const plates = wallDistance(mesh, geometry, selectBoundaryFaces(mesh, geometry, [{ plane: 'y', at: [0, 1] }]));
    for (let c = 0; c < mesh.cellCount; c++) {
      const y = geometry.cellCentroids[3 * c + 1]!;
      expect(plates[c]!).toBeCloseTo(Math.min(y, 1 - y), 13);
    }
  });

  it('equals brute force over sampled walls of a bend', () => {
    const { mesh, geometry } = meshOf(bendChannel(9, 4, 3));
    const walls = selectBoundaryFaces(mesh, geometry, ['wall']);
    const distance = wallDistance(mesh, geometry, walls);
    const triangles = faceTriangles(mesh, walls);
    // Points of a fine barycentric lattice on each triangle: never nearer than the true distance, and close to it.
    const m = 12;
    for (let c = 0; c < mesh.cellCount; c += 7) {
      let best = Infinity;
      for (let t = 0; t < triangles.length; t += 9)
        for (let i = 0; i <= m; i++)
          for (let j = 0; i + j <= m; j++) {
            let d2 = 0;
            for (let a = 0; a < 3; a++) {
              const p = ((m - i - j) * triangles[t + a]! + i * triangles[t + 3 + a]! + j * triangles[t + 6 + a]!) / m;
              d2 += (p - geometry.cellCentroids[3 * c + a]!) ** 2;
            }
            best = Math.min(best, d2);
          }
      expect(distance[c]!).toBeLessThanOrEqual(Math.sqrt(best) + 1e-14);
      expect(distance[c]!).toBeGreaterThan(Math.sqrt(best) - 0.01);
    }
  });

  it('looks across periods', () => {
    // A single wall face on the low-y side: the distance repeats with the period in x.
    const { mesh, geometry } = meshOf(hexBox(8, 4, 1, { lengths: [8, 4, 1] }));
    const pairs = matchPeriodic(mesh, geometry, ['x']);
    const wall = selectBoundaryFaces(mesh, geometry, [
      {
        box: [
          [0, -1, 0],
          [1, 0.1, 1],
        ],
      },
    ]).filter((f) => geometry.faceAreas[3 * f + 1]! < 0);
    const distance = wallDistance(mesh, geometry, wall, pairs);
    for (let c = 0; c < mesh.cellCount; c++) {
      const x = geometry.cellCentroids[3 * c]!;
      const y = geometry.cellCentroids[3 * c + 1]!;
      const dx = Math.min(...[x, x - 8].map((v) => Math.max(0, -v, v - 1)));
      expect(distance[c]!).toBeCloseTo(Math.hypot(dx, y), 13);
    }
  });

  it('is infinite without walls', () => {
    const { mesh, geometry } = meshOf(hexBox(2, 2, 2));
    expect(wallDistance(mesh, geometry, new Int32Array(0))[0]).toBe(Infinity);
  });
});

describe('widths and centroids', () => {
  it('widths of bricks are their edges', () => {
    const { geometry } = meshOf(hexBox(4, 5, 2, { lengths: [2, 1, 1.5] }));
    expect(cellWidths(geometry)[7]!).toBeCloseTo(Math.cbrt(0.5 * 0.2 * 0.75), 14);
    [0.5, 0.2, 0.75].forEach((w, a) => {
      expect(axisWidths(geometry)[a]!).toBeCloseTo(w, 13);
    });
    expect(widthAlong(geometry, 3, 0, 1, 0)).toBeCloseTo(0.2, 13);
    expect(widthAlong(geometry, 3, Math.SQRT1_2, Math.SQRT1_2, 0)).toBeCloseTo(Math.hypot(0.5, 0.2) * Math.SQRT1_2, 13);
  });

  it.each([
    ['mixed', mixedBox(8, 3, 3, { warp: 0.2 })],
    ['honeycomb', polyBox(4, 4, 2, { warp: 0.2 })],
  ])('%s: centroids of the data set are those of the mesh', (_name, dataset) => {
    const { geometry } = meshOf(dataset);
    const centroids = datasetCentroids(dataset);
    centroids.forEach((v, i) => {
      expect(v).toBeCloseTo(geometry.cellCentroids[i]!, 13);
    });
  });

  it('centroids of flat cells: quadrilaterals, an L-shaped polygon, a strip, pixels, lines, points', () => {
    const sheet = datasetCentroids(quadSheet(4, 2));
    expect([...sheet.subarray(0, 3)]).toEqual([0.125, 0.25, 0]);
    const points = [0, 0, 0, 2, 0, 0, 2, 1, 0, 1, 1, 0, 1, 2, 0, 0, 2, 0, 1, 0, 0, 0, 1, 0];
    const cells = makeDataset(points, {
      types: Uint8Array.of(7, 6, 8, 4, 1),
      offsets: Int32Array.of(0, 6, 10, 14, 17, 18),
      connectivity: Int32Array.of(0, 1, 2, 3, 4, 5, /**/ 0, 6, 7, 3, /**/ 0, 6, 7, 3, /**/ 0, 1, 2, /**/ 4),
    });
    const c = datasetCentroids(cells);
    // L of three unit squares: (5/6, 5/6).
    expect(c[0]!).toBeCloseTo(5 / 6, 14);
    expect(c[1]!).toBeCloseTo(5 / 6, 14);
    for (const i of [1, 2]) for (const a of [0, 1]) expect(c[3 * i + a]!).toBeCloseTo(0.5, 14);
    // Lines of length 2 and 1.
    expect(c[9]!).toBeCloseTo((2 * 1 + 1 * 2) / 3, 14);
    expect(c[10]!).toBeCloseTo((2 * 0 + 1 * 0.5) / 3, 14);
    expect([...c.subarray(12, 15)]).toEqual([1, 2, 0]);
  });

  it('structured grids: points, cells, views', () => {
    const structure = {
      kind: 'image' as const,
      extent: [2, 5, 0, 2, 0, 1] as const,
      origin: [1, 0, 0] as const,
      spacing: [0.5, 1, 2] as const,
    };
    const dataset = makeDataset(structuredPoints(structure), structuredCells(structure));
    expect([...dataset.points.subarray(0, 6)]).toEqual([2, 0, 0, 2.5, 0, 0]);
    const { mesh, geometry } = meshOf(dataset);
    expect(mesh.cellCount).toBe(6);
    expect(mesh.innerFaceCount).toBe(2 * 2 + 3);
    const view = cellView(geometry.cellVolumes, structure);
    expect(view.shape).toEqual([1, 2, 3]);
    expect(view.get(0, 1, 2)).toBeCloseTo(1, 14);
    const flat = structuredCells({ ...structure, extent: [0, 3, 0, 2, 0, 0] });
    expect([...flat.types]).toEqual(new Array(6).fill(9));
  });

  it('random triangles: nearest equals brute force over all of them', async () => {
    const { buildTriangleTree, createNearestTriangle, nearestTriangle } = await import(
      '../../src/spatial/triangle-tree.js'
    );
    const draw = seedrandom('triangles');
    const triangles = Float64Array.from({ length: 9 * 300 }, (_, i) => draw() + (i % 27 < 9 ? 0 : 0.3 * draw()));
    const whole = buildTriangleTree(triangles);
    const single = Array.from({ length: 300 }, (_, t) => buildTriangleTree(triangles.subarray(9 * t, 9 * t + 9)));
    const shared = createNearestTriangle();
    for (let q = 0; q < 300; q++) {
      const [x, y, z] = [2 * draw() - 0.5, 2 * draw() - 0.5, 2 * draw() - 0.5];
      nearestTriangle(whole, x, y, z, Infinity, shared);
      let best = Infinity;
      for (const tree of single) {
        const own = createNearestTriangle();
        nearestTriangle(tree, x, y, z, Infinity, own);
        best = Math.min(best, own.distance2);
      }
      expect(shared.distance2).toBe(best);
    }
  });
});
