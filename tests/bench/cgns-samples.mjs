// Both samples from CGNS files with named boundaries against the VTK ones: same start to rounding.
// usage: node samples/demo.mjs; node tests/bench/cgns-samples.mjs
import { spawnSync } from 'node:child_process';
import { readFileSync, rmSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

const e = await import('../../dist/index.js');
const root = fileURLToPath(new URL('../..', import.meta.url));
const run = (path) =>
  spawnSync(process.execPath, [`${root}bin/eddygraft.js`, 'run', path, '--overwrite', '--json'], { encoding: 'utf8' });

/** Boundary faces gathered by name. */
function named(dataset, nameOf) {
  const mesh = e.buildMesh(dataset);
  const geometry = e.measureMesh(mesh);
  const lists = new Map();
  for (let face = mesh.innerFaceCount; face < mesh.faceCount; face += 1) {
    const name = nameOf(...geometry.faceCentroids.subarray(3 * face, 3 * face + 3));
    if (name === undefined) continue;
    const list = lists.get(name) ?? { offsets: [0], points: [] };
    list.points.push(...mesh.facePoints.subarray(mesh.faceOffsets[face], mesh.faceOffsets[face + 1]));
    list.offsets.push(list.points.length);
    lists.set(name, list);
  }
  return [...lists].map(([name, { offsets, points }]) => ({
    name,
    kind: /wall|slat/.test(name) ? 'wall' : 'other',
    offsets: Int32Array.from(offsets),
    points: Int32Array.from(points),
  }));
}

const near = (a, b) => Math.abs(a - b) < 1e-7;
const samples = {
  channel: {
    nameOf: (x, y, z) =>
      near(y, 0) || near(y, 0.04)
        ? 'walls'
        : near(x, 0)
          ? 'west'
          : near(x, 0.12)
            ? 'east'
            : near(z, 0)
              ? 'back'
              : near(z, 0.06)
                ? 'front'
                : undefined,
    edit: (text) =>
      text
        .replace(/walls: .*\]/, 'walls: [walls]')
        .replace(/periodic: \[x, z\]/, 'periodic: [[west, east], [back, front]]'),
  },
  louvre: {
    nameOf: (x, y, z) => (near(z, 0) ? 'back' : near(z, 0.16) ? 'front' : Math.hypot(x, y) < 0.05 ? 'slat' : undefined),
    edit: (text) =>
      text.replace(/walls: .*\]/, 'walls: [slat]').replace(/periodic: \[z\]/, 'periodic: [[back, front]]'),
  },
};
for (const [sample, { nameOf, edit }] of Object.entries(samples)) {
  const folder = `${root}samples/${sample}`;
  const dataset = await e.readDataset(`${folder}/generated/target.vtu`);
  const withNames = { ...dataset, points: dataset.points, cells: dataset.cells, boundaries: named(dataset, nameOf) };
  await e.writeDataset(`${folder}/generated/target.cgns`, {
    mesh: withNames,
    cellArrays: [],
    pointArrays: [],
    notes: new Map(),
  });
  const text = readFileSync(`${folder}/case.yaml`, 'utf8');
  writeFileSync(
    `${folder}/cgns.yaml`,
    edit(text)
      .replace('target.vtu', 'target.cgns')
      .replace(/output: .*/, `output: { file: out/cgns.cgns, report: none }`),
  );
  const plain = run(`${folder}/case.yaml`);
  const cgns = run(`${folder}/cgns.yaml`);
  if (cgns.status !== 0 || plain.status !== 0) console.log(plain.stderr, cgns.stderr);
  // Sections of one type follow each other in a CGNS file: cells are matched by their centres.
  const load = async (path) => {
    const found = await e.readDataset(path);
    const { fields } = e.recogniseFields(found.cellArrays, { file: path });
    return { fields, centroids: e.datasetCentroids(found) };
  };
  const a = await load(`${folder}/out/${sample}-start.vtu`);
  const b = await load(`${folder}/out/cgns.cgns`);
  const tree = e.buildKdTree(b.centroids);
  const search = e.createKdSearch();
  const [index, squared] = [new Int32Array(1), new Float64Array(1)];
  const places = Int32Array.from({ length: a.centroids.length / 3 }, (_, i) => {
    const [x, y, z] = a.centroids.subarray(3 * i, 3 * i + 3);
    e.nearestNeighbours(tree, x, y, z, 1, index, squared, search);
    return index[0];
  });
  for (const name of ['Velocity', 'VelocityFluctuation', 'TurbulentEnergyKinetic', 'ResolvableShare']) {
    const one = a.fields.get(name).values;
    const { components } = a.fields.get(name);
    const unordered = b.fields.get(name).values;
    const other = one.map((_, i) => unordered[places[Math.floor(i / components)] * components + (i % components)]);
    const size = one.reduce((most, v) => Math.max(most, Math.abs(v)), 0);
    const difference = one.reduce((most, v, i) => Math.max(most, Math.abs(v - other[i])), 0);
    console.log(`${sample} ${name}: largest difference over largest value ${(difference / size).toExponential(1)}`);
  }
  for (const file of ['cgns.yaml', 'generated/target.cgns', 'out/cgns.cgns', 'out/cgns.json'])
    rmSync(`${folder}/${file}`, { force: true });
}
