import { spawnSync } from 'node:child_process';
import { join } from 'node:path';
import { expect, it } from 'vitest';

it('the README says what the options and the schema say', () => {
  const root = join(import.meta.dirname, '..');
  const result = spawnSync(process.execPath, ['src/reference.mjs', '--check'], { cwd: root, encoding: 'utf8' });
  expect(result.stderr).toBe('');
  expect(result.status).toBe(0);
});
