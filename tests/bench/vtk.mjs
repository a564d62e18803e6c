// Writes and reads a .vtu file of N^3 hexahedra (default 150) with eight Float64 numbers a cell, with times, speeds
// against plain reading of the same file, and peak memory of each step in a process of its own.
//
//   node tests/bench/vtk.mjs [N] [folder of the built library]
import { spawnSync } from 'node:child_process';
import { closeSync, mkdtempSync, openSync, readSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

const side = Number(process.argv[2] ?? 150);
const library = resolve(process.argv[3] ?? fileURLToPath(new URL('../../dist', import.meta.url)));
const [step, folder] = process.argv.slice(4);
const cells = side ** 3;

async function timed(label, bytes, action) {
  const begin = performance.now();
  const result = await action();
  const seconds = (performance.now() - begin) / 1000;
  const size = bytes(result) / 1e6;
  console.log(`${label}: ${size.toFixed(0)} MB in ${seconds.toFixed(2)} s, ${(size / seconds).toFixed(0)} MB/s`);
  return result;
}

function box() {
  const extent = [0, side, 0, side, 0, side];
  const axis = Float64Array.from({ length: side + 1 }, (_, i) => i / side);
  return { kind: 'rectilinear', extent, axes: [axis, axis, axis] };
}

/** Smooth numbers with noise in their last digits, which compress as results do. */
function field(components) {
  const values = new Float64Array(new SharedArrayBuffer(8 * components * cells));
  for (let i = 0; i < values.length; i++) values[i] = Math.sin(i * 1e-4) + 1e-7 * ((i * 7919) % 1009);
  return values;
}

async function run() {
  const { readDataset, writeDataset } = await import(pathToFileURL(join(library, 'formats/registry.js')).href);
  const structured = await import(pathToFileURL(join(library, 'formats/vtk/structured.js')).href);
  const path = join(folder, step.endsWith('zlib') ? 'zlib.vtu' : 'raw.vtu');
  if (step.startsWith('write')) {
    const { extent, axes } = box();
    const points = structured.rectilinearPoints(axes);
    const topology = structured.structuredCells(extent);
    const arrays = ['a', 'b', 'c', 'd', 'e'].map((name) => [name, 1]).concat([['Velocity', 3]]);
    const cellArrays = arrays.map(([name, components]) => {
      const values = field(components);
      return { name, components, tuples: cells, type: 'Float64', load: () => values };
    });
    const mesh = {
      file: '',
      format: 'vtu',
      points,
      pointType: 'Float64',
      cells: topology,
      pointArrays: [],
      cellArrays: [],
      zones: [],
      boundaries: [],
      missingAxes: [],
      notes: new Map(),
      remarks: [],
    };
    const compress = step.endsWith('zlib');
    const request = { mesh, cellArrays, pointArrays: [], notes: new Map(), compress };
    await timed(
      step,
      () => statSync(path).size,
      () => writeDataset(path, request),
    );
  } else if (step.startsWith('plain')) {
    const buffer = new Uint8Array(1 << 26);
    await timed(
      step,
      () => statSync(path).size,
      () => {
        const file = openSync(path, 'r');
        while (readSync(file, buffer, 0, buffer.length, null) > 0);
        closeSync(file);
      },
    );
  } else {
    const mesh = await timed(
      `${step} points and cells`,
      (found) => {
        const { types, offsets, connectivity } = found.cells;
        return found.points.byteLength + types.byteLength + offsets.byteLength + connectivity.byteLength;
      },
      () => readDataset(path),
    );
    await timed(
      `${step} arrays one by one`,
      (total) => total,
      () => {
        let total = 0;
        for (const array of mesh.cellArrays) total += array.load().byteLength;
        return total;
      },
    );
  }
  console.log(`  peak ${(process.resourceUsage().maxRSS / 1024).toFixed(0)} MB`);
}

if (step === undefined) {
  const work = mkdtempSync(join(tmpdir(), 'eddygraft-bench-'));
  try {
    console.log(`${cells} hexahedra`);
    for (const name of ['write raw', 'plain reading', 'read raw', 'write zlib', 'read zlib']) {
      const args = ['--max-old-space-size=4096', process.argv[1], String(side), library, name, work];
      const { status } = spawnSync(process.execPath, args, { stdio: 'inherit' });
      if (status !== 0) process.exitCode = 1;
    }
  } finally {
    rmSync(work, { recursive: true, force: true });
  }
} else {
  await run();
}
