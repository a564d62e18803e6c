import type { Dataset } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import type { CellMesh } from '../../mesh/cell-mesh.js';
import { createFaceTable, findFace, putFace, setFaceKey } from '../../mesh/face-table.js';
import { weldPoints } from '../../mesh/weld.js';
import type { Hdf5File } from './hdf5.js';
import type { RaggedSection } from './sections.js';
import { createNode, textData, wholeData } from './write-node.js';
import { shortName, writeExponents, writeSiUnits } from './write-solution.js';

/** Values on the faces of a mesh, positive along the face's area vector (from owner to neighbour, or outwards). */
export interface FaceFields {
  readonly mesh: CellMesh;
  readonly arrays: readonly FaceArray[];
}

export interface FaceArray {
  readonly name: string;
  /** One value a mesh face, SI. */
  readonly values: Float64Array;
  /** Turns its sign with the face's direction, as a flux does. */
  readonly signed: boolean;
  /** Exponents of mass, length, time, temperature and angle; a volume flux is [0, 3, -1, 0, 0]. */
  readonly exponents: readonly [number, number, number, number, number];
}

/** A section of polygons and the zone in the file that it belongs to. */
export interface FaceSection {
  readonly zone: string;
  readonly pointBegin: number;
  readonly section: Pick<RaggedSection, 'first' | 'last' | 'offsets' | 'values'>;
}

const FACES = 'StartFaceFields';

/** For each polygon the mesh face, from 1, negative where it runs against it. */
function matchFaces(sections: readonly FaceSection[], dataset: Dataset, mesh: CellMesh): Int32Array[] {
  const pointOf = weldPoints(dataset);
  const table = createFaceTable(dataset.points.length / 3);
  for (let f = 0; f < mesh.faceCount; f++) {
    setFaceKey(mesh.facePoints, mesh.faceOffsets[f] as number, mesh.faceOffsets[f + 1] as number);
    putFace(table, f);
  }
  let polygon = new Int32Array(16);
  return sections.map(({ section, pointBegin, zone }) => {
    const { offsets, values } = section;
    const count = offsets.length - 1;
    const result = new Int32Array(count);
    for (let i = 0; i < count; i++) {
      const begin = offsets[i] as number;
      const n = (offsets[i + 1] as number) - begin;
      if (n > polygon.length) polygon = new Int32Array(2 * n);
      for (let k = 0; k < n; k++) {
        const point = (values[begin + k] as number) + pointBegin;
        polygon[k] = pointOf === undefined ? point : (pointOf[point] as number);
      }
      setFaceKey(polygon, 0, n);
      const face = findFace(table);
      if (face < 0) {
        throw new InputError({
          file: dataset.file,
          place: zone,
          cause: `polygon ${section.first + i} is no face of the mesh, so face values cannot be kept`,
        });
      }
      // Same direction when the mesh face goes on from the polygon's first point to its second.
      const at = mesh.facePoints.indexOf(polygon[0] as number, mesh.faceOffsets[face] as number);
      const end = mesh.faceOffsets[face + 1] as number;
      const after = mesh.facePoints[at + 1 < end ? at + 1 : (mesh.faceOffsets[face] as number)];
      result[i] = after === polygon[1] ? face + 1 : -(face + 1);
    }
    return result;
  });
}

/**
 * Adds values on faces as ZoneSubRegion_t nodes at FaceCenter, one for each section of polygons.
 *
 * @throws InputError when a polygon of the file is no face of the mesh
 */
export function writeFaceFields(
  file: Hdf5File,
  sections: readonly FaceSection[],
  dataset: Dataset,
  fields: FaceFields,
  freeName: (name: string) => string,
): void {
  if (sections.length === 0) return;
  const matched = matchFaces(sections, dataset, fields.mesh);
  const inZone = new Map<string, Set<string>>();
  sections.forEach(({ zone, section }, s) => {
    const faces = matched[s] as Int32Array;
    const used = inZone.get(zone) ?? new Set<string>();
    inZone.set(zone, used);
    const name = shortName(freeName(FACES), used);
    used.add(name);
    // A FlowSolution_t at FaceCenter of an unstructured zone cannot be opened by the standard's library 3.4, even where
    // it wrote it; ZoneSubRegion_t is the standard's node for values on some faces and is read by it.
    const path = createNode(file, zone, name, 'ZoneSubRegion_t', wholeData('I4', [1], [2]));
    createNode(file, path, 'GridLocation', 'GridLocation_t', textData('FaceCenter'));
    createNode(file, path, 'PointRange', 'IndexRange_t', wholeData('I4', [1, 2], [section.first, section.last]));
    writeSiUnits(file, path);
    const taken = new Set<string>();
    for (const array of fields.arrays) {
      const short = shortName(array.name, taken);
      taken.add(short);
      const node = createNode(file, path, short, 'DataArray_t', {
        type: 'R8',
        dimensions: [faces.length],
        fill: (out, begin) => {
          for (let i = 0; i < out.length; i++) {
            const face = faces[begin + i] as number;
            const value = array.values[Math.abs(face) - 1] as number;
            (out as Float64Array)[i] = array.signed && face < 0 ? -value : value;
          }
        },
      });
      writeExponents(file, node, array.exponents);
    }
  });
}
