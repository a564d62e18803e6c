// What both samples need to write meshes: the data set that eddygraft's own writer takes.
import { mkdirSync } from 'node:fs';
import { dirname } from 'node:path';
import { writeDataset } from '../dist/formats/registry.js';

export const vtk = { triangle: 5, quad: 9, hexahedron: 12, wedge: 13 };

/** A data set from points (x y z interleaved) and cells ([type, ...points]). */
export function meshOf(points, cells) {
  const offsets = new Int32Array(cells.length + 1);
  cells.forEach((cell, at) => {
    offsets[at + 1] = offsets[at] + cell.length - 1;
  });
  const connectivity = new Int32Array(offsets[cells.length]);
  cells.forEach((cell, at) => {
    connectivity.set(cell.slice(1), offsets[at]);
  });
  return {
    file: '',
    format: 'vtu',
    points: Float64Array.from(points),
    pointType: 'Float64',
    cells: { types: Uint8Array.from(cells, (cell) => cell[0]), offsets, connectivity },
    pointArrays: [],
    cellArrays: [],
    zones: [],
    boundaries: [],
    missingAxes: [],
    notes: new Map(),
    remarks: [],
  };
}

/** One array on cells. */
export function cellArray(name, values, components = 1) {
  const stored = Float64Array.from(values);
  return { name, components, tuples: stored.length / components, type: 'Float64', load: () => stored };
}

export async function writeMesh(path, mesh, cellArrays = []) {
  mkdirSync(dirname(path), { recursive: true });
  await writeDataset(path, { mesh, cellArrays, pointArrays: [], notes: new Map() });
}

/** A plane mesh drawn out along z in equal layers: triangles become prisms, quadrilaterals hexahedra. */
export function extrude(points2d, cells2d, depth, layers) {
  const perLayer = points2d.length / 2;
  const points = new Float64Array(perLayer * (layers + 1) * 3);
  for (let layer = 0; layer <= layers; layer++) {
    for (let p = 0; p < perLayer; p++) {
      points.set([points2d[2 * p], points2d[2 * p + 1], (depth * layer) / layers], 3 * (layer * perLayer + p));
    }
  }
  const cells = [];
  for (let layer = 0; layer < layers; layer++) {
    const low = layer * perLayer;
    for (const corners of cells2d) {
      const bottom = corners.map((p) => low + p);
      const top = bottom.map((p) => p + perLayer);
      // The base of a wedge runs the other way round than that of a hexahedron.
      if (corners.length === 4) cells.push([vtk.hexahedron, ...bottom, ...top]);
      else cells.push([vtk.wedge, bottom[0], bottom[2], bottom[1], top[0], top[2], top[1]]);
    }
  }
  return meshOf(points, cells);
}
