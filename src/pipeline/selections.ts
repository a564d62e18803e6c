import { InputError } from '../basis/errors.js';
import type { FaceSelection } from '../case/parts.js';
import { readDataset } from '../formats/registry.js';
import { type BoundarySelection, selectBoundaryFaces } from '../mesh/selection.js';
import type { Target } from './target.js';

async function opened(selection: FaceSelection): Promise<BoundarySelection> {
  if (typeof selection === 'string' || !('surface' in selection)) return selection;
  const surface = await readDataset(selection.surface);
  if (surface.cells === undefined) {
    throw new InputError({ file: surface.file, cause: 'the file holds no surface', remedy: 'give a .vtp file' });
  }
  return {
    surface: {
      points: surface.points,
      offsets: surface.cells.offsets,
      connectivity: surface.cells.connectivity,
      file: selection.surface,
    },
  };
}

/**
 * Boundary faces that the case selects; none for an empty list.
 *
 * @throws InputError when a selection takes no face, or a name is unknown
 */
export async function facesOf(target: Target, selections: readonly FaceSelection[]): Promise<Int32Array> {
  if (selections.length === 0) return new Int32Array(0);
  const list = await Promise.all(selections.map(opened));
  return selectBoundaryFaces(target.mesh, target.geometry, list, { periodic: target.periodic, file: target.file });
}
