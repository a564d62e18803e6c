// The invented louvre bay: one slat with round ends, at an angle to the stream, between two planes without friction.
export const bay = {
  low: [-0.24, -0.2],
  high: [0.56, 0.2],
  span: 0.16,
  speed: 10,
  viscosity: 1.5e-5,
  /** Intensity and k^(3/2) / epsilon of the oncoming stream. */
  intensity: 0.02,
  length: 0.02,
};

export const slat = { chord: 0.08, thickness: 0.016, degrees: 40 };

const angle = (slat.degrees * Math.PI) / 180;
const along = [Math.cos(angle), Math.sin(angle)];
/** Half the length of the straight part: the ends are half circles about its ends. */
const straight = 0.5 * (slat.chord - slat.thickness);

/** Distance to the surface of the slat, negative inside. */
export function distanceToSlat(x, y) {
  const t = Math.max(-straight, Math.min(straight, x * along[0] + y * along[1]));
  return Math.hypot(x - t * along[0], y - t * along[1]) - 0.5 * slat.thickness;
}

/**
 * Point of the curve at a distance from the surface; `s` runs once round in [0, 1), counter-clockwise. Points at the
 * same `s` on two of these curves lie on one normal.
 */
export function offsetCurve(s, distance) {
  const radius = 0.5 * slat.thickness;
  // Shares of the parameter by lengths on the surface itself.
  const arc = Math.PI * radius;
  const around = 2 * arc + 4 * straight;
  let rest = (((s % 1) + 1) % 1) * around;
  const r = radius + distance;
  let local;
  if (rest < arc) {
    const phi = -0.5 * Math.PI + rest / radius;
    local = [straight + r * Math.cos(phi), r * Math.sin(phi)];
  } else {
    rest -= arc;
    if (rest < 2 * straight) local = [straight - rest, r];
    else {
      rest -= 2 * straight;
      if (rest < arc) {
        const phi = 0.5 * Math.PI + rest / radius;
        local = [-straight + r * Math.cos(phi), r * Math.sin(phi)];
      } else {
        rest -= arc;
        local = [-straight + rest, -r];
      }
    }
  }
  return [local[0] * along[0] - local[1] * along[1], local[0] * along[1] + local[1] * along[0]];
}
