// Reading and writing a CGNS file of N^3 hexahedra (default 216, ten million cells), with times, speeds against plain
// files of the same size, and peak memory of each step in a process of its own.
//
//   node tests/bench/cgns-large.mjs [N] [folder of the built library]
import { spawnSync } from 'node:child_process';
import { closeSync, fsyncSync, mkdtempSync, openSync, readSync, rmSync, statSync, writeSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

const side = Number(process.argv[2] ?? 216);
const library = resolve(process.argv[3] ?? fileURLToPath(new URL('../../dist', import.meta.url)));
const [step, folder] = process.argv.slice(4);
const cells = side ** 3;

function syncFile(path) {
  const file = openSync(path, 'r+');
  fsyncSync(file);
  closeSync(file);
}

/** An array that is made when it is asked for, as one from a file or a computation is. */
const lazy = (name, components) => ({
  name,
  components,
  tuples: cells,
  type: 'Float64',
  load: () => {
    const values = new Float64Array(components * cells);
    for (let i = 0; i < values.length; i++) values[i] = i % 1000;
    return values;
  },
});

async function run() {
  const { readCgns, writeCgns } = await import(pathToFileURL(join(library, 'formats/cgns.js')).href);
  const { structuredCells, structuredPoints } = await import(pathToFileURL(join(library, 'mesh/structured.js')).href);
  const [mesh, start] = [join(folder, 'mesh.cgns'), join(folder, 'start.cgns')];
  const notes = new Map();
  if (step === 'new') {
    const box = { kind: 'image', extent: [0, side, 0, side, 0, side], origin: [0, 0, 0], spacing: [1, 1, 1] };
    const dataset = {
      file: 'box.vtu',
      format: 'vtu',
      points: structuredPoints(box),
      pointType: 'Float64',
      cells: structuredCells(box),
      pointArrays: [],
      cellArrays: [],
      zones: [{ name: 'box', pointBegin: 0, pointEnd: (side + 1) ** 3, cellBegin: 0, cellEnd: cells }],
      boundaries: [],
      missingAxes: [],
      notes,
      remarks: [],
    };
    const cellArrays = [
      ['Velocity', 3],
      ['VelocityCovariance', 6],
      ['TurbulentEnergyKinetic', 1],
      ['TurbulentDissipation', 1],
    ];
    const begin = performance.now();
    await writeCgns(mesh, { mesh: dataset, cellArrays: cellArrays.map((one) => lazy(...one)), pointArrays: [], notes });
    syncFile(mesh);
    return { seconds: (performance.now() - begin) / 1000, bytes: statSync(mesh).size };
  }
  if (step === 'read' || step === 'read-copy') {
    const path = step === 'read' ? mesh : start;
    const begin = performance.now();
    const dataset = await readCgns(path);
    for (const array of dataset.cellArrays) array.load();
    return { seconds: (performance.now() - begin) / 1000, bytes: statSync(path).size };
  }
  if (step === 'copy') {
    const dataset = await readCgns(mesh);
    const cellArrays = [
      ['Velocity', 3],
      ['VelocityMean', 3],
      ['VelocityFluctuation', 3],
      ['Outside', 1],
    ];
    const begin = performance.now();
    await writeCgns(start, {
      mesh: dataset,
      cellArrays: cellArrays.map((one) => lazy(...one)),
      pointArrays: [],
      notes,
    });
    syncFile(start);
    return { seconds: (performance.now() - begin) / 1000, bytes: statSync(start).size };
  }
  const path = join(folder, 'plain.bin');
  const total = Number(process.argv[6]);
  const block = Buffer.alloc(8 << 20, 1);
  const begin = performance.now();
  const file = openSync(path, step === 'plain-write' ? 'w' : 'r');
  for (let at = 0; at < total; at += block.length) {
    if (step === 'plain-write') writeSync(file, block);
    else readSync(file, block);
  }
  if (step === 'plain-write') fsyncSync(file);
  closeSync(file);
  return { seconds: (performance.now() - begin) / 1000, bytes: total };
}

if (step !== undefined) {
  const result = await run();
  console.log(JSON.stringify({ ...result, peak: process.resourceUsage().maxRSS * 1024 }));
} else {
  const place = mkdtempSync(join(tmpdir(), 'eddygraft-bench-'));
  try {
    console.log(`${side}^3 = ${cells} hexahedra`);
    let bytes = 0;
    for (const name of ['new', 'plain-write', 'read', 'plain-read', 'copy', 'read-copy']) {
      const self = fileURLToPath(import.meta.url);
      const child = spawnSync(process.execPath, [self, side, library, name, place, bytes].map(String), {
        encoding: 'utf8',
        stdio: ['ignore', 'pipe', 'inherit'],
      });
      if (child.status !== 0) throw new Error(`${name} failed`);
      const result = JSON.parse(child.stdout);
      if (name === 'new') bytes = result.bytes;
      const speed = (result.bytes / 1e6 / result.seconds).toFixed(0);
      console.log(
        `${name.padEnd(12)} ${result.seconds.toFixed(1).padStart(7)} s  ${(result.bytes / 1e9).toFixed(2)} GB  ${speed.padStart(5)} MB/s  peak ${(result.peak / 2 ** 30).toFixed(2)} GiB`,
      );
    }
  } finally {
    rmSync(place, { recursive: true, force: true });
  }
}
