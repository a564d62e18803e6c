import { caseJsonSchema, type SchemaNode } from './json-schema.js';

function literal(value: unknown): string {
  return typeof value === 'string' ? value : JSON.stringify(value);
}

/** The values that a key may have, in one short phrase. */
function valueForm(node: SchemaNode): string {
  if (node.const !== undefined) return `\`${literal(node.const)}\``;
  if (node.enum !== undefined) {
    return node.enum.length > 12 ? 'standard name' : node.enum.map((value) => `\`${literal(value)}\``).join(' ');
  }
  if (node.anyOf !== undefined) return [...new Set(node.anyOf.map(valueForm))].join(' or ');
  switch (node.type) {
    case 'string':
      return 'text';
    case 'integer':
      return 'whole number';
    case 'boolean':
      return '`true` `false`';
    case 'array':
      return node.prefixItems === undefined
        ? `list of ${node.items === undefined ? 'values' : valueForm(node.items)}`
        : `list of ${node.prefixItems.length}: ${[...new Set(node.prefixItems.map(valueForm))].join(', ')}`;
    case 'object': {
      if (node.properties === undefined) return 'standard name: value';
      return `{${Object.keys(node.properties).join(', ')}}`;
    }
    default:
      return node.type ?? 'value';
  }
}

interface Row {
  readonly key: string;
  readonly form: string;
  readonly otherwise: string;
  readonly meaning: string;
}

function objectForms(node: SchemaNode): SchemaNode[] {
  if (node.properties !== undefined) return [node];
  const inner = [...(node.anyOf ?? []), ...(node.items === undefined ? [] : [node.items])];
  return inner.flatMap(objectForms);
}

function rowsOf(node: SchemaNode, prefix: string): Row[] {
  const rows: Row[] = [];
  const seen = new Set<string>();
  for (const form of objectForms(node)) {
    for (const [name, child] of Object.entries(form.properties ?? {})) {
      if (seen.has(name)) continue;
      seen.add(name);
      const key = prefix === '' ? name : `${prefix}.${name}`;
      const required = form.required?.includes(name) === true;
      const empty = child.default === undefined || JSON.stringify(child.default) === '{}';
      const otherwise = required ? 'required' : empty ? '' : `\`${literal(child.default)}\``;
      rows.push({ key, form: valueForm(child), otherwise, meaning: child.description ?? '' });
      // The forms of a selection of faces are told once, at the walls.
      if (name === 'walls' || !valueForm(child).includes('{plane, at}') || name === 'zones') {
        rows.push(...rowsOf(child, key));
      }
    }
  }
  return rows;
}

function cell(text: string): string {
  return text.replaceAll('|', '\\|').replaceAll('<', '&lt;');
}

function table(rows: readonly Row[]): string {
  const lines = rows.map(
    ({ key, form, otherwise, meaning }) => `| \`${key}\` | ${cell(form)} | ${cell(otherwise)} | ${cell(meaning)} |`,
  );
  return ['| key | value | default | meaning |', '| --- | --- | --- | --- |', ...lines].join('\n');
}

/** The reference of the case file in Markdown: one table a section, from the schema itself. */
export function caseReference(): string {
  const schema = caseJsonSchema();
  const top: Row[] = [];
  const parts: string[] = [];
  for (const [name, child] of Object.entries(schema.properties ?? {})) {
    const rows = name === 'targets' || name === 'snapshots' ? [] : rowsOf(child, '');
    if (rows.length === 0) {
      top.push({ key: name, form: valueForm(child), otherwise: '', meaning: child.description ?? '' });
    } else {
      parts.push(`### ${name}\n\n${child.description ?? ''}\n\n${table(rows)}`);
    }
  }
  return [table(top), ...parts].join('\n\n');
}
