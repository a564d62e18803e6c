// Transfer between meshes of hexahedra: node tests/bench/cell-transfer.mjs [n] [dist]
import { resolve } from 'node:path';
import { performance } from 'node:perf_hooks';
import { pathToFileURL } from 'node:url';

const n = Number(process.argv[2] ?? 50);
const dist = resolve(process.argv[3] ?? 'dist');
const load = (path) => import(pathToFileURL(`${dist}/${path}`).href);
const { structuredPoints, structuredCells } = await load('mesh/structured.js');
const { buildMesh } = await load('mesh/build.js');
const { measureMesh } = await load('mesh/geometry.js');
const { prepareCellLinear, cellLinearRange } = await load('transfer/cell-linear.js');
const { prepareConservative, conservativeRange } = await load('transfer/conservative.js');

function box(m, bend) {
  const structure = { kind: 'image', extent: [0, m, 0, m, 0, m], spacing: [1 / m, 1 / m, 1 / m] };
  const points = structuredPoints(structure);
  // A smooth map of the box onto itself that warps all faces.
  for (let i = 0; i < points.length; i += 3) {
    const [x, y, z] = [points[i], points[i + 1], points[i + 2]];
    const s = bend * Math.sin(Math.PI * x) * Math.sin(Math.PI * y) * Math.sin(Math.PI * z);
    points[i] = x + s;
    points[i + 1] = y - s;
  }
  const cells = structuredCells(structure);
  const mesh = buildMesh({ file: 'box', points, pointType: 'Float64', cells, zones: [], boundaries: [] });
  return { mesh, geometry: measureMesh(mesh) };
}

function timed(what, count, work) {
  const start = performance.now();
  const result = work();
  const seconds = (performance.now() - start) / 1000;
  process.stdout.write(
    `${what.padEnd(44)} ${seconds.toFixed(2)} s, ${((1e6 * seconds) / count).toFixed(2)} us a cell\n`,
  );
  return result;
}

for (const [name, bendSource, bendTarget] of [
  ['plane faces', 0, 0],
  ['warped target', 0, 0.05],
  ['both warped', 0.05, -0.05],
]) {
  const source = box(n, bendSource);
  const target = box(Math.round(1.3 * n), bendTarget);
  const count = target.mesh.cellCount;
  const values = new Float64Array(3 * source.mesh.cellCount).map((_, i) => Math.sin(i));
  const fields = [{ components: 3, values }];
  const out = {
    fields: [new Float64Array(3 * count)],
    outside: new Uint8Array(count),
    distance: new Float64Array(count),
    covered: new Float64Array(count),
  };
  const sources = source.mesh.cellCount;
  const linear = timed(`${name}: linear, preparing (source cells)`, sources, () =>
    prepareCellLinear(source.mesh, source.geometry, fields),
  );
  timed(`${name}: linear`, count, () => cellLinearRange(linear, target.geometry.cellCentroids, 0, count, out));
  const plan = timed(`${name}: conservative, preparing`, count, () => prepareConservative(source, target, fields));
  const some = Math.min(count, 20_000);
  timed(`${name}: conservative`, some, () => conservativeRange(plan, count - some, count, out));
}
