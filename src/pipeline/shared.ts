type TypedArray =
  | Int8Array
  | Uint8Array
  | Int16Array
  | Uint16Array
  | Int32Array
  | Uint32Array
  | Float32Array
  | Float64Array;

const smallBytes = 4096;

function onSharedMemory(array: TypedArray): TypedArray {
  if (array.buffer instanceof SharedArrayBuffer || array.byteLength <= smallBytes) return array;
  const buffer = new SharedArrayBuffer(array.byteLength);
  const copy = new (array.constructor as new (buffer: SharedArrayBuffer) => TypedArray)(buffer);
  copy.set(array);
  return copy;
}

/**
 * A copy of a plain object in which every large typed array lies on shared memory, so that handing it to workers
 * copies nothing. Arrays that are shared already are kept as they are.
 */
export function shareDeep<T>(value: T): T {
  const seen = new Map<object, unknown>();
  const visit = (item: unknown): unknown => {
    if (item === null || typeof item !== 'object') return item;
    const known = seen.get(item);
    if (known !== undefined) return known;
    if (ArrayBuffer.isView(item)) {
      const copy = onSharedMemory(item as TypedArray);
      seen.set(item, copy);
      return copy;
    }
    if (item instanceof ArrayBuffer || item instanceof SharedArrayBuffer) return item;
    if (item instanceof Map) {
      const copy = new Map<unknown, unknown>();
      seen.set(item, copy);
      for (const [key, entry] of item) copy.set(key, visit(entry));
      return copy;
    }
    if (Array.isArray(item)) {
      const copy: unknown[] = [];
      seen.set(item, copy);
      for (const entry of item) copy.push(visit(entry));
      return copy;
    }
    const copy: Record<string, unknown> = {};
    seen.set(item, copy);
    for (const [key, entry] of Object.entries(item)) copy[key] = visit(entry);
    return copy;
  };
  return visit(value) as T;
}
