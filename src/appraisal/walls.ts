import type { CellMesh, MeshGeometry } from '../mesh/cell-mesh.js';
import { buildKdTree, createKdSearch, nearestNeighbours } from '../spatial/kd-tree.js';
import { quantiles } from './histogram.js';

/** Skin-friction coefficients, 2 tau_w / (rho U^2). */
export const skinFriction = {
  /** Turbulent flat plate, Reynolds number of the running length (White 2006, Viscous Fluid Flow): 0.026 Re^(-1/7). */
  flatPlate: (reynolds: number): number => 0.026 * reynolds ** (-1 / 7),
  /** Plane channel, Reynolds number of the bulk velocity and full height (Dean 1978, J. Fluids Eng. 100:215-223). */
  channel: (reynolds: number): number => 0.073 * reynolds ** -0.25,
  /** Smooth pipe, Reynolds number of the bulk velocity and diameter (Blasius 1913, Fanning factor). */
  pipe: (reynolds: number): number => 0.079 * reynolds ** -0.25,
};

/** u_tau = U sqrt(Cf / 2). */
export function frictionVelocity(speed: number, coefficient: number): number {
  return speed * Math.sqrt(coefficient / 2);
}

/** Distance from the wall, m, that has the given y+. */
export function heightForYPlus(yPlus: number, nu: number, frictionSpeed: number): number {
  return (yPlus * nu) / frictionSpeed;
}

const kappa = 0.4;
const intercept = 5.5;

/**
 * Friction velocity from the speed at a distance from the wall by Spalding's single formula,
 * y+ = U+ + e^(-kB) (e^(kU+) - 1 - kU+ - (kU+)^2 / 2 - (kU+)^3 / 6), kappa = 0.4, B = 5.5.
 *
 * @returns m/s; 0 for a fluid at rest
 * @see Spalding 1961, J. Appl. Mech. 28:455-458
 */
export function frictionFromWallLaw(speed: number, distance: number, nu: number): number {
  if (!(speed > 0)) return 0;
  // y+ U+ = speed distance / nu rises with U+: bisection on U+.
  const target = (speed * distance) / nu;
  let low = 0;
  let high = Math.min(Math.sqrt(target), 200);
  for (let i = 0; i < 60; i++) {
    const u = 0.5 * (low + high);
    const z = kappa * u;
    const yPlus = u + Math.exp(-kappa * intercept) * (Math.exp(z) - 1 - z - (z * z) / 2 - z ** 3 / 6);
    if (yPlus * u > target) high = u;
    else low = u;
  }
  return speed / (0.5 * (low + high));
}

/** Per wall face; spacings of the cell beside it in wall units. */
export interface WallSpacings {
  readonly faces: Int32Array;
  /** Distance of the cell's centre from the face, times u_tau / nu. */
  readonly yPlus: Float64Array;
  /** Width along the near-wall flow and across it (in the wall), in wall units. */
  readonly alongPlus: Float64Array;
  readonly acrossPlus: Float64Array;
  readonly frictionSpeed: Float64Array;
  /** m2, weights for histograms. */
  readonly areas: Float64Array;
}

function widthAlong(tensors: Float64Array, cell: number, x: number, y: number, z: number): number {
  const t = 6 * cell;
  return Math.sqrt(
    (tensors[t] as number) * x * x +
      (tensors[t + 3] as number) * y * y +
      (tensors[t + 5] as number) * z * z +
      2 *
        ((tensors[t + 1] as number) * x * y + (tensors[t + 2] as number) * x * z + (tensors[t + 4] as number) * y * z),
  );
}

/** Distance of a cell's centre from the plane of a face, along the inward normal, m. */
function depth(geometry: MeshGeometry, cell: number, face: number, normal: readonly number[]): number {
  let distance = 0;
  for (let a = 0; a < 3; a++) {
    distance +=
      (normal[a] as number) *
      ((geometry.faceCentroids[3 * face + a] as number) - (geometry.cellCentroids[3 * cell + a] as number));
  }
  return distance;
}

const mostSteps = 400;

/** Walks from cell to cell away from the wall until a centre lies at least `wanted` deep. */
function cellAtDepth(
  mesh: CellMesh,
  geometry: MeshGeometry,
  face: number,
  normal: readonly number[],
  wanted: number,
): number {
  let cell = mesh.owner[face] as number;
  let reached = depth(geometry, cell, face, normal);
  for (let step = 0; step < mostSteps && reached < wanted; step++) {
    let best = -1;
    let bestSlant = 0.3;
    for (let i = mesh.cellFaceOffsets[cell] as number; i < (mesh.cellFaceOffsets[cell + 1] as number); i++) {
      const f = mesh.cellFaces[i] as number;
      if (f >= mesh.innerFaceCount) continue;
      const other = (mesh.owner[f] === cell ? mesh.neighbour[f] : mesh.owner[f]) as number;
      const gain = depth(geometry, other, face, normal) - reached;
      const length = Math.hypot(
        ...[0, 1, 2].map(
          (a) => (geometry.cellCentroids[3 * other + a] as number) - (geometry.cellCentroids[3 * cell + a] as number),
        ),
      );
      // The neighbour that lies straightest above.
      if (gain / length > bestSlant) {
        best = other;
        bestSlant = gain / length;
      }
    }
    if (best < 0) break;
    cell = best;
    reached = depth(geometry, cell, face, normal);
  }
  return cell;
}

/**
 * How far from the wall the precursor has its first moving values: the median over the wall faces of the depth of the
 * nearest precursor point whose speed is above a thousandth of the largest.
 *
 * @param points  3 x m, metres
 * @param velocity  3 x m, m/s
 * @param constantAxes  axes (0 x, 1 y, 2 z) along which the precursor is constant
 * @returns metres; 0 when nothing moves
 */
export function precursorDepth(
  geometry: MeshGeometry,
  wallFaces: Int32Array,
  points: Float64Array,
  velocity: Float64Array,
  constantAxes: readonly number[] = [],
): number {
  const speeds = Float64Array.from({ length: points.length / 3 }, (_, i) =>
    Math.hypot(velocity[3 * i] as number, velocity[3 * i + 1] as number, velocity[3 * i + 2] as number),
  );
  const floor = 1e-3 * speeds.reduce((a, b) => Math.max(a, b), 0);
  const moving: number[] = [];
  speeds.forEach((speed, i) => {
    if (speed <= floor) return;
    for (let a = 0; a < 3; a++) moving.push(constantAxes.includes(a) ? 0 : (points[3 * i + a] as number));
  });
  if (moving.length === 0 || wallFaces.length === 0) return 0;
  const places = Float64Array.from(moving);
  const tree = buildKdTree(places);
  const search = createKdSearch();
  const index = new Int32Array(1);
  const squared = new Float64Array(1);
  const depths = Float64Array.from(wallFaces, (face) => {
    const at = [0, 1, 2].map((a) => (constantAxes.includes(a) ? 0 : (geometry.faceCentroids[3 * face + a] as number)));
    nearestNeighbours(tree, at[0] as number, at[1] as number, at[2] as number, 1, index, squared, search);
    const area = Math.hypot(...geometry.faceAreas.subarray(3 * face, 3 * face + 3));
    let sum = 0;
    for (let a = 0; a < 3; a++) {
      const normal = (geometry.faceAreas[3 * face + a] as number) / area;
      sum += normal * ((at[a] as number) - (places[3 * (index[0] as number) + a] as number));
    }
    return Math.abs(sum);
  });
  return quantiles(depths, [0.5])[0] as number;
}

/**
 * Spacings next to walls in wall units. The friction velocity comes from the transferred velocity through Spalding's wall
 * law, which holds in the sublayer and in the log layer alike. It is read where the precursor has values of its own: in
 * the first cell whose centre is `samplingDistance` away from the wall, not closer, where a finer target only interpolates.
 *
 * @param velocity  3 x cells, m/s
 * @param nu  m2/s, one number or one a cell
 * @param samplingDistance  m; 0 reads in the first cell
 */
export function appraiseWalls(
  mesh: CellMesh,
  geometry: MeshGeometry,
  wallFaces: Int32Array,
  velocity: Float64Array,
  nu: number | Float64Array,
  samplingDistance = 0,
): WallSpacings {
  const n = wallFaces.length;
  const yPlus = new Float64Array(n);
  const alongPlus = new Float64Array(n);
  const acrossPlus = new Float64Array(n);
  const frictionSpeed = new Float64Array(n);
  const areas = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const face = wallFaces[i] as number;
    const cell = mesh.owner[face] as number;
    const f = 3 * face;
    const area = Math.hypot(
      geometry.faceAreas[f] as number,
      geometry.faceAreas[f + 1] as number,
      geometry.faceAreas[f + 2] as number,
    );
    const normal = [0, 1, 2].map((a) => (geometry.faceAreas[f + a] as number) / area) as [number, number, number];
    const distance = depth(geometry, cell, face, normal);
    const sample = cellAtDepth(mesh, geometry, face, normal, samplingDistance);
    const sampleDistance = depth(geometry, sample, face, normal);
    const flow = [0, 1, 2].map((a) => velocity[3 * sample + a] as number) as [number, number, number];
    const through = normal[0] * flow[0] + normal[1] * flow[1] + normal[2] * flow[2];
    let along = flow.map((u, a) => u - through * (normal[a] as number)) as [number, number, number];
    const speed = Math.hypot(...along);
    if (speed > 0) along = along.map((x) => x / speed) as [number, number, number];
    else {
      // No flow, no direction: any tangent.
      const [x, y, z] = normal;
      const t: [number, number, number] = Math.abs(x) < 0.6 ? [0, z, -y] : [-z, 0, x];
      const size = Math.hypot(...t);
      along = t.map((s) => s / size) as [number, number, number];
    }
    const across: [number, number, number] = [
      normal[1] * along[2] - normal[2] * along[1],
      normal[2] * along[0] - normal[0] * along[2],
      normal[0] * along[1] - normal[1] * along[0],
    ];
    const viscosity = typeof nu === 'number' ? nu : (nu[cell] as number);
    const friction = frictionFromWallLaw(speed, Math.abs(sampleDistance), viscosity);
    const unit = friction / viscosity;
    frictionSpeed[i] = friction;
    yPlus[i] = Math.abs(distance) * unit;
    alongPlus[i] = widthAlong(geometry.widthTensors, cell, ...along) * unit;
    acrossPlus[i] = widthAlong(geometry.widthTensors, cell, ...across) * unit;
    areas[i] = area;
  }
  return { faces: wallFaces, yPlus, alongPlus, acrossPlus, frictionSpeed, areas };
}

/**
 * What the spacings mean, in words.
 *
 * @param yPlus  95th percentile (area) of y+ of the first cell centre
 * @see Piomelli & Chasnov 1996 (from memory): wall-resolved runs need y+ of about 1, 50 to 100 along and 15 to 30 across
 */
export function wallVerdict(yPlus: number, along: number, across: number): string {
  const figures = `y+ ${yPlus.toPrecision(3)}, along ${along.toPrecision(3)}, across ${across.toPrecision(3)} wall units`;
  if (yPlus <= 2 && along <= 100 && across <= 30) return `wall-resolved: ${figures}`;
  if (yPlus <= 2)
    return `first cells are flat enough, but too long along or across the flow to carry streaks: ${figures}`;
  if (yPlus < 30) return `between the two practices (neither wall-resolved nor in the log layer): ${figures}`;
  return `needs a wall model: ${figures}`;
}
