import { closest } from 'fastest-levenshtein';

/** The candidate that takes the fewest edits to become `name`, capitals ignored; undefined when there is none. */
export function nearestName(name: string, candidates: readonly string[]): string | undefined {
  if (candidates.length === 0) return undefined;
  const lower = candidates.map((candidate) => candidate.toLowerCase());
  return candidates[lower.indexOf(closest(name.toLowerCase(), lower))];
}
