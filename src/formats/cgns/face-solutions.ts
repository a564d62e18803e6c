import { InputError } from '../../basis/errors.js';
import { withSession } from './read.js';
import { faceLookup, readSections } from './sections.js';
import { locationOf } from './solutions.js';
import {
  type CgnsNode,
  type CgnsSession,
  childOf,
  childrenOf,
  readIntegers,
  readIntegersOf,
  readNode,
  readTree,
} from './tree.js';
import { conversionOf, inherit } from './units.js';
import { listZones, type ZoneInfo } from './zones.js';

/** Values on faces of an unstructured zone. */
export interface CgnsFaceArray {
  readonly name: string;
  readonly zone: string;
  readonly solution: string;
  /** One value a face, SI. */
  readonly values: Float64Array;
  /** n + 1 starts into `facePoints`. */
  readonly faceOffsets: Int32Array;
  /** Point numbers of the merged data set; the order gives the face's direction. */
  readonly facePoints: Int32Array;
}

function faceNumbers(session: CgnsSession, zone: ZoneInfo, solution: CgnsNode): number[] {
  const range = childOf(solution, 'IndexRange_t', 'PointRange');
  const list = childOf(solution, 'IndexArray_t', 'PointList');
  if (list !== undefined) return readIntegers(session, list);
  let span: [number, number] | undefined;
  if (range !== undefined) span = readIntegersOf(session, range, 2) as [number, number];
  else {
    const polygons = readSections(session, zone.node, zone.points, zone.cells).filter(
      ({ kind }) => kind === 'polygons',
    );
    if (polygons.length === 1) span = [polygons[0]?.first as number, polygons[0]?.last as number];
  }
  if (span === undefined || span[1] < span[0] || span[1] - span[0] > 0x7ffffff) {
    throw new InputError({
      file: solution.file,
      place: solution.path,
      cause: 'the faces of the solution are not named',
    });
  }
  const first = span[0];
  return Array.from({ length: span[1] - first + 1 }, (_, i) => first + i);
}

/**
 * Reads the values at FaceCenter of unstructured zones, from FlowSolution_t and ZoneSubRegion_t.
 *
 * @throws InputError for damaged files and for faces that do not exist
 */
export async function readCgnsFaceArrays(path: string): Promise<CgnsFaceArray[]> {
  return withSession(path, (session) => {
    const result: CgnsFaceArray[] = [];
    for (const zone of listZones(session, readTree(session, path)).zones) {
      if (zone.structured) continue;
      const places = [...childrenOf(zone.node, 'FlowSolution_t'), ...childrenOf(zone.node, 'ZoneSubRegion_t')];
      for (const solution of places) {
        if (locationOf(session, solution) !== 'FaceCenter') continue;
        const sections = readSections(session, zone.node, zone.points, zone.cells);
        const lookup = faceLookup(session, sections, 2, zone.points);
        const numbers = faceNumbers(session, zone, solution);
        const points: number[] = [];
        const faceOffsets = new Int32Array(numbers.length + 1);
        numbers.forEach((number, i) => {
          const face = lookup.points(number);
          if (face === undefined) {
            throw new InputError({ file: solution.file, place: solution.path, cause: `element ${number} is no face` });
          }
          for (const point of face) points.push(point + zone.pointBegin);
          faceOffsets[i + 1] = points.length;
        });
        const facePoints = Int32Array.from(points);
        const context = inherit(session, zone.context, solution);
        for (const node of childrenOf(solution, 'DataArray_t')) {
          const { scale, offset } = conversionOf(session, context, node);
          const stored = readNode(session, node);
          const values = new Float64Array(stored.length);
          for (let i = 0; i < values.length; i++) values[i] = Number(stored[i]) * scale + offset;
          if (values.length !== numbers.length) {
            throw new InputError({
              file: node.file,
              place: node.path,
              cause: `${numbers.length} values at faces were expected, the array holds ${values.length}`,
            });
          }
          result.push({ name: node.name, zone: zone.name, solution: solution.name, values, faceOffsets, facePoints });
        }
      }
    }
    return result;
  });
}
