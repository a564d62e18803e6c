// Iterations and seconds of the projection of white noise by six decades on n^3 hexahedra, periodic in x and z with
// walls across y: node tests/bench/projection.mjs [n,n,...] [dist]
import { performance } from 'node:perf_hooks';
import { loader, openBox, refined, straight, whiteNoise } from './box-mesh.mjs';

const sizes = (process.argv[2] ?? '32,64').split(',').map(Number);
const load = loader(process.argv[3] ?? 'dist');
const { createFaceOperator, divergence } = await load('divergence/face-operator.js');
const { buildPreconditioner, project } = await load('divergence/projection.js');
const { componentRms, divergenceFigures } = await load('audit/divergence-figures.js');

const kinds = [
  ['uniform', straight, 0],
  ['refined to the walls, warped 5 %', refined(2), 0.05],
  ['refined to the walls, warped 20 %', refined(2), 0.2],
];
process.stdout.write(
  '| cells | mesh | iterations | prepare, s | project, s | scaled divergence before | after | energy lost |\n',
);
process.stdout.write('| --- | --- | --- | --- | --- | --- | --- | --- |\n');
for (const n of sizes)
  for (const [name, across, warp] of kinds) {
    const { mesh, geometry, periodic } = await openBox(load, [n, n, n], [1, 1, 1], across, warp);
    const op = createFaceOperator(mesh, geometry, { periodic });
    const u = whiteNoise(3 * mesh.cellCount, 'noise');
    const start = performance.now();
    const hierarchy = buildPreconditioner(op);
    const middle = performance.now();
    const result = project(op, u, { hierarchy, tolerance: 1e-6 });
    const end = performance.now();
    const scale = componentRms(u, geometry.cellVolumes);
    const scaled = (velocity) => {
      const net = new Float64Array(mesh.cellCount);
      divergence(op, velocity, net);
      return divergenceFigures(net, geometry.cellVolumes, geometry.cellCentroids, scale).scaledRms;
    };
    const columns = [
      `${n}^3`,
      name,
      result.converged ? result.iterations : 'not converged',
      ((middle - start) / 1000).toFixed(2),
      ((end - middle) / 1000).toFixed(2),
      scaled(u).toFixed(2),
      scaled(result.velocity).toExponential(1),
      `${(100 * (1 - result.energyAfter / result.energyBefore)).toFixed(1)} %`,
    ];
    process.stdout.write(`| ${columns.join(' | ')} |\n`);
  }
