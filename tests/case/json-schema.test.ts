import { expect, it } from 'vitest';
import { caseJsonSchema, knownKeys, type SchemaNode } from '../../src/case/json-schema.js';
import { caseReference } from '../../src/case/reference.js';

it('describes every key for editors', () => {
  const bare: string[] = [];
  const visit = (node: SchemaNode, path: string): void => {
    for (const [name, child] of Object.entries(node.properties ?? {})) {
      if (child.description === undefined && !['sphere', 'cylinder', 'box'].includes(name))
        bare.push(`${path}.${name}`);
      visit(child, `${path}.${name}`);
    }
    for (const form of node.anyOf ?? []) visit(form, path);
    if (node.items !== undefined) visit(node.items, `${path}[]`);
  };
  visit(caseJsonSchema(), '');
  const allowed = [/\.snapshot$/, /\.energy$/, /\.length$/, /\.spectrum$/];
  expect(bare.filter((path) => !allowed.some((pattern) => pattern.test(path)))).toEqual([]);
});

it('forbids unknown keys and asks for the three files only', () => {
  const schema = caseJsonSchema();
  expect(schema.additionalProperties).toBe(false);
  expect(schema.required).toEqual(['precursor', 'target', 'output']);
  expect(schema.properties?.precursor?.required).toEqual(['file']);
});

it('knows the keys of a place, alternatives included', () => {
  expect(knownKeys(['fluctuations', 'zones', 0])).toEqual(
    expect.arrayContaining(['box', 'sphere', 'cylinder', 'boundary', 'field', 'fade']),
  );
  expect(knownKeys(['precursor', 'placement', 'rotate'])).toEqual(['axis', 'degrees', 'about']);
});

it('renders one row a key', () => {
  const text = caseReference();
  expect(text).toContain('| `wavelength-cells` | number | `3` |');
  expect(text).toContain('### fluctuations');
  for (const line of text.split('\n')) {
    if (line.startsWith('|')) expect(line.split(/(?<!\\)\|/)).toHaveLength(6);
  }
});
