import type { DataArray, NumberArray, NumberType } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { type FileReader, withFile } from '../file-reader.js';
import { readAscii } from './ascii.js';
import {
  checkAnnounced,
  type EncodedPlace,
  type Encoding,
  expandPayload,
  expandXzPayload,
  readPayload,
} from './encoded.js';
import type { Element, Head } from './head.js';
import { bytesOf, isNumberType, swapBytes, viewAs } from './numbers.js';

/** What is needed to find and decode the arrays of one open file. */
export interface FileContext {
  readonly reader: FileReader;
  readonly encoding: Encoding;
  readonly appended: Head['appended'];
}

const compressors: Readonly<Record<string, Encoding['compressor']>> = {
  vtkZLibDataCompressor: 'zlib',
  vtkLZ4DataCompressor: 'lz4',
  vtkLZMADataCompressor: 'lzma',
};

function fault(reader: FileReader, place: string | undefined, cause: string): InputError {
  return new InputError({ file: reader.path, ...(place === undefined ? {} : { place }), cause });
}

/** Reads the attributes of the root element that govern every array. */
export function openContext(reader: FileReader, head: Head): FileContext {
  const { attributes } = head.root;
  const order = attributes.byte_order ?? 'LittleEndian';
  if (order !== 'LittleEndian' && order !== 'BigEndian') {
    throw fault(reader, undefined, `byte order '${order}' is not known`);
  }
  const header = attributes.header_type ?? 'UInt32';
  if (header !== 'UInt32' && header !== 'UInt64')
    throw fault(reader, undefined, `header type '${header}' is not known`);
  const compressor = attributes.compressor === undefined ? 'none' : compressors[attributes.compressor];
  if (compressor === undefined) throw fault(reader, undefined, `compressor '${attributes.compressor}' is not known`);
  return {
    reader,
    encoding: { headerBytes: header === 'UInt32' ? 4 : 8, bigEndian: order === 'BigEndian', compressor },
    appended: head.appended,
  };
}

function componentsOf(element: Element, label: string, reader: FileReader): number {
  const components = Number(element.attributes.NumberOfComponents ?? '1');
  // Some writers say 0 for scalars.
  if (components === 0) return 1;
  if (!Number.isInteger(components) || components < 0 || components > 1024) {
    throw fault(reader, label, `NumberOfComponents '${element.attributes.NumberOfComponents}' is no sensible number`);
  }
  return components;
}

function placeOf(element: Element, label: string, context: FileContext): EncodedPlace {
  const { reader, appended } = context;
  if (element.attributes.format === 'appended') {
    if (appended === undefined) throw fault(reader, label, 'the array is appended but the file has no appended data');
    const offset = Number(element.attributes.offset);
    if (!Number.isInteger(offset) || offset < 0 || appended.begin + offset >= appended.end) {
      const length = appended.end - appended.begin;
      throw fault(reader, label, `offset '${element.attributes.offset}' lies outside the ${length} appended bytes`);
    }
    return { begin: appended.begin + offset, end: appended.end, text: appended.encoding === 'base64', label };
  }
  const [range] = element.text;
  if (range === undefined) throw fault(reader, label, 'the array is empty');
  return { begin: range[0], end: range[1], text: true, label };
}

function decodeBytes(bytes: Uint8Array, type: NumberType, context: FileContext): NumberArray {
  if (context.encoding.bigEndian) swapBytes(bytes, bytesOf(type));
  return viewAs(bytes, type);
}

export interface ArrayWish {
  readonly place: string;
  /** Number of tuples it must have; undefined when only its own header says (connectivity, faces). */
  readonly tuples?: number;
}

/**
 * The array an element describes. LZMA arrays are expanded at once because their decoder is asynchronous; all others
 * when they are loaded.
 *
 * @throws InputError when type, offset or size make no sense
 */
export async function readArray(element: Element, context: FileContext, wish: ArrayWish): Promise<DataArray> {
  const { reader, encoding } = context;
  const name = element.attributes.Name ?? '';
  const label = name === '' ? wish.place : `${wish.place} array ${name}`;
  const { type } = element.attributes;
  if (!isNumberType(type)) throw fault(reader, label, `number type '${type}' is not known`);
  const components = componentsOf(element, label, reader);
  const expected = wish.tuples === undefined ? undefined : wish.tuples * components * bytesOf(type);
  const finish = (load: () => NumberArray, known?: number): DataArray => ({
    name,
    components,
    tuples: wish.tuples ?? (known ?? load().length) / components,
    type,
    load,
  });
  if (expected === 0) return finish(() => viewAs(new Uint8Array(0), type), 0);
  const format = element.attributes.format ?? 'ascii';
  const { path } = reader;
  if (format === 'ascii') {
    const count = expected === undefined ? undefined : expected / bytesOf(type);
    const load = (): NumberArray => withFile(path, (file) => readAscii(file, element.text, type, count, label));
    return finish(load);
  }
  if (format !== 'binary' && format !== 'appended') throw fault(reader, label, `format '${format}' is not known`);
  const place = placeOf(element, label, context);
  if (encoding.compressor === 'lzma') {
    const values = decodeBytes(
      await expandXzPayload(readPayload(reader, place, encoding, expected), reader, label),
      type,
      context,
    );
    return finish(() => values.slice(), values.length);
  }
  const load = (): NumberArray =>
    withFile(path, (file) =>
      decodeBytes(
        expandPayload(readPayload(file, place, encoding, expected), file, label, encoding.compressor),
        type,
        context,
      ),
    );
  // Announced sizes are checked at once, so that a damaged file is refused before any work is done.
  return finish(load, checkAnnounced(reader, place, encoding, expected) / bytesOf(type));
}
