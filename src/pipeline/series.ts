import { extname } from 'node:path';
import type { Dataset } from '../basis/dataset.js';
import { InputError } from '../basis/errors.js';
import type { Snapshot } from '../case/schema.js';
import { listCgnsSnapshots, readCgns } from '../formats/cgns.js';
import { readDataset } from '../formats/registry.js';
import { readSeries } from '../formats/vtk/read.js';

/** One time of a precursor, read when asked for. */
export interface SeriesMember {
  /** Seconds, or the place in the series where the files do not say. */
  readonly time: number;
  readonly file: string;
  readonly read: () => Promise<Dataset>;
}

/** The times a precursor holds: a list of files, a .pvd collection, the states of a CGNS file, or one. */
export async function listSeries(files: readonly string[]): Promise<readonly SeriesMember[]> {
  const [only = ''] = files;
  if (files.length > 1) {
    return files.map((file, place) => ({ time: place, file, read: () => readDataset(file) }));
  }
  const extension = extname(only).toLowerCase();
  if (extension === '.pvd') {
    const entries = readSeries(only);
    return entries.map(({ time, files: parts }, place) => ({
      time,
      file: parts[0] as string,
      read: () => {
        // The collection's own reader joins the parts of its last time.
        if (parts.length > 1 && place === entries.length - 1) return readDataset(only);
        if (parts.length > 1) {
          throw new InputError({
            file: only,
            place: `time ${time}`,
            cause: `this time is in ${parts.length} parts, and only the last time of such a collection is read`,
            remedy: 'write one .pvtu file a time',
          });
        }
        return readDataset(parts[0] as string);
      },
    }));
  }
  if (extension === '.cgns') {
    const snapshots = await listCgnsSnapshots(only);
    if (snapshots.length > 1) {
      return snapshots.map(({ index, time }) => ({
        time: time ?? index,
        file: only,
        read: () => readCgns(only, { snapshot: index }),
      }));
    }
  }
  return [{ time: 0, file: only, read: () => readDataset(only) }];
}

/**
 * Members that a snapshot setting means: one, or all of them for `mean`.
 *
 * @throws InputError when a time is asked of a precursor that has one time only and says another
 */
export function chooseMembers(series: readonly SeriesMember[], snapshot: Snapshot): readonly SeriesMember[] {
  const first = series[0] as SeriesMember;
  const last = series.at(-1) as SeriesMember;
  if (snapshot === 'mean') return series;
  if (snapshot === 'first') return [first];
  if (snapshot === 'last') return [last];
  if (series.length === 1) {
    throw new InputError({
      file: first.file,
      place: `snapshot ${snapshot}`,
      cause: 'the precursor holds one time only',
      remedy: 'leave the snapshot out, or give a series (.pvd, CGNS states, or a list of files)',
    });
  }
  return [
    series.reduce((best, member) =>
      Math.abs(member.time - snapshot) < Math.abs(best.time - snapshot) ? member : best,
    ),
  ];
}
