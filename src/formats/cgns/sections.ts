import { InputError } from '../../basis/errors.js';
import { type ElementType, elementType, MIXED, NFACE, NGON } from './elements.js';
import {
  type CgnsNode,
  type CgnsSession,
  childOf,
  childrenOf,
  placeOf,
  readIndices,
  readIntegersOf,
  requireChild,
  requireIndexCount,
} from './tree.js';

interface SectionBase {
  readonly name: string;
  readonly node: CgnsNode;
  /** Element numbers, from 1, both inclusive. */
  readonly first: number;
  readonly last: number;
}

/** Elements of one type; the connectivity stays in the file until it is needed. */
export interface UniformSection extends SectionBase {
  readonly kind: 'uniform';
  readonly type: ElementType;
  readonly connectivity: CgnsNode;
}

/** Elements of several types; `starts` lead to the first node number of each in `values`. */
export interface MixedSection extends SectionBase {
  readonly kind: 'mixed';
  readonly types: Uint8Array;
  readonly starts: Int32Array;
  readonly values: Int32Array;
}

/** Polygons (points from 0) or polyhedra (signed numbers of polygons, from 1). */
export interface RaggedSection extends SectionBase {
  readonly kind: 'polygons' | 'polyhedra';
  readonly offsets: Int32Array;
  readonly values: Int32Array;
}

export type Section = UniformSection | MixedSection | RaggedSection;

function wrong(node: CgnsNode, cause: string): InputError {
  return new InputError({ file: node.file, place: placeOf(node), cause, remedy: 'export the file again' });
}

/** @throws InputError unless all values lie in 1 ... most */
function requirePoints(node: CgnsNode, values: Int32Array, most: number): void {
  for (let i = 0; i < values.length; i++) {
    const value = values[i] as number;
    if (value < 1 || value > most) throw wrong(node, `there is no point ${value} in a zone of ${most} points`);
  }
}

/** Starts of ragged lists: from ElementStartOffset where it stands, else from the counts between the lists. */
function raggedLists(session: CgnsSession, node: CgnsNode, count: number): { offsets: Int32Array; values: Int32Array } {
  const connectivity = requireChild(node, 'DataArray_t', 'ElementConnectivity');
  const starts = childOf(node, 'DataArray_t', 'ElementStartOffset');
  const raw = readIndices(session, connectivity);
  if (starts !== undefined) {
    if (requireIndexCount(starts) !== count + 1) throw wrong(starts, `${count + 1} starts were expected`);
    const offsets = readIndices(session, starts);
    for (let i = 0; i < count; i++) {
      if ((offsets[i + 1] as number) < (offsets[i] as number)) throw wrong(starts, `start ${i + 2} runs backwards`);
    }
    if (offsets[0] !== 0 || offsets[count] !== raw.length) {
      throw wrong(starts, `the starts do not span the ${raw.length} values of ElementConnectivity`);
    }
    return { offsets, values: raw };
  }
  // Older layout: count, members, count, members ...
  const offsets = new Int32Array(count + 1);
  const values = new Int32Array(Math.max(0, raw.length - count));
  let from = 0;
  let to = 0;
  for (let i = 0; i < count; i++) {
    const n = raw[from] ?? -1;
    if (n < 1 || from + n >= raw.length) throw wrong(connectivity, `list ${i + 1} of ${count} runs past the end`);
    for (let k = 1; k <= n; k++) values[to++] = raw[from + k] as number;
    offsets[i + 1] = to;
    from += n + 1;
  }
  if (from !== raw.length) throw wrong(connectivity, `${raw.length - from} values are left over after the last list`);
  return { offsets, values };
}

function readMixed(session: CgnsSession, base: SectionBase, points: number): MixedSection {
  const count = base.last - base.first + 1;
  const connectivity = requireChild(base.node, 'DataArray_t', 'ElementConnectivity');
  const values = readIndices(session, connectivity);
  const types = new Uint8Array(count);
  const starts = new Int32Array(count);
  let at = 0;
  for (let i = 0; i < count; i++) {
    const number = values[at] ?? -1;
    const type = elementType(number);
    if (type === undefined) throw wrong(connectivity, `element ${base.first + i} has the unknown type ${number}`);
    types[i] = number;
    starts[i] = at + 1;
    at += 1 + type.nodes;
    if (at > values.length) throw wrong(connectivity, `element ${base.first + i} runs past the end`);
    for (let k = starts[i] as number; k < at; k++) {
      const value = values[k] as number;
      if (value < 1 || value > points)
        throw wrong(connectivity, `there is no point ${value} in a zone of ${points} points`);
    }
  }
  if (at !== values.length)
    throw wrong(connectivity, `${values.length - at} values are left over after the last element`);
  const offsets = childOf(base.node, 'DataArray_t', 'ElementStartOffset');
  if (offsets !== undefined) {
    // What the types say is enough, but a file that contradicts itself is not to be trusted.
    const stated = readIndices(session, offsets);
    const agree = stated.length === count + 1 && stated[count] === values.length;
    if (!agree || starts.some((start, i) => stated[i] !== start - 1)) {
      throw wrong(offsets, 'the starts contradict the types of the elements');
    }
  }
  return { ...base, kind: 'mixed', types, starts, values };
}

function readSection(session: CgnsSession, node: CgnsNode, points: number): Section {
  const [number] = readIntegersOf(session, node, 2) as [number, number];
  const range = requireChild(node, 'IndexRange_t', 'ElementRange');
  const [first, last] = readIntegersOf(session, range, 2) as [number, number];
  if (first < 1 || last < first || last > 0x7fffffff) throw wrong(range, `${first} to ${last} is no range of elements`);
  const base = { name: node.name, node, first, last };
  const count = last - first + 1;
  const connectivity = requireChild(node, 'DataArray_t', 'ElementConnectivity');
  const stored = requireIndexCount(connectivity);
  if (stored < count) throw wrong(connectivity, `${stored} values cannot hold ${count} elements`);
  if (number === MIXED) return readMixed(session, base, points);
  if (number === NGON || number === NFACE) {
    const lists = raggedLists(session, node, count);
    if (number === NFACE) return { ...base, kind: 'polyhedra', ...lists };
    requirePoints(connectivity, lists.values, points);
    for (let i = 0; i < lists.values.length; i++) lists.values[i] = (lists.values[i] as number) - 1;
    return { ...base, kind: 'polygons', ...lists };
  }
  const type = elementType(number);
  if (type === undefined) {
    throw new InputError({
      file: node.file,
      place: placeOf(node),
      cause: `elements of type ${number} are not known here (linear and quadratic ones are)`,
      remedy: 'export linear elements',
    });
  }
  if (stored !== count * type.nodes) {
    throw wrong(connectivity, `${count} elements ${type.name} need ${count * type.nodes} values, not ${stored}`);
  }
  return { ...base, kind: 'uniform', type, connectivity };
}

/** Polyhedra from the two parents that each polygon names, for files without a section of polyhedra. */
function polyhedraFromParents(session: CgnsSession, faces: RaggedSection, cells: number): RaggedSection | undefined {
  const node = childOf(faces.node, 'DataArray_t', 'ParentElements');
  if (node === undefined) return undefined;
  const parents = readIndices(session, node);
  const count = faces.last - faces.first + 1;
  if (parents.length !== 2 * count) throw wrong(node, `${2 * count} values were expected, not ${parents.length}`);
  let lowest = 0x7fffffff;
  let highest = 0;
  for (const parent of parents) {
    if (parent > 0 && parent < lowest) lowest = parent;
    if (parent > highest) highest = parent;
  }
  if (highest - lowest + 1 !== cells) {
    throw wrong(node, `the parents run from ${lowest} to ${highest}, the zone has ${cells} cells`);
  }
  const offsets = new Int32Array(cells + 1);
  for (const parent of parents)
    if (parent > 0) offsets[parent - lowest + 1] = (offsets[parent - lowest + 1] as number) + 1;
  for (let c = 0; c < cells; c++) offsets[c + 1] = (offsets[c + 1] as number) + (offsets[c] as number);
  const next = offsets.slice(0, cells);
  const values = new Int32Array(offsets[cells] as number);
  for (let f = 0; f < count; f++) {
    // The polygon's normal points from the first parent to the second.
    for (const [parent, sign] of [
      [parents[f], 1],
      [parents[count + f], -1],
    ] as [number, number][]) {
      if (parent <= 0) continue;
      const slot = next[parent - lowest] as number;
      values[slot] = sign * (faces.first + f);
      next[parent - lowest] = slot + 1;
    }
  }
  const first = faces.last + 1;
  return { name: 'cells', node: faces.node, first, last: first + cells - 1, kind: 'polyhedra', offsets, values };
}

/**
 * Reads the sections of an unstructured zone in the order of their element numbers.
 *
 * @param points  number of points of the zone
 * @param cells   number of cells of the zone, used where cells are known by their faces' parents only
 * @throws InputError for missing nodes, unknown types, numbers out of range, overlapping sections
 */
export function readSections(session: CgnsSession, zone: CgnsNode, points: number, cells: number): Section[] {
  const sections = childrenOf(zone, 'Elements_t').map((node) => readSection(session, node, points));
  sections.sort((a, b) => a.first - b.first);
  for (let i = 1; i < sections.length; i++) {
    const [before, after] = [sections[i - 1] as Section, sections[i] as Section];
    if (after.first <= before.last) throw wrong(after.node, `element ${after.first} is in ${before.name} as well`);
  }
  const polygons = sections.filter((section) => section.kind === 'polygons') as RaggedSection[];
  const alone = sections.every((section) => section.kind === 'polygons' || sectionDimension(section) < 3);
  if (polygons.length === 1 && alone && cells > 0) {
    const made = polyhedraFromParents(session, polygons[0] as RaggedSection, cells);
    if (made !== undefined) sections.push(made);
  }
  return sections;
}

/** Highest dimension of a section's elements. */
function sectionDimension(section: Section): number {
  if (section.kind === 'uniform') return section.type.dimension;
  if (section.kind !== 'mixed') return section.kind === 'polyhedra' ? 3 : 2;
  let highest = 0;
  for (const number of section.types) highest = Math.max(highest, elementType(number)?.dimension ?? 0);
  return highest;
}

/** Points of surface elements by element number, corners only. */
export interface FaceLookup {
  /** Points (from 0 in the zone) of the element; undefined when it is no surface element. */
  readonly points: (element: number) => Int32Array | undefined;
  /** Element numbers of all surface elements, section by section. */
  readonly ranges: readonly { readonly name: string; readonly first: number; readonly last: number }[];
}

/**
 * @param dimension  dimension of the faces: 2 for volume zones, 1 for surface zones
 */
export function faceLookup(
  session: CgnsSession,
  sections: readonly Section[],
  dimension: number,
  points: number,
): FaceLookup {
  const usable = sections.filter(
    (section) =>
      (section.kind === 'polygons' && dimension === 2) ||
      (section.kind === 'uniform' && section.type.dimension === dimension) ||
      section.kind === 'mixed',
  );
  const loaded = new Map<Section, Int32Array>();
  const values = (section: UniformSection): Int32Array => {
    let found = loaded.get(section);
    if (found === undefined) {
      found = readIndices(session, section.connectivity);
      requirePoints(section.connectivity, found, points);
      loaded.set(section, found);
    }
    return found;
  };
  const lookUp = (element: number): Int32Array | undefined => {
    const section = usable.find((one) => element >= one.first && element <= one.last);
    if (section === undefined) return undefined;
    const i = element - section.first;
    if (section.kind === 'uniform') {
      const { nodes, corners } = section.type;
      return values(section)
        .slice(i * nodes, i * nodes + corners)
        .map((point) => point - 1);
    }
    if (section.kind === 'mixed') {
      const type = elementType(section.types[i] as number);
      if (type?.dimension !== dimension) return undefined;
      const start = section.starts[i] as number;
      return section.values.slice(start, start + type.corners).map((point) => point - 1);
    }
    const ragged = section as RaggedSection;
    return ragged.values.subarray(ragged.offsets[i] as number, ragged.offsets[i + 1] as number);
  };
  return { points: lookUp, ranges: usable.filter((section) => section.kind !== 'polygons') };
}
