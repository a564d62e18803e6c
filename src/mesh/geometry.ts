import { sharedFloat64 } from '../basis/fields.js';
import type { CellMesh, MeshGeometry } from './cell-mesh.js';

/**
 * Area vectors and centroids of faces [begin, end): triangle fans about the mean of the corners, triangles weighted by
 * their area along the face's area vector.
 *
 * @param areas      3 x faces, written
 * @param centroids  3 x faces, written
 */
export function measureFacesRange(
  mesh: CellMesh,
  begin: number,
  end: number,
  areas: Float64Array,
  centroids: Float64Array,
): void {
  const { points: xyz, faceOffsets, facePoints } = mesh;
  for (let face = begin; face < end; face++) {
    const first = faceOffsets[face]!;
    const last = faceOffsets[face + 1]!;
    const n = last - first;
    let mx = 0;
    let my = 0;
    let mz = 0;
    for (let i = first; i < last; i++) {
      const p = 3 * facePoints[i]!;
      mx += xyz[p]!;
      my += xyz[p + 1]!;
      mz += xyz[p + 2]!;
    }
    mx /= n;
    my /= n;
    mz /= n;
    let ax = 0;
    let ay = 0;
    let az = 0;
    let p = 3 * facePoints[last - 1]!;
    const ox = xyz[p]! - mx;
    const oy = xyz[p + 1]! - my;
    const oz = xyz[p + 2]! - mz;
    let ux = ox;
    let uy = oy;
    let uz = oz;
    for (let i = first; i < last; i++) {
      p = 3 * facePoints[i]!;
      const vx = xyz[p]! - mx;
      const vy = xyz[p + 1]! - my;
      const vz = xyz[p + 2]! - mz;
      ax += uy * vz - uz * vy;
      ay += uz * vx - ux * vz;
      az += ux * vy - uy * vx;
      ux = vx;
      uy = vy;
      uz = vz;
    }
    let cx = 0;
    let cy = 0;
    let cz = 0;
    const a2 = ax * ax + ay * ay + az * az;
    if (n > 3 && a2 > 0) {
      ux = ox;
      uy = oy;
      uz = oz;
      for (let i = first; i < last; i++) {
        p = 3 * facePoints[i]!;
        const vx = xyz[p]! - mx;
        const vy = xyz[p + 1]! - my;
        const vz = xyz[p + 2]! - mz;
        const w = ax * (uy * vz - uz * vy) + ay * (uz * vx - ux * vz) + az * (ux * vy - uy * vx);
        cx += w * (ux + vx);
        cy += w * (uy + vy);
        cz += w * (uz + vz);
        ux = vx;
        uy = vy;
        uz = vz;
      }
      const scale = 1 / (3 * a2);
      cx *= scale;
      cy *= scale;
      cz *= scale;
    }
    const o = 3 * face;
    areas[o] = 0.5 * ax;
    areas[o + 1] = 0.5 * ay;
    areas[o + 2] = 0.5 * az;
    centroids[o] = mx + cx;
    centroids[o + 1] = my + cy;
    centroids[o + 2] = mz + cz;
  }
}

/**
 * Volumes, centroids and width tensors of cells [begin, end) by division into tetrahedra between a point of the cell and
 * the fans of its faces; all three are exact for the body that the fans bound, wherever that point lies.
 * Moments of a tetrahedron with vertices 0, m, p, q and volume V: first V (m + p + q) / 4, second
 * V / 20 (m m + p p + q q + s s) with s = m + p + q.
 */
export function measureCellsRange(
  mesh: CellMesh,
  begin: number,
  end: number,
  volumes: Float64Array,
  centroids: Float64Array,
  widthTensors: Float64Array,
): void {
  const { points: xyz, faceOffsets, facePoints, cellFaceOffsets, cellFaces, owner } = mesh;
  for (let cell = begin; cell < end; cell++) {
    const firstFace = cellFaceOffsets[cell]!;
    const lastFace = cellFaceOffsets[cell + 1]!;
    let rx = 0;
    let ry = 0;
    let rz = 0;
    let count = 0;
    for (let j = firstFace; j < lastFace; j++) {
      const face = cellFaces[j]!;
      for (let i = faceOffsets[face]!; i < faceOffsets[face + 1]!; i++) {
        const p = 3 * facePoints[i]!;
        rx += xyz[p]!;
        ry += xyz[p + 1]!;
        rz += xyz[p + 2]!;
        count++;
      }
    }
    rx /= count;
    ry /= count;
    rz /= count;
    let v = 0;
    let sx = 0;
    let sy = 0;
    let sz = 0;
    let xx = 0;
    let xy = 0;
    let xz = 0;
    let yy = 0;
    let yz = 0;
    let zz = 0;
    for (let j = firstFace; j < lastFace; j++) {
      const face = cellFaces[j]!;
      const first = faceOffsets[face]!;
      const last = faceOffsets[face + 1]!;
      const sign = owner[face] === cell ? 1 : -1;
      let mx = 0;
      let my = 0;
      let mz = 0;
      for (let i = first; i < last; i++) {
        const p = 3 * facePoints[i]!;
        mx += xyz[p]!;
        my += xyz[p + 1]!;
        mz += xyz[p + 2]!;
      }
      const n = last - first;
      mx = mx / n - rx;
      my = my / n - ry;
      mz = mz / n - rz;
      let p = 3 * facePoints[last - 1]!;
      let ax = xyz[p]! - rx;
      let ay = xyz[p + 1]! - ry;
      let az = xyz[p + 2]! - rz;
      for (let i = first; i < last; i++) {
        p = 3 * facePoints[i]!;
        const bx = xyz[p]! - rx;
        const by = xyz[p + 1]! - ry;
        const bz = xyz[p + 2]! - rz;
        const t = sign * (mx * (ay * bz - az * by) + my * (az * bx - ax * bz) + mz * (ax * by - ay * bx));
        const ex = mx + ax + bx;
        const ey = my + ay + by;
        const ez = mz + az + bz;
        v += t;
        sx += t * ex;
        sy += t * ey;
        sz += t * ez;
        xx += t * (mx * mx + ax * ax + bx * bx + ex * ex);
        xy += t * (mx * my + ax * ay + bx * by + ex * ey);
        xz += t * (mx * mz + ax * az + bx * bz + ex * ez);
        yy += t * (my * my + ay * ay + by * by + ey * ey);
        yz += t * (my * mz + ay * az + by * bz + ey * ez);
        zz += t * (mz * mz + az * az + bz * bz + ez * ez);
        ax = bx;
        ay = by;
        az = bz;
      }
    }
    volumes[cell] = v / 6;
    const safe = v === 0 ? 1 : v;
    const gx = sx / (4 * safe);
    const gy = sy / (4 * safe);
    const gz = sz / (4 * safe);
    const c = 3 * cell;
    centroids[c] = rx + gx;
    centroids[c + 1] = ry + gy;
    centroids[c + 2] = rz + gz;
    const h = 6 * cell;
    const s = 1 / (20 * safe);
    widthTensors[h] = 12 * (s * xx - gx * gx);
    widthTensors[h + 1] = 12 * (s * xy - gx * gy);
    widthTensors[h + 2] = 12 * (s * xz - gx * gz);
    widthTensors[h + 3] = 12 * (s * yy - gy * gy);
    widthTensors[h + 4] = 12 * (s * yz - gy * gz);
    widthTensors[h + 5] = 12 * (s * zz - gz * gz);
  }
}

/** Measures all faces and cells; arrays lie on shared memory. */
export function measureMesh(mesh: CellMesh): MeshGeometry {
  const geometry = createGeometry(mesh);
  measureFacesRange(mesh, 0, mesh.faceCount, geometry.faceAreas, geometry.faceCentroids);
  measureCellsRange(mesh, 0, mesh.cellCount, geometry.cellVolumes, geometry.cellCentroids, geometry.widthTensors);
  return geometry;
}

/** Room for the measures of a mesh, for filling by ranges. */
export function createGeometry(mesh: CellMesh): MeshGeometry {
  return {
    cellCentroids: sharedFloat64(3 * mesh.cellCount),
    cellVolumes: sharedFloat64(mesh.cellCount),
    faceAreas: sharedFloat64(3 * mesh.faceCount),
    faceCentroids: sharedFloat64(3 * mesh.faceCount),
    widthTensors: sharedFloat64(6 * mesh.cellCount),
  };
}
