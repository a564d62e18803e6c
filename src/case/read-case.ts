import { readFile } from 'node:fs/promises';
import { basename, dirname, extname, isAbsolute, join, resolve } from 'node:path';
import { InputError } from '../basis/errors.js';
import { type CaseFault, faultOf } from './issue-sentence.js';
import { type SchemaNode, schemaNodesAt } from './json-schema.js';
import type { FaceSelection } from './parts.js';
import { type Case, caseSchema, type FluctuationSettings, type TargetSettings } from './schema.js';
import { parseYaml } from './yaml-text.js';
import type { Zone } from './zones.js';

/** A case with every default filled in and every path joined to the folder of the case file. */
export interface ResolvedCase extends Omit<Case, 'precursor' | 'output' | 'targets'> {
  /** Path of the case file as it was given. */
  readonly file: string;
  readonly precursor: Omit<Case['precursor'], 'file'> & {
    /** One file, or a series in its order. */
    readonly files: readonly string[];
  };
  readonly targets?: readonly TargetSettings[] | undefined;
  readonly output: Omit<Case['output'], 'report' | 'manifest'> & {
    /** Undefined for none. */
    readonly report: string | undefined;
    readonly manifest: string;
  };
}

type Join = (path: string) => string;

function joinSelections(list: readonly FaceSelection[], at: Join): FaceSelection[] {
  return list.map((entry) =>
    typeof entry === 'object' && 'surface' in entry ? { surface: at(entry.surface) } : entry,
  );
}

function joinTarget(target: TargetSettings, at: Join): TargetSettings {
  return { ...target, file: at(target.file), walls: joinSelections(target.walls, at) };
}

function joinZone(zone: Zone, at: Join): Zone {
  return 'boundary' in zone ? { ...zone, boundary: joinSelections(zone.boundary, at) } : zone;
}

function joinFluctuations(settings: FluctuationSettings, at: Join): FluctuationSettings {
  const { spectrum } = settings;
  return {
    ...settings,
    spectrum: typeof spectrum === 'object' ? { table: at(spectrum.table) } : spectrum,
    zones: settings.zones.map((zone) => joinZone(zone, at)),
  };
}

function withExtension(path: string, extension: string): string {
  return `${path.slice(0, path.length - extname(path).length)}${extension}`;
}

function resolveCase(parsed: Case, file: string): ResolvedCase {
  const folder = dirname(file);
  const at: Join = (path) => (isAbsolute(path) ? path : join(folder, path));
  const { precursor, output, targets, fluctuations, projection, ...rest } = parsed;
  const { file: source, ...from } = precursor;
  const start = at(output.file);
  const { 'face-fluxes': fluxes, report, manifest, ...written } = output;
  return {
    ...rest,
    file,
    title: parsed.title === '' ? basename(file, extname(file)) : parsed.title,
    precursor: { ...from, files: (Array.isArray(source) ? source : [source]).map(at) },
    target: joinTarget(parsed.target, at),
    fluctuations: fluctuations === 'none' ? 'none' : joinFluctuations(fluctuations, at),
    projection: { ...projection, 'hold-flux': joinSelections(projection['hold-flux'], at) },
    output: {
      ...written,
      file: start,
      report: report === 'none' ? undefined : report === undefined ? withExtension(start, '.html') : at(report),
      manifest: manifest === undefined ? withExtension(start, '.json') : at(manifest),
      ...(fluxes === undefined ? {} : { 'face-fluxes': at(fluxes) }),
    },
    ...(targets === undefined
      ? {}
      : {
          targets: targets.map((entry) =>
            joinTarget(typeof entry === 'string' ? { ...parsed.target, file: entry } : entry, at),
          ),
        }),
  };
}

/** Faults that concern two places of the case at once. */
function contradiction(parsed: Case): CaseFault | undefined {
  const fault = (path: readonly PropertyKey[], cause: string, remedy: string): CaseFault => ({
    path,
    atKey: false,
    cause,
    remedy,
  });
  const written = new Map<string, string>();
  const inputs = [parsed.precursor.file, parsed.target.file].flat().map((path) => resolve(path));
  for (const key of ['file', 'report', 'manifest', 'face-fluxes'] as const) {
    const path = parsed.output[key];
    if (path === undefined || (key === 'report' && path === 'none')) continue;
    if (inputs.includes(resolve(path))) {
      return fault(['output', key], `${path} is an input of this case`, 'write to another file');
    }
    const other = written.get(resolve(path));
    if (other !== undefined) return fault(['output', key], `${path} is output.${other} already`, 'name another file');
    written.set(resolve(path), key);
  }
  const both = Object.keys(parsed.precursor.constants).find((name) => name in parsed.precursor.rename);
  if (both !== undefined) {
    return fault(['precursor', 'constants', both], 'the same quantity is renamed from an array', 'keep one of the two');
  }
  if (parsed.fluctuations === 'none') return undefined;
  const { shells, directions } = parsed.fluctuations;
  if (shells * directions > 1_000_000) {
    return fault(['fluctuations', 'shells'], `${shells} x ${directions} modes are more than a million`, 'lower one');
  }
  return undefined;
}

function mayBeEmpty(node: SchemaNode): boolean {
  if (node.anyOf !== undefined) return node.anyOf.some(mayBeEmpty);
  return node.type === 'object' && (node.required === undefined || node.required.length === 0);
}

/** A section of which only comments are left is an empty one. */
function withEmptySections(value: unknown, path: readonly PropertyKey[]): unknown {
  if (value === null && schemaNodesAt(path).some(mayBeEmpty)) return {};
  if (value === null || typeof value !== 'object') return value;
  if (Array.isArray(value)) return value.map((entry, at) => withEmptySections(entry, [...path, at]));
  return Object.fromEntries(
    Object.entries(value).map(([key, entry]) => [key, withEmptySections(entry, [...path, key])]),
  );
}

/**
 * Checks the text of a case file.
 *
 * @param file  path for the text of errors and for relative paths
 * @throws InputError with line and key for the first thing that is wrong
 */
export function parseCase(text: string, file: string): ResolvedCase {
  const yaml = parseYaml(text, file);
  const complain = (found: CaseFault): InputError => {
    const place = `line ${yaml.lineOf(found.path, found.atKey)}`;
    const path = found.atKey ? found.path.slice(0, -1) : found.path;
    const key = path.map((step) => (typeof step === 'number' ? `[${step}]` : `.${String(step)}`)).join('');
    return new InputError({
      file,
      place: key === '' ? place : `${place}, ${key.replace(/^\./, '')}`,
      cause: found.cause,
      remedy: found.remedy,
    });
  };
  const value = withEmptySections(yaml.value, []);
  const result = caseSchema.safeParse(value);
  if (!result.success) {
    const faults = result.error.issues.map((issue) => faultOf(issue, [], value));
    // A misspelt key is often why another one is missing: it is named first, then what stands highest in the file.
    const order = (fault: CaseFault): number => (fault.atKey ? 0 : 1e9) + yaml.lineOf(fault.path, fault.atKey);
    throw complain(faults.sort((a, b) => order(a) - order(b))[0]!);
  }
  const found = contradiction(result.data);
  if (found !== undefined) throw complain(found);
  return resolveCase(result.data, file);
}

/**
 * Reads, checks and completes a case file.
 *
 * @throws InputError with line and key for the first thing that is wrong; errors of the file system as they are
 */
export async function readCase(path: string): Promise<ResolvedCase> {
  return parseCase(await readFile(path, 'utf8'), path);
}
