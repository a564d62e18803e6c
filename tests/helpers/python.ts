import { spawnSync } from 'node:child_process';

const python = '/usr/bin/python3';
const known = new Map<string, boolean>();

/** True when Debian's python3 has the module; says once what is skipped when it has not. */
export function hasPythonModule(module: string): boolean {
  let found = known.get(module);
  if (found === undefined) {
    found = spawnSync(python, ['-c', `import ${module}`], { stdio: 'ignore' }).status === 0;
    known.set(module, found);
    if (!found) console.log(`skipped: checks against ${module} (python3-${module} is not installed)`);
  }
  return found;
}

/** Runs a script and returns its standard output; throws with its standard error when it fails. */
export function runPython(args: readonly string[], input?: string): string {
  const result = spawnSync(python, [...args], {
    encoding: 'utf8',
    maxBuffer: 1 << 28,
    ...(input === undefined ? {} : { input }),
  });
  if (result.status !== 0) throw new Error(`python3 ${args[0]} failed: ${result.stderr}`);
  return result.stdout;
}
