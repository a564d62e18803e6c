import type { ResolvedCase } from '../case/read-case.js';
import { keepsMesh, type Placement, placeCloud } from '../transfer/placement.js';
import { addSnapshot, finishMean, type SnapshotMean, startMean } from '../transfer/snapshots.js';
import { gatherPrecursor, type Precursor, type PrecursorCloud } from './precursor.js';
import { type Progress, timed } from './progress.js';
import { chooseMembers, listSeries } from './series.js';

function isIdentity(placement: Placement): boolean {
  const { scale, rotate, translate } = placement;
  return scale === 1 && rotate === undefined && translate.every((v) => v === 0);
}

function place(precursor: Precursor, placement: Placement, velocityScale: number): Precursor {
  const clouds = precursor.clouds.map((cloud): PrecursorCloud => {
    const placed = placeCloud(cloud, placement, velocityScale);
    return { place: cloud.place, points: placed.points, fields: new Map(placed.fields) };
  });
  const { mesh: own, ...rest } = precursor;
  if (own === undefined || !keepsMesh(placement)) return { ...rest, clouds };
  if (isIdentity(placement)) return { ...rest, mesh: own, clouds };
  const { points } = placeCloud({ points: own.points, fields: new Map() }, placement);
  // A getter of the file's points must not be run by a spread: every property is named.
  const mesh = {
    file: own.file,
    format: own.format,
    points,
    pointType: own.pointType,
    ...(own.cells === undefined ? {} : { cells: own.cells }),
    pointArrays: own.pointArrays,
    cellArrays: own.cellArrays,
    zones: own.zones,
    boundaries: own.boundaries,
    missingAxes: own.missingAxes,
    notes: own.notes,
    remarks: own.remarks,
  };
  return { ...rest, mesh, clouds };
}

/** Reads the snapshot (or the mean of all) that the case wants and puts it where the case says. */
export async function placedPrecursor(
  given: ResolvedCase,
  progress: Progress,
  timings: Map<string, number>,
): Promise<Precursor> {
  const { files, snapshot, rename, constants, placement } = given.precursor;
  const options = {
    rename: rename as Readonly<Record<string, string>>,
    constants: constants as Readonly<Record<string, number>>,
    quantities: given.transfer.quantities,
    extrude: placement.extrude,
  };
  const members = chooseMembers(await listSeries(files), snapshot);
  const read = (index: number) =>
    timed(progress, timings, 'read precursor', 0, async () => {
      const member = members[index] as (typeof members)[number];
      return gatherPrecursor(await member.read(), options);
    });
  let precursor = await read(0);
  if (members.length > 1) {
    const means: SnapshotMean[] = precursor.clouds.map(() => startMean());
    for (let i = 0; i < members.length; i += 1) {
      const present = i === 0 ? precursor : await read(i);
      present.clouds.forEach((cloud, c) => {
        addSnapshot(means[c] as SnapshotMean, cloud.fields, present.file);
      });
    }
    precursor = {
      ...precursor,
      clouds: precursor.clouds.map((cloud, c) => ({ ...cloud, fields: finishMean(means[c] as SnapshotMean) })),
      assumptions: [
        ...precursor.assumptions,
        `The precursor is the mean of ${members.length} snapshots; the stresses that they resolve were added to the modelled ones.`,
      ],
    };
  }
  const scale = given.precursor['velocity-scale'];
  const assumptions = [...precursor.assumptions];
  if (scale !== 1) {
    assumptions.push(`Velocities were multiplied by ${scale}; k, epsilon, omega, stresses and pressure followed.`);
  }
  return { ...place(precursor, placement, scale), assumptions };
}
