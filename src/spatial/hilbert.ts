/** Bits a coordinate in a Hilbert key: three of them fit a 30-bit number. */
const bits = 10;
const cells = 2 ** bits;

/**
 * Position along the Hilbert curve of a cell of a 1024^3 grid.
 *
 * @see Skilling 2004, AIP Conference Proceedings 707:381 (axes to transposed Hilbert index)
 */
export function hilbertKey(i: number, j: number, k: number): number {
  let x = i;
  let y = j;
  let z = k;
  for (let q = cells >> 1; q > 1; q >>= 1) {
    const p = q - 1;
    if (x & q) x ^= p;
    let t = 0;
    if (y & q) x ^= p;
    else {
      t = (x ^ y) & p;
      x ^= t;
      y ^= t;
    }
    if (z & q) x ^= p;
    else {
      t = (x ^ z) & p;
      x ^= t;
      z ^= t;
    }
  }
  y ^= x;
  z ^= y;
  let t = 0;
  for (let q = cells >> 1; q > 1; q >>= 1) if (z & q) t ^= q - 1;
  x ^= t;
  y ^= t;
  z ^= t;
  let key = 0;
  for (let bit = bits - 1; bit >= 0; bit -= 1) {
    key = key * 8 + (((x >> bit) & 1) * 4 + ((y >> bit) & 1) * 2 + ((z >> bit) & 1));
  }
  return key;
}

/** Hilbert keys (30 bits) of points in their bounding box. */
export function hilbertKeys(points: Float64Array): Uint32Array {
  const count = points.length / 3;
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  for (let i = 0; i < count; i += 1) {
    for (let c = 0; c < 3; c += 1) {
      const value = points[3 * i + c] as number;
      if (value < (low[c] as number)) low[c] = value;
      if (value > (high[c] as number)) high[c] = value;
    }
  }
  const scale = low.map((value, c) => {
    const side = (high[c] as number) - value;
    return side > 0 ? (cells - 1) / side : 0;
  });
  const [lx = 0, ly = 0, lz = 0] = low;
  const [sx = 0, sy = 0, sz = 0] = scale;
  const keys = new Uint32Array(count);
  for (let i = 0; i < count; i += 1) {
    keys[i] = hilbertKey(
      Math.floor(((points[3 * i] as number) - lx) * sx),
      Math.floor(((points[3 * i + 1] as number) - ly) * sy),
      Math.floor(((points[3 * i + 2] as number) - lz) * sz),
    );
  }
  return keys;
}

/** Numbers 0 ... n - 1 sorted by key, stable (radix sort). */
export function orderByKey(keys: Uint32Array): Int32Array {
  const count = keys.length;
  let order = Int32Array.from({ length: count }, (_, i) => i);
  let other = new Int32Array(count);
  const digit = 11;
  const buckets = 2 ** digit;
  for (let shift = 0; shift < 32; shift += digit) {
    const starts = new Int32Array(buckets + 1);
    for (let i = 0; i < count; i += 1) {
      const bucket = ((keys[i] as number) >>> shift) & (buckets - 1);
      starts[bucket + 1] = (starts[bucket + 1] as number) + 1;
    }
    for (let b = 0; b < buckets; b += 1) starts[b + 1] = (starts[b + 1] as number) + (starts[b] as number);
    for (let i = 0; i < count; i += 1) {
      const number = order[i] as number;
      const bucket = ((keys[number] as number) >>> shift) & (buckets - 1);
      other[starts[bucket] as number] = number;
      starts[bucket] = (starts[bucket] as number) + 1;
    }
    [order, other] = [other, order];
  }
  return order;
}

/** Points in the order of the Hilbert curve. */
export function hilbertOrder(points: Float64Array): Int32Array {
  return orderByKey(hilbertKeys(points));
}
