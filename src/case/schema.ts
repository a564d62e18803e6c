import { z } from 'zod';
import { fluctuations } from './fluctuations.js';
import { audit, checks, output, projection } from './outcome.js';
import { path } from './parts.js';
import { precursor, snapshot } from './precursor.js';
import { target } from './target.js';
import { transfer } from './transfer.js';

/** The case file, as it is written. */
export const caseSchema = z
  .strictObject({
    title: z.string().default('').describe('one line for the report'),
    precursor: precursor.describe('where fields come from'),
    target: target.describe('the mesh that is to be started'),
    transfer: transfer.prefault({}).describe('precursor fields to target cell centres'),
    fluctuations: z
      .union([z.literal('none').describe('transfer only'), fluctuations])
      .prefault({})
      .describe('the turbulence that is superimposed, or none'),
    projection: projection.prefault({}).describe('the discrete projection, where it is used'),
    checks: checks.prefault({}).describe('limits that the audit must meet (exit code 1 otherwise)'),
    audit: audit.prefault({}).describe('measuring the finished start'),
    output: output.describe('files written'),
    targets: z
      .array(z.union([path, target]))
      .min(1)
      .optional()
      .describe('batch: several target meshes, each with every snapshot; a path takes the rest from `target`'),
    snapshots: z.array(snapshot).min(1).optional().describe('batch: several snapshots, each with every target'),
  })
  .describe('eddygraft case file');

export type CaseInput = z.input<typeof caseSchema>;
export type Case = z.output<typeof caseSchema>;
export type PrecursorSettings = Case['precursor'];
export type PlacementSettings = PrecursorSettings['placement'];
export type TargetSettings = Case['target'];
export type TransferSettings = Case['transfer'];
export type FluctuationSettings = Exclude<Case['fluctuations'], 'none'>;
export type ProjectionSettings = Case['projection'];
export type CheckSettings = Case['checks'];
export type OutputSettings = Case['output'];
export type Snapshot = z.output<typeof snapshot>;

/** Defaults for commands that work without a case file. */
export const transferDefaults: TransferSettings = transfer.parse({});
export const fluctuationDefaults: FluctuationSettings = fluctuations.parse({});
export const projectionDefaults: ProjectionSettings = projection.parse({});
