import { extname } from 'node:path';
import type { DataArray, Dataset } from '../basis/dataset.js';
import type { Field, Fields } from '../basis/fields.js';
import { fieldsToArrays } from '../basis/quantities.js';
import { writeCgns } from '../formats/cgns.js';
import { writeDataset } from '../formats/registry.js';
import type { CellMesh } from '../mesh/cell-mesh.js';

/** Name of the note in a start file that says how it was made. */
export const provenanceNote = 'Provenance';

function onDataset(mesh: CellMesh, cells: number, components: number, values: Float64Array): Float64Array {
  const out = new Float64Array(cells * components);
  for (let c = 0; c < mesh.cellCount; c += 1) {
    const to = (mesh.datasetCell[c] as number) * components;
    for (let i = 0; i < components; i += 1) out[to + i] = values[c * components + i] as number;
  }
  return out;
}

/**
 * Fields of the volume cells as arrays over all cells of the data set; surface cells in the same file get 0. Values
 * are laid out only when they are written.
 */
export function cellArraysOf(
  dataset: Dataset,
  mesh: CellMesh,
  fields: Fields,
  numberType: 'Float64' | 'Float32',
): DataArray[] {
  const cells = dataset.cells?.types.length ?? 0;
  return fieldsToArrays(fields, numberType).map((array) => {
    if (cells === mesh.cellCount && isInOrder(mesh)) return array;
    const load = (): Float64Array | Float32Array => {
      const spread = onDataset(mesh, cells, array.components, Float64Array.from(array.load() as Float64Array, Number));
      return numberType === 'Float32' ? Float32Array.from(spread) : spread;
    };
    return { ...array, tuples: cells, load };
  });
}

function isInOrder(mesh: CellMesh): boolean {
  for (let c = 0; c < mesh.cellCount; c += 1) if (mesh.datasetCell[c] !== c) return false;
  return true;
}

/** Codes of the `Outside` array as a field. */
export function outsideField(outside: Uint8Array): Field {
  return { components: 1, values: Float64Array.from(outside) };
}

/** Writes a copy of the target with the fields on its cells. */
export async function writeStart(
  path: string,
  dataset: Dataset,
  mesh: CellMesh,
  fields: Fields,
  provenance: string,
  options: {
    readonly numberType?: 'Float64' | 'Float32';
    readonly compress?: boolean;
    /** Volume flux of the fluctuation through every face, m3/s; formats that know faces carry it. */
    readonly faceFluxes?: Float64Array;
  } = {},
): Promise<void> {
  const { numberType = 'Float64', compress = false, faceFluxes } = options;
  const request = {
    mesh: dataset,
    cellArrays: cellArraysOf(dataset, mesh, fields, numberType),
    pointArrays: [],
    notes: new Map([...dataset.notes, [provenanceNote, provenance]]),
    compress,
  };
  if (faceFluxes !== undefined && extname(path).toLowerCase() === '.cgns') {
    const flux = { name: 'VolumeFlux', values: faceFluxes, signed: true, exponents: [0, 3, -1, 0, 0] as const };
    await writeCgns(path, request, { mesh, arrays: [flux] });
    return;
  }
  await writeDataset(path, request);
}
