import { describe, expect, it } from 'vitest';
import { buildMesh } from '../../src/mesh/build.js';
import type { CellMesh, MeshGeometry } from '../../src/mesh/cell-mesh.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { sliceMesh } from '../../src/report/slices.js';
import {
  bendChannel,
  brickPolyhedra,
  hexBox,
  mixedBox,
  polyBox,
  refinedBox,
  stepChannel,
  tetBox,
} from '../helpers/meshes.js';

/** How far a point lies outside of a cell with plane faces (0 inside). */
function outsideBy(mesh: CellMesh, geometry: MeshGeometry, cell: number, at: readonly number[]): number {
  let worst = 0;
  for (let i = mesh.cellFaceOffsets[cell]!; i < mesh.cellFaceOffsets[cell + 1]!; i++) {
    const face = mesh.cellFaces[i]!;
    const sign = mesh.owner[face] === cell ? 1 : -1;
    let area = 0;
    let distance = 0;
    for (let a = 0; a < 3; a++) {
      const s = sign * geometry.faceAreas[3 * face + a]!;
      area += s * s;
      distance += s * (at[a]! - geometry.faceCentroids[3 * face + a]!);
    }
    worst = Math.max(worst, distance / Math.sqrt(area));
  }
  return worst;
}

const meshes = {
  hexahedra: hexBox(7, 5, 3),
  tetrahedra: tetBox(4, 4, 3),
  'all cell types': mixedBox(8, 4, 3),
  polyhedra: polyBox(6, 6, 3),
  'bricks as polyhedra': brickPolyhedra(5, 4, 3),
  'hanging nodes': refinedBox(6, 4, 2),
  step: stepChannel(8, 3),
} as const;

describe.each(Object.entries(meshes))('slice of %s', (_name, dataset) => {
  const mesh = buildMesh(dataset);
  const geometry = measureMesh(mesh);

  it.each(['x', 'y', 'z'] as const)('across %s shows at each pixel the cell that holds it', (axis) => {
    const number = { x: 0, y: 1, z: 2 } as const;
    let low = Infinity;
    let high = -Infinity;
    for (let p = number[axis]; p < mesh.points.length; p += 3) {
      low = Math.min(low, mesh.points[p]!);
      high = Math.max(high, mesh.points[p]!);
    }
    const slice = sliceMesh(mesh, axis, low + 0.437 * (high - low), 90);
    let covered = 0;
    for (let row = 0; row < slice.height; row++) {
      for (let column = 0; column < slice.width; column++) {
        const cell = slice.cells[row * slice.width + column]!;
        if (cell < 0) continue;
        covered++;
        const at = [0, 0, 0];
        at[number[axis]] = slice.position;
        at[number[slice.axes[0]]] = slice.low[0] + ((column + 0.5) / slice.width) * (slice.high[0] - slice.low[0]);
        at[number[slice.axes[1]]] = slice.high[1] - ((row + 0.5) / slice.height) * (slice.high[1] - slice.low[1]);
        expect(outsideBy(mesh, geometry, cell, at)).toBeLessThan(1e-9);
      }
    }
    // Boxes are covered without a gap; behind the step a sixth of the box is missing from a slice along the channel.
    const share = covered / slice.cells.length;
    if (_name !== 'step') expect(share).toBe(1);
    else if (axis === 'z') expect(Math.abs(share - 5 / 6)).toBeLessThan(0.02);
  });
});

describe('slice of a bend', () => {
  it('leaves the corner outside the bend empty', () => {
    const mesh = buildMesh(bendChannel(24, 8, 3));
    const slice = sliceMesh(mesh, 'z', 0.4, 200);
    const share = slice.cells.filter((cell) => cell >= 0).length / slice.cells.length;
    // A quarter ring of radii 1 and 2 in its square of side 2: pi (4 - 1) / 4 / 4.
    expect(Math.abs(share - (3 * Math.PI) / 16)).toBeLessThan(0.01);
  });
});
