import { describe, expect, it } from 'vitest';
import { applyGradient, createGradient } from '../../src/mesh/gradient.js';
import { prepareFluctuations } from '../../src/turbulence/prepare.js';
import { localScales } from '../../src/turbulence/scales.js';
import { vonKarmanPao } from '../../src/turbulence/spectra.js';
import { cellStencil, createStencil } from '../../src/turbulence/stencil.js';
import { potentialAtPoints, synthesiseRange } from '../../src/turbulence/synthesis.js';
import { vertexParameters } from '../../src/turbulence/vertex-parameters.js';
import { weighRange } from '../../src/turbulence/weights.js';
import { brickMesh } from './fields.js';

const box = brickMesh([12, 12, 12], ['x'], { lengths: [1, 1, 1], warp: 0.2, seed: 'curl' });
const cells = box.mesh.cellCount;

function plan(stress: boolean) {
  const covariance = new Float64Array(6 * cells);
  for (let i = 0; i < cells; i++) covariance.set([1.2, -0.2, 0.1, 0.6, 0, 0.9], 6 * i);
  const scales = Float64Array.from({ length: cells }, (_, i) => 0.7468 / Math.exp(1 + 1.5 * (i / cells)));
  const made = prepareFluctuations({
    ...box,
    scales: localScales(
      // The tables reach over the lengths met: ln kappa_e from 1 to 2.5.
      { cells, k: 1, integralScale: scales, viscosity: 1e-4 },
      { spectrum: vonKarmanPao, subgrid: 'model', wallLengthFactor: 1.5 },
    ),
    ...(stress ? { covariance } : {}),
    options: { seed: 11, shells: 12, directions: 12, wavelengthCells: 2, spectrum: vonKarmanPao, grade: 'potential' },
  });
  weighRange(made, 0, cells);
  return made;
}

/** Parameters as linear functions of the place: the mesh's gradients are exact for them. */
function linearParameters(columns: number, x: number, y: number, z: number, out: Float64Array, at: number): void {
  out[at] = 1 + 0.4 * y - 0.3 * z;
  out[at + 1] = 1.2 + 0.8 * y + 0.3 * z;
  out[at + 2] = -6 + 0.9 * z;
  const h = [0.006 + 0.004 * y, 0.0005 * z, 0, 0.005 + 0.002 * z, 0.0005 * y, 0.008 - 0.003 * y];
  const l = [0.5 * y, 0.2 * z, -0.2, -0.4 * z, 0.3 * y, 0.1];
  for (let c = 0; c < 6; c++) {
    out[at + 3 + c] = h[c]!;
    if (columns > 9) out[at + 9 + c] = l[c]!;
  }
  // x is periodic, nothing may depend on it.
  if (x > 1e9) throw new Error('unreachable');
}

describe.each([
  ['isotropic', false],
  ['with stresses', true],
] as const)('velocity, %s', (_, stress) => {
  it('is the curl of the potential, cut-off, polarisation and gradient term included', () => {
    const p = plan(stress);
    const c = box.geometry.cellCentroids;
    for (let i = 0; i < cells; i++) {
      linearParameters(p.columns, c[3 * i]!, c[3 * i + 1]!, c[3 * i + 2]!, p.parameters, p.columns * i);
    }
    const out = { potential: new Float64Array(3 * cells), velocity: new Float64Array(3 * cells) };
    synthesiseRange(p, 0, cells, out);
    const h = 2e-3;
    let worst = 0;
    let square = 0;
    let count = 0;
    for (let i = 5; i < cells; i += 37) {
      const points = new Float64Array(18);
      const parameters = new Float64Array(6 * p.columns);
      for (let s = 0; s < 6; s++) {
        for (let a = 0; a < 3; a++) points[3 * s + a] = c[3 * i + a]!;
        points[3 * s + (s >> 1)]! += s % 2 === 0 ? h : -h;
        linearParameters(p.columns, 0, points[3 * s + 1]!, points[3 * s + 2]!, parameters, s * p.columns);
      }
      const a = new Float64Array(18);
      potentialAtPoints(p, points, parameters, a);
      const slope = (component: number, axis: number): number =>
        (a[6 * axis + component]! - a[6 * axis + 3 + component]!) / (2 * h);
      const curl = [slope(2, 1) - slope(1, 2), slope(0, 2) - slope(2, 0), slope(1, 0) - slope(0, 1)];
      for (let k = 0; k < 3; k++) {
        worst = Math.max(worst, Math.abs(curl[k]! - out.velocity[3 * i + k]!));
        square += out.velocity[3 * i + k]! ** 2;
        count++;
      }
    }
    // Central differences of waves up to kappa h = 0.1 err by (kappa h)^2 / 6, the rest is 32-bit rounding.
    expect(worst / Math.sqrt(square / count)).toBeLessThan(4e-3);
  });
});

it('has stencils that are the gradient of the mesh', () => {
  const op = createGradient(box.mesh, box.geometry, box.periodic);
  const values = Float64Array.from({ length: cells }, (_, i) => Math.sin(i * 1.7));
  const wanted = applyGradient(op, values, 1);
  const s = createStencil();
  for (let i = 0; i < cells; i += 13) {
    cellStencil(op, i, s);
    for (let a = 0; a < 3; a++) {
      let g = 0;
      for (let j = 0; j < s.count; j++) g += s.coefficients[3 * j + a]! * (values[s.others[j]!]! - values[i]!);
      expect(g).toBeCloseTo(wanted[3 * i + a]!, 9);
    }
  }
});

it('gives vertices one set of parameters across a period and none on quiet faces', () => {
  const p = plan(true);
  const quiet: number[] = [];
  for (let f = box.mesh.innerFaceCount; f < box.mesh.faceCount; f++) {
    if (Math.abs(box.geometry.faceCentroids[3 * f + 1]!) < 1e-9) quiet.push(f);
  }
  expect(quiet.length).toBe(144);
  const v = vertexParameters(p, box.mesh, box.periodic, Int32Array.from(quiet));
  const { points } = box.mesh;
  const at = new Map<string, number>();
  let pairs = 0;
  for (let i = 0; i < points.length / 3; i++) {
    const key = `${points[3 * i + 1]!.toFixed(9)},${points[3 * i + 2]!.toFixed(9)}`;
    if (Math.abs(points[3 * i + 1]!) < 1e-12) expect(v[p.columns * i]).toBe(0);
    if (Math.abs(points[3 * i]!) < 1e-12) at.set(key, i);
  }
  for (let i = 0; i < points.length / 3; i++) {
    const key = `${points[3 * i + 1]!.toFixed(9)},${points[3 * i + 2]!.toFixed(9)}`;
    const mate = at.get(key);
    if (Math.abs(points[3 * i]! - 1) > 1e-12 || mate === undefined) continue;
    pairs++;
    for (let c = 0; c < p.columns; c++) expect(v[p.columns * i + c]).toBe(v[p.columns * mate + c]);
  }
  expect(pairs).toBe(169);
});
