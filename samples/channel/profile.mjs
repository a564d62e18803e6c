// Fully developed turbulent channel in one dimension: momentum, k and omega in wall units, finite volumes from the wall
// to the middle. Model: two-equation k-omega of Wilcox 1988 (AIAA J. 26, 1299), coefficients from memory:
//   nu_t = k / omega, beta* = 0.09, alpha = 5/9, beta = 3/40, sigma = sigma* = 1/2, omega -> 6 nu / (beta y^2) at the wall.

const betaStar = 0.09;
const alpha = 5 / 9;
const beta = 3 / 40;
const sigma = 0.5;

/** Solves a tridiagonal system; all arrays of length n, a[0] and c[n - 1] unused. */
function tridiagonal(a, b, c, d) {
  const n = b.length;
  const x = new Float64Array(n);
  const e = new Float64Array(n);
  let pivot = b[0];
  x[0] = d[0] / pivot;
  for (let i = 1; i < n; i++) {
    e[i] = c[i - 1] / pivot;
    pivot = b[i] - a[i] * e[i];
    x[i] = (d[i] - a[i] * x[i - 1]) / pivot;
  }
  for (let i = n - 2; i >= 0; i--) x[i] -= e[i + 1] * x[i + 1];
  return x;
}

/**
 * @param reynolds  friction Reynolds number
 * @param cells     cells from wall to middle
 * @returns y+, U+, k+, epsilon+ at the cell centres, and the number of sweeps
 */
export function solveChannel(reynolds, cells = 160) {
  // Cells grow towards the middle; the first is about 0.1 wall units high.
  const growth = 3.4;
  const face = Float64Array.from(
    { length: cells + 1 },
    (_, i) => reynolds * (1 - Math.tanh(growth * (1 - i / cells)) / Math.tanh(growth)),
  );
  const y = Float64Array.from({ length: cells }, (_, i) => 0.5 * (face[i] + face[i + 1]));
  const height = Float64Array.from({ length: cells }, (_, i) => face[i + 1] - face[i]);
  let u = Float64Array.from(y, (value) => (value < 11 ? value : 2.44 * Math.log(value) + 5));
  let k = Float64Array.from(y, (value) => Math.min(0.05 * value * value, 3.5 - (2.5 * value) / reynolds));
  let omega = Float64Array.from(y, (value) =>
    Math.max(6 / (beta * value * value), Math.sqrt(3) / (0.3 * 0.41 * value)),
  );

  /** Diffusion with conductivity 1 + factor nu_t, fixed value 0 at the wall (none for omega), no flux in the middle. */
  const solve = (factor, nut, source, sink, wall) => {
    const a = new Float64Array(cells);
    const b = new Float64Array(cells);
    const c = new Float64Array(cells);
    const d = new Float64Array(cells);
    for (let i = 0; i < cells; i++) {
      const low = i === 0 ? 1 / (y[0] - face[0]) : (1 + factor * 0.5 * (nut[i - 1] + nut[i])) / (y[i] - y[i - 1]);
      const high = i === cells - 1 ? 0 : (1 + factor * 0.5 * (nut[i] + nut[i + 1])) / (y[i + 1] - y[i]);
      a[i] = -low;
      c[i] = -high;
      b[i] = low + high + sink[i] * height[i];
      d[i] = source[i] * height[i];
      if (wall !== undefined && y[i] < 2.5) {
        a[i] = 0;
        c[i] = 0;
        b[i] = 1;
        d[i] = wall[i];
      }
    }
    return tridiagonal(a, b, c, d);
  };

  const wallOmega = Float64Array.from(y, (value) => 6 / (beta * value * value));
  const zero = new Float64Array(cells);
  const relax = 0.4;
  for (let sweep = 1; sweep <= 20_000; sweep++) {
    const nut = Float64Array.from(k, (value, i) => value / omega[i]);
    const newU = solve(
      1,
      nut,
      zero.map(() => 1 / reynolds),
      zero,
    );
    const strain2 = Float64Array.from(y, (_, i) => {
      const below = i === 0 ? 0 : u[i - 1];
      const yBelow = i === 0 ? 0 : y[i - 1];
      const gradient =
        i === cells - 1 ? (u[i] - below) / (y[i] - yBelow) / 2 : (u[i + 1] - below) / (y[i + 1] - yBelow);
      return gradient * gradient;
    });
    const newK = solve(
      sigma,
      nut,
      nut.map((value, i) => value * strain2[i]),
      omega.map((value) => betaStar * value),
    );
    const newOmega = solve(
      sigma,
      nut,
      strain2.map((value) => alpha * value),
      omega.map((value) => beta * value),
      wallOmega,
    );
    let change = 0;
    const blend = (before, after) =>
      before.map((value, i) => {
        change = Math.max(change, Math.abs(after[i] - value) / (Math.abs(value) + 1e-6));
        return value + relax * (after[i] - value);
      });
    u = blend(u, newU);
    k = blend(k, newK);
    omega = blend(omega, newOmega);
    if (change < 1e-10) {
      return { y, height, u, k, epsilon: k.map((value, i) => betaStar * value * omega[i]), sweeps: sweep };
    }
  }
  throw new Error('The channel profile does not converge.');
}
