// Grades of divergence control side by side on a turbulent channel at Re_tau 550 (profiles of
// tests/reference/channel-profiles.ts), 48 x 64 x 48 wall-refined hexahedra warped by 10 %, k and all stresses wanted:
// node tests/bench/control-table.mjs [seeds] [warp] [dist]
import { readFileSync } from 'node:fs';
import { parse } from 'yaml';
import { loader, openBox, refined, whiteNoise } from './box-mesh.mjs';

const seeds = Number(process.argv[2] ?? 3);
const warp = Number(process.argv[3] ?? 0.1);
const load = loader(process.argv[4] ?? 'dist');
const { createFaceOperator, divergence } = await load('divergence/face-operator.js');
const { buildPreconditioner, project, projectionLoss } = await load('divergence/projection.js');
const { componentRms, divergenceFigures } = await load('audit/divergence-figures.js');
const { prepareFluctuations } = await load('turbulence/prepare.js');
const { weighRange } = await load('turbulence/weights.js');
const { expectedRange, compensate } = await load('turbulence/compensate.js');
const { synthesiseRange } = await load('turbulence/synthesis.js');
const { calibrate } = await load('turbulence/calibrate.js');
const { applyMultiplierRange } = await load('turbulence/multiplier-field.js');
const { localScales } = await load('turbulence/scales.js');
const { vonKarmanPao } = await load('turbulence/spectra.js');
const { wallRamp } = await load('turbulence/zones.js');

const source = readFileSync(new URL('../reference/channel-profiles.ts', import.meta.url), 'utf8');
// The object literal of the profile reads as a YAML flow map.
const channel550 = parse(/channel550: ChannelProfile = (\{.*?\n\});/s.exec(source)[1]);

const counts = [48, 64, 48];
const [nx, ny] = counts;
const box = await openBox(load, counts, [2 * Math.PI, 2, Math.PI], refined(2), warp);
const { mesh, geometry, periodic } = box;
const volumes = geometry.cellVolumes;
const n = mesh.cellCount;
const { rows, reynolds } = channel550;
const k = new Float64Array(n);
const epsilon = new Float64Array(n);
const covariance = new Float64Array(6 * n);
const velocityGradient = new Float64Array(9 * n);
const wallDistance = new Float64Array(n);
for (let c = 0; c < n; c++) {
  const y = geometry.cellCentroids[3 * c + 1];
  const side = y < 1 ? 1 : -1;
  const d = Math.min(y, 2 - y);
  let r = 0;
  while (r < rows.length - 2 && rows[r + 1][0] < d) r++;
  const t = Math.min(1, (d - rows[r][0]) / (rows[r + 1][0] - rows[r][0]));
  const at = (column) => (1 - t) * rows[r][column] + t * rows[r + 1][column];
  covariance.set([at(2) ** 2, -side * at(5), 0, at(3) ** 2, 0, at(4) ** 2], 6 * c);
  k[c] = 0.5 * (covariance[6 * c] + covariance[6 * c + 3] + covariance[6 * c + 5]);
  epsilon[c] = at(7) * reynolds;
  velocityGradient[9 * c + 1] = side * at(6) * reynolds;
  wallDistance[c] = d;
}
const scales = localScales(
  { cells: n, k, epsilon, viscosity: 1 / reynolds, wallDistance, velocityGradient },
  { spectrum: vonKarmanPao, subgrid: 'model', wallLengthFactor: 2.5 },
);
const seeding = wallRamp(wallDistance, scales.integralScale);
const op = createFaceOperator(mesh, geometry, { periodic });
const hierarchy = buildPreconditioner(op);

const layerOf = (c) => Math.floor(c / nx) % ny;
function planeMeans(value) {
  const sum = new Float64Array(ny);
  const weight = new Float64Array(ny);
  for (let c = 0; c < n; c++) {
    sum[layerOf(c)] += volumes[c] * value(c);
    weight[layerOf(c)] += volumes[c];
  }
  return sum.map((s, l) => s / weight[l]);
}
const yPlus = planeMeans((c) => wallDistance[c] * reynolds);

function synthesis(seed, grade, compensated) {
  const plan = prepareFluctuations({
    ...box,
    scales,
    covariance,
    seeding,
    options: { seed, shells: 40, directions: 16, wavelengthCells: 3, spectrum: vonKarmanPao, grade },
  });
  weighRange(plan, 0, n);
  if (compensated) {
    const expected = new Float32Array(10 * n);
    expectedRange(plan, 0, n, expected);
    compensate(plan, expected);
  }
  const out = { potential: new Float64Array(3 * n), velocity: new Float64Array(3 * n) };
  synthesiseRange(plan, 0, n, out);
  return { plan, ...out };
}

const energyAt = (u) => (c) => (u[3 * c] ** 2 + u[3 * c + 1] ** 2 + u[3 * c + 2] ** 2) / 2;

/** Velocity itself scaled plane by plane to the wanted energy: what breaks the divergence. */
function rescaled(u, wanted) {
  const found = planeMeans(energyAt(u));
  const aim = planeMeans((c) => wanted[c]);
  return u.map((v, i) => v * Math.sqrt(aim[layerOf(Math.floor(i / 3))] / found[layerOf(Math.floor(i / 3))]));
}

function figuresOf(u, wanted) {
  const scale = componentRms(u, volumes);
  const net = new Float64Array(n);
  divergence(op, u, net);
  const found = planeMeans(energyAt(u));
  const aim = planeMeans((c) => wanted[c]);
  let energy = 0;
  let whole = 0;
  let stress = 0;
  for (let c = 0; c < n; c++) {
    energy += volumes[c] * energyAt(u)(c);
    whole += volumes[c] * wanted[c];
  }
  let worst = 0;
  let squares = 0;
  let count = 0;
  for (let l = 0; l < ny; l++) {
    if (yPlus[l] <= 5) continue;
    worst = Math.max(worst, Math.abs(found[l] / aim[l] - 1));
    squares += (found[l] / aim[l] - 1) ** 2;
    count++;
  }
  // Shear stress, its share of k wanted and found, over the half channel where it is one-signed.
  let shear = 0;
  for (let c = 0; c < n; c++) {
    const side = geometry.cellCentroids[3 * c + 1] < 1 ? 1 : -1;
    shear -= side * volumes[c] * u[3 * c] * u[3 * c + 1];
    stress -= (side * volumes[c] * covariance[6 * c + 1] * wanted[c]) / k[c];
  }
  const { scaledRms, scaledP99 } = divergenceFigures(net, volumes, geometry.cellCentroids, scale);
  const loss = projectionLoss(op, u, hierarchy);
  return [scaledRms, scaledP99, loss, energy / whole, Math.sqrt(squares / count), worst, shear / stress];
}

const rowsOut = new Map();
function note(name, figures) {
  const list = rowsOut.get(name) ?? [];
  list.push(figures);
  rowsOut.set(name, list);
}
for (let seed = 1; seed <= seeds; seed++) {
  const modes = synthesis(seed, 'modes', false);
  const { wanted } = modes.plan;
  const noise = whiteNoise(3 * n, `noise ${seed}`).map((v, i) => v * Math.sqrt((2 / 3) * wanted[Math.floor(i / 3)]));
  note('white noise shaped to k', figuresOf(noise, wanted));
  note('white noise, each plane scaled to k', figuresOf(rescaled(noise, wanted), wanted));
  const noiseProjected = project(op, noise, { hierarchy }).velocity;
  note('white noise, projected', figuresOf(noiseProjected, wanted));
  note('modes', figuresOf(modes.velocity, wanted));
  note('modes, each plane scaled to k', figuresOf(rescaled(modes.velocity, wanted), wanted));
  const plain = synthesis(seed, 'potential', false);
  note('potential, uncalibrated', figuresOf(plain.velocity, wanted));
  note('projection, uncalibrated', figuresOf(project(op, plain.velocity, { hierarchy }).velocity, wanted));
  const made = synthesis(seed, 'potential', true);
  note('potential, compensated in expectation', figuresOf(made.velocity, made.plan.wanted));
  const { field } = calibrate({
    ...made,
    volumes,
    periods: periodic.periods,
    integralScale: scales.integralScale,
  });
  applyMultiplierRange(field, geometry.cellCentroids, made.potential, made.velocity, 0, n);
  note('potential, calibrated', figuresOf(made.velocity, made.plan.wanted));
  note('projection, calibrated', figuresOf(project(op, made.velocity, { hierarchy }).velocity, made.plan.wanted));
}

const percent = (x) => `${(100 * x).toPrecision(2)} %`;
process.stdout.write(
  `${seeds} seeds, means\n\n| start | scaled divergence rms | p99 | projectionLoss | energy / wanted | plane averages of k, rms error beyond y+ 5 | worst | -uv / wanted |\n| --- | --- | --- | --- | --- | --- | --- | --- |\n`,
);
for (const [name, list] of rowsOut) {
  const [rms, p99, loss, energy, planes, worst, shear] = list[0].map(
    (_, i) => list.reduce((sum, figures) => sum + figures[i], 0) / list.length,
  );
  const lossText = loss < 1e-8 ? 'none' : percent(loss);
  process.stdout.write(
    `| ${[name, rms.toPrecision(2), p99.toPrecision(2), lossText, energy.toFixed(3), percent(planes), percent(worst), shear.toFixed(2)].join(' | ')} |\n`,
  );
}
