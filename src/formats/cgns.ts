import type { Dataset, Format, WriteRequest } from '../basis/dataset.js';
import { MachineError } from '../basis/errors.js';
import { writeBeside } from '../basis/half-written.js';
import type { CgnsFaceArray } from './cgns/face-solutions.js';
import type { CgnsReadOptions } from './cgns/read.js';
import { isHdf5 } from './cgns/signature.js';
import type { CgnsSnapshot } from './cgns/snapshots.js';
import type { FaceFields } from './cgns/write-faces.js';

export type { CgnsFaceArray } from './cgns/face-solutions.js';
export type { CgnsReadOptions } from './cgns/read.js';
export type { CgnsSnapshot } from './cgns/snapshots.js';
export type { FaceArray, FaceFields } from './cgns/write-faces.js';

// The HDF5 library is a large WebAssembly module: it is loaded when the first CGNS file is met.

/**
 * Reads a CGNS file (HDF5 storage): all zones of the bases with the highest cell dimension, merged, in SI units.
 * Fields are read from the file when asked for.
 *
 * @throws InputError for anything wrong in the file, MachineError when it cannot be read
 */
export async function readCgns(path: string, options: CgnsReadOptions = {}): Promise<Dataset> {
  return (await import('./cgns/read.js')).readCgns(path, options);
}

/** The states of a time series in a CGNS file; empty when it holds none. Read one by `readCgns(path, {snapshot})`. */
export async function listCgnsSnapshots(path: string): Promise<CgnsSnapshot[]> {
  return (await import('./cgns/read.js')).listCgnsSnapshots(path);
}

/**
 * Values at the faces of unstructured zones (FlowSolution_t or ZoneSubRegion_t at FaceCenter).
 *
 * @throws InputError for damaged files and for faces that do not exist
 */
export async function readCgnsFaceArrays(path: string): Promise<CgnsFaceArray[]> {
  return (await import('./cgns/face-solutions.js')).readCgnsFaceArrays(path);
}

/**
 * Writes fields into a CGNS file: a copy of the mesh's own file with new flow solutions where it is one, else a new file.
 *
 * @param faces  values on faces besides; they are kept where the file's cells are polyhedra (a new file then is written so)
 * @throws InputError, MachineError
 */
export async function writeCgns(path: string, request: WriteRequest, faces?: FaceFields): Promise<void> {
  await (await import('./cgns/hdf5.js')).hdf5Ready();
  const { writeCopy } = await import('./cgns/write-copy.js');
  const { writeNew } = await import('./cgns/write-new.js');
  await writeBeside(path, (temporary) => {
    try {
      if (request.mesh.format === 'cgns') writeCopy(temporary, path, request, faces);
      else writeNew(temporary, request, faces);
    } catch (error) {
      // The user knows the final name only.
      if (error instanceof MachineError) throw new MachineError({ ...error.details, file: path });
      throw error;
    }
  });
}

/** CGNS in HDF5 storage. */
export const cgnsFormat: Format = {
  id: 'cgns',
  extensions: ['.cgns'],
  description: 'CGNS in HDF5 storage',
  recognise: (path, head) => /\.cgns$/i.test(path) || isHdf5(head),
  read: (path) => readCgns(path),
  write: (path, request) => writeCgns(path, request),
};
