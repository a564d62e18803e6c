// Time and size of a run page for a mesh of 100 x 100 x 100 hexahedra with eight pictures.
// By hand, after a build: node tests/bench/report-million.mjs

import { weightedHistogram } from '../../dist/appraisal/histogram.js';
import { planMonitors } from '../../dist/appraisal/monitors.js';
import { worstRegions } from '../../dist/appraisal/regions.js';
import { appraiseResolution } from '../../dist/appraisal/resolution.js';
import { courantRates, fluctuationRates, planRun } from '../../dist/appraisal/run-plan.js';
import { buildMesh } from '../../dist/mesh/build.js';
import { measureMesh } from '../../dist/mesh/geometry.js';
import { gridRatioPicture, sharePicture, slicePicture } from '../../dist/report/figures.js';
import { renderReport } from '../../dist/report/render.js';
import { runReport } from '../../dist/report/run-report.js';
import { sampleSlice, sliceMesh, sliceOutline } from '../../dist/report/slices.js';

const n = Number(process.argv[2] ?? 100);
const lines = [];
let last = performance.now();
const lap = (name) => {
  const now = performance.now();
  lines.push([name, ((now - last) / 1000).toFixed(2)]);
  last = performance.now();
};

const p = n + 1;
const points = new Float64Array(3 * p ** 3);
for (let k = 0, at = 0; k < p; k++) {
  for (let j = 0; j < p; j++) {
    for (let i = 0; i < p; i++, at += 3) {
      points[at] = (2 * i) / n + 0.002 * Math.sin(j + k);
      points[at + 1] = j / n + 0.002 * Math.sin(i + 2 * k);
      points[at + 2] = k / n;
    }
  }
}
const connectivity = new Int32Array(8 * n ** 3);
for (let k = 0, at = 0; k < n; k++) {
  for (let j = 0; j < n; j++) {
    for (let i = 0; i < n; i++, at += 8) {
      const a = i + p * (j + p * k);
      connectivity.set([a, a + 1, a + 1 + p, a + p, a + p * p, a + 1 + p * p, a + 1 + p + p * p, a + p + p * p], at);
    }
  }
}
const count = n ** 3;
const mesh = buildMesh({
  file: 'bench',
  format: 'vtu',
  points,
  pointType: 'Float64',
  cells: {
    types: new Uint8Array(count).fill(12),
    offsets: Int32Array.from({ length: count + 1 }, (_, i) => 8 * i),
    connectivity,
  },
  pointArrays: [],
  cellArrays: [],
  zones: [],
  boundaries: [],
  missingAxes: [],
  notes: new Map(),
  remarks: [],
});
const geometry = measureMesh(mesh);
const x = geometry.cellCentroids;
const k = Float64Array.from({ length: count }, (_, i) => 0.05 + Math.exp(-(((x[3 * i + 1] - 0.5) / 0.1) ** 2)));
const epsilon = k.map((v) => v ** 1.5 / 0.1);
const velocity = new Float64Array(3 * count);
for (let i = 0; i < count; i++) {
  // Rough noise is the hardest case for the size of the pictures.
  const noise = () => Math.sqrt(k[i]) * (Math.random() - 0.5) * 3;
  velocity.set([10 + noise(), noise(), noise()], 3 * i);
}
lap('mesh and fields (not counted)');
const input = { volumes: geometry.cellVolumes, k, epsilon, nu: 1.5e-5 };
const fields = appraiseResolution(input);
lap('resolution of every cell');
worstRegions(input, fields, x);
lap('worst regions');
const rates = courantRates(mesh, geometry, velocity);
const plan = planRun({
  rates,
  fluctuationRates: fluctuationRates(geometry.widthTensors, k),
  centroids: x,
  volumes: geometry.cellVolumes,
  velocity,
  k,
  epsilon,
});
lap('run plan');
const monitors = planMonitors({
  centroids: x,
  velocity,
  k,
  epsilon,
  cellWidth: fields.cellWidth,
  shearRate: k,
  direction: plan.bulkDirection,
});
lap('monitor plan');
const slice = sliceMesh(mesh, 'z', 0.5);
const boundary = sliceOutline(mesh, slice);
lap('slice and outline');
const pictures = [
  gridRatioPicture(slice, sampleSlice(slice, fields.gridRatio), { boundary }),
  sharePicture(slice, sampleSlice(slice, fields.share), 0.8, { boundary }),
  ...[0, 1, 2, 0, 1, 2].map((c, i) =>
    slicePicture(slice, sampleSlice(slice, velocity, 3, c), {
      title: `component ${c}, picture ${i}`,
      quantity: 'Velocity',
      unit: 'm/s',
      ramp: i > 2 ? 'diverging' : 'sequential',
      boundary,
    }),
  ),
];
const html = renderReport(
  runReport({
    title: 'bench',
    checks: [],
    steps: [],
    audit: {
      cells: count,
      volume: 2,
      energy: { wanted: 1, resolvable: 1, recovered: 1, modelled: 0 },
      divergence: { after: { scaledRms: 1e-4, scaledP99: 1e-3, scaledMax: 1e-2 } },
      covariance: [1, 0, 0, 1, 0, 1],
      velocityMax: 12,
      timeStepForCourantOne: 1e-3,
    },
    divergenceAfter: weightedHistogram(k, geometry.cellVolumes, { scale: 'log' }),
    operator: 'bench',
    courant: { histogram: weightedHistogram(rates, undefined), timeStep: 1 },
    gridRatioHistogram: weightedHistogram(fields.gridRatio, geometry.cellVolumes, { scale: 'log' }),
    shareHistogram: weightedHistogram(fields.share, geometry.cellVolumes, { range: [0, 1] }),
    before: [],
    pictures,
    plan,
    monitors,
    assumptions: [],
    remarks: [],
    files: [],
    footer: [],
  }),
);
lap('page with eight pictures and three histograms');
for (const [name, seconds] of lines) console.log(`${name.padEnd(48)} ${seconds} s`);
console.log(`${'cells'.padEnd(48)} ${count}\n${'page'.padEnd(48)} ${(html.length / 1e6).toFixed(2)} MB`);
