import { InputError } from '../basis/errors.js';
import type { CellMesh, MeshGeometry } from './cell-mesh.js';

/** Error that names the count and the first cells (numbers of the file) without a positive volume; undefined when all are. */
export function volumeError(
  volumes: Float64Array,
  mesh: Pick<CellMesh, 'cellCount' | 'datasetCell'>,
  file: string,
): InputError | undefined {
  let count = 0;
  const first: number[] = [];
  for (let c = 0; c < mesh.cellCount; c++)
    if (!(volumes[c]! > 0)) {
      count++;
      if (first.length < 5) first.push(mesh.datasetCell[c]!);
    }
  if (count === 0) return undefined;
  const named = first.join(', ') + (count > first.length ? ', ...' : '');
  return new InputError({
    file,
    place: `${count === 1 ? 'cell' : 'cells'} ${named}`,
    cause: `${count} of ${mesh.cellCount} cells ${count === 1 ? 'has' : 'have'} zero or negative volume`,
    remedy: 'repair the mesh, or check the order of the points in these cells',
  });
}

/** @throws InputError naming the count and the first cells (numbers of the file) without a positive volume */
export function requirePositiveVolumes(mesh: CellMesh, geometry: MeshGeometry, file: string): void {
  const error = volumeError(geometry.cellVolumes, mesh, file);
  if (error !== undefined) throw error;
}
