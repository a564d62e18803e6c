import type { Dimension } from '../basis/quantities.js';

/** SI value = value * factor + offset. */
export interface UnitConversion {
  readonly factor: number;
  readonly offset: number;
  readonly dimension: Dimension;
}

const mass: Dimension = [1, 0, 0, 0];
const length: Dimension = [0, 1, 0, 0];
const time: Dimension = [0, 0, 1, 0];
const temperature: Dimension = [0, 0, 0, 1];
const pressure: Dimension = [1, -1, -2, 0];

// Inch, foot, bar and atmosphere: exact by definition (NIST Special Publication 811, appendix B).
const units: Readonly<Record<string, readonly [number, Dimension]>> = {
  kg: [1, mass],
  g: [1e-3, mass],
  m: [1, length],
  km: [1e3, length],
  dm: [1e-1, length],
  cm: [1e-2, length],
  mm: [1e-3, length],
  um: [1e-6, length],
  '\u00b5m': [1e-6, length],
  '\u03bcm': [1e-6, length],
  in: [0.0254, length],
  ft: [0.3048, length],
  s: [1, time],
  ms: [1e-3, time],
  min: [60, time],
  h: [3600, time],
  K: [1, temperature],
  N: [1, [1, 1, -2, 0]],
  J: [1, [1, 2, -2, 0]],
  W: [1, [1, 2, -3, 0]],
  Pa: [1, pressure],
  hPa: [1e2, pressure],
  kPa: [1e3, pressure],
  MPa: [1e6, pressure],
  bar: [1e5, pressure],
  atm: [101325, pressure],
  '1': [1, [0, 0, 0, 0]],
  '-': [1, [0, 0, 0, 0]],
};

const celsius = new Set(['degC', '\u00b0C', 'Celsius']);

interface Factor {
  readonly factor: number;
  readonly dimension: readonly number[];
}

function parseFactor(text: string): Factor | undefined {
  const whole = units[text];
  if (whole !== undefined) return { factor: whole[0], dimension: whole[1] };
  const match = /^([^\d^*+-]+)(?:\^|\*\*)?\(?([+-]?\d+)\)?$/.exec(
    text.replaceAll('\u00b2', '2').replaceAll('\u00b3', '3'),
  );
  const base = match === null ? undefined : units[match[1] ?? ''];
  if (match === null || base === undefined) return undefined;
  const power = Number(match[2]);
  return { factor: base[0] ** power, dimension: base[1].map((entry) => entry * power) };
}

/**
 * Reads a unit such as `mm`, `m/s`, `m^2/s^2`, `m2 s-2`, `kg/(m s)`, `kPa` or `degC`; undefined for one that is not
 * known. Factors apart by a space, a dot or an asterisk multiply; those after a stroke divide.
 */
export function parseUnit(text: string): UnitConversion | undefined {
  const unit = text.trim();
  if (celsius.has(unit)) return { factor: 1, offset: 273.15, dimension: temperature };
  const [above, below, ...rest] = unit.split('/');
  if (above === undefined || rest.length > 0) return undefined;
  let factor = 1;
  const dimension = [0, 0, 0, 0];
  const parts: [string, 1 | -1][] = [[above, 1]];
  if (below !== undefined) parts.push([below.trim().replace(/^\((.*)\)$/, '$1'), -1]);
  for (const [part, sign] of parts) {
    for (const word of part
      .trim()
      .replaceAll('**', '^')
      .split(/[\s.*\u00b7]+/)) {
      const found = parseFactor(word);
      if (found === undefined) return undefined;
      factor = sign > 0 ? factor * found.factor : factor / found.factor;
      found.dimension.forEach((entry, at) => {
        dimension[at] = dimension[at]! + sign * entry;
      });
    }
  }
  return { factor, offset: 0, dimension: dimension as unknown as Dimension };
}

/** Splits `name [unit]` or `name (unit)`. */
export function splitUnit(header: string): { readonly name: string; readonly unit?: string } {
  const match = /^(.*\S)\s*(?:\[([^\]]*)\]|\(([^)]*\)?[^)]*)\))$/.exec(header.trim());
  if (match === null) return { name: header.trim() };
  return { name: match[1] ?? '', unit: (match[2] ?? match[3] ?? '').trim() };
}
