import type { Format } from '../../basis/dataset.js';
import { readVtkXml } from './read.js';
import { writeVtkXml } from './write.js';

type Writable = Parameters<typeof writeVtkXml>[2];

function vtkFormat(extension: string, type: string, description: string, writable?: Writable): Format {
  const id = extension.slice(1);
  const recognise = (path: string, head: Uint8Array): boolean => {
    const text = Buffer.from(head).toString('latin1');
    const stated = /<VTKFile[^>]*\stype\s*=\s*["'](\w+)["']/.exec(text)?.[1];
    return stated === undefined ? path.toLowerCase().endsWith(extension) : stated === type;
  };
  const format = { id, extensions: [extension], description, recognise, read: (path: string) => readVtkXml(path, id) };
  return writable === undefined
    ? format
    : { ...format, write: (path, request) => writeVtkXml(path, request, writable) };
}

/** VTK XML, one entry a kind of data set. */
export const vtkFormats: readonly Format[] = [
  vtkFormat('.vtu', 'UnstructuredGrid', 'VTK XML unstructured grid', 'UnstructuredGrid'),
  vtkFormat('.vts', 'StructuredGrid', 'VTK XML structured grid', 'StructuredGrid'),
  vtkFormat('.vtr', 'RectilinearGrid', 'VTK XML rectilinear grid', 'RectilinearGrid'),
  vtkFormat('.vti', 'ImageData', 'VTK XML image grid', 'ImageData'),
  vtkFormat('.vtp', 'PolyData', 'VTK XML surface'),
  vtkFormat('.pvtu', 'PUnstructuredGrid', 'VTK XML unstructured grid in parts'),
  vtkFormat('.pvts', 'PStructuredGrid', 'VTK XML structured grid in parts'),
  vtkFormat('.pvtr', 'PRectilinearGrid', 'VTK XML rectilinear grid in parts'),
  vtkFormat('.pvti', 'PImageData', 'VTK XML image grid in parts'),
  vtkFormat('.vtm', 'vtkMultiBlockDataSet', 'VTK XML blocks'),
  vtkFormat('.pvd', 'Collection', 'VTK XML series of times'),
];
