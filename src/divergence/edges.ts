import type { CellMesh } from '../mesh/cell-mesh.js';

/** Edges of a mesh, each once, whichever faces share it. Plain data. */
export interface MeshEdges {
  readonly count: number;
  /** 2 x edges: point numbers, the lower first; an edge runs from its first point to its second. */
  readonly points: Int32Array;
  /**
   * As long as the mesh's `facePoints`: edge from that corner of the face to the next corner. The face runs along the
   * edge when the corner's point number is the lower one, else against it.
   */
  readonly ofCorner: Int32Array;
}

/**
 * Numbers the edges of all faces by their lower, then their order of appearance.
 *
 * @returns edges in the order of their lower point
 */
export function findEdges(mesh: CellMesh): MeshEdges {
  const { faceOffsets, facePoints, faceCount } = mesh;
  const corners = facePoints.length;
  const next = new Int32Array(corners);
  for (let f = 0; f < faceCount; f++) {
    const begin = faceOffsets[f]!;
    const end = faceOffsets[f + 1]!;
    for (let a = begin; a < end; a++) next[a] = facePoints[a + 1 < end ? a + 1 : begin]!;
  }
  // Corners sorted by the lower point of their edge; the few edges of one point are then told apart by the other.
  const starts = new Int32Array(mesh.points.length / 3 + 1);
  for (let a = 0; a < corners; a++) starts[Math.min(facePoints[a]!, next[a]!) + 1]!++;
  for (let p = 1; p < starts.length; p++) starts[p]! += starts[p - 1]!;
  const sorted = new Int32Array(corners);
  const at = starts.slice();
  for (let a = 0; a < corners; a++) sorted[at[Math.min(facePoints[a]!, next[a]!)]!++] = a;
  const ofCorner = new Int32Array(corners);
  let room = new Int32Array(Math.ceil(corners / 2) + 2);
  let count = 0;
  for (let low = 0; low + 1 < starts.length; low++) {
    const first = count;
    for (let i = starts[low]!; i < starts[low + 1]!; i++) {
      const a = sorted[i]!;
      const high = Math.max(facePoints[a]!, next[a]!);
      let edge = first;
      while (edge < count && room[2 * edge + 1] !== high) edge++;
      if (edge === count) {
        if (2 * count + 2 > room.length) {
          const more = new Int32Array(2 * room.length);
          more.set(room);
          room = more;
        }
        room[2 * count] = low;
        room[2 * count + 1] = high;
        count++;
      }
      ofCorner[a] = edge;
    }
  }
  return { count, points: room.slice(0, 2 * count), ofCorner };
}
