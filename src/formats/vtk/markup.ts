import { SaxesParser } from 'saxes';
import { InputError } from '../../basis/errors.js';
import { readAt, type SourceFile, useFile } from './source-file.js';

/** One element; the text of data arrays stays in the file and is known by its bytes. */
export interface XmlNode {
  readonly name: string;
  readonly attributes: Readonly<Record<string, string>>;
  readonly children: readonly XmlNode[];
  /** Bytes of the element's own text in the file (data arrays only), without the white space around it. */
  readonly textBegin: number;
  readonly textEnd: number;
}

/** Where the block of appended data lies, after its underscore. */
export interface AppendedBlock {
  readonly encoding: 'raw' | 'base64';
  readonly begin: number;
  readonly end: number;
}

export interface Markup {
  readonly root: XmlNode;
  readonly appended?: AppendedBlock;
}

interface OpenNode {
  name: string;
  attributes: Record<string, string>;
  children: OpenNode[];
  textBegin: number;
  textEnd: number;
}

const windowBytes = 1 << 20;
const largestTag = 1 << 20;
const deepest = 100;
const dataElements = new Set(['DataArray', 'Array']);
const less = Buffer.from('<');
const greater = Buffer.from('>');

/** Bytes of a file by way of one window that follows the scan. */
function createWindow(file: SourceFile) {
  const buffer = Buffer.alloc(Math.min(windowBytes, Math.max(file.size, 1)));
  let begin = 0;
  let end = 0;
  const show = (position: number): void => {
    if (position >= begin && position < end) return;
    begin = position;
    end = Math.min(position + buffer.length, file.size);
    readAt(file, buffer.subarray(0, end - begin), begin);
  };
  return {
    /** Byte at a position before the end of the file. */
    byte(position: number): number {
      show(position);
      return buffer[position - begin] as number;
    },
    /** Position of `pattern` at or after `from`, -1 when it does not come before `limit`. */
    find(pattern: Buffer, from: number, limit = file.size): number {
      let at = from;
      while (at + pattern.length <= limit) {
        if (at < begin || at + pattern.length > end) {
          begin = end = 0;
          show(at);
        }
        const found = buffer.subarray(0, end - begin).indexOf(pattern, at - begin);
        if (found >= 0) return begin + found + pattern.length <= limit ? begin + found : -1;
        at = end - pattern.length + 1;
      }
      return -1;
    },
    text(from: number, to: number): string {
      const bytes = Buffer.alloc(to - from);
      readAt(file, bytes, from);
      return bytes.toString('utf8');
    },
  };
}

type Window = ReturnType<typeof createWindow>;

const isSpace = (byte: number): boolean => byte === 32 || (byte >= 9 && byte <= 13);

/** Narrows a range of bytes to what is not white space. */
function trimmed(window: Window, from: number, to: number): [number, number] {
  let begin = from;
  let end = to;
  while (begin < end && isSpace(window.byte(begin))) begin++;
  while (end > begin && isSpace(window.byte(end - 1))) end--;
  return [begin, end];
}

/** Position after the `>` that ends a tag; `>` inside quotes does not. */
function tagEnd(window: Window, from: number, limit: number): number {
  let quote = 0;
  for (let at = from; at < limit; at++) {
    const byte = window.byte(at);
    if (quote !== 0) {
      if (byte === quote) quote = 0;
    } else if (byte === 34 || byte === 39) {
      quote = byte;
    } else if (byte === 62) {
      return at + 1;
    }
  }
  return -1;
}

/** Position after a comment, a processing instruction or a tag that starts at `from`; -1 when it does not end. */
function markupEnd(window: Window, file: SourceFile, from: number): number {
  const limit = Math.min(file.size, from + largestTag);
  const second = from + 1 < file.size ? window.byte(from + 1) : 0;
  if (second === 63) {
    const end = window.find(Buffer.from('?>'), from, limit);
    return end < 0 ? -1 : end + 2;
  }
  if (second === 33) {
    if (window.find(Buffer.from('<!--'), from, Math.min(from + 4, file.size)) !== from) {
      throw new InputError({
        file: file.path,
        cause: 'the XML holds a document type, an entity or a CDATA section, none of which belongs in a VTK file',
        remedy: 'write the file again with a VTK writer',
      });
    }
    const end = window.find(Buffer.from('-->'), from + 4);
    return end < 0 ? -1 : end + 3;
  }
  return tagEnd(window, from, limit);
}

/** Looks for the closing tags behind a block of appended data, which alone prove that the file is whole. */
function findAppended(file: SourceFile, window: Window, node: OpenNode, from: number): AppendedBlock {
  const fail = (cause: string): InputError =>
    new InputError({ file: file.path, place: 'appended data', cause, remedy: 'copy or write the file again' });
  const encoding = node.attributes.encoding ?? 'base64';
  if (encoding !== 'raw' && encoding !== 'base64') throw fail(`"${encoding}" is not an encoding of appended data`);
  const [mark] = trimmed(window, from, file.size);
  if (mark >= file.size || window.byte(mark) !== 95) throw fail('the underscore before the data is missing');
  const tailBegin = Math.max(mark + 1, file.size - 4096);
  const tail = Buffer.alloc(file.size - tailBegin);
  readAt(file, tail, tailBegin);
  const close = tail.lastIndexOf('</AppendedData');
  if (close < 0 || tail.indexOf('</VTKFile>', close) < 0) throw fail('the file ends too early');
  return { encoding, begin: mark + 1, end: tailBegin + close };
}

function scan(file: SourceFile): Markup {
  const window = createWindow(file);
  const fail = (cause: string): InputError =>
    new InputError({ file: file.path, cause, remedy: 'copy or write the file again' });
  const parser = new SaxesParser({ position: false });
  const stack: OpenNode[] = [];
  let root: OpenNode | undefined;
  parser.on('error', (error) => {
    throw fail(`the XML is not well-formed (${error.message})`);
  });
  parser.on('opentag', (tag) => {
    const node: OpenNode = { name: tag.name, attributes: { ...tag.attributes }, children: [], textBegin: 0, textEnd: 0 };
    const parent = stack.at(-1);
    if (parent === undefined) root = node;
    else parent.children.push(node);
    if (root?.name !== 'VTKFile') throw fail(`this is not a VTK XML file: its root element is "${tag.name}"`);
    if (stack.push(node) > deepest) throw fail(`the XML is nested deeper than ${deepest} elements`);
  });
  parser.on('closetag', () => {
    stack.pop();
  });
  let at = window.find(Buffer.from('\uFEFF'), 0, Math.min(3, file.size)) === 0 ? 3 : 0;
  for (;;) {
    const open = window.find(less, at);
    const inside = stack.at(-1);
    const textEnd = open < 0 ? file.size : open;
    if (inside !== undefined && dataElements.has(inside.name)) {
      const [begin, end] = trimmed(window, at, textEnd);
      if (begin < end) {
        if (inside.textEnd > inside.textBegin) throw fail(`the data of ${describeArray(inside)} are interrupted`);
        inside.textBegin = begin;
        inside.textEnd = end;
      }
    } else if (textEnd - at > largestTag) {
      throw fail('this is not a VTK XML file: long text outside a data array');
    } else {
      parser.write(window.text(at, textEnd));
    }
    if (open < 0) break;
    const end = markupEnd(window, file, open);
    if (end < 0) throw fail(file.size - open > largestTag ? 'the XML has a tag without end' : 'the file ends too early');
    parser.write(window.text(open, end));
    at = end;
    const current = stack.at(-1);
    if (current?.name === 'AppendedData' && window.find(greater, end - 1, end) >= 0) {
      return { root: root as OpenNode, appended: findAppended(file, window, current, end) };
    }
  }
  if (stack.length > 0) throw fail(`the file ends too early, inside <${stack.at(-1)?.name}>`);
  parser.close();
  if (root === undefined) throw fail('this is not a VTK XML file: it has no root element');
  return { root };
}

/** How errors name a data array. */
export function describeArray(node: { readonly attributes: Readonly<Record<string, string>> }): string {
  return `array "${node.attributes.Name ?? '(without name)'}"`;
}

/**
 * Reads the XML of a VTK file, leaving the data where they are: text of data arrays and the appended block are known
 * by their bytes only, so that files of any size need no more memory than their tags.
 *
 * @throws InputError when the file is not well-formed, not a VTK file, or ends too early
 */
export function readMarkup(path: string): Markup {
  return useFile(path, scan);
}

/** First child of that name. */
export function childNamed(node: XmlNode, name: string): XmlNode | undefined {
  return node.children.find((child) => child.name === name);
}
