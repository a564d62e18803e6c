import type { Command } from 'commander';
import { addAppraise } from './appraise.js';
import { addAudit } from './audit.js';
import { addBatch } from './batch.js';
import { addDescribe } from './describe.js';
import { addFluctuate } from './fluctuate.js';
import { addFollowup } from './followup.js';
import { addInit } from './init.js';
import { addRun } from './run.js';
import { addTransfer } from './transfer.js';

/** Every command, in the order in which --help lists them. */
export function addCommands(program: Command): void {
  addRun(program);
  addTransfer(program);
  addFluctuate(program);
  addAppraise(program);
  addAudit(program);
  addBatch(program);
  addFollowup(program);
  addDescribe(program);
  addInit(program);
}
