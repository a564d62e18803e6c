// Plane mesh of the louvre bay: quadrilaterals in layers around the slat, triangles elsewhere.
import Delaunator from 'delaunator';
import { bay, distanceToSlat, offsetCurve, slat } from './geometry.mjs';

const around = 96;
const layers = 8;
const firstHeight = 0.4e-3;
const growth = 1.25;
const wake = { low: [-0.07, -0.12], high: [bay.high[0], 0.12], spacing: 0.012 };
const farSpacing = 0.024;

const perimeter = (distance) => 2 * (slat.chord - slat.thickness) + Math.PI * (slat.thickness + 2 * distance);
const inWake = (x, y) => x >= wake.low[0] && y >= wake.low[1] && y <= wake.high[1];
const wanted = (x, y) => (inWake(x, y) ? wake.spacing : farSpacing);

/** Points on the four edges of the bay, each once. */
function edgePoints() {
  const { low, high } = bay;
  const points = [];
  const edge = (from, to) => {
    const length = Math.hypot(to[0] - from[0], to[1] - from[1]);
    for (let at = 0; at < length - 1e-9; ) {
      const share = at / length;
      const x = from[0] + share * (to[0] - from[0]);
      const y = from[1] + share * (to[1] - from[1]);
      points.push([x, y]);
      const step = wanted(x, y);
      // The last step is stretched or shortened to the corner.
      at = length - at < 1.5 * step ? length : at + step;
    }
  };
  const corners = [low, [high[0], low[1]], high, [low[0], high[1]]];
  corners.forEach((corner, at) => {
    edge(corner, corners[(at + 1) % 4]);
  });
  return points;
}

/** Rings of points around the slat, wider from one to the next until they reach the spacing of the wake. */
function ringPoints(start) {
  const points = [];
  let distance = start;
  let height = (perimeter(start) / around) * 0.9;
  for (let ring = 1; ; ring++) {
    distance += height * 0.87;
    height *= 1.3;
    if (height > 0.85 * wake.spacing) return { points, end: distance };
    const count = Math.round(perimeter(distance) / height);
    for (let at = 0; at < count; at++) points.push(offsetCurve((at + 0.5 * (ring % 2)) / count, distance));
  }
}

/** Triangular lattice of one spacing where `keep` says so. */
function lattice(spacing, keep) {
  const points = [];
  const rise = spacing * Math.sqrt(0.75);
  for (let row = 0, y = bay.low[1]; y < bay.high[1]; row++, y += rise) {
    for (let x = bay.low[0] + (row % 2) * 0.5 * spacing; x < bay.high[0]; x += spacing) {
      const margin = 0.55 * spacing;
      const inside =
        x > bay.low[0] + margin && x < bay.high[0] - margin && y > bay.low[1] + margin && y < bay.high[1] - margin;
      if (inside && keep(x, y)) points.push([x, y]);
    }
  }
  return points;
}

function area(points, corners) {
  let twice = 0;
  corners.forEach((p, at) => {
    const q = corners[(at + 1) % corners.length];
    twice += points[p][0] * points[q][1] - points[q][0] * points[p][1];
  });
  return twice / 2;
}

/** @returns points (x y interleaved) and cells as lists of corners, counter-clockwise */
export function planeMesh() {
  const points = [];
  const cells = [];
  let distance = 0;
  for (let layer = 0; layer <= layers; layer++) {
    for (let at = 0; at < around; at++) points.push(offsetCurve(at / around, distance));
    if (layer < layers) distance += firstHeight * growth ** layer;
  }
  for (let layer = 0; layer < layers; layer++) {
    for (let at = 0; at < around; at++) {
      const next = (at + 1) % around;
      const inner = layer * around;
      const outer = inner + around;
      cells.push([inner + at, outer + at, outer + next, inner + next]);
    }
  }
  const ring = layers * around;
  const { points: rings, end } = ringPoints(distance);
  points.push(...rings, ...edgePoints());
  const clear = (spacing) => (x, y) => distanceToSlat(x, y) > end - 0.3 * spacing;
  points.push(...lattice(wake.spacing, (x, y) => inWake(x, y) && clear(wake.spacing)(x, y)));
  const beyond = 0.7 * farSpacing;
  const far = (x, y) => x < wake.low[0] - beyond || y < wake.low[1] - beyond || y > wake.high[1] + beyond;
  points.push(...lattice(farSpacing, (x, y) => far(x, y) && clear(farSpacing)(x, y)));

  const free = points.slice(ring);
  const { triangles } = Delaunator.from(free);
  for (let t = 0; t < triangles.length; t += 3) {
    const corners = [triangles[t] + ring, triangles[t + 1] + ring, triangles[t + 2] + ring];
    // The outermost layer is a convex curve: triangles with all corners on it lie inside.
    if (corners.every((p) => p < ring + around)) continue;
    cells.push(area(points, corners) > 0 ? corners : corners.reverse());
  }
  let covered = 0;
  for (const corners of cells) covered += area(points, corners);
  const body = area(
    points,
    Array.from({ length: around }, (_, at) => at),
  );
  const whole = (bay.high[0] - bay.low[0]) * (bay.high[1] - bay.low[1]);
  if (Math.abs(covered + body - whole) > 1e-12 * whole) throw new Error('The mesh of the louvre bay has gaps.');
  return { points: points.flat(), cells };
}
