import type { NumberArray } from './dataset.js';

/** True for the 64-bit integer arrays, whose entries are not plain numbers. */
export function holdsBigIntegers(values: NumberArray): values is BigInt64Array | BigUint64Array {
  return values instanceof BigInt64Array || values instanceof BigUint64Array;
}

/** Copies numbers of any type into `out`, which is as long. */
export function copyNumbers(values: NumberArray, out: Float64Array): void {
  if (holdsBigIntegers(values)) {
    for (let at = 0; at < out.length; at++) out[at] = Number(values[at]);
  } else {
    out.set(values);
  }
}

/** Any numbers as Float64Array; the same array where it is one already. */
export function toFloat64(values: NumberArray): Float64Array {
  if (values instanceof Float64Array) return values;
  const out = new Float64Array(values.length);
  copyNumbers(values, out);
  return out;
}
