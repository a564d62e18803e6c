import type { CellMesh, MeshGeometry } from '../../src/mesh/cell-mesh.js';

/** A box of nx x ny x nz bricks between given planes, cells numbered x fastest, with its measures by plain formulas. */
export function brickMesh(
  xs: readonly number[],
  ys: readonly number[],
  zs: readonly number[],
): { mesh: CellMesh; geometry: MeshGeometry } {
  const planes = [xs, ys, zs] as const;
  const n = planes.map((p) => p.length - 1) as [number, number, number];
  const cellCount = n[0] * n[1] * n[2];
  const points = new Float64Array(3 * xs.length * ys.length * zs.length);
  const point = (i: number, j: number, k: number): number => i + xs.length * (j + ys.length * k);
  for (let k = 0; k < zs.length; k++)
    for (let j = 0; j < ys.length; j++)
      for (let i = 0; i < xs.length; i++) points.set([xs[i]!, ys[j]!, zs[k]!], 3 * point(i, j, k));
  const cell = (i: number, j: number, k: number): number => i + n[0] * (j + n[1] * k);
  interface Face {
    owner: number;
    neighbour: number;
    points: number[];
    area: [number, number, number];
    centre: [number, number, number];
  }
  const inner: Face[] = [];
  const outer: Face[] = [];
  for (let axis = 0; axis < 3; axis++) {
    const b = (axis + 1) % 3;
    const c = (axis + 2) % 3;
    const at = [0, 0, 0];
    for (at[axis] = 0; at[axis]! <= n[axis]!; at[axis]!++)
      for (at[b] = 0; at[b]! < n[b]!; at[b]!++)
        for (at[c] = 0; at[c]! < n[c]!; at[c]!++) {
          const corner = (db: number, dc: number): number => {
            const p = [...at];
            p[b]! += db;
            p[c]! += dc;
            return point(p[0]!, p[1]!, p[2]!);
          };
          const ring = [corner(0, 0), corner(1, 0), corner(1, 1), corner(0, 1)];
          const below = [...at];
          below[axis]!--;
          const db = planes[b]![at[b]! + 1]! - planes[b]![at[b]!]!;
          const dc = planes[c]![at[c]! + 1]! - planes[c]![at[c]!]!;
          const atLow = at[axis] === 0;
          const atHigh = at[axis] === n[axis];
          const area: [number, number, number] = [0, 0, 0];
          area[axis] = (atLow ? -1 : 1) * db * dc;
          const centre: [number, number, number] = [0, 0, 0];
          centre[axis] = planes[axis]![at[axis]!]!;
          centre[b] = planes[b]![at[b]!]! + db / 2;
          centre[c] = planes[c]![at[c]!]! + dc / 2;
          const here = atHigh ? -1 : cell(at[0]!, at[1]!, at[2]!);
          const owner = atLow ? here : cell(below[0]!, below[1]!, below[2]!);
          const face = { owner, neighbour: atLow ? -1 : here, points: atLow ? ring.reverse() : ring, area, centre };
          (atLow || atHigh ? outer : inner).push(face);
        }
  }
  const faces = [...inner, ...outer];
  const around: number[][] = Array.from({ length: cellCount }, () => []);
  faces.forEach((f, i) => {
    around[f.owner]!.push(i);
    if (i < inner.length) around[f.neighbour]!.push(i);
  });
  const offsets = new Int32Array(cellCount + 1);
  around.forEach((list, i) => {
    offsets[i + 1] = offsets[i]! + list.length;
  });
  const centroids = new Float64Array(3 * cellCount);
  const volumes = new Float64Array(cellCount);
  const tensors = new Float64Array(6 * cellCount);
  for (let k = 0; k < n[2]; k++)
    for (let j = 0; j < n[1]; j++)
      for (let i = 0; i < n[0]; i++) {
        const at = cell(i, j, k);
        const w = [xs[i + 1]! - xs[i]!, ys[j + 1]! - ys[j]!, zs[k + 1]! - zs[k]!];
        centroids.set([xs[i]! + w[0]! / 2, ys[j]! + w[1]! / 2, zs[k]! + w[2]! / 2], 3 * at);
        volumes[at] = w[0]! * w[1]! * w[2]!;
        tensors.set([w[0]! ** 2, 0, 0, w[1]! ** 2, 0, w[2]! ** 2], 6 * at);
      }
  const mesh: CellMesh = {
    points,
    cellCount,
    faceCount: faces.length,
    innerFaceCount: inner.length,
    faceOffsets: Int32Array.from({ length: faces.length + 1 }, (_, i) => 4 * i),
    facePoints: Int32Array.from(faces.flatMap((f) => f.points)),
    owner: Int32Array.from(faces, (f) => f.owner),
    neighbour: Int32Array.from(inner, (f) => f.neighbour),
    cellFaceOffsets: offsets,
    cellFaces: Int32Array.from(around.flat()),
    datasetCell: Int32Array.from({ length: cellCount }, (_, i) => i),
    patches: [],
  };
  const geometry: MeshGeometry = {
    cellCentroids: centroids,
    cellVolumes: volumes,
    faceAreas: Float64Array.from(faces.flatMap((f) => f.area)),
    faceCentroids: Float64Array.from(faces.flatMap((f) => f.centre)),
    widthTensors: tensors,
  };
  return { mesh, geometry };
}

/** n + 1 equally spaced planes. */
export function planes(low: number, high: number, n: number): number[] {
  return Array.from({ length: n + 1 }, (_, i) => low + ((high - low) * i) / n);
}
