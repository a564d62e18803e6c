import { dirname, resolve } from 'node:path';
import type { NumberArray, NumberType } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import {
  closeHdf5,
  damaged,
  dataInfo,
  type Hdf5DataInfo,
  type Hdf5File,
  isGroup,
  linkNames,
  openHdf5,
  readNumbers,
  readPieces,
  textAttribute,
} from './hdf5.js';

/** A file of more nodes, or nested deeper, is taken for damaged or cyclic. */
const MOST_NODES = 2_000_000;
const DEEPEST = 48;

/** A link to a node of this or another file, as it stands in the file. */
export interface CgnsLink {
  /** Empty for a link inside the same file. */
  readonly file: string;
  readonly path: string;
}

/** A node of the CGNS tree without its data, links followed. */
export interface CgnsNode {
  readonly name: string;
  /** SIDS type, for example `Zone_t`. */
  readonly label: string;
  /** File and HDF5 path where the node really lies. */
  readonly file: string;
  readonly path: string;
  /** Dimensions in the standard's (Fortran) order, fastest first; undefined without data. */
  readonly dimensions?: readonly number[];
  readonly numberType?: NumberType;
  readonly data?: Hdf5DataInfo;
  readonly children: readonly CgnsNode[];
  /** Set where the node is a link in the file that was opened. */
  readonly link?: CgnsLink;
}

/** Open files of one reading; close it in a `finally`. */
export interface CgnsSession {
  readonly open: (path: string) => Hdf5File;
  readonly close: () => void;
}

export function openSession(): CgnsSession {
  const files = new Map<string, Hdf5File>();
  return {
    open: (path) => {
      const key = resolve(path);
      let file = files.get(key);
      if (file === undefined) {
        file = openHdf5(path);
        files.set(key, file);
      }
      return file;
    },
    close: () => {
      for (const file of files.values()) closeHdf5(file);
      files.clear();
    },
  };
}

const join = (path: string, name: string): string => (path === '/' ? `/${name}` : `${path}/${name}`);

function textData(file: Hdf5File, path: string): string {
  return decodeText(readNumbers(file, path, dataInfo(file, path)));
}

function decodeText(values: NumberArray): string {
  const bytes = new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
  const end = bytes.indexOf(0);
  return Buffer.from(end < 0 ? bytes : bytes.subarray(0, end))
    .toString('utf8')
    .replace(/ +$/, '');
}

interface Walk {
  readonly session: CgnsSession;
  nodes: number;
}

function follow(walk: Walk, file: Hdf5File, path: string, names: readonly string[], seen: readonly string[]): CgnsNode {
  const linkFile = names.includes(' file') ? textData(file, join(path, ' file')) : '';
  const linkPath = names.includes(' path') ? textData(file, join(path, ' path')) : '';
  if (linkPath === '') throw new InputError({ file: file.path, place: path, cause: 'the link names no target' });
  const target = linkFile === '' ? file.path : resolve(dirname(file.path), linkFile);
  const targetPath = linkPath.startsWith('/') ? linkPath : `/${linkPath}`;
  const key = `${resolve(target)}:${targetPath}`;
  // A link to a node that contains the link, directly or over other links, never ends.
  if (seen.some((one) => one === key || one.startsWith(`${key}/`))) {
    throw new InputError({
      file: file.path,
      place: path,
      cause: `the link to ${linkFile}${targetPath} runs in a circle`,
    });
  }
  let opened: Hdf5File;
  try {
    opened = walk.session.open(target);
  } catch (error) {
    const cause = error instanceof InputError ? error.details.cause : 'it cannot be read';
    throw new InputError({
      file: file.path,
      place: path,
      cause: `the link leads to ${linkFile}, and ${cause}`,
      remedy: 'put the linked file where the link expects it',
    });
  }
  if (!hasPath(opened, targetPath)) {
    throw new InputError({
      file: file.path,
      place: path,
      cause: `the link's target ${linkFile}${targetPath} is missing`,
    });
  }
  const node = visit(walk, opened, targetPath, [...seen, key]);
  return { ...node, name: path.slice(path.lastIndexOf('/') + 1), link: { file: linkFile, path: targetPath } };
}

function hasPath(file: Hdf5File, path: string): boolean {
  let at = '/';
  for (const name of path.split('/').filter((part) => part !== '')) {
    if (!isGroup(file, at) || !linkNames(file, at).includes(name)) return false;
    at = join(at, name);
  }
  return isGroup(file, at);
}

function visit(walk: Walk, file: Hdf5File, path: string, seen: readonly string[]): CgnsNode {
  walk.nodes += 1;
  if (walk.nodes > MOST_NODES || path.split('/').length > DEEPEST || seen.length > DEEPEST) {
    throw new InputError({
      file: file.path,
      place: path.slice(0, 80),
      cause: 'the tree of nodes is endless or damaged',
    });
  }
  const names = linkNames(file, path);
  const root = path === '/';
  if (!root && textAttribute(file, path, 'type') === 'LK') return follow(walk, file, path, names, seen);
  const data = !root && names.includes(' data') ? dataInfo(file, join(path, ' data')) : undefined;
  const here = [...seen, `${resolve(file.path)}:${path}`];
  const children: CgnsNode[] = [];
  for (const name of names) {
    // Names that begin with a blank are storage, not nodes.
    if (name.startsWith(' ') || !isGroup(file, join(path, name))) continue;
    children.push(visit(walk, file, join(path, name), here));
  }
  return {
    name: root ? '' : path.slice(path.lastIndexOf('/') + 1),
    label: root ? '' : textAttribute(file, path, 'label'),
    file: file.path,
    path,
    children,
    ...(data === undefined ? {} : { data, numberType: data.type, dimensions: [...data.shape].reverse() }),
  };
}

/**
 * Reads the tree of nodes with links followed, without the data.
 *
 * @throws InputError for damaged files, cyclic links, links without target
 */
export function readTree(session: CgnsSession, path: string): CgnsNode {
  const file = session.open(path);
  try {
    return visit({ session, nodes: 0 }, file, '/', []);
  } catch (error) {
    throw damaged(path, '', error);
  }
}

/** Path for people: the node inside its file. */
export function placeOf(node: CgnsNode): string {
  return node.path;
}

export function childrenOf(node: CgnsNode, label: string): CgnsNode[] {
  return node.children.filter((child) => child.label === label);
}

export function childOf(node: CgnsNode, label: string, name?: string): CgnsNode | undefined {
  return node.children.find((child) => child.label === label && (name === undefined || child.name === name));
}

/** @throws InputError when there is none */
export function requireChild(node: CgnsNode, label: string, name?: string): CgnsNode {
  const child = childOf(node, label, name);
  if (child === undefined) {
    throw new InputError({ file: node.file, place: placeOf(node), cause: `the node ${name ?? label} is missing` });
  }
  return child;
}

function requireData(node: CgnsNode): Hdf5DataInfo {
  if (node.data === undefined) {
    throw new InputError({ file: node.file, place: placeOf(node), cause: 'the node holds no data' });
  }
  return node.data;
}

export function readNode(session: CgnsSession, node: CgnsNode): NumberArray {
  return readNumbers(session.open(node.file), join(node.path, ' data'), requireData(node));
}

/** Pieces in the order of the file. */
export function readNodePieces(
  session: CgnsSession,
  node: CgnsNode,
  use: (values: NumberArray, begin: number) => void,
): void {
  readPieces(session.open(node.file), join(node.path, ' data'), requireData(node), use);
}

/** Text of a node; empty without data. */
export function readText(session: CgnsSession, node: CgnsNode | undefined): string {
  if (node?.data === undefined) return '';
  if (node.data.size !== 1) {
    throw new InputError({ file: node.file, place: placeOf(node), cause: 'text was expected, the node holds numbers' });
  }
  return decodeText(readNode(session, node));
}

/** Whole numbers of a node as plain numbers. @throws InputError when they are text or fractions */
export function readIntegers(session: CgnsSession, node: CgnsNode): number[] {
  const info = requireData(node);
  if (info.count > 10_000_000) {
    throw new InputError({ file: node.file, place: placeOf(node), cause: `${info.count} values are too many here` });
  }
  if (info.size < 4 || info.type.startsWith('Float')) {
    throw new InputError({
      file: node.file,
      place: placeOf(node),
      cause: `whole numbers were expected, not ${info.type}`,
    });
  }
  return Array.from(readNode(session, node), Number);
}

/** @throws InputError when there are not exactly `count` */
export function readIntegersOf(session: CgnsSession, node: CgnsNode, count: number): number[] {
  const values = readIntegers(session, node);
  if (values.length !== count) {
    throw new InputError({
      file: node.file,
      place: placeOf(node),
      cause: `${count} whole numbers were expected, the node holds ${values.length}`,
    });
  }
  return values;
}

/**
 * One-based (or signed) index numbers of 32 or 64 bit into 32 bit, unchanged.
 *
 * @throws InputError when the data are no whole numbers or one does not fit
 */
export function readIndices(session: CgnsSession, node: CgnsNode): Int32Array {
  const result = new Int32Array(requireIndexCount(node));
  readIndexPieces(session, node, (values, begin) => result.set(values, begin));
  return result;
}

/** @throws InputError when the node holds no whole numbers */
export function requireIndexCount(node: CgnsNode): number {
  const info = requireData(node);
  if (info.size < 4 || info.type.startsWith('Float')) {
    throw new InputError({
      file: node.file,
      place: placeOf(node),
      cause: `whole numbers were expected, not ${info.type}`,
    });
  }
  return info.count;
}

export function readIndexPieces(
  session: CgnsSession,
  node: CgnsNode,
  use: (values: Int32Array, begin: number) => void,
): void {
  requireIndexCount(node);
  readNodePieces(session, node, (values, begin) => {
    if (values instanceof Int32Array) {
      use(values, begin);
      return;
    }
    const narrow = new Int32Array(values.length);
    for (let i = 0; i < values.length; i++) {
      const value = Number(values[i]);
      narrow[i] = value;
      if (narrow[i] !== value) {
        throw new InputError({
          file: node.file,
          place: placeOf(node),
          cause: `the index ${value} is larger than any number of points or cells that can be held`,
        });
      }
    }
    use(narrow, begin);
  });
}
