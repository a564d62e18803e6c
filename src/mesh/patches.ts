import type { BoundaryKind, Dataset } from '../basis/dataset.js';
import type { MeshPatch } from './cell-mesh.js';
import { cellShape } from './cell-types.js';
import { type FaceTable, findFace, setFaceKey } from './face-table.js';

function patch(name: string, kind: BoundaryKind, found: readonly number[]): MeshPatch {
  const faces = Int32Array.from(new Set(found));
  return { name, kind, faces: faces.sort() };
}

/** Corners of the polygon in rim order; empty for cells that are no single polygon. */
function rim(type: number, points: Int32Array, begin: number, end: number): Int32Array {
  const shape = cellShape(type);
  if (shape === undefined || shape.dimension !== 2 || type === 6) return new Int32Array(0);
  const corners = points.slice(begin, shape.corners === 0 ? end : begin + shape.corners);
  if (type === 8) return Int32Array.of(corners[0]!, corners[1]!, corners[3]!, corners[2]!);
  return corners;
}

/**
 * Named boundaries: the polygons that the data set names, then the faces that are 2-D cells of the same data set, one
 * patch a zone (named after it when it has no volume cells, else `<zone> surface`). Polygons that are no boundary face,
 * joints between zones among them, are left out.
 *
 * @param table  boundary faces of the mesh
 */
export function findPatches(dataset: Dataset, table: FaceTable, pointOf: Int32Array | undefined): MeshPatch[] {
  const patches: MeshPatch[] = [];
  const look = (polygon: Int32Array, found: number[]): void => {
    const welded = pointOf === undefined ? polygon : polygon.map((p) => pointOf[p]!);
    const kept = welded.filter((p, i) => p !== welded[(i + 1) % welded.length]);
    if (kept.length < 3) return;
    setFaceKey(kept, 0, kept.length);
    const face = findFace(table);
    if (face >= 0) found.push(face);
  };
  for (const boundary of dataset.boundaries) {
    const found: number[] = [];
    for (let i = 0; i + 1 < boundary.offsets.length; i++)
      look(boundary.points.subarray(boundary.offsets[i]!, boundary.offsets[i + 1]!), found);
    patches.push(patch(boundary.name, boundary.kind, found));
  }
  const cells = dataset.cells!;
  for (const zone of dataset.zones) {
    const found: number[] = [];
    let solid = false;
    for (let c = zone.cellBegin; c < zone.cellEnd; c++) {
      const type = cells.types[c]!;
      const dimension = cellShape(type)?.dimension;
      if (dimension === 3) solid = true;
      else if (dimension === 2) look(rim(type, cells.connectivity, cells.offsets[c]!, cells.offsets[c + 1]!), found);
    }
    if (found.length > 0) patches.push(patch(solid ? `${zone.name} surface` : zone.name, 'other', found));
  }
  return patches;
}
