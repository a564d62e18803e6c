// The method table of src/transfer/README.md: errors from analytic fields. usage: node tests/bench/transfer-table.mjs
const e = await import('../../dist/index.js');
const { structuredPoints, structuredCells } = await import('../../dist/mesh/structured.js');
const { randomStream } = await import('../../dist/basis/random.js');

// Franke's function in three dimensions (Renka 1988, ACM TOMS 14:139).
const franke = (x, y, z) =>
  0.75 * Math.exp(-((9 * x - 2) ** 2 + (9 * y - 2) ** 2 + (9 * z - 2) ** 2) / 4) +
  0.75 * Math.exp(-((9 * x + 1) ** 2) / 49 - (9 * y + 1) / 10 - (9 * z + 1) / 10) +
  0.5 * Math.exp(-((9 * x - 7) ** 2 + (9 * y - 3) ** 2 + (9 * z - 5) ** 2) / 4) -
  0.2 * Math.exp(-((9 * x - 4) ** 2) - (9 * y - 7) ** 2 - (9 * z - 5) ** 2);

function errors(found, wanted) {
  let squares = 0;
  let most = 0;
  found.forEach((value, i) => {
    const error = Math.abs(value - wanted[i]);
    squares += error * error;
    most = Math.max(most, error);
  });
  return { rms: Math.sqrt(squares / found.length), most };
}

function onCloud(points, values, targets, options) {
  const n = targets.length / 3;
  const out = { fields: [new Float64Array(n)], outside: new Uint8Array(n), distance: new Float64Array(n) };
  const plan = e.prepareCloudTransfer(points, options);
  e.cloudTransferRange(plan, [{ components: 1, values }], targets, 0, n, out);
  return out.fields[0];
}

const sampled = (points, f) =>
  Float64Array.from({ length: points.length / 3 }, (_, i) => f(points[3 * i], points[3 * i + 1], points[3 * i + 2]));
const short = (value) => value.toExponential(1);
const order = (rms, ratio) => rms.slice(1).map((value, i) => (Math.log(rms[i] / value) / Math.log(ratio)).toFixed(2));

console.log("\nFranke's function, random clouds, 20 000 targets in [0.05, 0.95]^3: rms / largest error\n");
console.log('| method | 1 000 | 8 000 | 64 000 | order |\n| --- | --- | --- | --- | --- |');
const draw = randomStream(1, 'table');
const targets = Float64Array.from({ length: 60000 }, () => 0.05 + 0.9 * draw());
const truth = sampled(targets, franke);
const clouds = [1000, 8000, 64000].map((n) => Float64Array.from({ length: 3 * n }, draw));
for (const method of ['nearest', 'inverse-distance', 'linear']) {
  const found = clouds.map((points) => errors(onCloud(points, sampled(points, franke), targets, { method }), truth));
  const rms = found.map((entry) => entry.rms);
  console.log(
    `| ${method} | ${found.map(({ rms: r, most }) => `${short(r)} / ${short(most)}`).join(' | ')} | ${order(rms, 2).join(', ')} |`,
  );
}

console.log(
  '\nBoundary layer, cells 1000 times longer than high, log law above the sublayer: error of the wall-adjacent cells\n',
);
{
  const friction = 0.05;
  const nu = 1.5e-5;
  const law = (y) => {
    const plus = (Math.abs(y) * friction) / nu;
    // Reichardt 1951, with kappa = 0.41.
    return (
      friction *
      (Math.log(1 + 0.41 * plus) / 0.41 + 7.8 * (1 - Math.exp(-plus / 11) - (plus / 11) * Math.exp(-0.33 * plus)))
    );
  };
  const own = [];
  const heights = Array.from({ length: 24 }, (_, j) => 1.2e-4 * (1.25 ** (j + 0.5) - 1 + 0.4));
  for (const y of heights) {
    for (let i = 0; i < 16; i += 1)
      for (let k = 0; k < 16; k += 1) own.push(0.12 * (i + draw() * 0.5), y, 0.12 * (k + draw() * 0.5));
  }
  const walls = [];
  for (let i = 0; i < 24; i += 1) for (let k = 0; k < 24; k += 1) walls.push(0.01 + 0.075 * i, 0, 0.01 + 0.075 * k);
  const aims = [];
  for (let i = 0; i < 2000; i += 1) aims.push(0.3 + 1.2 * draw(), 2e-5 + 2e-5 * draw(), 0.3 + 1.2 * draw());
  const all = Float64Array.from([...own, ...walls]);
  const at = Float64Array.from(aims);
  const profile = (_x, y) => law(y);
  const wanted = sampled(at, profile);
  const scale = Math.sqrt(wanted.reduce((sum, v) => sum + v * v, 0) / wanted.length);
  const relative = (points, options) =>
    errors(onCloud(points, sampled(points, profile), at, options), wanted).rms / scale;
  const inverse = relative(Float64Array.from(own), { method: 'inverse-distance' });
  const linear = relative(all, { method: 'linear', own: own.length / 3 });
  console.log('| method | rms error over rms value |\n| --- | --- |');
  console.log(`| inverse distance (8 neighbours, no wall points) | ${inverse.toPrecision(3)} |`);
  console.log(
    `| linear with wall points | ${linear.toPrecision(3)} (${(inverse / linear).toFixed(0)} times smaller) |`,
  );
}

console.log('\nHexahedra to hexahedra (non-nested, 17/13 of the source), four refinements: rms error of cell means\n');
console.log('| method | n = 8 | 16 | 32 | 48 | order |\n| --- | --- | --- | --- | --- | --- |');
function box(n, low, high) {
  const spacing = (high - low) / n;
  const structure = {
    kind: 'image',
    extent: [0, n, 0, n, 0, n],
    origin: [low, low, low],
    spacing: [spacing, spacing, spacing],
  };
  const mesh = e.buildMesh({
    file: 'box',
    format: 'vti',
    points: structuredPoints(structure),
    pointType: 'Float64',
    cells: structuredCells(structure),
    pointArrays: [],
    cellArrays: [],
    zones: [],
    boundaries: [],
    missingAxes: [],
    notes: new Map(),
    remarks: [],
  });
  return { mesh, geometry: e.measureMesh(mesh) };
}
const wave = (x, y, z) => Math.sin(4 * x) * Math.cos(3 * y) + Math.sin(5 * z);
// Exact means over bricks of the product of sines and cosines.
const meanOf = (c, h) => {
  const damp = (a) => Math.sin((a * h) / 2) / ((a * h) / 2);
  return Math.sin(4 * c[0]) * damp(4) * Math.cos(3 * c[1]) * damp(3) + Math.sin(5 * c[2]) * damp(5);
};
const means = (geometry, h) =>
  Float64Array.from({ length: geometry.cellVolumes.length }, (_, i) =>
    meanOf(geometry.cellCentroids.subarray(3 * i, 3 * i + 3), h),
  );
const sizes = [8, 16, 32, 48];
const rows = { 'cell values with slopes': [], 'conservative, first order': [], 'conservative with slopes': [] };
for (const n of sizes) {
  const source = box(n, 0, 1);
  const m = Math.round((n * 17) / 13);
  const [low, high] = [0.25, 0.75];
  const target = box(Math.max(4, Math.round(m / 2)), low, high);
  const count = target.mesh.cellCount;
  const field = { components: 1, values: means(source.geometry, 1 / n) };
  const h = (high - low) / Math.cbrt(count);
  const wanted = means(target.geometry, h);
  const out = () => ({
    fields: [new Float64Array(count)],
    outside: new Uint8Array(count),
    distance: new Float64Array(count),
    covered: new Float64Array(count),
  });
  const linear = out();
  e.cellLinearRange(
    e.prepareCellLinear(source.mesh, source.geometry, [field], { limited: false }),
    target.geometry.cellCentroids,
    0,
    count,
    linear,
  );
  rows['cell values with slopes'].push(errors(linear.fields[0], sampled(target.geometry.cellCentroids, wave)).rms);
  for (const [name, rank] of [
    ['conservative, first order', 1],
    ['conservative with slopes', 2],
  ]) {
    const found = out();
    e.conservativeRange(
      e.prepareConservative(source, target, [field], { order: rank, limited: false }),
      0,
      count,
      found,
    );
    rows[name].push(errors(found.fields[0], wanted).rms);
  }
}
for (const [name, rms] of Object.entries(rows)) {
  const orders = rms
    .slice(1)
    .map((value, i) => (Math.log(rms[i] / value) / Math.log(sizes[i + 1] / sizes[i])).toFixed(2));
  console.log(`| ${name} | ${rms.map(short).join(' | ')} | ${orders.join(', ')} |`);
}
