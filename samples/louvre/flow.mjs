// Unsteady two-dimensional flow past the slat on a coarse rectangular grid: finite volumes, pressure projection, the slat
// as a body that lets nothing through (cells blocked by their solid share), turbulence by the k-epsilon model of Launder
// & Spalding 1974 (Comput. Methods Appl. Mech. Eng. 3, 269; coefficients from memory) with the time scale limited as
// Durbin 1996 proposes (Int. J. Heat Fluid Flow 17, 89). Good enough for a precursor, not for a result.
import { bay, distanceToSlat } from './geometry.mjs';

const cMu = 0.09;
const c1 = 1.44;
const c2 = 1.92;
const sigmaEpsilon = 1.3;

/** Solves the pressure equation: no flux at x low and y, zero pressure at x high; cosine modes in y, elimination in x. */
function pressureSolver(nx, ny, d) {
  const modes = Float64Array.from({ length: ny * ny }, (_, at) =>
    Math.cos((Math.PI * Math.floor(at / ny) * ((at % ny) + 0.5)) / ny),
  );
  const half = ny / 2;
  const hat = new Float64Array(nx * ny);
  const fold = new Float64Array(ny);
  const e = new Float64Array(nx);
  return (rhs, p) => {
    for (let i = 0; i < nx; i++) {
      // Even modes see the sum of mirrored values, odd ones their difference.
      for (let j = 0; j < half; j++) {
        const low = rhs[i * ny + j];
        const high = rhs[i * ny + ny - 1 - j];
        fold[j] = low + high;
        fold[half + j] = low - high;
      }
      for (let m = 0; m < ny; m++) {
        const row = m * ny;
        const from = m % 2 === 0 ? 0 : half;
        let sum = 0;
        for (let j = 0; j < half; j++) sum += modes[row + j] * fold[from + j];
        hat[i * ny + m] = (sum * (m === 0 ? 1 : 2)) / ny;
      }
    }
    for (let m = 0; m < ny; m++) {
      const eigen = 2 * (Math.cos((Math.PI * m) / ny) - 1);
      for (let i = 0; i < nx; i++) {
        const diagonal = eigen - (i === 0 ? 1 : i === nx - 1 ? 3 : 2);
        const pivot = i === 0 ? diagonal : diagonal - e[i - 1];
        e[i] = 1 / pivot;
        hat[i * ny + m] = (hat[i * ny + m] * d * d - (i === 0 ? 0 : hat[(i - 1) * ny + m])) / pivot;
      }
      for (let i = nx - 2; i >= 0; i--) hat[i * ny + m] -= e[i] * hat[(i + 1) * ny + m];
    }
    for (let i = 0; i < nx; i++) {
      for (let j = 0; j < half; j++) {
        let even = 0;
        let odd = 0;
        for (let m = 0; m < ny; m += 2) {
          even += modes[m * ny + j] * hat[i * ny + m];
          odd += modes[m * ny + ny + j] * hat[i * ny + m + 1];
        }
        p[i * ny + j] = even + odd;
        p[i * ny + ny - 1 - j] = even - odd;
      }
    }
  };
}

/**
 * @param nx     cells along x (so that there is an even number across); the cells are squares
 * @param time   end of the computation, s
 * @returns cell centres outside the slat with velocity, k and epsilon at the end, and the history of the force-like
 *   cross velocity behind the slat
 */
export function solveLouvre(nx = 128, time = 0.16) {
  const d = (bay.high[0] - bay.low[0]) / nx;
  const ny = Math.round((bay.high[1] - bay.low[1]) / d);
  const n = nx * ny;
  const xAt = (i) => bay.low[0] + (i + 0.5) * d;
  const yAt = (j) => bay.low[1] + (j + 0.5) * d;
  const distance = Float64Array.from({ length: n }, (_, c) => distanceToSlat(xAt(Math.floor(c / ny)), yAt(c % ny)));
  const open = distance.map((value) => Math.max(0, Math.min(1, 0.5 + value / d)));
  const kIn = 1.5 * (bay.intensity * bay.speed) ** 2;
  const epsilonIn = kIn ** 1.5 / bay.length;
  const u = open.map((share) => share * bay.speed);
  // A push across the stream, once, so that shedding does not wait for rounding errors.
  const v = Float64Array.from(
    { length: n },
    (_, c) => 0.1 * bay.speed * Math.exp(-(((xAt(Math.floor(c / ny)) - 0.1) / 0.05) ** 2)),
  );
  const k = new Float64Array(n).fill(kIn);
  const epsilon = new Float64Array(n).fill(epsilonIn);
  const p = new Float64Array(n);
  const rhs = new Float64Array(n);
  const fx = new Float64Array((nx + 1) * ny).fill(bay.speed);
  const fy = new Float64Array(nx * (ny + 1));
  const nut = new Float64Array(n);
  const strain = new Float64Array(n);
  const solvePressure = pressureSolver(nx, ny, d);

  /** Value of a neighbour, beyond the edge: given at the inflow, the same elsewhere (sign -1 mirrors). */
  const beyond = (f, i, j, inflow, sign) => {
    if (i < 0) return inflow;
    const column = Math.min(i, nx - 1);
    if (j < 0) return sign * f[column * ny];
    if (j > ny - 1) return sign * f[column * ny + ny - 1];
    return f[column * ny + j];
  };

  const limited = (up2, up, down) => {
    const a = up - up2;
    const b = down - up;
    return up + (a * b > 0 ? (a * b) / (a + b) : 0);
  };

  /** Convection with van Leer's limiter and diffusion; returns the rate of change. */
  const transport = (f, inflow, sign, diffusivity) => {
    const rate = new Float64Array(n);
    for (let i = 0; i <= nx; i++) {
      for (let j = 0; j < ny; j++) {
        const left = beyond(f, i - 1, j, inflow, sign);
        const right = i === nx ? left : f[i * ny + j];
        const flux = fx[i * ny + j];
        const face =
          flux > 0
            ? limited(beyond(f, i - 2, j, inflow, sign), left, right)
            : limited(beyond(f, i + 1, j, inflow, sign), right, left);
        const between =
          i === 0 ? diffusivity[j] : i === nx ? 0 : 0.5 * (diffusivity[(i - 1) * ny + j] + diffusivity[i * ny + j]);
        const through = (flux * face - (between * (right - left)) / d) / d;
        if (i > 0) rate[(i - 1) * ny + j] -= through;
        if (i < nx) rate[i * ny + j] += through;
      }
    }
    for (let i = 0; i < nx; i++) {
      for (let j = 0; j <= ny; j++) {
        const low = beyond(f, i, j - 1, inflow, sign);
        const high = beyond(f, i, j, inflow, sign);
        const flux = fy[i * (ny + 1) + j];
        const face =
          flux > 0
            ? limited(beyond(f, i, j - 2, inflow, sign), low, high)
            : limited(beyond(f, i, j + 1, inflow, sign), high, low);
        const edge = j === 0 || j === ny;
        const between = edge ? 0 : 0.5 * (diffusivity[i * ny + j - 1] + diffusivity[i * ny + j]);
        const through = (flux * face - (between * (high - low)) / d) / d;
        if (j > 0) rate[i * ny + j - 1] -= through;
        if (j < ny) rate[i * ny + j] += through;
      }
    }
    return rate;
  };

  const project = (dt) => {
    for (let i = 1; i < nx; i++) {
      for (let j = 0; j < ny; j++) {
        fx[i * ny + j] =
          0.5 * (u[(i - 1) * ny + j] + u[i * ny + j]) * Math.min(open[(i - 1) * ny + j], open[i * ny + j]);
      }
    }
    for (let j = 0; j < ny; j++) fx[nx * ny + j] = u[(nx - 1) * ny + j];
    for (let i = 0; i < nx; i++) {
      for (let j = 1; j < ny; j++) {
        const c = i * ny + j;
        fy[i * (ny + 1) + j] = 0.5 * (v[c - 1] + v[c]) * Math.min(open[c - 1], open[c]);
      }
    }
    for (let i = 0; i < nx; i++) {
      for (let j = 0; j < ny; j++) {
        const out = fx[(i + 1) * ny + j] - fx[i * ny + j] + fy[i * (ny + 1) + j + 1] - fy[i * (ny + 1) + j];
        rhs[i * ny + j] = out / (d * dt);
      }
    }
    solvePressure(rhs, p);
    const push = dt / d;
    for (let i = 1; i <= nx; i++) {
      for (let j = 0; j < ny; j++) {
        const right = i === nx ? -p[(nx - 1) * ny + j] : p[i * ny + j];
        fx[i * ny + j] -= push * (right - p[(i - 1) * ny + j]);
      }
    }
    for (let i = 0; i < nx; i++) {
      for (let j = 1; j < ny; j++) fy[i * (ny + 1) + j] -= push * (p[i * ny + j] - p[i * ny + j - 1]);
    }
    for (let i = 0; i < nx; i++) {
      for (let j = 0; j < ny; j++) {
        const c = i * ny + j;
        const right = i === nx - 1 ? -p[c] : p[c + ny];
        const left = i === 0 ? p[c] : p[c - ny];
        const high = j === ny - 1 ? p[c] : p[c + 1];
        const low = j === 0 ? p[c] : p[c - 1];
        u[c] = (u[c] - 0.5 * push * (right - left)) * open[c];
        v[c] = (v[c] - 0.5 * push * (high - low)) * open[c];
      }
    }
  };

  const turbulence = () => {
    for (let i = 0; i < nx; i++) {
      for (let j = 0; j < ny; j++) {
        const c = i * ny + j;
        const ux = (beyond(u, i + 1, j, bay.speed, 1) - beyond(u, i - 1, j, bay.speed, 1)) / (2 * d);
        const uy = (beyond(u, i, j + 1, bay.speed, 1) - beyond(u, i, j - 1, bay.speed, 1)) / (2 * d);
        const vx = (beyond(v, i + 1, j, 0, -1) - beyond(v, i - 1, j, 0, -1)) / (2 * d);
        const vy = (beyond(v, i, j + 1, 0, -1) - beyond(v, i, j - 1, 0, -1)) / (2 * d);
        strain[c] = Math.sqrt(2 * (ux * ux + vy * vy) + (uy + vx) ** 2);
        const scale = Math.min(k[c] / epsilon[c], 0.6 / (Math.sqrt(3) * cMu * strain[c] + 1e-30));
        nut[c] = cMu * k[c] * scale;
      }
    }
  };

  const history = [];
  let now = 0;
  while (now < time) {
    turbulence();
    let fastest = bay.speed;
    let thickest = 0;
    for (let c = 0; c < n; c++) {
      fastest = Math.max(fastest, Math.abs(u[c]) + Math.abs(v[c]));
      thickest = Math.max(thickest, nut[c]);
    }
    const dt = Math.min((0.45 * d) / fastest, (0.2 * d * d) / (thickest + bay.viscosity), time - now);
    const effective = nut.map((value) => bay.viscosity + value);
    const du = transport(u, bay.speed, 1, effective);
    const dv = transport(v, 0, -1, effective);
    const dk = transport(k, kIn, 1, effective);
    const de = transport(
      epsilon,
      epsilonIn,
      1,
      nut.map((value) => bay.viscosity + value / sigmaEpsilon),
    );
    for (let c = 0; c < n; c++) {
      u[c] = (u[c] + dt * du[c]) * open[c];
      v[c] = (v[c] + dt * dv[c]) * open[c];
      const production = nut[c] * strain[c] * strain[c] * open[c];
      // The time scale of production and destruction of epsilon is that of the eddy viscosity.
      const rate = (cMu * k[c]) / Math.max(nut[c], 1e-12);
      const newK = (k[c] + dt * (dk[c] + production)) / (1 + (dt * epsilon[c]) / k[c]);
      const newEpsilon = (epsilon[c] + dt * (de[c] + c1 * production * rate)) / (1 + dt * c2 * rate);
      k[c] = Math.max(newK, 1e-3 * kIn);
      epsilon[c] = Math.max(newEpsilon, 1e-4 * epsilonIn);
      // Next to the slat the length is that of the wall layer: epsilon = C_mu^(3/4) k^(3/2) / (0.41 distance).
      if (distance[c] < 1.5 * d) epsilon[c] = (cMu ** 0.75 * k[c] ** 1.5) / (0.41 * Math.max(distance[c], 0.25 * d));
    }
    project(dt);
    now += dt;
    const probe = Math.floor((0.14 - bay.low[0]) / d) * ny + Math.floor(ny / 2);
    history.push([now, v[probe]]);
  }

  const points = [];
  const fields = { velocity: [], k: [], epsilon: [] };
  const kept = [];
  for (let c = 0; c < n; c++) {
    if (distance[c] <= 0) continue;
    kept.push(c);
    points.push(xAt(Math.floor(c / ny)), yAt(c % ny));
    fields.velocity.push(u[c], v[c], 0);
    fields.k.push(k[c]);
    fields.epsilon.push(epsilon[c]);
  }
  return { d, nx, ny, kept, points, fields, history };
}
