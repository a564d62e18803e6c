import { sharedFloat64 } from '../basis/fields.js';
import type { CellMesh, MeshGeometry } from '../mesh/cell-mesh.js';

/** Ratio of neighbouring widths from which a mesh counts as jumping. */
const jump = 1.3;
const passes = 6;

/**
 * Width tensors for the cut-off: where the mesh size jumps from cell to cell they are averaged over neighbours, so that
 * the cut-off changes over several cells and its gradient can be resolved; elsewhere they stay as they are.
 *
 * @returns 6 x cells, m2
 */
export function smoothWidths(mesh: CellMesh, geometry: MeshGeometry): Float64Array {
  const cells = mesh.cellCount;
  const smooth = sharedFloat64(6 * cells);
  smooth.set(geometry.widthTensors);
  const size = (c: number): number =>
    geometry.widthTensors[6 * c]! + geometry.widthTensors[6 * c + 3]! + geometry.widthTensors[6 * c + 5]!;
  let rough = new Uint8Array(cells);
  let any = false;
  for (let f = 0; f < mesh.innerFaceCount; f++) {
    const a = mesh.owner[f]!;
    const b = mesh.neighbour[f]!;
    const ratio = size(a) / size(b);
    if (ratio > jump * jump || ratio < 1 / (jump * jump)) {
      rough[a] = 1;
      rough[b] = 1;
      any = true;
    }
  }
  if (!any) return smooth;
  for (let p = 0; p < passes; p++) {
    // The rough region grows by one cell a pass.
    const wider = rough.slice();
    for (let f = 0; f < mesh.innerFaceCount; f++) {
      const a = mesh.owner[f]!;
      const b = mesh.neighbour[f]!;
      if (rough[a] === 1) wider[b] = 1;
      if (rough[b] === 1) wider[a] = 1;
    }
    rough = wider;
  }
  const sum = new Float64Array(6 * cells);
  const count = new Uint16Array(cells);
  for (let p = 0; p < passes; p++) {
    sum.fill(0);
    count.fill(0);
    for (let f = 0; f < mesh.innerFaceCount; f++) {
      const a = mesh.owner[f]!;
      const b = mesh.neighbour[f]!;
      count[a]!++;
      count[b]!++;
      for (let c = 0; c < 6; c++) {
        sum[6 * a + c]! += smooth[6 * b + c]!;
        sum[6 * b + c]! += smooth[6 * a + c]!;
      }
    }
    for (let i = 0; i < cells; i++) {
      if (rough[i] !== 1 || count[i] === 0) continue;
      for (let c = 0; c < 6; c++) {
        smooth[6 * i + c] = 0.5 * smooth[6 * i + c]! + (0.5 * sum[6 * i + c]!) / count[i]!;
      }
    }
  }
  return smooth;
}
