import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import seedrandom from 'seedrandom';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { InputError } from '../../src/basis/errors.js';
import { readCgns } from '../../src/formats/cgns.js';
import { temporaryFolder, unpackShapes } from '../helpers/cgns-files.js';
import { cubes, group, numbers, type TreeNode, text, writeTree } from '../helpers/cgns-tree.js';

const folder = temporaryFolder();
beforeAll(() => unpackShapes(folder.path));
afterAll(folder.remove);

let count = 0;
const next = (): string => join(folder.path, `damaged-${count++}.cgns`);

/** Reads everything; undefined when it went well. Any other error than one sentence for the user fails the test. */
async function failure(path: string): Promise<InputError | undefined> {
  const begin = performance.now();
  try {
    const dataset = await readCgns(path);
    for (const array of [...dataset.cellArrays, ...dataset.pointArrays]) array.load();
    return undefined;
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    // A mistake in the reader must not pass for a damaged file.
    if (error.cause instanceof TypeError || error.cause instanceof ReferenceError) throw error.cause;
    expect(error.message).toContain(path);
    return error;
  } finally {
    expect(performance.now() - begin).toBeLessThan(5000);
  }
}

describe('cut and altered bytes', () => {
  it.each(['polyhedra', 'structured', 'series'])('%s cut at any length is refused', async (name) => {
    const bytes = readFileSync(join(folder.path, `${name}.cgns`));
    for (let part = 0; part < 24; part++) {
      const path = next();
      writeFileSync(path, bytes.subarray(0, Math.floor((bytes.length * part) / 24)));
      expect(await failure(path)).toBeInstanceOf(InputError);
    }
  });

  it.each(['polyhedra', 'structured', 'links'])('%s with altered bytes is read or refused', async (name) => {
    const draw = seedrandom(`damage ${name}`);
    const bytes = readFileSync(join(folder.path, `${name}.cgns`));
    let refused = 0;
    for (let k = 0; k < 60; k++) {
      const altered = Buffer.from(bytes);
      for (let i = 0; i < 1 + (k % 5); i++) altered[Math.floor(draw() * altered.length)] = Math.floor(draw() * 256);
      const path = join(folder.path, `altered-${k}-${name}.cgns`);
      writeFileSync(path, altered);
      if ((await failure(path)) !== undefined) refused++;
    }
    expect(refused).toBeGreaterThan(10);
    // The library still works after all that.
    expect((await readCgns(join(folder.path, 'sections.cgns'))).cells?.types.length).toBe(4);
  });

  it('refuses other files by name', async () => {
    const path = next();
    writeFileSync(path, 'plain text that is longer than the signature of any storage');
    await expect(readCgns(path)).rejects.toThrow(/this is not an HDF5 file/);
    writeFileSync(path, `\0ADF Database Version A02011>${' '.repeat(40)}`);
    await expect(readCgns(path)).rejects.toThrow(/older ADF storage; convert it to HDF5 storage/);
    await expect(readCgns(join(folder.path, 'missing.cgns'))).rejects.toThrow(/there is no such file/);
    await expect(readCgns(folder.path)).rejects.toThrow(/this is not a file/);
    await writeTree(path, []);
    await expect(readCgns(path)).rejects.toThrow(/holds no CGNS base/);
  });
});

/** Every tree that results from changing one node. */
function* changed(
  nodes: readonly TreeNode[],
  change: (node: TreeNode) => readonly TreeNode[] | undefined,
): Generator<{ readonly nodes: TreeNode[]; readonly name: string }> {
  for (const [i, node] of nodes.entries()) {
    const replaced = change(node);
    if (replaced !== undefined)
      yield { nodes: [...nodes.slice(0, i), ...replaced, ...nodes.slice(i + 1)], name: node.name };
    for (const below of changed(node.children ?? [], change)) {
      yield {
        nodes: [...nodes.slice(0, i), { ...node, children: below.nodes }, ...nodes.slice(i + 1)],
        name: below.name,
      };
    }
  }
}

const structured = (): TreeNode[] => [
  numbers(
    'Base',
    'CGNSBase_t',
    'I4',
    [3, 3],
    [2],
    [
      numbers(
        'Zone',
        'Zone_t',
        'I4',
        [3, 2, 2, 2, 1, 1, 0, 0, 0],
        [3, 3],
        [
          text('ZoneType', 'ZoneType_t', 'Structured'),
          group(
            'GridCoordinates',
            'GridCoordinates_t',
            ['X', 'Y', 'Z'].map((name, a) =>
              numbers(
                `Coordinate${name}`,
                'DataArray_t',
                'R8',
                Array.from({ length: 12 }, (_, p) => [p % 3, Math.floor(p / 3) % 2, Math.floor(p / 6)][a] ?? 0),
                [3, 2, 2],
              ),
            ),
          ),
          group('ZoneBC', 'ZoneBC_t', [
            text('low', 'BC_t', 'BCWall', [numbers('PointRange', 'IndexRange_t', 'I4', [1, 1, 1, 3, 1, 2], [3, 2])]),
          ]),
          group('Fields', 'FlowSolution_t', [
            text('GridLocation', 'GridLocation_t', 'CellCenter'),
            numbers('Rind', 'Rind_t', 'I4', [0, 0, 0, 0, 0, 0], [6]),
            numbers('Pressure', 'DataArray_t', 'R8', [1, 2], [2, 1, 1]),
          ]),
        ],
      ),
    ],
  ),
];

const trees: Readonly<Record<string, () => TreeNode[]>> = {
  polyhedra: () => cubes(),
  'polyhedra, counts between': () => cubes({ interleaved: true }),
  mixed: () => cubes({ kind: 'mixed' }),
  hexahedra: () => cubes({ kind: 'hexahedra', index: 'I8' }),
  structured,
};

/** Nodes that may be missing or odd: their defaults are in the standard, or the field is left out and said so. */
const optional = /^(ZoneType|GridLocation|Pressure|Fields|Rind|PointRange|low|ZoneBC|ElementStartOffset)$/;

describe.each(Object.keys(trees))('%s', (kind) => {
  const tree = trees[kind]!();
  const all = async (
    change: (node: TreeNode) => readonly TreeNode[] | undefined,
    mustFail: (name: string) => boolean,
  ): Promise<void> => {
    for (const { nodes, name } of changed(tree, change)) {
      const path = next();
      await writeTree(path, nodes);
      const error = await failure(path);
      if (mustFail(name)) expect(error, `after changing ${name}`).toBeInstanceOf(InputError);
    }
  };

  it('is read as it is', async () => {
    const path = next();
    await writeTree(path, tree);
    expect(await failure(path)).toBeUndefined();
  });

  it('with a node missing', () =>
    all(
      () => [],
      (name) => !optional.test(name),
    ));

  it('with the data of a node missing', () =>
    all(
      ({ name, label, children, values }) =>
        values === undefined ? undefined : [{ name, label, children: children ?? [] }],
      (name) => !optional.test(name),
    ));

  it('with text for numbers and numbers for text', () =>
    all(
      (node) => (node.type === undefined ? undefined : [{ ...node, type: node.type === 'C1' ? 'R8' : 'C1' }]),
      (name) => !/^(low|PointRange)$/.test(name),
    ));

  it('with one value too few', () =>
    all(
      (node) => {
        if (node.values === undefined || node.values.length < 2 || node.type === 'C1') return undefined;
        const values = node.values.slice(0, -1);
        return [{ ...node, values, dimensions: [values.length] }];
      },
      // The boundary sizes at the end of a zone's data are not used.
      (name) => !/^(PointRange|Zone)$/.test(name),
    ));

  it.each([0, -1, 0x7fffffff, -0x80000000, 1_000_000])('with %d for the first value', (value) =>
    all(
      (node) => {
        if (node.values === undefined || !/^I/.test(node.type ?? '')) return undefined;
        return [{ ...node, values: [value, ...node.values.slice(1)] }];
      },
      // Rind planes that do not fit the array, a zone or section of absurd size, points that do not exist.
      (name) =>
        !/^(PointRange|Rind)$/.test(name) &&
        !(name === 'ElementStartOffset' && value === 0) &&
        // Minus one is the first polygon, seen from its other side.
        !(name === 'ElementConnectivity' && value === -1 && kind === 'polyhedra'),
    ),
  );

  it('with absurd sizes that agree', async () => {
    const huge = 2_000_000_000;
    for (const { nodes } of changed(tree, (node) =>
      node.label === 'Zone_t' ? [{ ...node, values: node.values!.map((n) => (n > 1 ? huge : n)) }] : undefined,
    )) {
      const path = next();
      await writeTree(path, nodes);
      expect(await failure(path)).toBeInstanceOf(InputError);
    }
  });
});

describe('fields', () => {
  it('names the array that is too long, and coordinates that are no numbers', async () => {
    const long = next();
    await writeTree(long, cubes({ field: [numbers('Density', 'DataArray_t', 'R8', [1, 2, 3])] }));
    await expect(readCgns(long)).rejects.toThrow(
      /Fields\/Density: 2 values at CellCenter were expected, the array holds 3/,
    );
    const nan = next();
    const [base] = cubes() as [TreeNode];
    const broken = JSON.parse(JSON.stringify(base), (key, value) =>
      key === 'name' && value === 'CoordinateY' ? 'CoordinateY' : value,
    );
    const zone = broken.children[0];
    zone.children[1].children[1].values[3] = Number.NaN;
    await writeTree(nan, [broken]);
    await expect(readCgns(nan)).rejects.toThrow(/CoordinateY: the coordinate of point 4 is not a finite number/);
  });

  it('leaves out a field that one zone lacks, and says so', async () => {
    const [base] = cubes() as [TreeNode];
    const zone = base.children![0]!;
    const other = { ...zone, name: 'Other', children: zone.children!.filter(({ name }) => name !== 'Fields') };
    const path = next();
    await writeTree(path, [{ ...base, children: [zone, other] }]);
    const dataset = await readCgns(path);
    expect(dataset.cellArrays).toEqual([]);
    expect(dataset.remarks.join('\n')).toMatch(/Pressure is missing in zone Other and was left out/);
  });
});
