import { existsSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { boxCase, eddygraft } from './cases.js';

let folder = '';
beforeAll(async () => {
  // More cells than three blocks of 4096, so that work is shared out.
  folder = await boxCase(24);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const start = (): Buffer => readFileSync(join(folder, 'out', 'start.vtu'));

describe('run', () => {
  it('writes start, manifest and report; the same bytes for any number of workers; others for another seed', () => {
    const first = eddygraft(folder, 'run', 'case.yaml', '--workers', '1', '--json');
    expect(first.code, first.err).toBe(0);
    const manifest = JSON.parse(first.out) as { readonly audit: Record<string, unknown>; readonly passed: boolean };
    expect(manifest.passed).toBe(true);
    expect(Object.keys(manifest.audit)).toEqual(
      expect.arrayContaining([
        'cells',
        'volume',
        'energy',
        'divergence',
        'projectionLoss',
        'covariance',
        'velocityMax',
      ]),
    );
    expect(readdirSync(join(folder, 'out')).sort()).toEqual(['start.html', 'start.json', 'start.vtu']);
    const one = start();
    const refused = eddygraft(folder, 'run', 'case.yaml');
    expect(refused.code).toBe(2);
    expect(refused.err).toMatch(/start\.vtu.*exists.*--overwrite/);
    expect(eddygraft(folder, 'run', 'case.yaml', '--workers', '2', '--overwrite', '--quiet')).toEqual({
      code: 0,
      out: '',
      err: '',
    });
    expect(start().equals(one)).toBe(true);
    expect(eddygraft(folder, 'run', 'case.yaml', '--seed', '6', '--overwrite').code).toBe(0);
    expect(start().equals(one)).toBe(false);
  });

  it('a dry run writes nothing', () => {
    rmSync(join(folder, 'out'), { recursive: true });
    expect(eddygraft(folder, 'run', 'case.yaml', '--dry-run').code).toBe(0);
    expect(existsSync(join(folder, 'out'))).toBe(false);
  });

  it('the audit of the written file alone repeats the figures of the manifest', () => {
    const ran = eddygraft(folder, 'run', 'case.yaml', '--json', '--overwrite');
    type Figures = {
      readonly energy: { readonly wanted: number; readonly resolvable: number; readonly recovered: number };
      readonly covariance: readonly number[];
      readonly velocityMax: number;
    };
    const { audit: told } = JSON.parse(ran.out) as { readonly audit: Figures };
    const seen = eddygraft(folder, 'audit', 'out/start.vtu', '--json');
    expect(seen.code, seen.err).toBe(0);
    const found = JSON.parse(seen.out) as Figures;
    for (const key of ['wanted', 'resolvable', 'recovered'] as const) {
      expect(found.energy[key] / told.energy[key]).toBeCloseTo(1, 9);
    }
    expect(found.velocityMax).toBe(told.velocityMax);
    found.covariance.forEach((value, i) => {
      expect(value).toBeCloseTo(told.covariance[i] as number, 12);
    });
  });

  it('ends with 1 when a check fails, the files written and marked', () => {
    const text = readFileSync(join(folder, 'case.yaml'), 'utf8').replace('divergence: 1.0e-3', 'divergence: 1.0e-30');
    const failing = join(folder, 'failing.yaml');
    writeFileSync(failing, text);
    const { code } = eddygraft(folder, 'run', 'failing.yaml', '--overwrite');
    expect(code).toBe(1);
    const manifest = JSON.parse(readFileSync(join(folder, 'out', 'start.json'), 'utf8')) as {
      readonly passed: boolean;
    };
    expect(manifest.passed).toBe(false);
  });
});

describe('every command', () => {
  it('has help with an example', () => {
    const { out } = eddygraft(folder, '--help');
    const names = [...out.matchAll(/^ {2}([a-z]+) /gm)]
      .map((match) => match[1] as string)
      .filter((name) => name !== 'help');
    expect(names).toEqual(
      expect.arrayContaining([
        'run',
        'transfer',
        'fluctuate',
        'appraise',
        'audit',
        'batch',
        'followup',
        'describe',
        'init',
      ]),
    );
    for (const name of names) {
      const help = eddygraft(folder, name, '--help');
      expect(help.code).toBe(0);
      expect(help.out, name).toMatch(/Example:\n\s+eddygraft/);
    }
  });
});
