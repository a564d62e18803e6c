import type { BoundaryKind, BoundaryPatch, CellTopology } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { addPolygon, emptyPolygons, facesOfMarkedPoints, type PolygonList, structuredFaces } from './patch-faces.js';
import type { FaceLookup } from './sections.js';
import { locationOf } from './solutions.js';
import {
  type CgnsNode,
  type CgnsSession,
  childOf,
  childrenOf,
  placeOf,
  readIntegers,
  readNode,
  readText,
} from './tree.js';
import type { ZoneInfo } from './zones.js';

/** A zone with what its boundaries refer to. */
export interface BoundaryZone {
  readonly zone: ZoneInfo;
  readonly lookup: FaceLookup | undefined;
  readonly cellBegin: number;
  readonly cellEnd: number;
}

interface RawPatch {
  readonly name: string;
  readonly family: string;
  readonly kind: BoundaryKind;
  readonly polygons: PolygonList;
}

/** Kind of a boundary from the standard's BCType_t. */
function boundaryKind(type: string): BoundaryKind {
  if (type.startsWith('BCWall')) return 'wall';
  if (type.startsWith('BCInflow') || type === 'BCTunnelInflow') return 'inflow';
  if (type.startsWith('BCOutflow') || type === 'BCTunnelOutflow' || type === 'BCExtrapolate') return 'outflow';
  if (type.startsWith('BCSymmetry')) return 'symmetry';
  return type === 'BCFarfield' ? 'farfield' : 'other';
}

/** Entries of a list or range: `axes` numbers each. */
interface Places {
  readonly range: boolean;
  readonly values: readonly number[];
  /** Old files name elements, not points, by ElementList and ElementRange. */
  readonly elements: boolean;
}

function placesOf(session: CgnsSession, node: CgnsNode): Places | undefined {
  for (const [label, name] of [
    ['IndexRange_t', 'PointRange'],
    ['IndexArray_t', 'PointList'],
    ['IndexRange_t', 'ElementRange'],
    ['IndexArray_t', 'ElementList'],
  ] as const) {
    const found = childOf(node, label, name);
    if (found === undefined) continue;
    return {
      range: label === 'IndexRange_t',
      values: readIntegers(session, found),
      elements: name.startsWith('Element'),
    };
  }
  return undefined;
}

function fail(node: CgnsNode, cause: string): InputError {
  return new InputError({ file: node.file, place: placeOf(node), cause });
}

function structuredRange(
  node: CgnsNode,
  zone: ZoneInfo,
  values: readonly number[],
  location: string,
  list: PolygonList,
): void {
  if (values.length !== 6) throw fail(node, `a range of 6 indices was expected, not ${values.length}`);
  const low = [0, 1, 2].map((d) => Math.min(values[d] as number, values[d + 3] as number));
  const high = [0, 1, 2].map((d) => Math.max(values[d] as number, values[d + 3] as number));
  const vertex = location === 'Vertex';
  const flat = [0, 1, 2].filter((d) => low[d] === high[d]);
  const named = ['IFaceCenter', 'JFaceCenter', 'KFaceCenter'].indexOf(location);
  // A plane at the end of the zone cannot be mistaken; a zone of one cell along an axis has several flat axes.
  const axis = named >= 0 ? named : (flat.find((d) => low[d] === zone.sizes[d]) ?? flat[0]);
  if (axis === undefined) throw fail(node, 'the range is no surface');
  // Face ranges that point at cells mean the cells' outer side.
  let index = low[axis] as number;
  if (location === 'CellCenter' && index === (zone.sizes[axis] as number) - 1 && index !== 1) index += 1;
  const most = zone.sizes.map((n, d) => (vertex || d === axis ? n : n - 1));
  if ([0, 1, 2].some((d) => (low[d] as number) < 1 || (high[d] as number) > (most[d] as number))) {
    throw fail(node, `the range ${values.join(', ')} leaves the zone`);
  }
  if (vertex && flat.length > 1) throw fail(node, 'the range is a line or a point, no surface');
  const begin = low.map((n) => n - 1);
  const end = high.map((n) => (vertex ? n - 1 : n));
  structuredFaces(list, zone.sizes, axis, index - 1, begin, end, zone.pointBegin);
}

function structuredList(
  node: CgnsNode,
  one: BoundaryZone,
  values: readonly number[],
  location: string,
  cells: CellTopology,
  list: PolygonList,
): void {
  const { sizes, points, pointBegin } = one.zone;
  if (values.length % 3 !== 0) throw fail(node, 'triples of indices were expected');
  const axis = ['IFaceCenter', 'JFaceCenter', 'KFaceCenter'].indexOf(location);
  if (location !== 'Vertex' && axis < 0)
    throw fail(node, `places at ${location} of a structured zone do not name faces`);
  const marked = new Uint8Array(points);
  for (let i = 0; i < values.length; i += 3) {
    const at = [0, 1, 2].map((d) => (values[i + d] as number) - 1);
    const most = sizes.map((n, d) => (axis < 0 || d === axis ? n - 1 : n - 2));
    if (at.some((n, d) => n < 0 || n > (most[d] as number))) throw fail(node, `entry ${i / 3 + 1} leaves the zone`);
    if (axis < 0) {
      const [nx, ny] = sizes as [number, number, number];
      marked[(at[0] as number) + nx * ((at[1] as number) + ny * (at[2] as number))] = 1;
    } else {
      const end = at.map((n) => n + 1);
      structuredFaces(list, sizes, axis, at[axis] as number, at, end, pointBegin);
    }
  }
  if (axis < 0) facesOfMarkedPoints(list, cells, one.cellBegin, one.cellEnd, pointBegin, marked);
}

function unstructuredFaces(
  node: CgnsNode,
  one: BoundaryZone,
  places: Places,
  location: string,
  cells: CellTopology,
  list: PolygonList,
): void {
  const { points, pointBegin } = one.zone;
  const [first, last] = places.values as [number, number];
  if (places.range && (places.values.length !== 2 || first < 1 || last < first || last > 0x7fffffff)) {
    throw fail(node, 'the range is empty or runs backwards');
  }
  const count = places.range ? last - first + 1 : places.values.length;
  const entry = (i: number): number => (places.range ? first + i : (places.values[i] as number));
  if (!places.elements && location === 'Vertex') {
    const marked = new Uint8Array(points);
    if (places.range && last > points) throw fail(node, `there is no point ${last} in a zone of ${points} points`);
    for (let i = 0; i < count; i++) {
      const point = entry(i);
      if (point < 1 || point > points) throw fail(node, `there is no point ${point} in a zone of ${points} points`);
      marked[point - 1] = 1;
    }
    facesOfMarkedPoints(list, cells, one.cellBegin, one.cellEnd, pointBegin, marked);
    return;
  }
  for (let i = 0; i < count; i++) {
    const face = one.lookup?.points(entry(i));
    if (face === undefined) throw fail(node, `element ${entry(i)} is no face of the zone`);
    addPolygon(list, face, pointBegin);
  }
}

function facesOf(
  session: CgnsSession,
  one: BoundaryZone,
  node: CgnsNode,
  cells: CellTopology,
): PolygonList | undefined {
  const places = placesOf(session, node);
  if (places === undefined) return undefined;
  const location = locationOf(session, node);
  const list = emptyPolygons();
  if (!one.zone.structured) unstructuredFaces(node, one, places, location, cells, list);
  else if (places.elements) throw fail(node, 'a structured zone has no element numbers');
  else if (places.range) structuredRange(node, one.zone, places.values, location, list);
  else structuredList(node, one, places.values, location, cells, list);
  return list;
}

/** Type that the family named by a boundary carries. */
function familyType(session: CgnsSession, zone: ZoneInfo, family: string): string {
  const name = family.slice(family.lastIndexOf('/') + 1);
  const node = childOf(zone.base, 'Family_t', name);
  const type = node === undefined ? undefined : childOf(node, 'FamilyBC_t');
  return readText(session, type);
}

function conditionPatches(session: CgnsSession, one: BoundaryZone, cells: CellTopology, remarks: string[]): RawPatch[] {
  const patches: RawPatch[] = [];
  for (const parent of childrenOf(one.zone.node, 'ZoneBC_t')) {
    for (const node of childrenOf(parent, 'BC_t')) {
      const family = readText(session, childOf(node, 'FamilyName_t'));
      let type = readText(session, node);
      if (/^(FamilySpecified|BCTypeNull|Null|BCTypeUserDefined|UserDefined)?$/.test(type) && family !== '') {
        type = familyType(session, one.zone, family) || type;
      }
      const polygons = attempt(() => facesOf(session, one, node, cells), `boundary ${node.name}`, remarks);
      if (polygons !== undefined) patches.push({ name: node.name, family, kind: boundaryKind(type), polygons });
    }
  }
  return patches;
}

/** A boundary that cannot be understood is left out by name; selecting it is an error then, reading the file is not. */
function attempt<T>(read: () => T, what: string, remarks: string[]): T | undefined {
  try {
    return read();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    remarks.push(`${what} was left out: ${error.details.cause}`);
    return undefined;
  }
}

function connectionPatches(
  session: CgnsSession,
  one: BoundaryZone,
  cells: CellTopology,
  remarks: string[],
): RawPatch[] {
  const patches: RawPatch[] = [];
  for (const parent of childrenOf(one.zone.node, 'ZoneGridConnectivity_t')) {
    for (const node of parent.children) {
      if (node.label !== 'GridConnectivity1to1_t' && node.label !== 'GridConnectivity_t') continue;
      const property = childOf(node, 'GridConnectivityProperty_t');
      const periodic = property === undefined ? undefined : childOf(property, 'Periodic_t');
      if (periodic === undefined) {
        const type = readText(session, childOf(node, 'GridConnectivityType_t'));
        if (node.label === 'GridConnectivity_t' && type !== 'Abutting1to1') {
          remarks.push(
            `zone ${one.zone.name} meets ${readText(session, node)} at ${node.name} without common points (${type || 'Overset'}); its faces there count as a boundary`,
          );
        }
        continue;
      }
      const angle = childOf(periodic, 'DataArray_t', 'RotationAngle');
      if (angle !== undefined && Array.from(readNode(session, angle), Number).some((value) => value !== 0)) {
        remarks.push(`the periodic connection ${node.name} turns about an axis; only translations are matched`);
      }
      const family = readText(session, childOf(node, 'FamilyName_t'));
      const polygons = attempt(() => facesOf(session, one, node, cells), `periodic connection ${node.name}`, remarks);
      if (polygons !== undefined) patches.push({ name: node.name, family, kind: 'periodic', polygons });
    }
  }
  return patches;
}

/** Where a zone states no conditions at all, the names of its surface sections are its boundaries. */
function sectionPatches(one: BoundaryZone): RawPatch[] {
  return (one.lookup?.ranges ?? []).flatMap(({ name, first, last }) => {
    const polygons = emptyPolygons();
    for (let element = first; element <= last; element++) {
      const face = one.lookup?.points(element);
      if (face !== undefined) addPolygon(polygons, face, one.zone.pointBegin);
    }
    return polygons.sizes.length === 0 ? [] : [{ name, family: '', kind: 'other' as const, polygons }];
  });
}

/** One name a patch: the family's where all its members are of one kind, else the condition's own. */
function mergePatches(raw: readonly RawPatch[], remarks: string[]): BoundaryPatch[] {
  const kinds = new Map<string, Set<BoundaryKind>>();
  for (const { family, kind } of raw) {
    if (family !== '') kinds.set(family, (kinds.get(family) ?? new Set()).add(kind));
  }
  for (const [family, of] of kinds) {
    if (of.size > 1) remarks.push(`family ${family} holds boundaries of several kinds; they go by their own names`);
  }
  const groups = new Map<string, RawPatch[]>();
  for (const patch of raw) {
    const name = patch.family !== '' && kinds.get(patch.family)?.size === 1 ? patch.family : patch.name;
    groups.set(name, [...(groups.get(name) ?? []), patch]);
  }
  const result: BoundaryPatch[] = [];
  for (const [name, members] of groups) {
    const faces = members.reduce((sum, { polygons }) => sum + polygons.sizes.length, 0);
    const offsets = new Int32Array(faces + 1);
    const points = new Int32Array(members.reduce((sum, { polygons }) => sum + polygons.points.length, 0));
    let [face, at] = [0, 0];
    for (const { polygons } of members) {
      points.set(polygons.points, at);
      for (const size of polygons.sizes) {
        at += size;
        offsets[++face] = at;
      }
    }
    const all = new Set(members.map(({ kind }) => kind));
    if (all.size > 1) remarks.push(`boundary ${name} has different kinds in different zones; it counts as other`);
    result.push({ name, kind: all.size === 1 ? (members[0] as RawPatch).kind : 'other', offsets, points });
  }
  return result;
}

/**
 * Named boundaries of volume zones: BC_t, periodic connections, or the surface sections of files without conditions.
 *
 * @param remarks  gets a sentence for each boundary that had to be left out
 */
export function readBoundaries(
  session: CgnsSession,
  zones: readonly BoundaryZone[],
  cells: CellTopology,
  remarks: string[],
): BoundaryPatch[] {
  const raw: RawPatch[] = [];
  for (const one of zones) {
    const conditions = conditionPatches(session, one, cells, remarks);
    const stated = childrenOf(one.zone.node, 'ZoneBC_t').some((node) => childOf(node, 'BC_t') !== undefined);
    raw.push(...conditions, ...connectionPatches(session, one, cells, remarks));
    if (!stated) raw.push(...sectionPatches(one));
  }
  return mergePatches(raw, remarks);
}
