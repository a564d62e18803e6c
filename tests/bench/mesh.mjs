// Building and measuring a mesh of n^3 hexahedra: node tests/bench/mesh.mjs [n] [dist]
import { resolve } from 'node:path';
import { performance } from 'node:perf_hooks';
import { pathToFileURL } from 'node:url';

const n = Number(process.argv[2] ?? 100);
const dist = resolve(process.argv[3] ?? 'dist');
const load = (path) => import(pathToFileURL(`${dist}/${path}`).href);
const { structuredPoints, structuredCells } = await load('mesh/structured.js');
const { buildMesh } = await load('mesh/build.js');
const { measureMesh } = await load('mesh/geometry.js');
const { matchPeriodic } = await load('mesh/periodic.js');
const { selectBoundaryFaces } = await load('mesh/selection.js');
const { wallDistance } = await load('mesh/wall-distance.js');
const { createGradient, applyGradient } = await load('mesh/gradient.js');

const structure = { kind: 'image', extent: [0, n, 0, n, 0, n], spacing: [1 / n, 1 / n, 1 / n] };
const timed = (what, work) => {
  const start = performance.now();
  const result = work();
  const seconds = (performance.now() - start) / 1000;
  const peak = process.resourceUsage().maxRSS / 1024 / 1024;
  process.stdout.write(`${what.padEnd(24)} ${seconds.toFixed(2)} s, ${peak.toFixed(2)} GiB at most\n`);
  return result;
};
const points = timed('points', () => structuredPoints(structure));
const cells = timed('cells', () => structuredCells(structure));
const zone = { name: 'box', pointBegin: 0, pointEnd: points.length / 3, cellBegin: 0, cellEnd: n ** 3 };
const dataset = {
  file: 'box',
  format: 'vti',
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
};
const mesh = timed('faces', () => buildMesh(dataset));
const geometry = timed('measures', () => measureMesh(mesh));
const pairs = timed('periodic pairs', () => matchPeriodic(mesh, geometry, ['x', 'z']));
const walls = timed('walls', () => selectBoundaryFaces(mesh, geometry, ['all'], { periodic: pairs }));
const distance = timed('wall distance', () => wallDistance(mesh, geometry, walls, pairs));
timed('gradient of a scalar', () => applyGradient(createGradient(mesh, geometry, pairs), distance, 1));
