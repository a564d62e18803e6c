import type { z } from 'zod';
import { nearestName } from '../basis/nearest-name.js';
import { standardNames } from '../basis/quantities.js';
import { knownKeys, schemaNodesAt } from './json-schema.js';

type Issue = z.core.$ZodIssue;

/** What is wrong at one place of the case file, and what to do. */
export interface CaseFault {
  readonly path: readonly PropertyKey[];
  /** True when the key itself is at fault, not its value. */
  readonly atKey: boolean;
  readonly cause: string;
  readonly remedy: string;
}

const typeWords: Readonly<Record<string, string>> = {
  string: 'text',
  number: 'a number',
  int: 'a whole number',
  boolean: 'true or false',
  object: 'a section of keys',
  record: 'a section of keys',
  array: 'a list',
  tuple: 'a list',
};

function shown(value: unknown): string {
  if (value === undefined) return 'nothing';
  if (value === null) return 'nothing (an empty value)';
  if (Array.isArray(value)) return 'a list';
  if (typeof value === 'object') return 'a section of keys';
  return `${value}`;
}

function listed(values: readonly unknown[]): string {
  const words = values.map(String);
  return words.length < 2 ? words.join('') : `${words.slice(0, -1).join(', ')} or ${words.at(-1)}`;
}

function rejectsType(branch: readonly Issue[]): boolean {
  return branch.some((issue) => issue.path.length === 0 && ['invalid_type', 'invalid_value'].includes(issue.code));
}

/** Of the forms that a value may have, the one that it was most likely meant to be; undefined when none is near. */
function likelyForm(branches: readonly (readonly Issue[])[]): readonly Issue[] | undefined {
  const near = branches.filter((branch) => !rejectsType(branch));
  if (near.length < 2) return near[0];
  // A form whose naming key is there lacks nothing; others miss keys and meet unknown ones.
  const complete = near.filter((branch) => !branch.some(isMissing));
  return complete.length === 1 ? complete[0] : undefined;
}

function isMissing(issue: Issue): boolean {
  return issue.code === 'invalid_type' && issue.input === undefined;
}

function valueAt(root: unknown, path: readonly PropertyKey[]): unknown {
  let value = root;
  for (const step of path) {
    if (value === null || typeof value !== 'object') return undefined;
    value = (value as Record<PropertyKey, unknown>)[step];
  }
  return value;
}

function unknownKey(path: readonly PropertyKey[], key: string): CaseFault {
  if (schemaNodesAt(path).some((node) => node.propertyNames !== undefined)) {
    return {
      path: [...path, key],
      atKey: true,
      cause: `${key} is not a standard quantity`,
      remedy: `the nearest is ${nearestName(key, standardNames)}`,
    };
  }
  const nearest = nearestName(key, knownKeys(path));
  return {
    path: [...path, key],
    atKey: true,
    cause: `unknown key ${key}`,
    remedy: nearest === undefined ? 'remove it' : `the nearest known key is ${nearest}`,
  };
}

/** The first key of an object that none of its forms knows. */
function strangeKey(value: unknown, path: readonly PropertyKey[]): string | undefined {
  if (value === null || typeof value !== 'object' || Array.isArray(value)) return undefined;
  const known = knownKeys(path);
  return Object.keys(value).find((key) => !known.includes(key));
}

function unionFault(issue: Issue & { code: 'invalid_union' }, path: readonly PropertyKey[], root: unknown): CaseFault {
  const value = valueAt(root, path);
  const strange = strangeKey(value, path);
  if (strange !== undefined) return unknownKey(path, strange);
  const form = likelyForm(issue.errors);
  if (form !== undefined && form[0] !== undefined) return faultOf(form[0], path, root);
  return { path, atKey: false, cause: `${shown(value)} is not a form that is known here`, remedy: forms(path) };
}

function forms(path: readonly PropertyKey[]): string {
  return `see the entry ${path.filter((step) => typeof step === 'string').join('.')} of the case file's reference`;
}

/** Puts one finding of the schema into words. */
export function faultOf(issue: Issue, before: readonly PropertyKey[], root: unknown): CaseFault {
  const path = [...before, ...issue.path];
  const value = valueAt(root, path);
  switch (issue.code) {
    case 'unrecognized_keys':
      return unknownKey(path, issue.keys[0] ?? '');
    case 'invalid_union':
      return unionFault(issue, path, root);
    case 'invalid_type': {
      const wanted = typeWords[issue.expected] ?? issue.expected;
      if (value === undefined) {
        return { path, atKey: false, cause: 'this key is missing', remedy: `add it with ${wanted}` };
      }
      return { path, atKey: false, cause: `${shown(value)} stands here`, remedy: `write ${wanted}` };
    }
    case 'invalid_value': {
      const nearest = typeof value === 'string' ? nearestName(value, issue.values.map(String)) : undefined;
      const hint = nearest === undefined || issue.values.length < 3 ? '' : `, the nearest is ${nearest}`;
      return {
        path,
        atKey: false,
        cause: `${shown(value)} is not known here`,
        remedy: `write ${listed(issue.values)}${hint}`,
      };
    }
    case 'too_small':
    case 'too_big': {
      const small = issue.code === 'too_small';
      const bound = small ? issue.minimum : issue.maximum;
      const relation = `${small ? 'at least' : 'at most'} ${bound}`;
      if (typeof value === 'string')
        return { path, atKey: false, cause: 'the text is empty', remedy: 'write something' };
      if (Array.isArray(value)) {
        return { path, atKey: false, cause: `the list has ${value.length} entries`, remedy: `write ${relation}` };
      }
      const strict = issue.inclusive === false ? `${small ? 'more' : 'less'} than ${bound}` : relation;
      return { path, atKey: false, cause: `${shown(value)} stands here`, remedy: `write ${strict}` };
    }
    default:
      return { path, atKey: false, cause: issue.message, remedy: 'correct it' };
  }
}
