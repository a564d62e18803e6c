// Projection of white noise on warped, wall-stretched hexahedra, walls in y, periodic in x and z: iterations and times.
// node tests/bench/projection.mjs [n,n,...] [dist]
import { resolve } from 'node:path';
import { performance } from 'node:perf_hooks';
import { pathToFileURL } from 'node:url';

const sizes = (process.argv[2] ?? '32,64,128').split(',').map(Number);
const dist = resolve(process.argv[3] ?? 'dist');
const load = (path) => import(pathToFileURL(`${dist}/${path}`).href);
const { structuredPoints, structuredCells } = await load('mesh/structured.js');
const { buildMesh } = await load('mesh/build.js');
const { measureMesh } = await load('mesh/geometry.js');
const { matchPeriodic } = await load('mesh/periodic.js');
const { createFaceOperator, divergence } = await load('divergence/face-operator.js');
const { buildPreconditioner, project } = await load('divergence/projection.js');
const { componentRms, divergenceFigures } = await load('audit/divergence-figures.js');

/** Uniform numbers from -0.5 to 0.5 (Park & Miller 1988). */
let state = 1;
const draw = () => {
  state = (state * 16807) % 2147483647;
  return state / 2147483647 - 0.5;
};

function open(n) {
  const structure = { kind: 'image', extent: [0, n, 0, n, 0, n], spacing: [1 / n, 1 / n, 1 / n] };
  const points = structuredPoints(structure);
  for (let i = 0; i < points.length; i += 3) {
    const [x, y, z] = points.subarray(i, i + 3);
    // Waves of a few cells that vanish on the ends: faces warp, ends and walls stay planes.
    const wave = (s, cells) => Math.sin((2 * Math.PI * s * n) / cells);
    points[i] += (0.25 / n) * wave(x, 4) * wave(y, 8 / 3) * wave(z, 16 / 3);
    points[i + 2] += (0.25 / n) * wave(z, 4) * wave(x, 8 / 3) * wave(y, 16 / 3);
    points[i + 1] = 0.5 + Math.tanh(1.8 * (2 * y - 1)) / (2 * Math.tanh(1.8));
  }
  const mesh = buildMesh({
    file: 'box',
    format: 'vti',
    points,
    pointType: 'Float64',
    cells: structuredCells(structure),
    pointArrays: [],
    cellArrays: [],
    zones: [{ name: 'box', pointBegin: 0, pointEnd: points.length / 3, cellBegin: 0, cellEnd: n ** 3 }],
    boundaries: [],
    missingAxes: [],
    notes: new Map(),
    remarks: [],
  });
  const geometry = measureMesh(mesh);
  return { mesh, geometry };
}

process.stdout.write(
  '| cells | preconditioner, s | iterations for 1e-2, 1e-4, 1e-6 | projection, s | scaled rms before, after | energy lost |\n',
);
process.stdout.write('| --- | --- | --- | --- | --- | --- |\n');
for (const n of sizes) {
  const opened = open(n);
  const periodic = matchPeriodic(opened.mesh, opened.geometry, ['x', 'z']);
  const op = createFaceOperator(opened.mesh, opened.geometry, { periodic });
  const { cellVolumes, cellCentroids } = opened.geometry;
  const u = new Float64Array(3 * op.cellCount).map(draw);
  const scale = componentRms(u, cellVolumes);
  const net = new Float64Array(op.cellCount);
  const rms = (velocity) => {
    divergence(op, velocity, net);
    return divergenceFigures(net, cellVolumes, cellCentroids, scale).scaledRms;
  };
  const before = rms(u);
  const start = performance.now();
  const hierarchy = buildPreconditioner(op);
  const built = performance.now();
  const result = project(op, u, { tolerance: 1e-6, hierarchy });
  const end = performance.now();
  const at = (share) => result.history.findIndex((value) => value <= share) + 1;
  process.stdout.write(
    `| ${n}^3 | ${((built - start) / 1000).toFixed(2)} | ${at(1e-2)}, ${at(1e-4)}, ${at(1e-6)} | ${((end - built) / 1000).toFixed(2)} | ` +
      `${before.toFixed(2)}, ${rms(result.velocity).toExponential(1)} | ${(100 * (1 - result.energyAfter / result.energyBefore)).toFixed(1)} % |\n`,
  );
}
