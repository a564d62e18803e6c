// Compiles every src/kernels/assembly/*.as.ts to dist/kernels/*.wasm (AssemblyScript, SIMD on).
import { mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import asc from 'assemblyscript/asc';

const here = dirname(fileURLToPath(import.meta.url));

export async function buildKernels() {
  const out = join(here, '..', '..', 'dist', 'kernels');
  const sources = join(here, 'assembly');
  mkdirSync(out, { recursive: true });
  for (const file of readdirSync(sources).filter((name) => name.endsWith('.as.ts'))) {
    const target = join(out, file.replace('.as.ts', '.wasm'));
    const half = `${target}.tmp`;
    const { error, stderr } = await asc.main([
      join(sources, file),
      '--outFile',
      half,
      '-O3',
      '--noAssert',
      '--enable',
      'simd',
      '--runtime',
      'stub',
      '--importMemory',
      '--sharedMemory',
      '--maximumMemory',
      '65536',
      '--enable',
      'threads',
    ]);
    if (error) throw new Error(`${file}: ${error.message}\n${stderr.toString()}`);
    writeFileSync(target, readFileSync(half));
    rmSync(half);
  }
}
