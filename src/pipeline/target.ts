import type { Dataset } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { readDataset } from '../formats/registry.js';
import { buildMesh } from '../mesh/build.js';
import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';
import { measureMesh } from '../mesh/geometry.js';
import { matchPeriodic, matchPeriodicPatches } from '../mesh/periodic.js';
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

/** An axis whose extreme planes match by translation, or the names of two boundaries that do. */
export type PeriodicDirection = 'x' | 'y' | 'z' | readonly [string, string];

function joined(a: PeriodicPairs, b: PeriodicPairs): PeriodicPairs {
  const both = (x: Int32Array, y: Int32Array): Int32Array => Int32Array.from([...x, ...y]);
  return {
    periods: [...a.periods, ...b.periods],
    lowFaces: both(a.lowFaces, b.lowFaces),
    highFaces: both(a.highFaces, b.highFaces),
    periodOf: both(
      a.periodOf,
      b.periodOf.map((period) => period + a.periods.length),
    ),
  };
}

function pairBoundaries(
  mesh: CellMesh,
  geometry: MeshGeometry,
  periodic: readonly PeriodicDirection[],
  file: string,
): PeriodicPairs | undefined {
  const axes = periodic.filter((entry) => typeof entry === 'string') as ('x' | 'y' | 'z')[];
  const names = periodic.filter((entry): entry is readonly [string, string] => typeof entry !== 'string');
  const byAxis = axes.length === 0 ? undefined : matchPeriodic(mesh, geometry, axes, file);
  const byName = names.length === 0 ? undefined : matchPeriodicPatches(mesh, geometry, names, file);
  return byAxis === undefined ? byName : byName === undefined ? byAxis : joined(byAxis, byName);
}

/**
 * Reads a mesh, builds its faces, measures it and pairs its periodic boundaries.
 *
 * @param periodic  periodic directions
 * @throws InputError when the file holds no volume cells, a volume is not positive, or periodic faces do not pair
 */
export async function loadTarget(
  file: string,
  periodic: readonly PeriodicDirection[],
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
    return { file, dataset, mesh, geometry, periodic: pairBoundaries(mesh, geometry, periodic, file) };
  });
}
