import { circulationFluxes, gaussPlaces } from '../divergence/circulation.js';
import { lnMultiplierAt, type MultiplierField } from '../turbulence/multiplier-field.js';
import type { FluctuationPlan } from '../turbulence/plan.js';
import { potentialAtPoints } from '../turbulence/synthesis.js';
import { vertexParameters } from '../turbulence/vertex-parameters.js';
import type { Target } from './target.js';

/**
 * Volume flux of the fluctuation through every face by the circulation of its vector potential, m3/s. The outward
 * fluxes of every cell sum to zero to rounding on any mesh; none passes a wall; periodic mates carry the same.
 *
 * Order: the faces of `target.mesh`, inner faces first, then boundary faces; positive out of the owner (for inner faces
 * from the lower cell number to the higher).
 *
 * @param plan        with its weights set (and compensated, when the run did so)
 * @param multiplier  of the calibration; none when the run was not calibrated
 * @param walls       boundary faces on which the potential vanishes
 */
export function faceFluxes(
  target: Pick<Target, 'mesh' | 'periodic'>,
  plan: FluctuationPlan,
  multiplier: MultiplierField | undefined,
  walls: Int32Array = new Int32Array(0),
): Float64Array {
  const { mesh, periodic } = target;
  const atVertices = vertexParameters(plan, mesh, periodic, walls);
  const { columns } = plan;
  const gradient = new Float64Array(3);
  return circulationFluxes(mesh, ({ points, ends }, out) => {
    const parameters = new Float64Array((columns * points.length) / 3);
    for (let e = 0; 2 * e < ends.length; e++) {
      const p = columns * ends[2 * e]!;
      const q = columns * ends[2 * e + 1]!;
      for (let g = 0; g < 2; g++) {
        const t = gaussPlaces[g as 0 | 1];
        const to = columns * (2 * e + g);
        for (let c = 0; c < columns; c++) parameters[to + c] = (1 - t) * atVertices[p + c]! + t * atVertices[q + c]!;
      }
    }
    potentialAtPoints(plan, points, parameters, out);
    if (multiplier === undefined) return;
    for (let i = 0; i < points.length; i += 3) {
      const c = Math.exp(lnMultiplierAt(multiplier, points[i]!, points[i + 1]!, points[i + 2]!, gradient));
      for (let a = 0; a < 3; a++) out[i + a]! *= c;
    }
  });
}
