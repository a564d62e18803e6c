import type { Dataset } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { readDataset } from '../formats/registry.js';
import { buildMesh } from '../mesh/build.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';
import { measureMesh } from '../mesh/geometry.js';
import { matchPeriodic } from '../mesh/periodic.js';
import { requirePositiveVolumes } from '../mesh/quality.js';
import { type Progress, timed } from './progress.js';

/** The mesh that is to be started, measured and with its periodic pairs. */
export interface Target {
  readonly file: string;
  readonly dataset: Dataset;
  readonly mesh: CellMesh;
  readonly geometry: MeshGeometry;
  readonly periodic: PeriodicPairs | undefined;
}

/**
 * Reads a mesh, builds its faces, measures it and pairs its periodic boundaries.
 *
 * @param periodic  axes (`x`, `y`, `z`) whose extreme planes match by translation
 * @throws InputError when the file holds no volume cells, a volume is not positive, or periodic faces do not pair
 */
export async function loadTarget(
  file: string,
  periodic: readonly ('x' | 'y' | 'z')[],
  progress: Progress,
  timings: Map<string, number>,
): Promise<Target> {
  const dataset = await timed(progress, timings, 'read target', 0, () => readDataset(file));
  if (dataset.cells === undefined) {
    throw new InputError({ file, cause: 'the target has points but no cells', remedy: 'give a file with a mesh' });
  }
  return timed(progress, timings, 'measure target', 0, () => {
    const mesh = buildMesh(dataset);
    if (mesh.cellCount === 0) {
      throw new InputError({ file, cause: 'the target has no volume cells', remedy: 'give a three-dimensional mesh' });
    }
    const geometry = measureMesh(mesh);
    requirePositiveVolumes(mesh, geometry, file);
    const pairs = periodic.length === 0 ? undefined : matchPeriodic(mesh, geometry, periodic, file);
    return { file, dataset, mesh, geometry, periodic: pairs };
  });
}
