// Reads tables of 1 M rows x 8 columns. Run by hand after a build: node tests/bench/csv.mjs
import { mkdtempSync, openSync, rmSync, statSync, writeSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { csvFormat } from '../../dist/formats/csv.js';

const rows = 1_000_000;
const folder = mkdtempSync(join(tmpdir(), 'eddygraft-bench-'));
const names = 'CoordinateX,CoordinateY,CoordinateZ,VelocityX,VelocityY,VelocityZ,TurbulentEnergyKinetic,Pressure';
const kinds = {
  '8 digits, exponent': (value) => value.toExponential(7),
  '17 digits': (value) => String(value),
};
for (const [kind, print] of Object.entries(kinds)) {
  const path = join(folder, 'table.csv');
  const file = openSync(path, 'w');
  let text = `${names}\n`;
  let state = 1;
  for (let row = 0; row < rows; row++) {
    const cells = [];
    for (let c = 0; c < 8; c++) {
      state = (state * 1103515245 + 12345) % 2147483648;
      cells.push(print(state / 2147483647 - 0.5));
    }
    text += `${cells.join(',')}\n`;
    if (text.length > 1e6) {
      writeSync(file, text);
      text = '';
    }
  }
  writeSync(file, text);
  const begin = performance.now();
  const found = await csvFormat.read(path);
  const seconds = (performance.now() - begin) / 1000;
  const megabytes = statSync(path).size / 1e6;
  console.log(
    `${kind}: ${found.points.length / 3} rows, ${megabytes.toFixed(0)} MB in ${seconds.toFixed(2)} s, ${(megabytes / seconds).toFixed(0)} MB/s, peak ${(process.resourceUsage().maxRSS / 1024).toFixed(0)} MB`,
  );
}
rmSync(folder, { recursive: true });
