/** One quantity on n places: `components` numbers a place, interleaved. */
export interface Field {
  /** 1 scalar, 3 vector (x y z), 6 symmetric tensor in the order XX XY XZ YY YZ ZZ. */
  readonly components: number;
  readonly values: Float64Array;
}

/**
 * Fields by standard name (design: SIDS data-name identifiers). Vectors and tensors are gathered: `Velocity` has
 * 3 components, `VelocityCovariance` 6 (u'_i u'_j, positive normal components, m2/s2).
 */
export type Fields = ReadonlyMap<string, Field>;

/** Places without connectivity. */
export interface PointCloud {
  /** 3 x n, interleaved x y z, metres. */
  readonly points: Float64Array;
  readonly fields: Fields;
}

/** Float64 array on memory that workers share without copying. */
export function sharedFloat64(length: number): Float64Array {
  return new Float64Array(new SharedArrayBuffer(length * 8));
}

/** Int32 array on memory that workers share without copying. */
export function sharedInt32(length: number): Int32Array {
  return new Int32Array(new SharedArrayBuffer(length * 4));
}
