import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { gunzipSync } from 'node:zlib';

const here = fileURLToPath(new URL('.', import.meta.url));

/** Folder for one test file; remove it when done. */
export function temporaryFolder(): { readonly path: string; readonly remove: () => void } {
  const path = mkdtempSync(join(tmpdir(), 'eddygraft-cgns-'));
  return { path, remove: () => rmSync(path, { recursive: true, force: true }) };
}

/** Unpacks the committed files, which `cgns-shapes.c` wrote once. */
export function unpackShapes(folder: string): void {
  const packed = join(here, '..', 'formats', 'cgns-fixtures');
  for (const name of readdirSync(packed)) {
    writeFileSync(join(folder, name.replace(/\.gz$/, '')), gunzipSync(readFileSync(join(packed, name))));
  }
}

/** Builds `cgns-shapes.c` with the reference library and runs it; false where library or compiler are not installed. */
export function makeShapes(folder: string): boolean {
  const program = join(folder, 'cgns-shapes');
  const built = spawnSync('cc', ['-O0', '-o', program, join(here, 'cgns-shapes.c'), '-lcgns', '-lm']);
  if (built.status !== 0) return false;
  const run = spawnSync(program, [folder], { encoding: 'utf8' });
  if (run.status !== 0) throw new Error(run.stderr);
  rmSync(program);
  return true;
}

export function hasTool(name: string): boolean {
  return spawnSync('sh', ['-c', `command -v ${name}`]).status === 0;
}

/** Lines of `cgnscheck` that tell of an error. */
export function checkErrors(file: string): string[] {
  const run = spawnSync('cgnscheck', [file], { encoding: 'utf8' });
  if (run.error !== undefined) throw run.error;
  return `${run.stdout}${run.stderr}`.split('\n').filter((line) => /error/i.test(line));
}

/** What `cgnsdiff` prints, one line a difference. */
export function differences(first: string, second: string): string[] {
  const run = spawnSync('cgnsdiff', ['-d', first, second], { encoding: 'utf8' });
  if (run.error !== undefined) throw run.error;
  return run.stdout.split('\n').filter((line) => line.trim() !== '');
}
