// Makes both samples from nothing and runs the main job on each: npm run demo
import { spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { makeChannel } from './channel/make.mjs';
import { makeLouvre } from './louvre/make.mjs';

const program = fileURLToPath(new URL('../bin/eddygraft.js', import.meta.url));

function run(name) {
  const path = fileURLToPath(new URL(`./${name}/case.yaml`, import.meta.url));
  const { status } = spawnSync(process.execPath, [program, 'run', path, '--overwrite'], { stdio: 'inherit' });
  return status ?? 3;
}

/** The energy that was transferred against what the precursor itself says. */
function compare(name, meanK) {
  const manifest = JSON.parse(readFileSync(new URL(`./${name}/out/${name}-start.json`, import.meta.url), 'utf8'));
  const { wanted } = manifest.audit.energy;
  const difference = Math.abs(wanted / meanK - 1);
  console.log(
    `Mean k of the precursor ${meanK.toPrecision(4)} m2/s2, carried to the target ${wanted.toPrecision(4)} m2/s2 (${(100 * difference).toFixed(1)} % apart).`,
  );
  return difference < 0.03;
}

let worst = 0;
for (const [name, make] of [
  ['channel', makeChannel],
  ['louvre', makeLouvre],
]) {
  console.log(`\n== Sample ${name}: computing its precursor and its mesh ==`);
  const begin = performance.now();
  const made = await make();
  const seconds = ((performance.now() - begin) / 1000).toFixed(1);
  console.log(`${made.cells} target cells, precursor computed in ${seconds} s.`);
  if (made.bulkVelocity !== undefined) console.log(`Bulk velocity ${made.bulkVelocity.toFixed(2)} m/s.`);
  if (made.frequency !== undefined) console.log(`Shedding frequency ${made.frequency.toFixed(1)} Hz.`);
  const status = run(name);
  worst = Math.max(worst, status);
  if (status <= 1 && !compare(name, made.meanK)) worst = Math.max(worst, 1);
}
process.exitCode = worst;
