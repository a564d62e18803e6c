import { expect, it } from 'vitest';
import { calibrate } from '../../src/turbulence/calibrate.js';
import { applyMultiplierRange } from '../../src/turbulence/multiplier-field.js';
import { prepareFluctuations } from '../../src/turbulence/prepare.js';
import { vonKarmanPao } from '../../src/turbulence/spectra.js';
import { synthesise } from '../turbulence/fields.js';
import { channelCase } from './channel-case.js';
import { channel550, channel2000 } from './channel-profiles.js';

it.each([
  ['Re_tau 547 (del Alamo & Jimenez 2003)', channel550, 2],
  ['Re_tau 2003 (Hoyas & Jimenez 2006)', channel2000, 2.6],
] as const)('channel %s: every realisation has the wanted k in every plane within 3 %', (_, profile, refinement) => {
  const made = channelCase(profile, [24, 40, 24], refinement);
  for (const seed of [1, 2]) {
    const plan = prepareFluctuations({
      ...made,
      options: { seed, shells: 32, directions: 16, wavelengthCells: 3, spectrum: vonKarmanPao, grade: 'potential' },
    });
    const field = synthesise(plan);
    const volumes = made.geometry.cellVolumes;
    const found = calibrate({
      plan,
      ...field,
      volumes,
      periods: made.periodic.periods,
      integralScale: made.scales.integralScale,
    });
    expect(found.field.kind).toBe('layers');
    applyMultiplierRange(found.field, plan.centroids, field.potential, field.velocity, 0, plan.cells);
    const energy = new Float64Array(made.layers);
    const wanted = new Float64Array(made.layers);
    const height = new Float64Array(made.layers);
    for (let i = 0; i < plan.cells; i++) {
      const l = made.layer[i]!;
      for (let a = 0; a < 3; a++) energy[l]! += 0.5 * volumes[i]! * field.velocity[3 * i + a]! ** 2;
      wanted[l]! += volumes[i]! * plan.wanted[i]!;
      height[l] = made.wallDistance[i]! * profile.reynolds;
    }
    for (let l = 0; l < made.layers; l++) {
      if (height[l]! > 5) expect(Math.abs(energy[l]! / wanted[l]! - 1)).toBeLessThan(0.03);
    }
  }
});
