import { describe, expect, it } from 'vitest';
import { buildMesh } from '../../src/mesh/build.js';
import { measureMesh } from '../../src/mesh/geometry.js';
import { calibrate } from '../../src/turbulence/calibrate.js';
import { compensate, expectedRange } from '../../src/turbulence/compensate.js';
import { applyMultiplierRange, lnMultiplierAt } from '../../src/turbulence/multiplier-field.js';
import { prepareFluctuations } from '../../src/turbulence/prepare.js';
import { localScales } from '../../src/turbulence/scales.js';
import { vonKarmanPao } from '../../src/turbulence/spectra.js';
import { weighRange } from '../../src/turbulence/weights.js';
import { tetBox } from '../helpers/meshes.js';
import { superimpose } from './fields.js';

/** A quarter bend of tetrahedra between two walls, nothing periodic. */
function bend() {
  const mesh = buildMesh(
    tetBox(20, 8, 10, {
      lengths: [Math.PI / 2, 1, 1.2],
      map: (angle, r, z) => [(1.5 + r) * Math.sin(angle), (1.5 + r) * Math.cos(angle), z],
    }),
  );
  const geometry = measureMesh(mesh);
  const cells = mesh.cellCount;
  const wallDistance = new Float64Array(cells);
  const k = new Float64Array(cells);
  for (let i = 0; i < cells; i++) {
    const c = geometry.cellCentroids.subarray(3 * i, 3 * i + 3);
    const r = Math.hypot(c[0]!, c[1]!) - 1.5;
    wallDistance[i] = Math.max(1e-3, Math.min(r, 1 - r));
    // Energy that grows along the bend and falls to the walls.
    k[i] = (0.2 + Math.atan2(c[0]!, c[1]!)) * (1 - Math.exp(-((wallDistance[i]! / 0.1) ** 2)));
  }
  const scales = localScales(
    { cells, k, epsilon: k.map((e) => e ** 1.5 / 0.6), wallDistance },
    { spectrum: vonKarmanPao, subgrid: 'model', wallLengthFactor: 1.5 },
  );
  return { mesh, geometry, scales };
}

describe('a bend of tetrahedra with walls, nothing homogeneous', () => {
  const made = bend();
  const plan = prepareFluctuations({
    ...made,
    options: { seed: 5, shells: 16, directions: 12, wavelengthCells: 3, spectrum: vonKarmanPao, grade: 'potential' },
  });
  weighRange(plan, 0, plan.cells);
  const expected = new Float32Array(10 * plan.cells);
  expectedRange(plan, 0, plan.cells, expected);

  it('brings the expected energy, gradient term included, nearer to the wanted one', () => {
    const found = compensate(plan, expected);
    expect(found.before).toBeGreaterThan(0.1);
    expect(found.after).toBeLessThan(0.5 * found.before);
    // Found again from the changed amplitudes themselves.
    expectedRange(plan, 0, plan.cells, expected);
    let square = 0;
    let weight = 0;
    for (let i = 0; i < plan.cells; i++) {
      square += plan.wanted[i]! * (expected[10 * i]! / plan.wanted[i]! - 1) ** 2 || 0;
      weight += plan.wanted[i]!;
    }
    expect(Math.sqrt(square / weight)).toBeLessThan(found.before);
  });

  it('meets the energy of every window of several L11 within 5 %', () => {
    const field = superimpose(plan);
    const found = calibrate({
      plan,
      ...field,
      volumes: made.geometry.cellVolumes,
      periods: [],
      integralScale: made.scales.integralScale,
    });
    expect(found.field.kind).toBe('windows');
    expect(found.windows).toBeGreaterThan(10);
    expect(found.before.rms).toBeGreaterThan(0.05);
    expect(found.after.rms).toBeLessThan(0.05);
    // Measured once more on the changed velocities, in the same windows.
    applyMultiplierRange(found.field, plan.centroids, field.potential, field.velocity, 0, plan.cells);
    const { origin, spacing, counts } = found.field;
    const windows = (counts[0]! - 2) * (counts[1]! - 2) * (counts[2]! - 2);
    const energy = new Float64Array(windows);
    const wanted = new Float64Array(windows);
    for (let i = 0; i < plan.cells; i++) {
      let at = 0;
      for (let d = 2; d >= 0; d--) {
        const n = counts[d]! - 2;
        const u = Math.floor((plan.centroids[3 * i + d]! - origin[d]!) / spacing[d]!);
        at = at * n + Math.min(n - 1, Math.max(0, u));
      }
      const u2 = field.velocity[3 * i]! ** 2 + field.velocity[3 * i + 1]! ** 2 + field.velocity[3 * i + 2]! ** 2;
      energy[at]! += 0.5 * made.geometry.cellVolumes[i]! * u2;
      wanted[at]! += made.geometry.cellVolumes[i]! * plan.wanted[i]!;
    }
    let square = 0;
    let weight = 0;
    for (let b = 0; b < energy.length; b++) {
      if (!(wanted[b]! > 0)) continue;
      square += wanted[b]! * (energy[b]! / wanted[b]! - 1) ** 2;
      weight += wanted[b]!;
    }
    expect(Math.sqrt(square / weight)).toBeLessThan(0.05);
  });
});

it.each(['layers', 'windows'] as const)('has the gradient of its function: %s', (kind) => {
  const layers = kind === 'layers';
  const field = {
    kind,
    axes: layers ? Float64Array.of(0, 1, 0) : Float64Array.of(1, 0, 0, 0, 0, 1),
    knots: layers ? Float64Array.of(0, 0.1, 0.3, 0.7, 1) : new Float64Array(0),
    origin: layers ? new Float64Array(0) : Float64Array.of(0, -1),
    spacing: layers ? new Float64Array(0) : Float64Array.of(0.25, 0.5),
    counts: layers ? new Int32Array(0) : Int32Array.of(4, 6),
    wrapped: layers ? new Uint8Array(0) : Uint8Array.of(1, 0),
    values: Float64Array.from({ length: layers ? 5 : 24 }, (_, i) => Math.sin(3 * i)),
  };
  const g = new Float64Array(3);
  const other = new Float64Array(3);
  const h = 1e-5;
  for (const [x, y, z] of [
    [0.13, 0.05, -0.9],
    [0.61, 0.2, 0.3],
    [0.97, 0.99, 0.95],
  ] as const) {
    lnMultiplierAt(field, x, y, z, g);
    const slopes = [
      lnMultiplierAt(field, x + h, y, z, other) - lnMultiplierAt(field, x - h, y, z, other),
      lnMultiplierAt(field, x, y + h, z, other) - lnMultiplierAt(field, x, y - h, z, other),
      lnMultiplierAt(field, x, y, z + h, other) - lnMultiplierAt(field, x, y, z - h, other),
    ];
    for (let a = 0; a < 3; a++) expect(g[a]).toBeCloseTo(slopes[a]! / (2 * h), 4);
  }
});
