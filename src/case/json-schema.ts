import { z } from 'zod';
import { caseSchema } from './schema.js';

/** The part of JSON Schema (draft 2020-12) that the case file's schema uses. */
export interface SchemaNode {
  readonly type?: string;
  readonly description?: string;
  readonly default?: unknown;
  readonly const?: unknown;
  readonly enum?: readonly unknown[];
  readonly anyOf?: readonly SchemaNode[];
  readonly properties?: Readonly<Record<string, SchemaNode>>;
  readonly required?: readonly string[];
  readonly items?: SchemaNode;
  readonly prefixItems?: readonly SchemaNode[];
  readonly propertyNames?: SchemaNode;
  readonly additionalProperties?: SchemaNode | boolean;
}

/** JSON Schema of the case file, for editors; generated from the schema that checks it. */
export function caseJsonSchema(): SchemaNode & { readonly $schema: string; readonly title: string } {
  const schema = z.toJSONSchema(caseSchema, { io: 'input', target: 'draft-2020-12' });
  return {
    ...(schema as SchemaNode),
    $schema: 'https://json-schema.org/draft/2020-12/schema',
    title: 'eddygraft case',
  };
}

function children(node: SchemaNode, step: PropertyKey): SchemaNode[] {
  const found: SchemaNode[] = [];
  for (const alternative of node.anyOf ?? []) found.push(...children(alternative, step));
  if (typeof step === 'number') {
    const item = node.prefixItems?.[step] ?? node.items;
    if (item !== undefined) found.push(item);
  } else {
    const property = node.properties?.[String(step)];
    if (property !== undefined) found.push(property);
    else if (typeof node.additionalProperties === 'object') found.push(node.additionalProperties);
  }
  return found;
}

let whole: SchemaNode | undefined;

/** Every part of the schema that may describe the value at this place of a case file. */
export function schemaNodesAt(path: readonly PropertyKey[]): SchemaNode[] {
  whole ??= caseJsonSchema();
  let nodes: SchemaNode[] = [whole];
  for (const step of path) nodes = nodes.flatMap((node) => children(node, step));
  return nodes;
}

function keysOf(node: SchemaNode): string[] {
  return [...Object.keys(node.properties ?? {}), ...(node.anyOf ?? []).flatMap(keysOf)];
}

/** The keys that are known at this place. */
export function knownKeys(path: readonly PropertyKey[]): string[] {
  return [...new Set(schemaNodesAt(path).flatMap(keysOf))];
}
