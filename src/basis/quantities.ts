import type { DataArray, NumberArray } from './dataset.js';
import { InputError } from './errors.js';
import { type Field, sharedFloat64 } from './fields.js';
import { nearestName } from './nearest-name.js';
import { copyNumbers, holdsBigIntegers } from './number-arrays.js';
import { type StandardSlot, slotOf, standardNames } from './quantity-slots.js';
import { componentSuffixes, type Quantity } from './quantity-table.js';

export { fieldsToArrays } from './fields-to-arrays.js';
export { toFloat64 } from './number-arrays.js';
export { isStandardName, quantityOf, standardNameOf, standardNames } from './quantity-slots.js';
export {
  componentSuffixes,
  type Dimension,
  findQuantity,
  lengthPower,
  type Quantity,
  quantities,
  tensorSuffixes,
  unitOf,
  velocityPower,
} from './quantity-table.js';
export { type RenameProposal, suggestRenames } from './suggest-renames.js';

export interface RecogniseOptions {
  /** For the text of errors. */
  readonly file: string;
  /** Standard name (gathered or with component suffix) to the name in the file. */
  readonly rename?: Readonly<Record<string, string>> | undefined;
  /** Read only these: gathered or component names of standard quantities, or names in the file as they stand. */
  readonly quantities?: readonly string[] | undefined;
  /** kg/m3, for the conversion of dynamic quantities where the file holds no Density. */
  readonly density?: number | undefined;
}

export interface Recognised {
  readonly fields: Map<string, Field>;
  /** Names of arrays that mean no standard quantity. */
  readonly unrecognised: readonly string[];
  readonly recognised: readonly { readonly standard: string; readonly inFile: string }[];
  /** What was assumed or converted, one sentence each. */
  readonly remarks: readonly string[];
}

/** Where the numbers of one quantity come from: whole, by components, or absent where undefined. */
interface Source {
  readonly quantity: Quantity;
  whole?: DataArray;
  readonly parts: (DataArray | undefined)[];
}

function assignSlots(arrays: readonly DataArray[], options: RecogniseOptions): Map<DataArray, StandardSlot> {
  const assigned = new Map<DataArray, StandardSlot>();
  const renamed = new Set<string>();
  for (const [standard, inFile] of Object.entries(options.rename ?? {})) {
    const place = `rename ${standard}`;
    const slot = slotOf(standard);
    if (slot === undefined) {
      throw new InputError({
        file: options.file,
        place,
        cause: `${standard} is not a standard quantity`,
        remedy: `the nearest is ${nearestName(standard, standardNames)}`,
      });
    }
    const array = arrays.find((entry) => entry.name === inFile);
    if (array === undefined) {
      const names = arrays.map((entry) => entry.name);
      const nearest = nearestName(inFile, names);
      throw new InputError({
        file: options.file,
        place,
        cause: `the file holds no array ${inFile}`,
        remedy: nearest === undefined ? 'it holds no arrays at all' : `the nearest name in it is ${nearest}`,
      });
    }
    const taken = assigned.get(array);
    if (taken !== undefined) {
      throw new InputError({
        file: options.file,
        place,
        cause: `array ${inFile} is already taken as ${taken.standard}`,
        remedy: 'give each array one standard name',
      });
    }
    assigned.set(array, slot);
    renamed.add(slot.standard);
  }
  for (const array of arrays) {
    const slot = assigned.has(array) ? undefined : slotOf(array.name);
    if (slot !== undefined && !renamed.has(slot.standard)) assigned.set(array, slot);
  }
  return assigned;
}

function requireUnique(assigned: ReadonlyMap<DataArray, StandardSlot>, file: string): void {
  const seen = new Map<string, DataArray>();
  for (const [array, slot] of assigned) {
    const other = seen.get(slot.standard);
    if (other !== undefined) {
      throw new InputError({
        file,
        place: `array ${array.name}`,
        cause: `${other.name} and ${array.name} both mean ${slot.standard}`,
        remedy: `say which is meant by a rename of ${slot.standard}`,
      });
    }
    seen.set(slot.standard, array);
  }
}

function gatherSources(assigned: ReadonlyMap<DataArray, StandardSlot>): Map<string, Source> {
  const sources = new Map<string, Source>();
  for (const [array, slot] of assigned) {
    const source = sources.get(slot.quantity.name) ?? { quantity: slot.quantity, parts: [] };
    if (slot.component < 0) source.whole = array;
    else source.parts[slot.component] = array;
    sources.set(slot.quantity.name, source);
  }
  return sources;
}

function wantedNames(
  options: RecogniseOptions,
  arrays: readonly DataArray[],
  sources: ReadonlyMap<string, Source>,
): Set<string> | undefined {
  if (options.quantities === undefined) return undefined;
  const wanted = new Set<string>();
  for (const name of options.quantities) {
    const standard = slotOf(name)?.quantity.name;
    // Asking for a kinematic quantity means its dynamic twin where only that is in the file.
    const twin = convertedByDensity.find(({ from, to }) => to === standard && !sources.has(to) && sources.has(from));
    if (twin !== undefined) wanted.add(twin.from);
    else if (standard !== undefined && sources.has(standard)) wanted.add(standard);
    else if (arrays.some((array) => array.name === name)) wanted.add(name);
    else {
      const known = [...standardNames, ...arrays.map((array) => array.name)];
      throw new InputError({
        file: options.file,
        place: `quantity ${name}`,
        cause:
          standard === undefined
            ? 'this is neither a standard quantity nor an array of the file'
            : 'no array of this standard name is in the file',
        remedy:
          standard === undefined
            ? `the nearest name is ${nearestName(name, known)}`
            : 'map an array to it by a rename or leave it out',
      });
    }
  }
  return wanted;
}

function requireTuples(array: DataArray, tuples: number, first: string, file: string): void {
  if (array.tuples === tuples) return;
  throw new InputError({
    file,
    place: `array ${array.name}`,
    cause: `it has ${array.tuples} entries while ${first} has ${tuples}`,
    remedy: 'write the file again; every array of one place needs the same number',
  });
}

function requireComponents(array: DataArray, wanted: number, standard: string, file: string): void {
  if (array.components === wanted) return;
  throw new InputError({
    file,
    place: `array ${array.name}`,
    cause: `it has ${array.components} component${array.components === 1 ? '' : 's'} and ${standard} needs ${wanted}`,
    remedy:
      wanted === 9
        ? `the order of fewer numbers differs between programs: write six scalars ${standard}XX, ${standard}XY, ...`
        : 'map another array to it by a rename',
  });
}

/** Throws for the first value that is not a finite number, naming place and component. */
function requireFinite(values: NumberArray, array: DataArray, file: string): void {
  if (holdsBigIntegers(values)) return;
  for (let at = 0; at < values.length; at++) {
    const value = values[at]!;
    // A difference with itself is zero for finite numbers only.
    if (value - value === 0) continue;
    const { components } = array;
    const component = components === 1 ? '' : `, component ${at % components}`;
    throw new InputError({
      file,
      place: `array ${array.name}, entry ${Math.floor(at / components)}${component} (counted from 0)`,
      cause: `the value is ${Number.isNaN(value) ? 'not a number' : value > 0 ? 'infinite' : 'minus infinite'}`,
      remedy: 'repair the file or leave the quantity out',
    });
  }
}

function loadNumbers(array: DataArray, file: string): NumberArray {
  const values = array.load();
  const announced = array.tuples * array.components;
  if (values.length !== announced) {
    throw new InputError({
      file,
      place: `array ${array.name}`,
      cause: `it holds ${values.length} numbers, ${announced} were announced`,
      remedy: 'the file is truncated or inconsistent: write it again',
    });
  }
  requireFinite(values, array, file);
  return values;
}

/** 3 x 3 row by row into XX XY XZ YY YZ ZZ; halves of unequal pairs are averaged. */
function copyTensor(values: NumberArray, out: Float64Array): void {
  const upper = [0, 1, 2, 4, 5, 8];
  const lower = [0, 3, 6, 4, 7, 8];
  for (let tuple = 0; tuple * 6 < out.length; tuple++) {
    for (let c = 0; c < 6; c++) {
      const a = Number(values[tuple * 9 + upper[c]!]);
      const b = Number(values[tuple * 9 + lower[c]!]);
      out[tuple * 6 + c] = a === b ? a : 0.5 * (a + b);
    }
  }
}

function readWhole(quantity: Quantity, array: DataArray, file: string): Field {
  const { components } = quantity;
  requireComponents(array, components === 6 ? 9 : components, quantity.name, file);
  const values = sharedFloat64(array.tuples * components);
  if (components === 6) copyTensor(loadNumbers(array, file), values);
  else copyNumbers(loadNumbers(array, file), values);
  return { components, values };
}

function requireNormalComponents(quantity: Quantity, missing: readonly string[], file: string): void {
  const normal = missing.filter((suffix) => ['XX', 'YY', 'ZZ'].includes(suffix));
  if (normal.length === 0) return;
  throw new InputError({
    file,
    place: `array ${quantity.name}${normal[0]}`,
    cause: `it is missing while other components of ${quantity.name} are there`,
    remedy: 'write all three normal components or none',
  });
}

function readParts(source: Source, tuples: number, file: string, remarks: string[]): Field {
  const { quantity, parts } = source;
  const { components } = quantity;
  const suffixes = componentSuffixes(components);
  const missing = suffixes.filter((_, component) => parts[component] === undefined);
  requireNormalComponents(quantity, missing, file);
  if (missing.length > 0) {
    const names = missing.map((suffix) => `${quantity.name}${suffix}`).join(', ');
    remarks.push(`${names} not in the file: taken as zero.`);
  }
  const values = sharedFloat64(tuples * components);
  for (let c = 0; c < components; c++) {
    const part = parts[c];
    if (part === undefined) continue;
    requireComponents(part, 1, `${quantity.name}${suffixes[c]}`, file);
    const numbers = loadNumbers(part, file);
    for (let tuple = 0; tuple < tuples; tuple++) values[tuple * components + c] = Number(numbers[tuple]);
  }
  return { components, values };
}

function readSource(source: Source, tuples: number, file: string, remarks: string[]): Field {
  const { quantity, whole, parts } = source;
  if (whole === undefined) return readParts(source, tuples, file, remarks);
  if (parts.some((part) => part !== undefined)) {
    remarks.push(`${quantity.name} read from array ${whole.name}; its single components in the file are not used.`);
  }
  return readWhole(quantity, whole, file);
}

/** Dynamic quantities that are held per unit mass: `to` = sign * `from` / Density. */
const convertedByDensity = [
  { from: 'ReynoldsStress', to: 'VelocityCovariance', sign: -1 },
  { from: 'ViscosityMolecular', to: 'ViscosityKinematic', sign: 1 },
  { from: 'ViscosityEddy', to: 'ViscosityEddyKinematic', sign: 1 },
] as const;

function divideByDensity(field: Field, density: Float64Array, sign: number, file: string): Field {
  const { components, values } = field;
  const out = sharedFloat64(values.length);
  for (let tuple = 0; tuple < density.length; tuple++) {
    const rho = density[tuple]!;
    if (!(rho > 0)) {
      throw new InputError({
        file,
        place: `array Density, entry ${tuple} (counted from 0)`,
        cause: `the density is ${rho}`,
        remedy: 'it must be positive where stresses or viscosities are divided by it',
      });
    }
    for (let c = 0; c < components; c++) out[tuple * components + c] = (sign * values[tuple * components + c]!) / rho;
  }
  return { components, values: out };
}

function convertDynamic(
  fields: Map<string, Field>,
  density: Float64Array | undefined,
  file: string,
  remarks: string[],
): void {
  for (const { from, to, sign } of convertedByDensity) {
    const field = fields.get(from);
    if (field === undefined) continue;
    if (fields.has(to)) {
      // The twin per unit mass is at hand; a stress has no other use.
      if (from === 'ReynoldsStress') fields.delete(from);
    } else if (density !== undefined) {
      fields.set(to, divideByDensity(field, density, sign, file));
      fields.delete(from);
      remarks.push(`${to} computed as ${sign < 0 ? '-' : ''}${from} / Density.`);
    } else if (from === 'ReynoldsStress') {
      throw new InputError({
        file,
        place: 'ReynoldsStress',
        cause: "the standard's ReynoldsStress is -rho u'u' and Density is missing",
        remedy:
          'add a Density array or constant, or map the arrays to VelocityCovariance by a rename if they are per unit mass',
      });
    }
  }
}

function readPlain(array: DataArray, file: string): Field {
  const values = sharedFloat64(array.tuples * array.components);
  copyNumbers(loadNumbers(array, file), values);
  return { components: array.components, values };
}

/**
 * Finds the standard quantities among the arrays of a file. A name counts only when it is the standard one (capitals
 * ignored) or given by `rename`; nothing is guessed. Components are gathered: VelocityX/Y/Z or a 3-component Velocity
 * become `Velocity`; six scalars or a 3 x 3 array become `VelocityCovariance` (XX XY XZ YY YZ ZZ), and ReynoldsStress
 * divided by -Density becomes the same. Values lie on shared memory as Float64; integers are converted.
 *
 * @param arrays  arrays of one place (points or cells), all with the same number of tuples
 * @throws InputError for NaN or infinite values (first index), unequal sizes, wrong component counts, two arrays for
 *   one quantity, a rename or a wanted quantity that meets nothing, a stress without density
 */
export function recogniseFields(arrays: readonly DataArray[], options: RecogniseOptions): Recognised {
  const { file } = options;
  const remarks: string[] = [];
  const assigned = assignSlots(arrays, options);
  requireUnique(assigned, file);
  const sources = gatherSources(assigned);
  const wanted = wantedNames(options, arrays, sources);
  const first = arrays.find((array) => assigned.has(array) || wanted?.has(array.name));
  const tuples = first?.tuples ?? 0;
  for (const array of assigned.keys()) requireTuples(array, tuples, first?.name ?? '', file);
  const fields = new Map<string, Field>();
  for (const [name, source] of sources) {
    if (wanted === undefined || wanted.has(name)) fields.set(name, readSource(source, tuples, file, remarks));
  }
  let density = fields.get('Density')?.values;
  const densitySource = sources.get('Density');
  const needed = convertedByDensity.some(({ from, to }) => fields.has(from) && !fields.has(to));
  if (density === undefined && densitySource !== undefined && needed) {
    density = readSource(densitySource, tuples, file, remarks).values;
  }
  if (density === undefined && options.density !== undefined && needed) {
    density = new Float64Array(tuples).fill(options.density);
  }
  convertDynamic(fields, density, file, remarks);
  for (const array of arrays) {
    if (assigned.has(array) || !wanted?.has(array.name)) continue;
    requireTuples(array, tuples, first?.name ?? '', file);
    fields.set(array.name, readPlain(array, file));
  }
  return {
    fields,
    unrecognised: arrays.filter((array) => !assigned.has(array)).map((array) => array.name),
    recognised: [...assigned].map(([array, slot]) => ({ standard: slot.standard, inFile: array.name })),
    remarks,
  };
}
