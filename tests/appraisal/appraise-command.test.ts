import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Command } from 'commander';
import { afterAll, afterEach, beforeAll, describe, expect, it, vi } from 'vitest';
import { readExpectations } from '../../src/appraisal/followup.js';
import { addAppraise } from '../../src/cli/appraise.js';
import { collectLine, collectPoint, collectSlice, collectWall } from '../../src/cli/appraise-options.js';
import { readDataset, writeDataset } from '../../src/formats/registry.js';
import { hexBox, makeArray } from '../helpers/meshes.js';

const folder = mkdtempSync(join(tmpdir(), 'appraise-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));
const at = (name: string): string => join(folder, name);

/** Precursor of 8 x 8 x 4 cells on a duct of 2 x 1 x 0.5 m: 10 m/s along x, k and epsilon uniform. */
async function writePrecursor(name: string, k: number, epsilon: number): Promise<void> {
  const mesh = hexBox(8, 8, 4, { lengths: [2, 1, 0.5] });
  const n = 8 * 8 * 4;
  const velocity = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) velocity[3 * i] = 10;
  await writeDataset(at(name), {
    mesh,
    cellArrays: [
      makeArray('Velocity', 3, velocity),
      makeArray('TurbulentEnergyKinetic', 1, new Float64Array(n).fill(k)),
      makeArray('TurbulentDissipation', 1, new Float64Array(n).fill(epsilon)),
    ],
    pointArrays: [],
    notes: new Map(),
  });
}

beforeAll(async () => {
  await writePrecursor('precursor.vtu', 1, 5);
  await writePrecursor('unsteady.vtu', 0.5, 5);
  await writeDataset(at('target.vtu'), {
    mesh: hexBox(32, 16, 8, { lengths: [2, 1, 0.5] }),
    cellArrays: [],
    pointArrays: [],
    notes: new Map(),
  });
});

let out = '';
async function run(...args: string[]): Promise<string> {
  out = '';
  vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    out += String(text);
    return true;
  });
  vi.spyOn(process.stderr, 'write').mockImplementation(() => true);
  const program = new Command('eddygraft').version('1.2.3').exitOverride();
  addAppraise(program);
  await program.parseAsync(['appraise', ...args, '--workers', '1'], { from: 'user' });
  return out;
}
afterEach(() => vi.restoreAllMocks());

interface AppraiseDocument {
  readonly summary: {
    readonly cells: number;
    readonly meanGridRatio: number;
    readonly meanShare: number;
    readonly verdict: string;
    readonly impliedCells: number;
  };
  readonly plan: {
    readonly timeStep: number;
    readonly flowThroughTime: number;
    readonly turnoverTime: number;
    readonly costHours: number;
  };
  readonly monitors: readonly { readonly kind: string }[];
  readonly second: { readonly comparison: { readonly lengthRatio: number } };
  readonly outside: { readonly inside: number };
}

describe('appraise command', () => {
  it('gives the verdicts and figures of a hand calculation', async () => {
    // L = 1 / 5 = 0.2 m on cells of 62.5 mm: GridRatio 3.2, share by the von Karman table between .510 (3) and .645 (5):
    // too coarse. 80 % needs 0.2 / 11.97 = 16.7 mm: 1 m3 / 4.66e-6 m3 = 214 400 cells.
    const document = JSON.parse(
      await run(
        at('precursor.vtu'),
        at('target.vtu'),
        '--json',
        '--second',
        at('unsteady.vtu'),
        '--seconds-per-step',
        '3',
      ),
    ) as AppraiseDocument;
    expect(document.summary.cells).toBe(4096);
    expect(document.summary.meanGridRatio).toBeCloseTo(3.2, 6);
    expect(document.summary.meanShare).toBeGreaterThan(0.51);
    expect(document.summary.meanShare).toBeLessThan(0.55);
    expect(document.summary.verdict).toBe('too coarse');
    expect(Math.abs(document.summary.impliedCells / 214_400 - 1)).toBeLessThan(0.01);
    // Largest and 99th percentile: 10 / 0.0625 + 3 sqrt(2 / 3) sqrt(3) / 0.0625 = 227.9 1/s; 0.5 of that decides.
    expect(Math.abs(document.plan.timeStep / (0.5 / 227.9) - 1)).toBeLessThan(2e-3);
    expect(document.plan.turnoverTime).toBeCloseTo(0.2, 6);
    expect(document.plan.flowThroughTime).toBeCloseTo(0.2 * (31 / 32), 6);
    expect(document.plan.costHours).toBeGreaterThan(0);
    expect(document.second.comparison.lengthRatio).toBeCloseTo(0.5 ** 1.5, 6);
    expect(document.outside.inside).toBe(4096);
  });

  it('writes field, monitor plan and report', async () => {
    const text = await run(
      at('precursor.vtu'),
      at('target.vtu'),
      '--walls',
      'y=0',
      '--periodic',
      'z',
      '--constant',
      'ViscosityKinematic=1.5e-5',
      '-o',
      at('judged.vtu'),
      '--monitors',
      at('monitors.csv'),
      '--report',
      at('page.html'),
      '--point',
      'hub=1,0.5,0.25',
      '--line',
      'rake=1.5,0.2,0.25:1.5,0.8,0.25:4',
      '--slice',
      'z=0.2',
    );
    expect(text).toContain('Worst regions');
    expect(text).toContain('Spacings in wall units');
    const judged = await readDataset(at('judged.vtu'));
    const values = (name: string): ArrayLike<number | bigint> =>
      judged.cellArrays.find((array) => array.name === name)!.load();
    expect(values('CellWidth')[17]).toBeCloseTo(0.0625, 9);
    expect(Number(values('CellWidthWanted')[17])).toBeLessThan(0.05);
    expect(Number(values('ResolvableShare')[17])).toBeGreaterThan(0.4);
    // eta = (3.375e-15 / epsilon)^(1/4) at the epsilon of the cells, 5 m2/s3: 0.161 mm.
    expect(Math.abs(Number(values('KolmogorovLength')[2000]) / 1.61e-4 - 1)).toBeLessThan(0.01);
    const monitors = readFileSync(at('monitors.csv'), 'utf8');
    expect(monitors).toContain('\nhub,point,1,0.5,0.25,');
    expect(monitors.match(/\nrake-0\d,line,/g)!.length).toBe(4);
    // The plan is what followup reads.
    expect(readExpectations(monitors, 'monitors.csv').get('hub')!.cellWidth).toBeCloseTo(0.0625, 9);
    const page = readFileSync(at('page.html'), 'utf8');
    expect(page).toContain('Cell width wanted');
    expect(page).toContain('Monitors on the map of k');
    await expect(run(at('precursor.vtu'), at('target.vtu'), '--report', at('page.html'))).rejects.toThrow(
      'exists already',
    );
  });

  it('takes what the precursor lacks from options, and names it otherwise', async () => {
    await writeDataset(at('mean.vtu'), {
      mesh: hexBox(4, 4, 4, { lengths: [2, 1, 0.5] }),
      cellArrays: [
        makeArray(
          'Velocity',
          3,
          Float64Array.from({ length: 192 }, (_, i) => (i % 3 === 0 ? 10 : 0)),
        ),
      ],
      pointArrays: [],
      notes: new Map(),
    });
    await expect(run(at('mean.vtu'), at('target.vtu'))).rejects.toThrow('--intensity');
    // Intensity 8.165 %: k = 1.5 (0.8165)^2 = 1; L11 = 0.0775 m is L = 0.2 m at L11 / L = 0.3875: the case above.
    const document = JSON.parse(
      await run(at('mean.vtu'), at('target.vtu'), '--intensity', '0.08165', '--length', '0.0775', '--json'),
    ) as AppraiseDocument;
    expect(Math.abs(document.summary.meanGridRatio / 3.2 - 1)).toBeLessThan(0.01);
  });

  it('does nothing in a dry run', async () => {
    await run(at('precursor.vtu'), at('target.vtu'), '--dry-run', '--report', at('never.html'));
    expect(() => readFileSync(at('never.html'))).toThrow();
  });
});

describe('options of appraise', () => {
  it('read points, lines, walls and slices', () => {
    expect(collectPoint('a=1,2,-3e-1')).toEqual([{ name: 'a', at: [1, 2, -0.3] }]);
    expect(collectLine('l=0,0,0:1,1,1:3')).toEqual([{ name: 'l', from: [0, 0, 0], to: [1, 1, 1], count: 3 }]);
    expect(collectWall('y=0.5')).toEqual([{ plane: 'y', at: 0.5 }]);
    expect(collectWall('box=0,0,0:1,2,3')).toEqual([
      {
        box: [
          [0, 0, 0],
          [1, 2, 3],
        ],
      },
    ]);
    expect(collectWall('hull', ['all'])).toEqual(['all', 'hull']);
    expect(collectSlice('x=-1')).toEqual([{ axis: 'x', position: -1 }]);
    for (const wrong of ['1,2,3', 'a=1,2', 'a=1,,3', 'a=x,1,2']) expect(() => collectPoint(wrong)).toThrow();
    expect(() => collectLine('l=0,0,0:1,1,1')).toThrow('COUNT');
    expect(() => collectSlice('w=1')).toThrow('z=0.2');
  });
});
