// The build: kernels to WebAssembly, TypeScript to dist, the case schema as a file beside it.
import { spawnSync } from 'node:child_process';
import { existsSync, writeFileSync } from 'node:fs';
import { pathToFileURL } from 'node:url';

async function build() {
  if (existsSync('src/kernels/assembly')) {
    const { buildKernels } = await import('./kernels/build.mjs');
    await buildKernels();
  }
  const compiled = spawnSync(process.execPath, ['node_modules/typescript/bin/tsc', '-p', 'tsconfig.json'], {
    stdio: 'inherit',
  });
  if (compiled.status !== 0) process.exit(compiled.status ?? 1);
  if (existsSync('dist/case/json-schema.js')) {
    const { caseJsonSchema } = await import(pathToFileURL('dist/case/json-schema.js').href);
    writeFileSync('dist/case/case.schema.json', `${JSON.stringify(caseJsonSchema(), null, 2)}\n`);
  }
}

await build();
