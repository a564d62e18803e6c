import { describe, expect, it } from 'vitest';
import { sampleSlice, sliceMesh, sliceOutline, tellingSlice, widestSlice } from '../../src/report/slices.js';
import { brickMesh, planes } from '../appraisal/brick.js';

describe('slices', () => {
  const { mesh, geometry } = brickMesh([0, 0.1, 0.3, 1, 2], planes(0, 1, 10), planes(0, 0.5, 3));

  it('paint every pixel with the cell whose brick holds it', () => {
    const slice = sliceMesh(mesh, 'z', 0.2, 200);
    expect([slice.width, slice.height]).toEqual([200, 100]);
    for (let row = 0; row < 100; row++) {
      for (let column = 0; column < 200; column++) {
        const x = ((column + 0.5) / 200) * 2;
        const y = 1 - (row + 0.5) / 100;
        const i = x < 0.1 ? 0 : x < 0.3 ? 1 : x < 1 ? 2 : 3;
        expect(slice.cells[row * 200 + column]).toBe(i + 4 * (Math.floor(y * 10) + 10 * 1));
      }
    }
  });

  it('cut each of the three axes, and a plane through a layer of points', () => {
    expect(sliceMesh(mesh, 'x', 0.5).axes).toEqual(['z', 'y']);
    expect(sliceMesh(mesh, 'y', 0.33).axes).toEqual(['x', 'z']);
    const layer = sliceMesh(mesh, 'y', 0.5, 64);
    expect(layer.cells.every((cell) => cell >= 0 && Math.floor(cell / 4) % 10 === 4)).toBe(true);
    expect(() => sliceMesh(mesh, 'z', 0.7)).toThrow('misses the mesh');
  });

  it('leave pixels outside the mesh empty', () => {
    // A triangular prism fills half of its bounding box.
    const prism = {
      points: Float64Array.from([0, 0, 0, 2, 0, 0, 0, 1, 0, 0, 0, 1, 2, 0, 1, 0, 1, 1]),
      cellCount: 1,
      faceCount: 5,
      innerFaceCount: 0,
      faceOffsets: Int32Array.from([0, 3, 6, 10, 14, 18]),
      facePoints: Int32Array.from([0, 2, 1, 3, 4, 5, 0, 1, 4, 3, 1, 2, 5, 4, 2, 0, 3, 5]),
      owner: new Int32Array(5),
      neighbour: new Int32Array(0),
      cellFaceOffsets: Int32Array.from([0, 5]),
      cellFaces: Int32Array.from([0, 1, 2, 3, 4]),
      datasetCell: Int32Array.from([0]),
      patches: [],
    };
    const slice = sliceMesh(prism, 'z', 0.4, 200);
    const covered = slice.cells.filter((cell) => cell === 0).length / slice.cells.length;
    expect(Math.abs(covered - 0.5)).toBeLessThan(0.01);
    const values = sampleSlice(slice, [7]);
    expect(values[199]).toBeNaN();
    expect(values[values.length - 200]).toBe(7);
    // Outline: the triangle's perimeter.
    const outline = sliceOutline(prism, slice);
    let length = 0;
    for (let i = 0; i < outline.length; i += 4) {
      length += Math.hypot(
        (outline[i + 2] as number) - (outline[i] as number),
        (outline[i + 3] as number) - (outline[i + 1] as number),
      );
    }
    expect(length).toBeCloseTo(2 + 1 + Math.sqrt(5), 5);
  });

  it('trace the whole boundary once', () => {
    const slice = sliceMesh(mesh, 'z', 0.2);
    const outline = sliceOutline(mesh, slice);
    let length = 0;
    for (let i = 0; i < outline.length; i += 4) {
      length += Math.hypot(
        (outline[i + 2] as number) - (outline[i] as number),
        (outline[i + 3] as number) - (outline[i + 1] as number),
      );
    }
    expect(length).toBeCloseTo(6, 5);
  });

  it('pick components and the shortest side', () => {
    const slice = sliceMesh(mesh, 'z', 0.2, 50);
    expect(sampleSlice(slice, geometry.cellCentroids, 3, 2)[10]).toBeCloseTo(0.25, 6);
    expect(widestSlice(mesh)).toEqual({ axis: 'z', position: 0.25 });
    // A channel profile along z: cut along the flow, not through the middle of the shortest side.
    const profile = Float64Array.from(
      { length: mesh.cellCount },
      (_, i) => geometry.cellCentroids[3 * i + 2] as number,
    );
    expect(tellingSlice(mesh, geometry.cellCentroids, profile)).toEqual({ axis: 'y', position: 0.5 });
  });
});
