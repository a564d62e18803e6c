import { isMap, isScalar, LineCounter, type Node, type ParsedNode, parseAllDocuments } from 'yaml';
import { InputError } from '../basis/errors.js';

/** A YAML text as plain values, with the lines on which they stand. */
export interface YamlText {
  readonly value: unknown;
  /** Line of a value (or of its key), 1 for the first; the nearest enclosing one where the place does not exist. */
  readonly lineOf: (path: readonly PropertyKey[], atKey: boolean) => number;
}

function step(node: Node | null | undefined, key: PropertyKey): { key?: Node; value?: Node | null } | undefined {
  if (isMap(node)) {
    for (const pair of node.items) {
      const name = isScalar(pair.key) ? pair.key.value : undefined;
      if (String(name) === String(key)) return { key: pair.key as Node, value: pair.value as Node | null };
    }
    return undefined;
  }
  const items = (node as { items?: readonly unknown[] } | null | undefined)?.items;
  const item = typeof key === 'number' ? items?.[key] : undefined;
  return item === undefined ? undefined : { value: item as Node };
}

/**
 * Parses one YAML 1.2 document.
 *
 * @throws InputError with the line for text that is not YAML, for repeated keys, and for several documents
 */
export function parseYaml(text: string, file: string): YamlText {
  const lines = new LineCounter();
  const documents = parseAllDocuments(text.replace(/^\uFEFF/, ' '), { lineCounter: lines, version: '1.2' });
  const lineAt = (offset: number): number => lines.linePos(offset).line;
  if (!Array.isArray(documents) || documents.length === 0) {
    throw new InputError({ file, cause: 'the file is empty', remedy: 'eddygraft init writes one to start from' });
  }
  const second = documents[1] as { range?: readonly number[] } | undefined;
  if (second !== undefined) {
    throw new InputError({
      file,
      place: `line ${lineAt(second.range?.[0] ?? 0)}`,
      cause: 'a second document begins',
      remedy: 'put each case in a file of its own',
    });
  }
  const document = documents[0]!;
  const error = document.errors[0];
  if (error !== undefined) {
    throw new InputError({
      file,
      place: `line ${lineAt(error.pos[0])}`,
      cause: error.message.split(/ at line | \(|:?\n/)[0] ?? error.message,
      remedy: 'correct the YAML',
    });
  }
  const root = document.contents as ParsedNode | null;
  let value: unknown;
  try {
    value = document.toJS();
  } catch (failure) {
    const cause = failure instanceof Error ? failure.message : String(failure);
    throw new InputError({ file, cause, remedy: 'write the values out instead of referring to them' });
  }
  const lineOf = (path: readonly PropertyKey[], atKey: boolean): number => {
    let node: Node | null | undefined = root;
    let offset = root?.range?.[0] ?? 0;
    path.forEach((key, depth) => {
      const found = node === undefined ? undefined : step(node, key);
      const last = depth === path.length - 1;
      const place = last && atKey ? found?.key : (found?.value ?? found?.key);
      offset = place?.range?.[0] ?? found?.key?.range?.[0] ?? offset;
      node = found?.value ?? undefined;
    });
    return lineAt(offset);
  };
  return { value, lineOf };
}
