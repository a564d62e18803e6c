import { InputError } from '../basis/errors.js';
import { randomStream } from '../basis/random.js';
import { type ModeTable, phaseNumbers, vectorNumbers } from '../kernels/mode-block.js';
import { type Frame, latticeFrame, snapInside, snapKeepingLength } from './lattice.js';
import { polarisationWeights } from './polarisation.js';

/** The global modes, the same for every cell: from the seed alone. */
export interface ModeSet {
  readonly shells: number;
  /** Modes a shell. */
  readonly directions: number;
  /** shells + 1 rising wave numbers, 1/m. */
  readonly edges: Float64Array;
  /** Representative wave number of each shell, 1/m. */
  readonly waves: Float64Array;
  /** 3 x n wave vectors K, 1/m; shell s holds modes s D ... (s + 1) D - 1. */
  readonly waveVectors: Float64Array;
  /** 3 x n unit polarisations a, K . a = 0. */
  readonly polarisations: Float64Array;
  /** n, radians. */
  readonly phases: Float64Array;
  /** n, mean 1 in each shell: with them every shell alone is exactly isotropic. */
  readonly shares: Float64Array;
  /** Smallest and largest |K| of each shell. */
  readonly shortest: Float64Array;
  readonly longest: Float64Array;
  /** Shells whose modes could not be weighted to exact isotropy. */
  readonly anisotropicShells: number;
}

export interface ModeOptions {
  readonly seed: number;
  readonly shells: number;
  readonly directions: number;
  /** Smallest and largest wave number, 1/m. */
  readonly minimum: number;
  readonly maximum: number;
  /** Periodic translations, metres, mutually perpendicular. */
  readonly periods: readonly (readonly [number, number, number])[];
  /** Stretching of eddies along x, y, z (default 1 1 1): wave vectors are divided by it. */
  readonly stretch?: readonly [number, number, number];
}

type Vector = [number, number, number];

function randomFrame(random: () => number): [Vector, Vector, Vector] {
  // Uniform rotation from a uniform unit quaternion (Shoemake 1992, Graphics Gems III).
  const u = random();
  const a = 2 * Math.PI * random();
  const b = 2 * Math.PI * random();
  const p = Math.sqrt(1 - u);
  const q = Math.sqrt(u);
  const [x, y, z, w] = [p * Math.sin(a), p * Math.cos(a), q * Math.sin(b), q * Math.cos(b)];
  return [
    [1 - 2 * (y * y + z * z), 2 * (x * y + z * w), 2 * (x * z - y * w)],
    [2 * (x * y - z * w), 1 - 2 * (x * x + z * z), 2 * (y * z + x * w)],
    [2 * (x * z + y * w), 2 * (y * z - x * w), 1 - 2 * (x * x + y * y)],
  ];
}

/** Edges that are log-spaced, or lie between lattice shells where three periods leave few wave vectors. */
function shellEdges(options: ModeOptions, frame: Frame): Float64Array {
  const { shells, minimum, maximum } = options;
  if (frame.periodic < 3) {
    return Float64Array.from({ length: shells + 1 }, (_, s) => minimum * (maximum / minimum) ** (s / shells));
  }
  const unit = Math.max(...frame.units);
  const last = Math.max(1.5, Math.round(maximum / unit - 0.5) + 0.5);
  const edges = [Math.max(0.5, Math.round(minimum / unit - 0.5) + 0.5)];
  for (let s = 1; s <= shells && edges.at(-1)! < last; s++) {
    const here = edges.at(-1)!;
    const wanted = here * (last / here) ** (1 / (shells - s + 1));
    edges.push(Math.min(last, Math.max(here + 1, Math.round(wanted - 0.5) + 0.5)));
  }
  return Float64Array.from(edges, (e) => e * unit);
}

/** Unit vector along p x q. */
function cross(p: Vector, q: Vector): Vector {
  const c: Vector = [p[1] * q[2] - p[2] * q[1], p[2] * q[0] - p[0] * q[2], p[0] * q[1] - p[1] * q[0]];
  const size = Math.hypot(...c);
  return [c[0] / size, c[1] / size, c[2] / size];
}

function perpendicular(k: Vector, wanted: Vector): Vector {
  const k2 = k[0] ** 2 + k[1] ** 2 + k[2] ** 2;
  let a = wanted;
  for (let attempt = 0; attempt < 4; attempt++) {
    const along = (k[0] * a[0] + k[1] * a[1] + k[2] * a[2]) / k2;
    const rest: Vector = [a[0] - along * k[0], a[1] - along * k[1], a[2] - along * k[2]];
    const length = Math.hypot(...rest);
    // Twice, so that K . a = 0 holds to rounding even after heavy cancellation.
    if (length > 0.05) {
      const unit: Vector = [rest[0] / length, rest[1] / length, rest[2] / length];
      const left = (k[0] * unit[0] + k[1] * unit[1] + k[2] * unit[2]) / k2;
      return [unit[0] - left * k[0], unit[1] - left * k[1], unit[2] - left * k[2]];
    }
    a = [wanted[1], wanted[2], wanted[0]].map((v, i) => v + (i === attempt ? 1 : 0)) as Vector;
  }
  throw new Error('No direction perpendicular to a wave vector was found.');
}

/**
 * Draws the modes. Directions come in triads e1, e2, e3 with polarisations e2, e3, e1, which are isotropic together;
 * what snapping to the periodic lattice disturbs is put right by weights within the shell.
 *
 * @throws InputError for numbers of shells or directions out of range, or periods that are not perpendicular
 */
export function createModes(options: ModeOptions): ModeSet {
  const { directions, seed } = options;
  if (!(Number.isInteger(options.shells) && options.shells >= 1 && Number.isInteger(directions) && directions >= 3)) {
    throw new InputError({
      place: 'fluctuations.shells, fluctuations.directions',
      cause: `${options.shells} shells of ${directions} directions cannot be used`,
      remedy: 'give at least 1 shell and 3 directions, whole numbers',
    });
  }
  const frame = latticeFrame(options.periods);
  const edges = shellEdges(options, frame);
  const shells = edges.length - 1;
  const waves = Float64Array.from({ length: shells }, (_, s) => Math.sqrt(edges[s]! * edges[s + 1]!));
  const n = shells * directions;
  const waveVectors = new Float64Array(3 * n);
  const polarisations = new Float64Array(3 * n);
  const phases = new Float64Array(n);
  const shares = new Float64Array(n).fill(1);
  const shortest = new Float64Array(shells).fill(Infinity);
  const longest = new Float64Array(shells);
  const turn = randomStream(seed, 'modes/directions');
  const radius = randomStream(seed, 'modes/radii');
  const phase = randomStream(seed, 'modes/phases');
  const stretch = options.stretch ?? [1, 1, 1];
  let anisotropicShells = 0;
  // Directions that do not fill a triad go on in the next shell, so that neighbouring shells complete each other.
  let spare: { axes: [Vector, Vector, Vector]; used: number } | undefined;
  const triads = Math.floor(directions / 3);
  // Wave vectors used in the shell: the polarisation of the first use, or null after the second.
  const met = new Map<string, Vector | null>();
  for (let s = 0; s < shells; s++) {
    const place = (mode: number, d: Vector, a: Vector): void => {
      const stretched: Vector = [d[0] / stretch[0], d[1] / stretch[1], d[2] / stretch[2]];
      const length = Math.hypot(...stretched);
      const unit: Vector = [stretched[0] / length, stretched[1] / length, stretched[2] / length];
      const unstretched: Vector = [a[0] * stretch[0], a[1] * stretch[1], a[2] * stretch[2]];
      const size = Math.hypot(...unstretched);
      let polarisation: Vector = [unstretched[0] / size, unstretched[1] / size, unstretched[2] / size];
      let k: Vector;
      if (frame.periodic < 3) k = snapKeepingLength(frame, unit, waves[s]! * length);
      else {
        // A wave vector met twice in a shell would interfere with itself: another is sought as long as there may be one,
        // then one met once whose second polarisation is free.
        for (let attempt = 0; ; attempt++) {
          k = snapInside(frame, unit, edges[s]! * length, edges[s + 1]! * length, radius, attempt);
          const key = latticeKey(k);
          const earlier = met.get(key);
          if (attempt < 60 ? earlier !== undefined : attempt < 160 && earlier === null) continue;
          if (earlier) polarisation = cross(k, earlier);
          met.set(key, earlier === undefined ? perpendicular(k, polarisation) : null);
          break;
        }
      }
      const p = perpendicular(k, polarisation);
      for (let c = 0; c < 3; c++) {
        waveVectors[3 * mode + c] = k[c]!;
        polarisations[3 * mode + c] = p[c]!;
      }
      const magnitude = Math.hypot(...k);
      shortest[s] = Math.min(shortest[s]!, magnitude);
      longest[s] = Math.max(longest[s]!, magnitude);
      phases[mode] = 2 * Math.PI * phase();
    };
    const first = s * directions;
    for (let attempt = 0; ; attempt++) {
      shortest[s] = Infinity;
      longest[s] = 0;
      met.clear();
      for (let t = 0; t < triads; t++) {
        const e = randomFrame(turn);
        for (let c = 0; c < 3; c++) place(first + 3 * t + c, e[c]!, e[(c + 1) % 3]!);
      }
      for (let m = 3 * triads; m < directions; m++) {
        if (spare === undefined || spare.used === 3) spare = { axes: randomFrame(turn), used: 0 };
        place(first + m, spare.axes[spare.used]!, spare.axes[(spare.used + 1) % 3]!);
        spare.used++;
      }
      if (isotropicShares(polarisations, shares, first, directions)) break;
      if (attempt === 20) {
        anisotropicShells++;
        break;
      }
    }
  }
  return {
    shells,
    directions,
    edges,
    waves,
    waveVectors,
    polarisations,
    phases,
    shares,
    shortest,
    longest,
    anisotropicShells,
  };
}

/** The same for K and -K. */
function latticeKey(k: Vector): string {
  const first = k.find((c) => Math.abs(c) > 1e-9 * Math.hypot(...k)) ?? 0;
  return k.map((c) => (first < 0 ? -c : c).toFixed(6).replace('-0.000000', '0.000000')).join();
}

/** Weights within a shell that make its second moment isotropic; false when they would have to be too uneven. */
function isotropicShares(polarisations: Float64Array, shares: Float64Array, first: number, count: number): boolean {
  const uniform = new Float64Array(count).fill(1 / count);
  const found = polarisationWeights(polarisations.subarray(3 * first, 3 * (first + count)), uniform, [
    1 / 3,
    0,
    0,
    1 / 3,
    0,
    1 / 3,
  ]);
  if (found === undefined || Math.max(...found.weights) > 8) {
    shares.fill(1, first, first + count);
    return false;
  }
  shares.set(found.weights, first);
  return true;
}

/** Constants of the modes for the kernels; `shortestWave` in cells scales the cut-off t2 = K . H K (cells / 2 pi)^2. */
export function modeTable(modes: ModeSet, cells: number): ModeTable {
  const n = modes.shells * modes.directions;
  const phases = new Float64Array(phaseNumbers * n);
  const vectors = new Float32Array(vectorNumbers * n);
  const scale = (cells / (2 * Math.PI)) ** 2;
  for (let i = 0; i < n; i++) {
    const k = modes.waveVectors.subarray(3 * i, 3 * i + 3);
    const a = modes.polarisations.subarray(3 * i, 3 * i + 3);
    const k2 = k[0]! ** 2 + k[1]! ** 2 + k[2]! ** 2;
    const root = Math.sqrt(modes.shares[i]!);
    for (let c = 0; c < 3; c++) {
      phases[4 * i + c] = k[c]! / (2 * Math.PI);
      const p = (c + 1) % 3;
      const q = (c + 2) % 3;
      vectors[vectorNumbers * i + c] = root * a[c]!;
      vectors[vectorNumbers * i + 3 + c] = (root * (k[p]! * a[q]! - k[q]! * a[p]!)) / k2;
    }
    phases[4 * i + 3] = modes.phases[i]! / (2 * Math.PI);
    let c = vectorNumbers * i + 6;
    for (let p = 0; p < 3; p++)
      for (let q = p; q < 3; q++) {
        const twice = p === q ? 1 : 2;
        vectors[c] = twice * k[p]! * k[q]! * scale;
        vectors[c + 6] = twice * a[p]! * a[q]!;
        c++;
      }
  }
  return { count: n, phases, vectors };
}
