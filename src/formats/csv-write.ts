import { open } from 'node:fs/promises';
import type { DataArray, NumberArray, WriteRequest } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import { writeBeside } from '../basis/half-written.js';
import { componentSuffixes, tensorSuffixes } from '../basis/quantities.js';
import { datasetCentroids } from '../mesh/centroids.js';

const flushCharacters = 1 << 20;

interface OutColumn {
  readonly name: string;
  readonly values: NumberArray;
  readonly stride: number;
  readonly offset: number;
}

function suffixesOf(components: number): readonly string[] {
  if (components === 1 || components === 3) return componentSuffixes(components);
  if (components === 6) return tensorSuffixes;
  if (components === 9) return ['XX', 'XY', 'XZ', 'YX', 'YY', 'YZ', 'ZX', 'ZY', 'ZZ'];
  return Array.from({ length: components }, (_, at) => `_${at}`);
}

function columnsOf(array: DataArray): OutColumn[] {
  const values = array.load();
  return suffixesOf(array.components).map((suffix, offset) => ({
    name: `${array.name}${suffix}`,
    values,
    stride: array.components,
    offset,
  }));
}

/** Arrays of the mesh that are carried through, then the new ones. */
function mergeArrays(kept: readonly DataArray[], added: readonly DataArray[]): DataArray[] {
  const names = new Set(added.map((array) => array.name));
  return [...kept.filter((array) => !names.has(array.name)), ...added];
}

function quoted(name: string): string {
  return /[",;|\s#]/.test(name) ? `"${name.replaceAll('"', '""')}"` : name;
}

/**
 * Writes a table with a header line, one row a point; where the mesh has cells and cell arrays are to be written, one row
 * a cell at its centroid. Numbers are written so that reading gives the same number. Notes become comment lines.
 *
 * @throws InputError when there are both cell and point arrays to write
 */
export async function writeCsv(path: string, request: WriteRequest): Promise<void> {
  const { mesh } = request;
  const atCells = mesh.cells !== undefined && request.cellArrays.length > 0;
  if (request.cellArrays.length > 0 && request.pointArrays.length > 0) {
    throw new InputError({
      file: path,
      cause: 'a table holds values of points or of cells, and both are to be written',
      remedy: 'write a .vtu file instead',
    });
  }
  const places = atCells ? datasetCentroids(mesh) : mesh.points;
  const rows = places.length / 3;
  const arrays = atCells
    ? mergeArrays(mesh.cellArrays, request.cellArrays)
    : mergeArrays(mesh.pointArrays, request.pointArrays);
  const columns: OutColumn[] = ['X', 'Y', 'Z']
    .map((letter, offset) => ({ name: `Coordinate${letter}`, values: places, stride: 3, offset }))
    .filter((_, axis) => !mesh.missingAxes.includes((['x', 'y', 'z'] as const)[axis]!));
  for (const array of arrays) columns.push(...columnsOf(array));

  await writeBeside(path, async (temporary) => {
    const file = await open(temporary, 'w');
    try {
      let text = '';
      for (const [name, note] of request.notes) text += `# ${name}: ${note.replace(/\s+/g, ' ')}\n`;
      text += `${columns.map(({ name }) => quoted(name)).join(',')}\n`;
      for (let row = 0; row < rows; row++) {
        let line = '';
        for (const { values, stride, offset } of columns) {
          line += `${line === '' ? '' : ','}${values[row * stride + offset]}`;
        }
        text += `${line}\n`;
        if (text.length > flushCharacters) {
          await file.write(text);
          text = '';
        }
      }
      await file.write(text);
      await file.sync();
    } finally {
      await file.close();
    }
  });
}
