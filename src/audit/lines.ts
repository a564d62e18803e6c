import type { CellMesh, MeshGeometry, PeriodicPairs } from '../mesh/cell-mesh.js';

/** Rows of cells along a period whose centres are equally spaced and close on themselves. */
export interface CellLines {
  /** Unit vector. */
  readonly direction: readonly [number, number, number];
  /** Distance between centres, m. */
  readonly spacing: number;
  /** Cells in every line. */
  readonly samples: number;
  /** samples x lines: cells one behind the other along `direction`. */
  readonly cells: Int32Array;
}

/** Centres may stand off their even places by this share of the spacing. */
const evenness = 0.05;
/** Shorter lines say nothing of a spectrum. */
const fewestSamples = 8;

/** The cell next along the direction, -1 where none or several stand in line. */
function successors(
  mesh: CellMesh,
  geometry: MeshGeometry,
  periodic: PeriodicPairs,
  direction: readonly number[],
): { next: Int32Array; steps: Float64Array } {
  const next = new Int32Array(mesh.cellCount).fill(-1);
  const steps = new Float64Array(mesh.cellCount);
  const x = geometry.cellCentroids;
  const link = (from: number, to: number, sx: number, sy: number, sz: number): void => {
    const dx = x[3 * to]! + sx - x[3 * from]!;
    const dy = x[3 * to + 1]! + sy - x[3 * from + 1]!;
    const dz = x[3 * to + 2]! + sz - x[3 * from + 2]!;
    const along = dx * direction[0]! + dy * direction[1]! + dz * direction[2]!;
    const across2 = dx * dx + dy * dy + dz * dz - along * along;
    if (across2 > (evenness * along) ** 2) return;
    const [a, b] = along > 0 ? [from, to] : [to, from];
    next[a] = next[a] === -1 ? b : -2;
    steps[a] = Math.abs(along);
  };
  for (let f = 0; f < mesh.innerFaceCount; f++) link(mesh.owner[f]!, mesh.neighbour[f]!, 0, 0, 0);
  for (let i = 0; i < periodic.lowFaces.length; i++) {
    const [px, py, pz] = periodic.periods[periodic.periodOf[i]!]!;
    link(mesh.owner[periodic.lowFaces[i]!]!, mesh.owner[periodic.highFaces[i]!]!, -px, -py, -pz);
  }
  return { next, steps };
}

/**
 * Lines along period number `period`; undefined when the mesh has none of at least eight cells. Lines of the commonest
 * number of cells are taken.
 */
export function findLines(
  mesh: CellMesh,
  geometry: MeshGeometry,
  periodic: PeriodicPairs,
  period: number,
): CellLines | undefined {
  const vector = periodic.periods[period]!;
  const length = Math.hypot(...vector);
  const direction = vector.map((v) => v / length) as unknown as CellLines['direction'];
  const { next, steps } = successors(mesh, geometry, periodic, direction);
  const met = new Uint8Array(mesh.cellCount);
  const bySamples = new Map<number, number[]>();
  for (let start = 0; start < mesh.cellCount; start++) {
    if (met[start] === 1) continue;
    const line: number[] = [];
    let least = Infinity;
    let most = 0;
    let cell = start;
    while (cell >= 0 && met[cell] === 0) {
      met[cell] = 1;
      line.push(cell);
      least = Math.min(least, steps[cell]!);
      most = Math.max(most, steps[cell]!);
      cell = next[cell]!;
    }
    const closes = cell === start && Math.abs((line.length * (least + most)) / 2 / length - 1) < evenness;
    if (!closes || line.length < fewestSamples || most - least > 2 * evenness * most) continue;
    const all = bySamples.get(line.length) ?? [];
    for (const c of line) all.push(c);
    bySamples.set(line.length, all);
  }
  let samples = 0;
  let cells: number[] = [];
  for (const [count, all] of bySamples) if (all.length > cells.length) [samples, cells] = [count, all];
  if (samples === 0) return undefined;
  return { direction, spacing: length / samples, samples, cells: Int32Array.from(cells) };
}
