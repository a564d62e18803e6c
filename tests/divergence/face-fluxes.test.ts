import { describe, expect, it } from 'vitest';
import { netFluxes } from '../../src/divergence/circulation.js';
import { faceFluxes } from '../../src/pipeline/face-fluxes.js';
import { applyMultiplierRange, type MultiplierField } from '../../src/turbulence/multiplier-field.js';
import { prepareFluctuations } from '../../src/turbulence/prepare.js';
import { localScales } from '../../src/turbulence/scales.js';
import { vonKarmanPao } from '../../src/turbulence/spectra.js';
import { brickMesh, synthesise } from '../turbulence/fields.js';
import { wallStretch } from './meshes.js';

const same = (s: number): number => s;
const box = brickMesh([16, 16, 16], ['x', 'z'], { stretch: [same, wallStretch, same], warp: 0.15, seed: 'fluxes' });
const { mesh, geometry, periodic } = box;
const cells = mesh.cellCount;
// Energy falls towards the walls with the square of the distance.
const k = Float64Array.from({ length: cells }, (_, c) => {
  const y = geometry.cellCentroids[3 * c + 1]!;
  return (4 * y * (1 - y)) ** 2 * (1 + 3 * y);
});
const plan = prepareFluctuations({
  ...box,
  scales: localScales(
    { cells, k, integralScale: new Float64Array(cells).fill(0.25), viscosity: 1e-4 },
    { spectrum: vonKarmanPao, subgrid: 'model', wallLengthFactor: 2.5 },
  ),
  options: { seed: 5, shells: 10, directions: 16, wavelengthCells: 5, spectrum: vonKarmanPao, grade: 'potential' },
});
const start = synthesise(plan);
const multiplier: MultiplierField = {
  kind: 'layers',
  axes: Float64Array.of(0, 1, 0),
  knots: Float64Array.of(0, 0.3, 0.6, 1),
  origin: new Float64Array(0),
  spacing: new Float64Array(0),
  counts: new Int32Array(0),
  wrapped: new Uint8Array(0),
  values: Float64Array.of(0.4, -0.2, 0.1, 0.3),
};
const walls = Int32Array.from(
  Array.from({ length: mesh.faceCount - mesh.innerFaceCount }, (_, b) => mesh.innerFaceCount + b).filter((f) => {
    const y = geometry.faceCentroids[3 * f + 1]!;
    return y < 1e-9 || y > 1 - 1e-9;
  }),
);
const rms = (values: Float64Array): number => Math.sqrt(values.reduce((s, v) => s + v * v, 0) / values.length);

describe.each([
  ['as synthesised', undefined],
  ['with the multiplier of a calibration', multiplier],
] as const)('face fluxes of a fluctuation on warped, wall-stretched cells, %s', (_, field) => {
  const fluxes = faceFluxes(box, plan, field, walls);
  const size = rms(fluxes);

  it('close over every cell to 1e-12 of the rms flux', () => {
    expect(size).toBeGreaterThan(0);
    for (const net of netFluxes(mesh, fluxes)) expect(Math.abs(net)).toBeLessThan(1e-12 * size);
  });

  it('match across periods and vanish on walls', () => {
    periodic.lowFaces.forEach((low, i) => {
      expect(Math.abs(fluxes[low]! + fluxes[periodic.highFaces[i]!]!)).toBeLessThan(1e-11 * size);
    });
    for (const f of walls) expect(Math.abs(fluxes[f]!)).toBeLessThan(1e-15 * size);
  });

  it('are the fluxes of the cell velocities within what linear interpolation resolves', () => {
    const velocity = start.velocity.slice();
    const potential = start.potential.slice();
    if (field !== undefined) applyMultiplierRange(field, geometry.cellCentroids, potential, velocity, 0, cells);
    let product = 0;
    let own = 0;
    let other = 0;
    for (let f = 0; f < mesh.innerFaceCount; f++) {
      const p = 3 * mesh.owner[f]!;
      const n = 3 * mesh.neighbour[f]!;
      let flux = 0;
      for (let c = 0; c < 3; c++) flux += geometry.faceAreas[3 * f + c]! * 0.5 * (velocity[p + c]! + velocity[n + c]!);
      product += flux * fluxes[f]!;
      own += fluxes[f]! ** 2;
      other += flux * flux;
    }
    expect(product / Math.sqrt(own * other)).toBeGreaterThan(0.97);
    expect(Math.sqrt(other / own)).toBeGreaterThan(0.85);
    expect(Math.sqrt(other / own)).toBeLessThan(1.1);
  });
});
