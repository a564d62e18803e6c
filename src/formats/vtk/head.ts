import { SaxesParser } from 'saxes';
import { InputError } from '../../basis/errors.js';
import type { FileReader } from '../file-reader.js';

/** One element of the head. Text is not kept: its places in the file are. */
export interface Element {
  readonly name: string;
  readonly attributes: Readonly<Record<string, string>>;
  readonly children: Element[];
  /** Byte ranges [begin, end) of the text directly inside, before the first child that is not text. */
  readonly text: [number, number][];
}

export interface Head {
  readonly root: Element;
  /** Appended data: the byte behind the `_`, the first byte behind them, and how they are encoded. */
  readonly appended?: { readonly begin: number; readonly end: number; readonly encoding: 'raw' | 'base64' };
}

const chunkBytes = 1 << 20;
const longestTag = 1 << 20;
const lessThan = 0x3c;
const greaterThan = 0x3e;
const doubleQuote = 0x22;
const singleQuote = 0x27;
const underscore = 0x5f;

function bad(file: string, cause: string): InputError {
  return new InputError({ file, cause, remedy: 'it is not well-formed VTK XML; write it again' });
}

/** Scans bytes in order, refilling from the file: tags are short, text between them may be gigabytes. */
function createScanner(reader: FileReader) {
  let base = 0;
  let chunk = reader.bytes(0, Math.min(chunkBytes, reader.size));
  const at = (position: number): number => {
    if (position >= reader.size) return -1;
    if (position < base || position >= base + chunk.length) {
      base = position;
      chunk = reader.bytes(base, Math.min(chunkBytes, reader.size - base));
    }
    return chunk[position - base] as number;
  };
  const find = (byte: number, from: number): number => {
    let position = from;
    while (position < reader.size) {
      if (at(position) < 0) return -1;
      const found = chunk.indexOf(byte, position - base);
      if (found >= 0) return base + found;
      position = base + chunk.length;
    }
    return -1;
  };
  const tagEnd = (from: number): number => {
    let quote = 0;
    for (let position = from; position < reader.size && position - from < longestTag; position += 1) {
      const byte = at(position);
      if (quote !== 0) {
        if (byte === quote) quote = 0;
      } else if (byte === doubleQuote || byte === singleQuote) quote = byte;
      else if (byte === greaterThan) return position;
    }
    return -1;
  };
  return { at, find, tagEnd };
}

/** Where the appended data end: only the tags behind them prove that the file is whole. */
function appendedEnd(reader: FileReader, begin: number): number {
  const tailBegin = Math.max(begin, reader.size - 4096);
  const tail = Buffer.from(reader.bytes(tailBegin, reader.size - tailBegin));
  const close = tail.lastIndexOf('</AppendedData');
  const last = close < 0 ? -1 : tail.indexOf('</VTKFile', close);
  if (last < 0 || tail.indexOf('>', last) < 0) {
    throw bad(reader.path, 'the file ends before its appended data are closed: it is truncated');
  }
  return tailBegin + close;
}

/**
 * Reads the tags of a VTK XML file up to its appended data. Only tags pass through the XML parser, so a file with
 * raw appended bytes (not well-formed as a whole) and inline arrays of any size are fine.
 *
 * @throws InputError when the file is no XML, is cut off inside a tag, or carries a document type definition
 */
export function readHead(reader: FileReader): Head {
  const file = reader.path;
  const scanner = createScanner(reader);
  const parser = new SaxesParser({ xmlns: false });
  let fault: Error | undefined;
  parser.on('error', (error) => {
    fault ??= error;
  });
  const stack: Element[] = [];
  let root: Element | undefined;
  parser.on('opentag', (tag) => {
    const element: Element = {
      name: tag.name,
      attributes: tag.attributes as Record<string, string>,
      children: [],
      text: [],
    };
    stack.at(-1)?.children.push(element);
    root ??= element;
    stack.push(element);
  });
  parser.on('closetag', () => {
    stack.pop();
  });

  if (reader.size === 0) throw new InputError({ file, cause: 'the file is empty' });
  let position = scanner.find(lessThan, 0);
  if (position < 0 || position > 4096) throw bad(file, 'the file does not begin like XML');
  while (position >= 0) {
    const next = String.fromCharCode(scanner.at(position + 1), scanner.at(position + 2), scanner.at(position + 3));
    if (next.startsWith('!--')) {
      let end = scanner.find(greaterThan, position);
      while (end >= 0 && !(scanner.at(end - 1) === 0x2d && scanner.at(end - 2) === 0x2d)) {
        end = scanner.find(greaterThan, end + 1);
      }
      if (end < 0) throw bad(file, 'a comment does not end');
      position = scanner.find(lessThan, end + 1);
      continue;
    }
    if (next.startsWith('!')) throw bad(file, 'document type definitions and CDATA sections are not accepted');
    const end = scanner.tagEnd(position);
    if (end < 0) throw bad(file, `the file ends inside a tag (byte ${position})`);
    const tag = Buffer.from(reader.bytes(position, end + 1 - position)).toString('utf8');
    parser.write(tag);
    if (fault !== undefined) throw bad(file, `XML fault near byte ${position}: ${fault.message.replace(/^\S+ /, '')}`);
    const open = stack.at(-1);
    if (open?.name === 'AppendedData') {
      const mark = scanner.find(underscore, end + 1);
      if (mark < 0 || mark - end > 4096) throw bad(file, "the '_' before the appended data is missing");
      const encoding = open.attributes.encoding ?? 'base64';
      if (encoding !== 'raw' && encoding !== 'base64') throw bad(file, `appended encoding '${encoding}' is not known`);
      if (root === undefined) break;
      return { root, appended: { begin: mark + 1, end: appendedEnd(reader, mark + 1), encoding } };
    }
    if (root !== undefined && open === undefined) return { root };
    position = scanner.find(lessThan, end + 1);
    const textEnd = position < 0 ? reader.size : position;
    if (open !== undefined && textEnd > end + 1 && open.children.every((child) => child.name === 'InformationKey')) {
      open.text.push([end + 1, textEnd]);
    }
  }
  throw bad(file, 'the file ends before its last tag is closed');
}

export function childrenNamed(element: Element | undefined, name: string): readonly Element[] {
  return element?.children.filter((child) => child.name === name) ?? [];
}

export function childNamed(element: Element | undefined, name: string): Element | undefined {
  return element?.children.find((child) => child.name === name);
}
