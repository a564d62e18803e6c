import { findQuantity } from '../../basis/quantities.js';
import { type CgnsNode, type CgnsSession, childOf, readNode, readText } from './tree.js';

/** Factors to SI of one set of units; undefined where the file leaves the unit open. */
export interface Units {
  readonly mass?: number;
  readonly length?: number;
  readonly time?: number;
  readonly temperature?: number;
  /** kelvin = value * temperature + shift. */
  readonly shift?: number;
  readonly angle?: number;
  /** As written, for remarks. */
  readonly names: string;
}

/** What a node hands down to its children: class of data and units. */
export interface DataContext {
  readonly dataClass: string;
  readonly units: Units | undefined;
}

export const noContext: DataContext = { dataClass: '', units: undefined };

/** SI value = value * scale + offset. */
export interface Conversion {
  readonly scale: number;
  readonly offset: number;
  /** Why the numbers were taken as they are though SI could not be proved. */
  readonly doubt?: 'no unit' | 'unknown reference' | 'unknown dimension';
}

// Exact by definition (international pound and foot, 1959); the slug is pound-force s2/ft.
const POUND = 0.45359237;
const FOOT = 0.3048;
const masses: Readonly<Record<string, number>> = {
  Kilogram: 1,
  Gram: 1e-3,
  Slug: (POUND * 9.80665) / FOOT,
  PoundMass: POUND,
};
const lengths: Readonly<Record<string, number>> = {
  Meter: 1,
  Centimeter: 1e-2,
  Millimeter: 1e-3,
  Foot: FOOT,
  Inch: FOOT / 12,
};
const temperatures: Readonly<Record<string, readonly [number, number]>> = {
  Kelvin: [1, 0],
  Celsius: [1, 273.15],
  Rankine: [5 / 9, 0],
  Fahrenheit: [5 / 9, (459.67 * 5) / 9],
};
const angles: Readonly<Record<string, number>> = { Degree: Math.PI / 180, Radian: 1 };

/** Units of a DimensionalUnits_t text: five fields of 32 characters (more are electric and luminous ones). */
function parseUnits(text: string): Units {
  const field = (k: number): string => text.slice(32 * k, 32 * k + 32).replace(/[\0 ]+$/, '');
  const [mass, length, time, temperature, angle] = [0, 1, 2, 3, 4].map(field) as [
    string,
    string,
    string,
    string,
    string,
  ];
  const heat = temperatures[temperature];
  return {
    names: [mass, length, time, temperature, angle].filter((name) => name !== '' && name !== 'Null').join(', '),
    ...(masses[mass] === undefined ? {} : { mass: masses[mass] }),
    ...(lengths[length] === undefined ? {} : { length: lengths[length] }),
    ...(time === 'Second' ? { time: 1 } : {}),
    ...(heat === undefined ? {} : { temperature: heat[0], shift: heat[1] }),
    ...(angles[angle] === undefined ? {} : { angle: angles[angle] }),
  };
}

/** The context below a node: its own DataClass_t and DimensionalUnits_t stand before what it inherits. */
export function inherit(session: CgnsSession, context: DataContext, node: CgnsNode): DataContext {
  const own = childOf(node, 'DataClass_t');
  const units = childOf(node, 'DimensionalUnits_t');
  return {
    dataClass: own === undefined ? context.dataClass : readText(session, own),
    units: units === undefined ? context.units : parseUnits(readRawText(session, units)),
  };
}

/** Text with its inner blanks and without cutting at a zero, as fields of fixed width need it. */
function readRawText(session: CgnsSession, node: CgnsNode): string {
  if (node.data === undefined) return '';
  const values = readNode(session, node);
  return Buffer.from(values.buffer, values.byteOffset, values.byteLength).toString('latin1');
}

/** Mass, length, time, temperature, angle. */
type Exponents = readonly [number, number, number, number, number];

/** Dimensions of data names beyond the quantities that are computed with (SIDS appendix A). */
const otherNames: readonly (readonly [RegExp, Exponents])[] = [
  [/^Coordinate(X|Y|Z|R|Xi|Eta|Zeta|Normal|Tangential)$/, [0, 1, 0, 0, 0]],
  [/^Coordinate(Theta|Phi)$/, [0, 0, 0, 0, 1]],
  [/^Velocity\w*$/, [0, 1, -1, 0, 0]],
  [/^ReynoldsStress[XYZ]{2}$/, [1, -1, -2, 0, 0]],
  [/^Momentum\w*$/, [1, -2, -1, 0, 0]],
  [/^Vorticity\w*$/, [0, 0, -1, 0, 0]],
  [/^Pressure\w*$/, [1, -1, -2, 0, 0]],
  [/^Density\w*$/, [1, -3, 0, 0, 0]],
  [/^Temperature\w*$/, [0, 0, 0, 1, 0]],
  [/^Mach\w*$|^Turbulent(BBReynolds)$|^LengthReference$/, [0, 0, 0, 0, 0]],
  [/^Energy(Stagnation|Internal|Kinetic)?$|^Enthalpy\w*$/, [0, 2, -2, 0, 0]],
  [/^EnergyStagnationDensity$/, [1, -1, -2, 0, 0]],
  [/^SkinFriction\w*$/, [1, -1, -2, 0, 0]],
  [/^(TimeValues|Time)$/, [0, 0, 1, 0, 0]],
];

/** Dimension of a standard name, `VelocityX` and `VelocityMeanX` alike; undefined for names that are none. */
export function exponentsOf(name: string): Exponents | undefined {
  const quantity = findQuantity(name) ?? findQuantity(name.replace(/(XX|XY|XZ|YY|YZ|ZZ|X|Y|Z)$/, ''));
  if (quantity !== undefined) return [...quantity.dimension, 0];
  return otherNames.find(([pattern]) => pattern.test(name))?.[1];
}

const isSi = (units: Units): boolean =>
  units.mass === 1 &&
  units.length === 1 &&
  units.time === 1 &&
  (units.temperature === undefined || units.temperature === 1);

function fromUnits(units: Units, exponents: Exponents): Conversion {
  const [mass, length, time, temperature, angle] = exponents;
  const parts: readonly (readonly [number | undefined, number])[] = [
    [units.mass, mass],
    [units.length, length],
    [units.time, time],
    [units.temperature, temperature],
    [units.angle, angle],
  ];
  let scale = 1;
  for (const [factor, power] of parts) {
    if (power === 0) continue;
    if (factor === undefined) return { scale: 1, offset: 0, doubt: 'no unit' };
    scale *= factor ** power;
  }
  const absolute = temperature === 1 && mass === 0 && length === 0 && time === 0;
  return { scale, offset: absolute ? (units.shift ?? 0) : 0 };
}

/**
 * How the numbers of a DataArray_t become SI.
 *
 * @param inherited  context of the array's parent
 * @see CGNS Standard Interface Data Structures, section 4 (data array structures and classes)
 */
export function conversionOf(session: CgnsSession, inherited: DataContext, node: CgnsNode): Conversion {
  const { dataClass, units } = inherit(session, inherited, node);
  if (dataClass === 'NormalizedByUnknownDimensional') return { scale: 1, offset: 0, doubt: 'unknown reference' };
  if (dataClass === 'NondimensionalParameter' || dataClass === 'DimensionlessConstant') {
    // A quantity with a dimension was divided by something that such a class does not tell.
    const dimensional = exponentsOf(node.name)?.some((power) => power !== 0) ?? false;
    return { scale: 1, offset: 0, ...(dimensional ? { doubt: 'unknown reference' as const } : {}) };
  }
  const normalised = dataClass === 'NormalizedByDimensional';
  const reference = childOf(node, 'DataConversion_t');
  let [factor, shift] = [1, 0];
  if (normalised) {
    if (reference === undefined) return { scale: 1, offset: 0, doubt: 'unknown reference' };
    const values = readNode(session, reference);
    [factor, shift] = [Number(values[0]), Number(values[1])];
  }
  const given = childOf(node, 'DimensionalExponents_t');
  const known = exponentsOf(node.name);
  const exponents = given === undefined ? known : exponentsFrom(session, given);
  let toSi: Conversion;
  if (exponents?.every((power) => power === 0)) toSi = { scale: 1, offset: 0 };
  else if (units === undefined) toSi = { scale: 1, offset: 0, doubt: 'no unit' };
  else if (exponents === undefined)
    toSi = { scale: 1, offset: 0, ...(isSi(units) ? {} : { doubt: 'unknown dimension' }) };
  else toSi = fromUnits(units, exponents);
  return {
    scale: factor * toSi.scale,
    offset: shift * toSi.scale + toSi.offset,
    ...(toSi.doubt === undefined ? {} : { doubt: toSi.doubt }),
  };
}

function exponentsFrom(session: CgnsSession, node: CgnsNode): Exponents {
  const values = Array.from(readNode(session, node), Number);
  return [0, 1, 2, 3, 4].map((k) => values[k] ?? 0) as unknown as Exponents;
}
