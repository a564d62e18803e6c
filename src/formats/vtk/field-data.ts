import type { NumberArray } from '../../basis/dataset.js';
import { type FileContext, readArray } from './arrays.js';
import { childNamed, type Element } from './head.js';

/** What the field data of a file say besides its mesh. */
export interface FieldData {
  readonly notes: Map<string, string>;
  readonly remarks: readonly string[];
  readonly time?: number;
}

/** Strings are stored as the codes of their characters with a zero behind each; several become lines. */
function textOf(codes: NumberArray): string {
  const bytes = Buffer.from(Uint8Array.from(codes as Int16Array));
  const text = bytes.toString('utf8');
  return (text.endsWith('\0') ? text.slice(0, -1) : text).replaceAll('\0', '\n');
}

/** Field data: strings are kept as notes, `TimeValue` is the physical time, other numbers are left out and named. */
export async function readFieldData(grid: Element, context: FileContext): Promise<FieldData> {
  const notes = new Map<string, string>();
  const remarks: string[] = [];
  let time: number | undefined;
  for (const element of childNamed(grid, 'FieldData')?.children ?? []) {
    if (element.name !== 'DataArray' && element.name !== 'Array') continue;
    const name = element.attributes.Name ?? '';
    const isText = element.attributes.type === 'String';
    if (!isText && name !== 'TimeValue') {
      remarks.push(`field data ${name} are neither text nor a time and were left out`);
      continue;
    }
    // As text the codes beyond 127 are written as negative numbers or as they are; Int16 holds both.
    const type = element.attributes.format === 'ascii' ? 'Int16' : 'UInt8';
    const plain = isText ? { ...element, attributes: { ...element.attributes, type } } : element;
    const values = (await readArray(plain, context, { place: 'FieldData' })).load();
    if (isText) notes.set(name, textOf(values));
    else if (values.length > 0) time = Number(values[0]);
  }
  return { notes, remarks, ...(time === undefined ? {} : { time }) };
}
