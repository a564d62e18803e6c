import { describe, expect, it } from 'vitest';
import { prepareFluctuations } from '../../src/turbulence/prepare.js';
import { localScales } from '../../src/turbulence/scales.js';
import { vonKarmanPao } from '../../src/turbulence/spectra.js';
import { synthesiseRange } from '../../src/turbulence/synthesis.js';
import { weighRange } from '../../src/turbulence/weights.js';
import { brickMesh, covarianceOf, energyOf, superimpose, synthesise } from './fields.js';

const box = brickMesh([32, 32, 32], ['x', 'y', 'z'], { lengths: [1, 1, 1] });

function planOf(seed: number, covariance?: Float64Array) {
  const scales = localScales(
    { cells: box.mesh.cellCount, k: 1.5, integralScale: 0.08 },
    { spectrum: vonKarmanPao, subgrid: 'model', wallLengthFactor: 1.5 },
  );
  return prepareFluctuations({
    ...box,
    scales,
    ...(covariance === undefined ? {} : { covariance }),
    options: { seed, shells: 24, directions: 16, wavelengthCells: 3, spectrum: vonKarmanPao, grade: 'potential' },
  });
}

describe('homogeneous turbulence in a periodic box', () => {
  it('recovers the wanted energy within 2 % in the mean over ten seeds, isotropically', () => {
    let ratio = 0;
    const mean = new Float64Array(6);
    for (let seed = 1; seed <= 10; seed++) {
      const plan = planOf(seed);
      const { velocity } = synthesise(plan);
      const c = covarianceOf(velocity, box.geometry.cellVolumes);
      ratio += energyOf(c) / plan.wanted[0]! / 10;
      for (let i = 0; i < 6; i++) mean[i]! += c[i]! / 10;
    }
    expect(Math.abs(ratio - 1)).toBeLessThan(0.02);
    const third = (2 / 3) * energyOf(mean);
    for (let i = 0; i < 6; i++) {
      expect(Math.abs(mean[i]! - ([0, 3, 5].includes(i) ? third : 0))).toBeLessThan(0.02 * third);
    }
  });

  it('is solenoidal by its modes: rms of K.a against rms of K below 1e-10, every wave on the lattice', () => {
    const { modes } = planOf(7);
    let divergence = 0;
    let gradient = 0;
    for (let n = 0; n < modes.phases.length; n++) {
      const k = modes.waveVectors.subarray(3 * n, 3 * n + 3);
      const a = modes.polarisations.subarray(3 * n, 3 * n + 3);
      divergence += (k[0]! * a[0]! + k[1]! * a[1]! + k[2]! * a[2]!) ** 2;
      gradient += k[0]! ** 2 + k[1]! ** 2 + k[2]! ** 2;
      expect(Math.hypot(...a)).toBeCloseTo(1, 12);
      for (const c of k) expect(Math.abs(c / (2 * Math.PI) - Math.round(c / (2 * Math.PI)))).toBeLessThan(1e-9);
    }
    expect(Math.sqrt(divergence / gradient)).toBeLessThan(1e-10);
  });

  it('leaves resolved and modelled energy that add up to k', () => {
    const plan = planOf(2);
    weighRange(plan, 0, plan.cells);
    // von Karman at L11 / width = 2.56: 0.70 of k lies below pi / width (incomplete beta function).
    expect(plan.resolvableShare[0]).toBeGreaterThan(0.68);
    expect(plan.resolvableShare[0]).toBeLessThan(0.72);
    for (let i = 0; i < plan.cells; i += 501) {
      expect(plan.wanted[i]! / plan.k[i]!).toBeCloseTo(plan.resolvableShare[i]!, 12);
    }
  });

  it('reaches wanted stresses in the mean over seeds', () => {
    const wanted = [1.4, -0.24, 0, 0.8, 0, 0.8];
    const covariance = new Float64Array(6 * box.mesh.cellCount);
    for (let i = 0; i < box.mesh.cellCount; i++) covariance.set(wanted, 6 * i);
    const mean = new Float64Array(6);
    let energy = 0;
    for (let seed = 1; seed <= 4; seed++) {
      const plan = planOf(seed, covariance);
      const { velocity } = synthesise(plan);
      const c = covarianceOf(velocity, box.geometry.cellVolumes);
      for (let i = 0; i < 6; i++) mean[i]! += c[i]! / 4;
      energy += plan.wanted[0]! / 4;
    }
    for (let i = 0; i < 6; i++) expect(Math.abs(mean[i]! / (2 * energy) - wanted[i]! / 3)).toBeLessThan(0.02);
  });

  it('gives the same numbers from one range as from many, and other ones from another seed', () => {
    const plan = planOf(3);
    weighRange(plan, 0, plan.cells);
    const whole = superimpose(plan);
    const pieces = { potential: new Float64Array(3 * plan.cells), velocity: new Float64Array(3 * plan.cells) };
    for (let begin = 0; begin < plan.cells; begin += 4096) {
      synthesiseRange(plan, begin, Math.min(plan.cells, begin + 4096), pieces);
    }
    expect(pieces.velocity).toEqual(whole.velocity);
    expect(pieces.potential).toEqual(whole.potential);
    expect(synthesise(planOf(4)).velocity[0]).not.toBe(whole.velocity[0]);
  });
});
