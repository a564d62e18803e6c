// The public library. Every stage is a pure function of typed arrays and a small plain options object.
export { type AuditFigures, type AuditInput, auditField } from './audit/audit.js';
export { type DivergenceFigures, divergenceFigures } from './audit/divergence-figures.js';
export type {
  BoundaryKind,
  BoundaryPatch,
  CellTopology,
  DataArray,
  Dataset,
  Format,
  GridStructure,
  NumberArray,
  NumberType,
  WriteRequest,
  ZoneRange,
} from './basis/dataset.js';
export { InputError, MachineError } from './basis/errors.js';
export type { Field, Fields, PointCloud } from './basis/fields.js';
export { fieldsToArrays, findQuantity, type Quantity, quantities, recogniseFields } from './basis/quantities.js';
export { caseJsonSchema } from './case/json-schema.js';
export { parseCase, type ResolvedCase, readCase } from './case/read-case.js';
export type { CaseInput } from './case/schema.js';
export {
  boundaryCode,
  createFaceOperator,
  divergence,
  type FaceOperator,
  type FaceOperatorOptions,
  scaledAdjoint,
} from './divergence/face-operator.js';
export {
  buildPreconditioner,
  type ProjectionOptions,
  type ProjectionResult,
  project,
  projectionLoss,
} from './divergence/projection.js';
export { findFormat, formats, readDataset, writeDataset } from './formats/registry.js';
export { buildMesh } from './mesh/build.js';
export type { CellMesh, MeshGeometry, MeshPatch, PeriodicPairs } from './mesh/cell-mesh.js';
export { cellWidths } from './mesh/cell-width.js';
export { datasetCentroids } from './mesh/centroids.js';
export { measureMesh } from './mesh/geometry.js';
export { applyGradient, createGradient, type GradientOperator } from './mesh/gradient.js';
export { matchPeriodic, matchPeriodicPatches } from './mesh/periodic.js';
export { type BoundarySelection, selectBoundaryFaces } from './mesh/selection.js';
export { wallDistance } from './mesh/wall-distance.js';
export { type RunOptions, type RunResult, runCase } from './pipeline/run.js';
export { buildKdTree, createKdSearch, type KdTree, nearestNeighbours } from './spatial/kd-tree.js';
export { locateTetrahedron, type Tetrahedralisation, tetrahedralise } from './spatial/tetrahedralisation.js';
export { type CellLinearPlan, cellLinearRange, prepareCellLinear } from './transfer/cell-linear.js';
export { type CloudOptions, type CloudPlan, cloudTransferRange, prepareCloudTransfer } from './transfer/cloud.js';
export { type ConservativePlan, conservativeRange, prepareConservative } from './transfer/conservative.js';
export { type CalibrationInput, calibrate } from './turbulence/calibrate.js';
export { compensate, expectedRange } from './turbulence/compensate.js';
export { createModes, type ModeSet } from './turbulence/modes.js';
export { applyMultiplierRange } from './turbulence/multiplier-field.js';
export type { FluctuationPlan } from './turbulence/plan.js';
export { type FluctuationInput, prepareFluctuations } from './turbulence/prepare.js';
export { type LocalScales, localScales, type ScaleInput } from './turbulence/scales.js';
export { pope, type Spectrum, spectralEnergy, tabulatedSpectrum, vonKarmanPao } from './turbulence/spectra.js';
export { synthesiseRange } from './turbulence/synthesis.js';
export { weighRange } from './turbulence/weights.js';
