import type { CellTopology } from '../../basis/dataset.js';
import { InputError } from '../../basis/errors.js';
import { elementType } from './elements.js';
import type { MixedSection, RaggedSection, Section, UniformSection } from './sections.js';
import { type CgnsNode, type CgnsSession, placeOf, readIndexPieces } from './tree.js';

/** Cells of one section or structured zone: sizes first, so that the arrays of the whole file are made once. */
export interface CellBlock {
  readonly cells: number;
  readonly connectivity: number;
  /** Length of the face lists of polyhedra. */
  readonly faces: number;
  readonly fill: (out: CellOutput) => void;
}

/** Where a block writes; `pointBase` is added to the zone's own point numbers. */
export interface CellOutput {
  readonly types: Uint8Array;
  readonly offsets: Int32Array;
  readonly connectivity: Int32Array;
  readonly polyhedronFaces: Int32Array;
  readonly polyhedronOffsets: Int32Array | undefined;
  readonly cellBegin: number;
  readonly connectivityBegin: number;
  readonly facesBegin: number;
  readonly pointBase: number;
}

function structuredBlock(sizes: readonly number[]): CellBlock {
  const [nx, ny, nz] = [sizes[0] ?? 1, sizes[1] ?? 1, sizes[2] ?? 1];
  const dimension = sizes.length;
  const corners = 2 ** dimension;
  const [cx, cy, cz] = [nx - 1, dimension > 1 ? ny - 1 : 1, dimension > 2 ? nz - 1 : 1];
  const cells = cx * cy * cz;
  const type = [3, 9, 12][dimension - 1] as number;
  return {
    cells,
    connectivity: cells * corners,
    faces: 0,
    fill: (out) => {
      let at = out.connectivityBegin;
      let cell = out.cellBegin;
      const { connectivity, offsets } = out;
      const layer = nx * ny;
      for (let k = 0; k < cz; k++) {
        for (let j = 0; j < cy; j++) {
          let p = out.pointBase + k * layer + j * nx;
          for (let i = 0; i < cx; i++, p++) {
            connectivity[at] = p;
            connectivity[at + 1] = p + 1;
            if (dimension > 1) {
              connectivity[at + 2] = p + 1 + nx;
              connectivity[at + 3] = p + nx;
            }
            if (dimension > 2) {
              connectivity[at + 4] = p + layer;
              connectivity[at + 5] = p + 1 + layer;
              connectivity[at + 6] = p + 1 + nx + layer;
              connectivity[at + 7] = p + nx + layer;
            }
            at += corners;
            offsets[++cell] = at;
          }
        }
      }
      out.types.fill(type, out.cellBegin, out.cellBegin + cells);
    },
  };
}

function uniformBlock(session: CgnsSession, section: UniformSection, points: number): CellBlock {
  const { type, connectivity: node } = section;
  const cells = section.last - section.first + 1;
  const width = type.order.length;
  const slots = new Int32Array(type.nodes).fill(-1);
  type.order.forEach((from, to) => {
    slots[from] = to;
  });
  return {
    cells,
    connectivity: cells * width,
    faces: 0,
    fill: (out) => {
      const { connectivity, connectivityBegin, pointBase } = out;
      readIndexPieces(session, node, (values, begin) => {
        let element = Math.floor(begin / type.nodes);
        let k = begin - element * type.nodes;
        let base = connectivityBegin + element * width;
        for (let i = 0; i < values.length; i++) {
          const point = values[i] as number;
          if (point < 1 || point > points) {
            throw new InputError({
              file: node.file,
              place: placeOf(node),
              cause: `element ${section.first + element} names point ${point}, the zone has ${points}`,
              remedy: 'export the file again',
            });
          }
          const slot = slots[k] as number;
          if (slot >= 0) connectivity[base + slot] = point - 1 + pointBase;
          if (++k === type.nodes) {
            k = 0;
            element++;
            base += width;
          }
        }
      });
      for (let c = 1; c <= cells; c++) out.offsets[out.cellBegin + c] = connectivityBegin + c * width;
      out.types.fill(type.vtk, out.cellBegin, out.cellBegin + cells);
    },
  };
}

function mixedBlock(section: MixedSection, dimension: number): CellBlock {
  let cells = 0;
  let length = 0;
  for (const number of section.types) {
    const type = elementType(number);
    if (type?.dimension !== dimension) continue;
    cells++;
    length += type.order.length;
  }
  return {
    cells,
    connectivity: length,
    faces: 0,
    fill: (out) => {
      let cell = out.cellBegin;
      let at = out.connectivityBegin;
      for (let i = 0; i < section.types.length; i++) {
        const type = elementType(section.types[i] as number);
        if (type?.dimension !== dimension) continue;
        const start = section.starts[i] as number;
        for (const k of type.order) out.connectivity[at++] = (section.values[start + k] as number) - 1 + out.pointBase;
        out.types[cell++] = type.vtk;
        out.offsets[cell] = at;
      }
    },
  };
}

function polygonBlock(section: RaggedSection): CellBlock {
  const cells = section.last - section.first + 1;
  return {
    cells,
    connectivity: section.values.length,
    faces: 0,
    fill: (out) => {
      for (let i = 0; i < section.values.length; i++) {
        out.connectivity[out.connectivityBegin + i] = (section.values[i] as number) + out.pointBase;
      }
      for (let c = 0; c < cells; c++) {
        const n = (section.offsets[c + 1] as number) - (section.offsets[c] as number);
        out.types[out.cellBegin + c] = n === 3 ? 5 : n === 4 ? 9 : 7;
        out.offsets[out.cellBegin + c + 1] = out.connectivityBegin + (section.offsets[c + 1] as number);
      }
    },
  };
}

/** Finds the polygon of a face number among the zone's sections of polygons. */
function polygonSection(sections: readonly RaggedSection[], element: number): RaggedSection | undefined {
  for (const section of sections) if (element >= section.first && element <= section.last) return section;
  return undefined;
}

function polyhedronBlock(
  section: RaggedSection,
  polygons: readonly RaggedSection[],
  points: number,
  node: CgnsNode,
): CellBlock {
  const cells = section.last - section.first + 1;
  const stamp = new Int32Array(points).fill(-1);
  let faces = 0;
  let connectivity = 0;
  for (let c = 0; c < cells; c++) {
    faces += 1;
    for (let i = section.offsets[c] as number; i < (section.offsets[c + 1] as number); i++) {
      const element = Math.abs(section.values[i] as number);
      const polygon = polygonSection(polygons, element);
      if (polygon === undefined) {
        throw new InputError({
          file: node.file,
          place: placeOf(node),
          cause: `cell ${section.first + c} names the face ${element}, which is in no section of polygons`,
          remedy: 'export the file again',
        });
      }
      const f = element - polygon.first;
      const end = polygon.offsets[f + 1] as number;
      const begin = polygon.offsets[f] as number;
      faces += 1 + end - begin;
      for (let k = begin; k < end; k++) {
        const point = polygon.values[k] as number;
        if (stamp[point] === c) continue;
        stamp[point] = c;
        connectivity++;
      }
    }
  }
  return {
    cells,
    connectivity,
    faces,
    fill: (out) => {
      stamp.fill(-1);
      const stream = out.polyhedronFaces;
      let at = out.facesBegin;
      let to = out.connectivityBegin;
      for (let c = 0; c < cells; c++) {
        const begin = section.offsets[c] as number;
        const end = section.offsets[c + 1] as number;
        stream[at++] = end - begin;
        for (let i = begin; i < end; i++) {
          const signed = section.values[i] as number;
          const polygon = polygonSection(polygons, Math.abs(signed)) as RaggedSection;
          const f = Math.abs(signed) - polygon.first;
          const from = polygon.offsets[f] as number;
          const n = (polygon.offsets[f + 1] as number) - from;
          stream[at++] = n;
          for (let k = 0; k < n; k++) {
            // A negative number says that the polygon's normal points into the cell.
            const point = polygon.values[signed > 0 ? from + k : from + n - 1 - k] as number;
            stream[at++] = point + out.pointBase;
            if (stamp[point] === c) continue;
            stamp[point] = c;
            out.connectivity[to++] = point + out.pointBase;
          }
        }
        out.types[out.cellBegin + c] = 42;
        out.offsets[out.cellBegin + c + 1] = to;
        (out.polyhedronOffsets as Int32Array)[out.cellBegin + c + 1] = at;
      }
    },
  };
}

/** Blocks of cells of a structured zone. @param sizes  points along i, j, k */
export function structuredBlocks(sizes: readonly number[]): CellBlock[] {
  return [structuredBlock(sizes)];
}

/** Blocks of the sections whose elements have the dimension of the base's cells. */
export function sectionBlocks(
  session: CgnsSession,
  sections: readonly Section[],
  dimension: number,
  points: number,
): CellBlock[] {
  const polygons = sections.filter((section) => section.kind === 'polygons') as RaggedSection[];
  const blocks: CellBlock[] = [];
  for (const section of sections) {
    if (section.kind === 'mixed') blocks.push(mixedBlock(section, dimension));
    else if (section.kind === 'uniform') {
      if (section.type.dimension === dimension) blocks.push(uniformBlock(session, section, points));
    } else if (section.kind === 'polyhedra') {
      if (dimension === 3) blocks.push(polyhedronBlock(section, polygons, points, section.node));
    } else if (dimension === 2) blocks.push(polygonBlock(section));
  }
  return blocks;
}

/**
 * Lays blocks one after the other.
 *
 * @throws InputError when 32-bit numbers cannot address the cells
 */
export function assembleCells(
  file: string,
  zones: readonly { readonly blocks: readonly CellBlock[]; readonly pointBase: number }[],
): CellTopology {
  let [cells, connectivity, faces] = [0, 0, 0];
  for (const zone of zones) {
    for (const block of zone.blocks) {
      cells += block.cells;
      connectivity += block.connectivity;
      faces += block.faces;
    }
  }
  if (Math.max(cells, connectivity, faces) > 0x7fffffff) {
    throw new InputError({ file, cause: `${cells} cells are more than can be held at once`, remedy: 'split the mesh' });
  }
  const types = new Uint8Array(cells);
  const offsets = new Int32Array(cells + 1);
  const points = new Int32Array(connectivity);
  const polyhedronFaces = new Int32Array(faces);
  const polyhedronOffsets = faces > 0 ? new Int32Array(cells + 1) : undefined;
  let [cellBegin, connectivityBegin, facesBegin] = [0, 0, 0];
  for (const zone of zones) {
    for (const block of zone.blocks) {
      block.fill({
        types,
        offsets,
        connectivity: points,
        polyhedronFaces,
        polyhedronOffsets,
        cellBegin,
        connectivityBegin,
        facesBegin,
        pointBase: zone.pointBase,
      });
      cellBegin += block.cells;
      connectivityBegin += block.connectivity;
      facesBegin += block.faces;
      // Cells that are no polyhedra own an empty range of face lists.
      if (polyhedronOffsets !== undefined && block.faces === 0) {
        polyhedronOffsets.fill(facesBegin, cellBegin - block.cells + 1, cellBegin + 1);
      }
    }
  }
  return {
    types,
    offsets,
    connectivity: points,
    ...(polyhedronOffsets === undefined ? {} : { polyhedronFaces, polyhedronOffsets }),
  };
}
