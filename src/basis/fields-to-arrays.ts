import type { DataArray, NumberArray, NumberType } from './dataset.js';
import type { Fields } from './fields.js';
import { tensorSuffixes } from './quantity-table.js';

/**
 * The arrays under which fields are written: vectors as one 3-component array, tensors as six scalars with the
 * suffixes XX XY XZ YY YZ ZZ.
 */
export function fieldsToArrays(
  fields: Fields,
  numberType: Extract<NumberType, 'Float32' | 'Float64'> = 'Float64',
): DataArray[] {
  const stored = (values: Float64Array): NumberArray => (numberType === 'Float32' ? Float32Array.from(values) : values);
  const arrays: DataArray[] = [];
  for (const [name, { components, values }] of fields) {
    const tuples = values.length / components;
    if (components !== 6) {
      arrays.push({ name, components, tuples, type: numberType, load: () => stored(values) });
      continue;
    }
    tensorSuffixes.forEach((suffix, component) => {
      const load = (): NumberArray => {
        const out = new Float64Array(tuples);
        for (let tuple = 0; tuple < tuples; tuple++) out[tuple] = values[tuple * 6 + component]!;
        return stored(out);
      };
      arrays.push({ name: `${name}${suffix}`, components: 1, tuples, type: numberType, load });
    });
  }
  return arrays;
}
