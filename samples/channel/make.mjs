// Makes the channel sample: a smooth mean profile (precursor) and a wall-stretched periodic mesh (target).
import { mkdirSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { meshOf, vtk, writeMesh } from '../mesh-file.mjs';
import { solveChannel } from './profile.mjs';

// Air between two plates 40 mm apart.
export const channel = { reynolds: 395, halfHeight: 0.02, viscosity: 1.5e-5, length: 0.12, span: 0.06 };
const counts = { x: 40, y: 48, z: 28 };
const stretch = 2.2;

function profileRows() {
  const { reynolds, halfHeight, viscosity } = channel;
  const friction = (reynolds * viscosity) / halfHeight;
  const { y, height, u, k, epsilon } = solveChannel(reynolds);
  const half = Array.from(y, (value, i) => ({
    y: (value / reynolds) * halfHeight,
    u: u[i] * friction,
    k: k[i] * friction ** 2,
    epsilon: (epsilon[i] * friction ** 4) / viscosity,
    share: height[i] / reynolds,
  }));
  const other = half.map((row) => ({ ...row, y: 2 * halfHeight - row.y })).reverse();
  return [...half, ...other];
}

function targetMesh() {
  const { halfHeight, length, span } = channel;
  const { x: nx, y: ny, z: nz } = counts;
  const level = (j) => halfHeight * (1 + Math.tanh(stretch * ((2 * j) / ny - 1)) / Math.tanh(stretch));
  const points = [];
  for (let l = 0; l <= nz; l++) {
    for (let j = 0; j <= ny; j++) {
      for (let i = 0; i <= nx; i++) points.push((length * i) / nx, level(j), (span * l) / nz);
    }
  }
  const at = (i, j, l) => (l * (ny + 1) + j) * (nx + 1) + i;
  const cells = [];
  for (let l = 0; l < nz; l++) {
    for (let j = 0; j < ny; j++) {
      for (let i = 0; i < nx; i++) {
        const square = (m) => [at(i, j, m), at(i + 1, j, m), at(i + 1, j + 1, m), at(i, j + 1, m)];
        cells.push([vtk.hexahedron, ...square(l), ...square(l + 1)]);
      }
    }
  }
  return meshOf(points, cells);
}

/** Writes both files and returns what the profile says: bulk velocity and mean k over the height. */
export async function makeChannel() {
  const folder = fileURLToPath(new URL('./generated/', import.meta.url));
  mkdirSync(folder, { recursive: true });
  const rows = profileRows();
  const lines = rows.map((row) => [row.y, row.u, row.k, row.epsilon].join(','));
  writeFileSync(
    `${folder}profile.csv`,
    `# channel sample, invented: k-omega solution at Re_tau ${channel.reynolds}\nCoordinateY [m],VelocityX [m/s],TurbulentEnergyKinetic [m2/s2],TurbulentDissipation [m2/s3]\n${lines.join('\n')}\n`,
  );
  await writeMesh(`${folder}target.vtu`, targetMesh());
  const mean = (key) => rows.reduce((sum, row) => sum + 0.5 * row.share * row[key], 0);
  return { bulkVelocity: mean('u'), meanK: mean('k'), cells: counts.x * counts.y * counts.z };
}
