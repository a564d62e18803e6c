import { createHash } from 'node:crypto';
import { createReadStream, statSync } from 'node:fs';
import { resolve } from 'node:path';

/** A file as it was when it was used. */
export interface FileStamp {
  readonly path: string;
  readonly bytes: number;
  readonly sha256: string;
}

/** Streams the file through SHA-256. */
export async function stampFile(path: string): Promise<FileStamp> {
  const hash = createHash('sha256');
  for await (const chunk of createReadStream(path, { highWaterMark: 1 << 22 })) hash.update(chunk as Buffer);
  return { path: resolve(path), bytes: statSync(path).size, sha256: hash.digest('hex') };
}

/** One check of the case: what was asked for, what came out. */
export interface CheckResult {
  readonly name: 'divergence' | 'energy';
  readonly limit: number;
  readonly value: number;
  readonly passed: boolean;
  readonly meaning: string;
}

/** The JSON document beside a start file. */
export interface Manifest {
  readonly program: 'eddygraft';
  readonly version: string;
  readonly node: string;
  readonly finished: string;
  readonly passed: boolean;
  readonly checks: readonly CheckResult[];
  readonly case: unknown;
  readonly seed: number | null;
  readonly inputs: readonly FileStamp[];
  readonly outputs: readonly FileStamp[];
  readonly assumptions: readonly string[];
  readonly remarks: readonly string[];
  readonly transfer: unknown;
  readonly fluctuations: unknown;
  readonly projection: unknown;
  readonly audit: unknown;
  readonly seconds: Readonly<Record<string, number>>;
  readonly peakMemoryBytes: number;
}

/** Largest resident memory of this process and its threads so far, bytes. */
export function peakMemoryBytes(): number {
  return process.resourceUsage().maxRSS * 1024;
}
