import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative, resolve, sep } from 'node:path';
import { expect, it } from 'vitest';

// Imports run downwards only; stages never reach into each other; nothing imports the command line.
const source = resolve(import.meta.dirname, '..', 'src');
const stages = ['formats', 'case', 'transfer', 'turbulence', 'divergence', 'audit', 'appraisal', 'report'];
const foundations = ['basis', 'kernels', 'mesh', 'spatial'];
const allowed: Readonly<Record<string, readonly string[]>> = {
  basis: [],
  kernels: ['basis'],
  mesh: ['basis', 'kernels', 'spatial'],
  spatial: ['basis', 'kernels', 'mesh'],
  ...Object.fromEntries(stages.map((stage) => [stage, foundations])),
  pipeline: [...foundations, ...stages],
  cli: [...foundations, ...stages, 'pipeline', 'index.ts'],
};

function filesBelow(folder: string): string[] {
  return readdirSync(folder, { withFileTypes: true }).flatMap((entry) => {
    const path = join(folder, entry.name);
    if (entry.isDirectory()) return entry.name === 'assembly' ? [] : filesBelow(path);
    return entry.name.endsWith('.ts') ? [path] : [];
  });
}

function importsOf(path: string): string[] {
  const text = readFileSync(path, 'utf8');
  return [...text.matchAll(/(?:from|import\()\s*'(\.[^']+)'/g)].map((match) =>
    resolve(dirname(path), (match[1] as string).replace(/\.js$/, '.ts')),
  );
}

const roomOf = (path: string): string => relative(source, path).split(sep)[0] as string;

it('imports run downwards only', () => {
  const wrong: string[] = [];
  for (const file of filesBelow(source)) {
    const room = roomOf(file);
    if (room === 'index.ts') continue;
    for (const target of importsOf(file)) {
      const other = roomOf(target);
      if (other !== room && !(allowed[room] ?? []).includes(other)) {
        wrong.push(`${relative(source, file)} imports ${relative(source, target)}`);
      }
    }
  }
  expect(wrong).toEqual([]);
});

it('has no circle of files', () => {
  const graph = new Map(filesBelow(source).map((file) => [file, importsOf(file)] as const));
  const state = new Map<string, 'open' | 'closed'>();
  const circles: string[] = [];
  const visit = (file: string, trail: readonly string[]): void => {
    if (state.get(file) === 'closed') return;
    if (state.get(file) === 'open') {
      circles.push([...trail.slice(trail.indexOf(file)), file].map((path) => relative(source, path)).join(' -> '));
      return;
    }
    state.set(file, 'open');
    for (const next of graph.get(file) ?? []) visit(next, [...trail, file]);
    state.set(file, 'closed');
  };
  for (const file of graph.keys()) visit(file, []);
  expect(circles).toEqual([]);
});
