// Iterations and seconds of the projection of white noise by six decades on n^3 hexahedra, periodic in x and z with
// walls across y: node tests/bench/projection.mjs [n,n,...] [dist]
import { resolve } from 'node:path';
import { performance } from 'node:perf_hooks';
import { pathToFileURL } from 'node:url';
import seedrandom from 'seedrandom';

const sizes = (process.argv[2] ?? '32,64').split(',').map(Number);
const dist = resolve(process.argv[3] ?? 'dist');
const load = (path) => import(pathToFileURL(`${dist}/${path}`).href);
const { structuredCells } = await load('mesh/structured.js');
const { buildMesh } = await load('mesh/build.js');
const { measureMesh } = await load('mesh/geometry.js');
const { matchPeriodic } = await load('mesh/periodic.js');
const { createFaceOperator, divergence } = await load('divergence/face-operator.js');
const { buildPreconditioner, project } = await load('divergence/projection.js');
const { componentRms, divergenceFigures } = await load('audit/divergence-figures.js');

const straight = (s) => s;
const refined = (s) => 0.5 + Math.tanh(2 * (2 * s - 1)) / (2 * Math.tanh(2));

/** Points of n^3 bricks; inner points move by at most `warp` of the spacing, alike at both ends of a period. */
function boxPoints(n, across, warp) {
  const draw = seedrandom('warp');
  const moves = Float64Array.from({ length: 3 * (n + 1) ** 3 }, () => warp * (2 * draw() - 1));
  const points = new Float64Array(moves.length);
  let at = 0;
  for (let k = 0; k <= n; k++)
    for (let j = 0; j <= n; j++)
      for (let i = 0; i <= n; i++) {
        const from = 3 * ((i % n) + (n + 1) * (j + (n + 1) * (k % n)));
        const place = (s, move, index, stretch) => {
          const spacing = stretch(Math.min(1, (index + 1) / n)) - stretch(index / n) || 1 / n;
          return stretch(s) + (index === 0 || index === n ? 0 : move * spacing);
        };
        points[at++] = place(i / n, moves[from], i, straight);
        points[at++] = place(j / n, moves[from + 1], j, across);
        points[at++] = place(k / n, moves[from + 2], k, straight);
      }
  return points;
}

function openBox(n, across, warp) {
  const structure = { kind: 'curvilinear', extent: [0, n, 0, n, 0, n] };
  const points = boxPoints(n, across, warp);
  const cells = structuredCells(structure);
  const zone = { name: 'box', pointBegin: 0, pointEnd: points.length / 3, cellBegin: 0, cellEnd: n ** 3 };
  const mesh = buildMesh({
    file: 'box',
    format: 'vts',
    points,
    pointType: 'Float64',
    cells,
    pointArrays: [],
    cellArrays: [],
    zones: [zone],
    boundaries: [],
    missingAxes: [],
    notes: new Map(),
    remarks: [],
  });
  const geometry = measureMesh(mesh);
  return { mesh, geometry, periodic: matchPeriodic(mesh, geometry, ['x', 'z'], 'box') };
}

function whiteNoise(length) {
  const draw = seedrandom('noise');
  return Float64Array.from({ length }, () => Math.sqrt(-2 * Math.log(1 - draw())) * Math.cos(2 * Math.PI * draw()));
}

const kinds = [
  ['uniform', straight, 0],
  ['refined to the walls, warped 5 %', refined, 0.05],
  ['refined to the walls, warped 20 %', refined, 0.2],
];
process.stdout.write(
  '| cells | mesh | iterations | prepare, s | project, s | scaled divergence before | after | energy lost |\n',
);
process.stdout.write('| --- | --- | --- | --- | --- | --- | --- | --- |\n');
for (const n of sizes)
  for (const [name, across, warp] of kinds) {
    const { mesh, geometry, periodic } = openBox(n, across, warp);
    const op = createFaceOperator(mesh, geometry, { periodic });
    const u = whiteNoise(3 * mesh.cellCount);
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
