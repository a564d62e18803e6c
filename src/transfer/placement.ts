import { type Field, sharedFloat64 } from '../basis/fields.js';
import { findQuantity, velocityPower } from '../basis/quantities.js';

type Vector = readonly [number, number, number];
type Axis = 'x' | 'y' | 'z';

export interface Turn {
  readonly axis: Vector;
  readonly degrees: number;
  /** A point on the axis, m. */
  readonly about: Vector;
}

/** From the coordinates of the file to those of the target, in this order. */
export interface Placement {
  readonly scale: number;
  readonly rotate?: Turn | readonly Turn[] | undefined;
  readonly translate: Vector;
  /** Planes in which a half model is doubled. */
  readonly mirror: readonly { readonly plane: Axis; readonly at: number }[];
  readonly tile: readonly { readonly translate: Vector; readonly times: number }[];
  readonly sector?:
    | { readonly axis: Vector; readonly about: Vector; readonly degrees: number; readonly times: number }
    | undefined;
}

/** Places and the fields known there. */
export interface PlacedCloud {
  /** 3 x n, m. */
  readonly points: Float64Array;
  readonly fields: ReadonlyMap<string, Field>;
}

/** Row-major 3 x 3 matrix. */
type Matrix = readonly number[];

const axisNumber: Readonly<Record<Axis, number>> = { x: 0, y: 1, z: 2 };

/** Rotation about an axis through the origin (Rodrigues' formula). */
export function rotationMatrix(axis: Vector, degrees: number): Matrix {
  const size = Math.hypot(...axis);
  const [x, y, z] = axis.map((v) => v / size) as [number, number, number];
  // Quarter turns are exact.
  const quarter = degrees / 90;
  const exact = Number.isInteger(quarter);
  const turn = ((quarter % 4) + 4) % 4;
  const c = exact ? ([1, 0, -1, 0][turn] as number) : Math.cos((degrees * Math.PI) / 180);
  const s = exact ? ([0, 1, 0, -1][turn] as number) : Math.sin((degrees * Math.PI) / 180);
  const t = 1 - c;
  return [
    t * x * x + c,
    t * x * y - s * z,
    t * x * z + s * y,
    t * x * y + s * z,
    t * y * y + c,
    t * y * z - s * x,
    t * x * z - s * y,
    t * y * z + s * x,
    t * z * z + c,
  ];
}

function reflection(plane: Axis): Matrix {
  const matrix = [1, 0, 0, 0, 1, 0, 0, 0, 1];
  matrix[4 * axisNumber[plane]] = -1;
  return matrix;
}

/** x' = M (x - about) + about + shift. */
function movePoints(points: Float64Array, m: Matrix, about: Vector, shift: Vector): Float64Array {
  const out = sharedFloat64(points.length);
  for (let i = 0; i < points.length; i += 3) {
    const x = (points[i] as number) - about[0];
    const y = (points[i + 1] as number) - about[1];
    const z = (points[i + 2] as number) - about[2];
    for (let r = 0; r < 3; r += 1) {
      out[i + r] =
        (m[3 * r] as number) * x +
        (m[3 * r + 1] as number) * y +
        (m[3 * r + 2] as number) * z +
        about[r as 0] +
        shift[r as 0];
    }
  }
  return out;
}

/** Places of XX XY XZ YY YZ ZZ in a full matrix. */
const full = [0, 1, 2, 1, 3, 4, 2, 4, 5] as const;
const compact = [
  [0, 0],
  [0, 1],
  [0, 2],
  [1, 1],
  [1, 2],
  [2, 2],
] as const;

/** Vectors become M v, tensors M T M^T; scalars stay. */
function turnField(field: Field, m: Matrix): Field {
  const { components, values } = field;
  if (components === 3) return { components, values: movePoints(values, m, [0, 0, 0], [0, 0, 0]) };
  if (components !== 6) return field;
  const out = sharedFloat64(values.length);
  for (let i = 0; i < values.length; i += 6) {
    compact.forEach(([r, c], place) => {
      let sum = 0;
      for (let a = 0; a < 3; a += 1) {
        for (let b = 0; b < 3; b += 1) {
          const t = values[i + (full[3 * a + b] as number)] as number;
          sum += (m[3 * r + a] as number) * t * (m[3 * c + b] as number);
        }
      }
      out[i + place] = sum;
    });
  }
  return { components, values: out };
}

function turnCloud(cloud: PlacedCloud, m: Matrix, about: Vector, shift: Vector): PlacedCloud {
  return {
    points: movePoints(cloud.points, m, about, shift),
    fields: new Map([...cloud.fields].map(([name, field]) => [name, turnField(field, m)])),
  };
}

/** Clouds one after the other. */
function together(clouds: readonly PlacedCloud[]): PlacedCloud {
  const [first] = clouds as [PlacedCloud];
  const joined = (parts: readonly Float64Array[]): Float64Array => {
    const out = sharedFloat64(parts.reduce((sum, part) => sum + part.length, 0));
    let at = 0;
    for (const part of parts) {
      out.set(part, at);
      at += part.length;
    }
    return out;
  };
  const fields = new Map<string, Field>();
  for (const [name, { components }] of first.fields) {
    fields.set(name, { components, values: joined(clouds.map((cloud) => (cloud.fields.get(name) as Field).values)) });
  }
  return { points: joined(clouds.map((cloud) => cloud.points)), fields };
}

const identity: Matrix = [1, 0, 0, 0, 1, 0, 0, 0, 1];
const origin: Vector = [0, 0, 0];

function turnsOf(placement: Placement): readonly Turn[] {
  const { rotate } = placement;
  if (rotate === undefined) return [];
  return Array.isArray(rotate) ? (rotate as readonly Turn[]) : [rotate as Turn];
}

/** True when the placed precursor still is one copy of its mesh: only scaled, turned and moved. */
export function keepsMesh(placement: Placement): boolean {
  return placement.mirror.length === 0 && placement.tile.length === 0 && placement.sector === undefined;
}

/** Fields after a change of the velocity scale at fixed lengths and viscosity: k by its square, epsilon by its cube. */
export function scaleVelocity(fields: ReadonlyMap<string, Field>, factor: number): ReadonlyMap<string, Field> {
  if (factor === 1) return fields;
  return new Map(
    [...fields].map(([name, field]) => {
      const known = findQuantity(name);
      const power = known === undefined ? 0 : velocityPower(known);
      if (power === 0) return [name, field];
      const values = sharedFloat64(field.values.length);
      const times = factor ** power;
      for (let i = 0; i < values.length; i += 1) values[i] = (field.values[i] as number) * times;
      return [name, { components: field.components, values }];
    }),
  );
}

/**
 * Applies a placement: scale, turns, displacement, then the copies: mirror planes in the placed position, periodic
 * tiles, sectors. Velocities and covariances turn with the geometry. `scale` changes the unit of the coordinates (0.001
 * for millimetres) and leaves the fields alone; `velocityScale` changes them by dimension.
 */
export function placeCloud(cloud: PlacedCloud, placement: Placement, velocityScale = 1): PlacedCloud {
  const { scale } = placement;
  let present: PlacedCloud = {
    points: scale === 1 ? cloud.points : cloud.points.map((x) => x * scale),
    fields: scaleVelocity(cloud.fields, velocityScale),
  };
  for (const { axis, degrees, about } of turnsOf(placement)) {
    present = turnCloud(present, rotationMatrix(axis, degrees), about, origin);
  }
  if (placement.translate.some((v) => v !== 0)) {
    present = { ...present, points: movePoints(present.points, identity, origin, placement.translate) };
  }
  for (const { plane, at } of placement.mirror) {
    const about: Vector = [plane === 'x' ? at : 0, plane === 'y' ? at : 0, plane === 'z' ? at : 0];
    present = together([present, turnCloud(present, reflection(plane), about, origin)]);
  }
  for (const { translate, times } of placement.tile) {
    const copies = Array.from({ length: times + 1 }, (_, n): PlacedCloud => {
      const shift = translate.map((v) => v * n) as unknown as Vector;
      return n === 0 ? present : { ...present, points: movePoints(present.points, identity, origin, shift) };
    });
    present = together(copies);
  }
  const { sector } = placement;
  if (sector !== undefined) {
    const copies = Array.from({ length: sector.times + 1 }, (_, n) =>
      n === 0 ? present : turnCloud(present, rotationMatrix(sector.axis, sector.degrees * n), sector.about, origin),
    );
    present = together(copies);
  }
  return present;
}
