// Boxes of hexahedra for the benches, built with the program's own mesh room.
import { resolve } from 'node:path';
import { pathToFileURL } from 'node:url';
import seedrandom from 'seedrandom';

/** Imports a module of the build. */
export const loader = (dist) => (path) => import(pathToFileURL(`${resolve(dist)}/${path}`).href);

export const straight = (s) => s;

/** Hyperbolic-tangent refinement to both ends. */
export const refined = (strength) => (s) => 0.5 + Math.tanh(strength * (2 * s - 1)) / (2 * Math.tanh(strength));

/** Points of bricks; inner points move by at most `warp` of the local spacing, alike at both ends of a period. */
function boxPoints([nx, ny, nz], lengths, across, warp) {
  const draw = seedrandom('warp');
  const moves = Float64Array.from({ length: 3 * (nx + 1) * (ny + 1) * (nz + 1) }, () => warp * (2 * draw() - 1));
  const points = new Float64Array(moves.length);
  const place = (index, n, move, stretch) => {
    if (index === 0 || index === n) return stretch(index / n);
    // The smaller of both neighbouring spacings, so that no cell turns over.
    const here = stretch(index / n);
    const spacing = Math.min(stretch((index + 1) / n) - here, here - stretch((index - 1) / n));
    return here + move * spacing;
  };
  let at = 0;
  for (let k = 0; k <= nz; k++)
    for (let j = 0; j <= ny; j++)
      for (let i = 0; i <= nx; i++) {
        const from = 3 * ((i % nx) + (nx + 1) * (j + (ny + 1) * (k % nz)));
        points[at++] = lengths[0] * place(i, nx, moves[from], straight);
        points[at++] = lengths[1] * place(j, ny, moves[from + 1], across);
        points[at++] = lengths[2] * place(k, nz, moves[from + 2], straight);
      }
  return points;
}

/** A measured box, periodic in x and z, x fastest. */
export async function openBox(load, counts, lengths, across, warp) {
  const { structuredCells } = await load('mesh/structured.js');
  const { buildMesh } = await load('mesh/build.js');
  const { measureMesh } = await load('mesh/geometry.js');
  const { matchPeriodic } = await load('mesh/periodic.js');
  const [nx, ny, nz] = counts;
  const points = boxPoints(counts, lengths, across, warp);
  const mesh = buildMesh({
    file: 'box',
    format: 'vts',
    points,
    pointType: 'Float64',
    cells: structuredCells({ kind: 'curvilinear', extent: [0, nx, 0, ny, 0, nz] }),
    pointArrays: [],
    cellArrays: [],
    zones: [{ name: 'box', pointBegin: 0, pointEnd: points.length / 3, cellBegin: 0, cellEnd: nx * ny * nz }],
    boundaries: [],
    missingAxes: [],
    notes: new Map(),
    remarks: [],
  });
  const geometry = measureMesh(mesh);
  return { mesh, geometry, periodic: matchPeriodic(mesh, geometry, ['x', 'z'], 'box') };
}

/** Normal numbers, mean 0, variance 1. */
export function whiteNoise(length, seed) {
  const draw = seedrandom(seed);
  return Float64Array.from({ length }, () => Math.sqrt(-2 * Math.log(1 - draw())) * Math.cos(2 * Math.PI * draw()));
}
