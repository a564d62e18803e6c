export type { DataArray, Dataset, Format, WriteRequest } from './basis/dataset.js';
export { InputError, MachineError } from './basis/errors.js';
export type { Field, Fields, PointCloud } from './basis/fields.js';
export type { CellMesh, MeshGeometry, MeshPatch, PeriodicPairs } from './mesh/cell-mesh.js';
