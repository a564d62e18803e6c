import type { BoundaryKind } from '../basis/dataset.js';

/**
 * Polyhedral mesh by faces. Faces are numbered inner faces first, then boundary faces. A face's points run so that
 * its area vector (right-hand rule) points out of its owner, from owner to neighbour; owner < neighbour.
 */
export interface CellMesh {
  /** 3 x points, interleaved, metres. */
  readonly points: Float64Array;
  /** Volume (3-D) cells only. */
  readonly cellCount: number;
  readonly faceCount: number;
  /** Faces 0 ... innerFaceCount - 1 have two cells; the others one. */
  readonly innerFaceCount: number;
  /** faceCount + 1 starts into `facePoints`. */
  readonly faceOffsets: Int32Array;
  readonly facePoints: Int32Array;
  readonly owner: Int32Array;
  /** innerFaceCount entries. */
  readonly neighbour: Int32Array;
  /** cellCount + 1 starts into `cellFaces`. */
  readonly cellFaceOffsets: Int32Array;
  readonly cellFaces: Int32Array;
  /** Number of each volume cell in the data set it came from (2-D and 1-D cells there are left out). */
  readonly datasetCell: Int32Array;
  /** Named boundaries: face numbers (all >= innerFaceCount). */
  readonly patches: readonly MeshPatch[];
}

export interface MeshPatch {
  readonly name: string;
  readonly kind: BoundaryKind;
  readonly faces: Int32Array;
}

/** Measures of a mesh. Warped faces are triangle fans about the mean of their corners, for area and centroid alike. */
export interface MeshGeometry {
  /** 3 x cells, metres. */
  readonly cellCentroids: Float64Array;
  /** cells, m3. */
  readonly cellVolumes: Float64Array;
  /** 3 x faces, m2, out of the owner. */
  readonly faceAreas: Float64Array;
  /** 3 x faces, metres. */
  readonly faceCentroids: Float64Array;
  /**
   * 6 x cells (XX XY XZ YY YZ ZZ), m2: 12 times the cell's central second moment over its volume, so that
   * sqrt(d.H.d) is the width of a brick along d when d is one of its axes.
   */
  readonly widthTensors: Float64Array;
}

/** Periodic pairs of boundary faces. */
export interface PeriodicPairs {
  /** One entry a periodic direction: translation from the low to the high side, metres. */
  readonly periods: readonly (readonly [number, number, number])[];
  /** Pairs: face on the low side. */
  readonly lowFaces: Int32Array;
  /** Pairs: its mate on the high side. */
  readonly highFaces: Int32Array;
  /** Pairs: number of the period. */
  readonly periodOf: Int32Array;
}
