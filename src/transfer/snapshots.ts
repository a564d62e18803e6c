import { InputError } from '../basis/errors.js';
import { type Field, sharedFloat64 } from '../basis/fields.js';

/** Running sums over snapshots; one snapshot is in memory at a time. */
export interface SnapshotMean {
  count: number;
  readonly means: Map<string, Field>;
  /** Sums of the velocity's products about the running mean, 6 x n; absent without velocity. */
  products?: Float64Array;
}

export function startMean(): SnapshotMean {
  return { count: 0, means: new Map() };
}

/**
 * Adds one snapshot: means and velocity products about them, updated in one pass.
 *
 * @see Welford 1962, Technometrics 4:419 (running sums of squares about the mean)
 * @throws InputError when the snapshot's places or quantities differ from the first one's
 */
export function addSnapshot(mean: SnapshotMean, fields: ReadonlyMap<string, Field>, file: string): void {
  if (mean.count === 0) {
    for (const [name, { components, values }] of fields) {
      const copy = sharedFloat64(values.length);
      copy.set(values);
      mean.means.set(name, { components, values: copy });
    }
    const velocity = fields.get('Velocity');
    if (velocity !== undefined) mean.products = sharedFloat64(2 * velocity.values.length);
    mean.count = 1;
    return;
  }
  for (const [name, own] of mean.means) {
    const other = fields.get(name);
    if (other === undefined || other.values.length !== own.values.length) {
      throw new InputError({
        file,
        place: `quantity ${name}`,
        cause: 'it is missing or has another number of places than in the first snapshot',
        remedy: 'average snapshots of one mesh with the same quantities',
      });
    }
  }
  mean.count += 1;
  const share = 1 / mean.count;
  const velocity = mean.means.get('Velocity')?.values;
  const now = fields.get('Velocity')?.values;
  if (velocity !== undefined && now !== undefined && mean.products !== undefined) {
    const { products } = mean;
    for (let i = 0; i < velocity.length; i += 3) {
      const before = [0, 1, 2].map((c) => (now[i + c] as number) - (velocity[i + c] as number));
      let at = 2 * i;
      for (let a = 0; a < 3; a += 1) {
        for (let b = a; b < 3; b += 1) {
          // (x - m_old)(y - m_new) with m_new = m_old + (y - m_old) / n.
          products[at] = (products[at] as number) + (before[a] as number) * (before[b] as number) * (1 - share);
          at += 1;
        }
      }
    }
  }
  for (const [name, { values }] of mean.means) {
    const other = (fields.get(name) as Field).values;
    for (let i = 0; i < values.length; i += 1) {
      values[i] = (values[i] as number) + ((other[i] as number) - (values[i] as number)) * share;
    }
  }
}

/**
 * Mean fields: the covariances that the snapshots resolve are added to the modelled ones, and half their trace to k.
 */
export function finishMean(mean: SnapshotMean): Map<string, Field> {
  const fields = new Map(mean.means);
  const { products, count } = mean;
  if (products === undefined || count < 2) return fields;
  const resolved = products.map((sum) => sum / count);
  const modelled = fields.get('VelocityCovariance');
  const k = fields.get('TurbulentEnergyKinetic');
  const covariance = sharedFloat64(resolved.length);
  for (let i = 0; i < resolved.length; i += 1) {
    const place = i % 6;
    const isNormal = place === 0 || place === 3 || place === 5;
    // Without modelled covariances the modelled part is isotropic.
    const part =
      modelled?.values[i] ?? (isNormal && k !== undefined ? (2 / 3) * (k.values[Math.floor(i / 6)] as number) : 0);
    covariance[i] = (resolved[i] as number) + part;
  }
  fields.set('VelocityCovariance', { components: 6, values: covariance });
  if (k !== undefined) {
    const total = sharedFloat64(k.values.length);
    for (let i = 0; i < total.length; i += 1) {
      const trace = (resolved[6 * i] as number) + (resolved[6 * i + 3] as number) + (resolved[6 * i + 5] as number);
      total[i] = (k.values[i] as number) + trace / 2;
    }
    fields.set('TurbulentEnergyKinetic', { components: 1, values: total });
  }
  return fields;
}
