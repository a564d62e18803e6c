// The main job on a large case: N^3-like channel target, a cloud precursor, 640 modes. Prints time and peak memory.
// usage: node tests/bench/whole-run.mjs [cells] [precursor points] [workers]
import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const [cells = 1_000_000, count = 200_000, workers = 2] = process.argv.slice(2).map(Number);
const root = fileURLToPath(new URL('../..', import.meta.url));
const { writeDataset } = await import('../../dist/formats/registry.js');
const folder = mkdtempSync(join(tmpdir(), 'eddygraft-whole-'));
const n = Math.round(Math.cbrt(cells));
const [lx, ly, lz] = [6, 2, 3];
const side = n + 1;
const points = new Float64Array(3 * side ** 3);
let at = 0;
for (let k = 0; k <= n; k += 1) {
  for (let j = 0; j <= n; j += 1) {
    for (let i = 0; i <= n; i += 1) {
      points[at++] = (lx * i) / n;
      points[at++] = 1 + Math.tanh(2 * ((2 * j) / n - 1)) / Math.tanh(2);
      points[at++] = (lz * k) / n;
    }
  }
}
const total = n ** 3;
const connectivity = new Int32Array(8 * total);
const offsets = new Int32Array(total + 1);
let c = 0;
for (let k = 0; k < n; k += 1) {
  for (let j = 0; j < n; j += 1) {
    for (let i = 0; i < n; i += 1) {
      const b = i + side * (j + side * k);
      const corner = [0, 1, side + 1, side];
      for (let v = 0; v < 4; v += 1) {
        connectivity[8 * c + v] = b + corner[v];
        connectivity[8 * c + v + 4] = b + corner[v] + side * side;
      }
      c += 1;
      offsets[c] = 8 * c;
    }
  }
}
const mesh = {
  file: 'target.vtu',
  format: 'vtu',
  points,
  pointType: 'Float64',
  pointArrays: [],
  cellArrays: [],
  boundaries: [],
  zones: [],
  missingAxes: [],
  notes: new Map(),
  remarks: [],
  cells: { types: new Uint8Array(total).fill(12), offsets, connectivity },
};
await writeDataset(join(folder, 'target.vtu'), { mesh, cellArrays: [], pointArrays: [], notes: new Map() });
// An invented channel-like cloud: mean velocity, k and epsilon that vary across the gap.
let seed = 1;
const random = () => {
  seed = (Math.imul(seed, 1664525) + 1013904223) >>> 0;
  return seed / 2 ** 32;
};
const rows = [
  'CoordinateX,CoordinateY,CoordinateZ,VelocityX,VelocityY,VelocityZ,TurbulentEnergyKinetic,TurbulentDissipation',
];
for (let p = 0; p < count; p += 1) {
  const [x, y, z] = [random() * lx, random() * ly, random() * lz];
  const d = Math.min(y, ly - y);
  const k = 3 * d * Math.exp(-2 * d) + 0.01;
  rows.push([x, y, z, 15 * (1 - (y - 1) ** 8), 0, 0, k, k ** 1.5 / Math.min(2.5 * d + 0.01, 0.7)].join());
}
writeFileSync(join(folder, 'cloud.csv'), `${rows.join('\n')}\n`);
writeFileSync(
  join(folder, 'case.yaml'),
  `title: whole run
precursor: { file: cloud.csv, constants: { ViscosityKinematic: 1.0e-3 } }
target: { file: target.vtu, walls: [{ plane: y, at: [0, 2] }], periodic: [x, z] }
fluctuations: { seed: 1 }
output: { file: start.vtu }
`,
);
const begin = performance.now();
const result = spawnSync(
  '/usr/bin/env',
  [
    'time',
    '-v',
    process.execPath,
    join(root, 'bin/eddygraft.js'),
    'run',
    join(folder, 'case.yaml'),
    '--workers',
    String(workers),
  ],
  { encoding: 'utf8' },
);
const seconds = (performance.now() - begin) / 1000;
const peak = /Maximum resident set size \(kbytes\): (\d+)/.exec(result.stderr)?.[1];
console.log(`${total} cells, ${count} points, ${workers} workers: ${seconds.toFixed(1)} s, exit ${result.status}`);
if (existsSync(join(folder, 'start.json'))) {
  const manifest = JSON.parse(readFileSync(join(folder, 'start.json'), 'utf8'));
  console.log(`report ${(statSync(join(folder, 'start.html')).size / 1e6).toFixed(2)} MB`);
  console.log(
    `peak memory ${((peak === undefined ? manifest.peakMemoryBytes : Number(peak) * 1024) / 2 ** 30).toFixed(2)} GiB`,
  );
  console.log(manifest.seconds, manifest.audit.energy, manifest.audit.divergence, manifest.projection);
} else {
  console.log(result.stdout, result.stderr);
}
rmSync(folder, { recursive: true, force: true });
