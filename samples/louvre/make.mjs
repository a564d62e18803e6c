// Makes the louvre sample: a plane section of an unsteady flow (precursor) and a mesh of the bay (target).
import { fileURLToPath } from 'node:url';
import { cellArray, extrude, meshOf, vtk, writeMesh } from '../mesh-file.mjs';
import { solveLouvre } from './flow.mjs';
import { bay } from './geometry.mjs';
import { planeMesh } from './mesh.mjs';

const layers = 12;

/** The cells of the coarse grid outside the slat, as quadrilaterals in the plane z = 0. */
function sectionMesh({ d, nx, ny, kept }) {
  const points = [];
  for (let i = 0; i <= nx; i++) {
    for (let j = 0; j <= ny; j++) points.push(bay.low[0] + i * d, bay.low[1] + j * d, 0);
  }
  const at = (i, j) => i * (ny + 1) + j;
  const cells = kept.map((c) => {
    const i = Math.floor(c / ny);
    const j = c % ny;
    return [vtk.quad, at(i, j), at(i + 1, j), at(i + 1, j + 1), at(i, j + 1)];
  });
  return meshOf(points, cells);
}

/** Shedding frequency from the upward crossings of the cross velocity in the second half of the history, Hz. */
function sheddingFrequency(history) {
  const crossings = [];
  for (let at = Math.floor(history.length / 2); at < history.length; at++) {
    const [t0, v0] = history[at - 1];
    const [t1, v1] = history[at];
    if (v0 < 0 && v1 >= 0) crossings.push(t0 + ((t1 - t0) * -v0) / (v1 - v0));
  }
  return crossings.length < 2 ? undefined : (crossings.length - 1) / (crossings.at(-1) - crossings[0]);
}

/** Writes both files and returns the mean k of the section and the shedding frequency. */
export async function makeLouvre() {
  const folder = fileURLToPath(new URL('./generated/', import.meta.url));
  const flow = solveLouvre();
  const { fields, history } = flow;
  await writeMesh(`${folder}section.vtu`, sectionMesh(flow), [
    cellArray('Velocity', fields.velocity, 3),
    cellArray('TurbulentEnergyKinetic', fields.k),
    cellArray('TurbulentDissipation', fields.epsilon),
  ]);
  const plane = planeMesh();
  const target = extrude(plane.points, plane.cells, bay.span, layers);
  await writeMesh(`${folder}target.vtu`, target);
  const meanK = fields.k.reduce((sum, value) => sum + value, 0) / fields.k.length;
  return { meanK, frequency: sheddingFrequency(history), cells: target.cells.types.length };
}
