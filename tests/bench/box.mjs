// Homogeneous turbulence in a periodic N^3 box: recovered k over ten seeds without calibration, K.a of the modes, and the
// divergence by interpolated faces. usage: node tests/bench/box.mjs [N]

const n = Number(process.argv[2] ?? 64);
const e = await import('../../dist/index.js');
const structure = { kind: 'image', extent: [0, n, 0, n, 0, n], spacing: [1 / n, 1 / n, 1 / n] };
const { structuredPoints, structuredCells } = await import('../../dist/mesh/structured.js');
const dataset = {
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
};
const mesh = e.buildMesh(dataset);
const geometry = e.measureMesh(mesh);
const periodic = e.matchPeriodic(mesh, geometry, ['x', 'y', 'z'], 'box');
const scales = e.localScales(
  { cells: mesh.cellCount, k: 1.5, epsilon: 1.5 ** 1.5 / 0.4, viscosity: 1e-5 },
  { spectrum: e.vonKarmanPao, subgrid: 'model', wallLengthFactor: 1.5 },
);
const op = e.createFaceOperator(mesh, geometry, { periodic });
const ratios = [];
let worstMode = 0;
let scaled = 0;
for (let seed = 1; seed <= 10; seed += 1) {
  const plan = e.prepareFluctuations({
    mesh,
    geometry,
    periodic,
    scales,
    options: { seed, shells: 40, directions: 16, wavelengthCells: 3, spectrum: e.vonKarmanPao, grade: 'potential' },
  });
  e.weighRange(plan, 0, mesh.cellCount);
  const out = { potential: new Float64Array(3 * mesh.cellCount), velocity: new Float64Array(3 * mesh.cellCount) };
  e.synthesiseRange(plan, 0, mesh.cellCount, out);
  let energy = 0;
  let wanted = 0;
  for (let c = 0; c < mesh.cellCount; c += 1) {
    energy += (out.velocity[3 * c] ** 2 + out.velocity[3 * c + 1] ** 2 + out.velocity[3 * c + 2] ** 2) / 2;
    wanted += plan.wanted[c];
  }
  ratios.push(energy / wanted);
  const { waveVectors, polarisations } = plan.modes;
  for (let m = 0; m < waveVectors.length; m += 3) {
    const product = [0, 1, 2].reduce((sum, i) => sum + waveVectors[m + i] * polarisations[m + i], 0);
    worstMode = Math.max(worstMode, Math.abs(product) / Math.hypot(...waveVectors.subarray(m, m + 3)));
  }
  const net = new Float64Array(mesh.cellCount);
  e.divergence(op, out.velocity, net);
  const rms = Math.sqrt((2 * energy) / (3 * mesh.cellCount));
  scaled += e.divergenceFigures(net, geometry.cellVolumes, geometry.cellCentroids, rms).scaledRms / 10;
}
const mean = ratios.reduce((a, b) => a + b, 0) / ratios.length;
console.log(
  `${n}^3, 640 modes, 10 seeds: recovered over wanted k, mean ${mean.toFixed(4)}, each ${ratios.map((r) => r.toFixed(3)).join(' ')}`,
);
console.log(
  `largest |K.a| / |K| of the modes (divergence of the sum over its gradient): ${worstMode.toExponential(1)}`,
);
console.log(`scaled rms divergence by interpolated faces, mean: ${scaled.toFixed(4)}`);
