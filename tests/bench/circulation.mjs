// Seconds and closure of the circulation fluxes on n^3 warped hexahedra: node tests/bench/circulation.mjs [n] [dist]
import { performance } from 'node:perf_hooks';
import { loader, openBox, refined } from './box-mesh.mjs';

const n = Number(process.argv[2] ?? 64);
const load = loader(process.argv[3] ?? 'dist');
const { findEdges } = await load('divergence/edges.js');
const { edgeIntegrals, netFluxes, rimFluxes } = await load('divergence/circulation.js');
const { mesh } = await openBox(load, [n, n, n], [1, 1, 1], refined(2), 0.1);
const turn = 2 * Math.PI;
const potential = ({ points }, out) => {
  for (let i = 0; i < points.length; i += 3) {
    out[i] = Math.sin(turn * (points[i + 1] + 2 * points[i + 2]));
    out[i + 1] = Math.cos(turn * (points[i] + points[i + 2]));
    out[i + 2] = Math.sin(turn * (points[i] - points[i + 1]));
  }
};
const start = performance.now();
const edges = findEdges(mesh);
const middle = performance.now();
const fluxes = rimFluxes(mesh, edges, edgeIntegrals(mesh, edges, potential));
const end = performance.now();
const rms = Math.sqrt(fluxes.reduce((sum, v) => sum + v * v, 0) / fluxes.length);
const worst = netFluxes(mesh, fluxes).reduce((most, v) => Math.max(most, Math.abs(v)), 0);
process.stdout.write(
  `${n}^3: ${edges.count} edges in ${((middle - start) / 1000).toFixed(2)} s, fluxes in ${((end - middle) / 1000).toFixed(2)} s, ` +
    `largest net flux ${(worst / rms).toExponential(1)} of the rms flux\n`,
);
