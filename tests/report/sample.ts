import { compareHistories, followUp } from '../../src/appraisal/followup.js';
import { weightedHistogram } from '../../src/appraisal/histogram.js';
import { readHistory } from '../../src/appraisal/history.js';
import { planMonitors } from '../../src/appraisal/monitors.js';
import { worstRegions } from '../../src/appraisal/regions.js';
import { appraiseResolution, summariseResolution } from '../../src/appraisal/resolution.js';
import { courantRates, planRun } from '../../src/appraisal/run-plan.js';
import { appraisalReport } from '../../src/report/appraisal-report.js';
import type { RunReportData } from '../../src/report/audit-data.js';
import { auditReport } from '../../src/report/audit-report.js';
import { gridRatioPicture, pointsOnSlice, sharePicture, slicePicture } from '../../src/report/figures.js';
import { followupReport } from '../../src/report/followup-report.js';
import type { PictureBlock, ReportPage } from '../../src/report/page.js';
import { runReport } from '../../src/report/run-report.js';
import { sampleSlice, sliceMesh, sliceOutline } from '../../src/report/slices.js';
import { brickMesh } from '../appraisal/brick.js';
import { ornsteinUhlenbeck } from '../appraisal/signals.js';

/** An invented duct with a wake behind x = 0.6 m; planes are denser in the wake. */
export function ductCase(nx: number, ny: number, nz: number) {
  const graded = (low: number, high: number, n: number, power: number): number[] =>
    Array.from({ length: n + 1 }, (_, i) => low + (high - low) * (i / n) ** power);
  const { mesh, geometry } = brickMesh(graded(0, 4, nx, 1.3), graded(0, 1, ny, 1), graded(0, 0.4, nz, 1));
  const n = mesh.cellCount;
  const x = (i: number, a: number): number => geometry.cellCentroids[3 * i + a] as number;
  const wake = (i: number): number =>
    x(i, 0) < 0.6 ? 0 : Math.exp(-(((x(i, 1) - 0.55) / (0.08 + 0.05 * x(i, 0))) ** 2) - (x(i, 0) - 0.6) / 4);
  const k = Float64Array.from({ length: n }, (_, i) => 0.02 + 2.5 * wake(i));
  const epsilon = k.map((value, i) => value ** 1.5 / (0.08 + 0.06 * x(i, 0)));
  const mean = new Float64Array(3 * n);
  const velocity = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) {
    mean[3 * i] = 10 - 6 * wake(i);
    const swing = Math.sqrt((2 / 3) * (k[i] as number));
    for (let a = 0; a < 3; a++) {
      const phase = 9 * x(i, (a + 1) % 3) + 23 * x(i, (a + 2) % 3) + 11 * a;
      velocity[3 * i + a] =
        (mean[3 * i + a] as number) + swing * (Math.sin(phase * 2) + Math.sin(5.3 * phase + 7 * x(i, 0)));
    }
  }
  const walls: number[] = [];
  for (let f = mesh.innerFaceCount; f < mesh.faceCount; f++) {
    const y = geometry.faceCentroids[3 * f + 1] as number;
    if (y === 0 || y === 1) walls.push(f);
  }
  return { mesh, geometry, k, epsilon, mean, velocity, walls: Int32Array.from(walls) };
}

export const hostile = '<img src=x onerror="alert(1)"> & "quoted" </script><script>alert(2)</script>';

/** Page of an appraisal of the duct. */
export function sampleAppraisal(title = 'Louvre bay, invented: medium mesh', zone = 'wake'): ReportPage {
  const duct = ductCase(72, 36, 12);
  const { mesh, geometry, k, epsilon, mean } = duct;
  const n = mesh.cellCount;
  const input = { volumes: geometry.cellVolumes, k, epsilon, nu: 1.5e-5 };
  const fields = appraiseResolution(input);
  const summary = summariseResolution(input, fields);
  const slice = sliceMesh(mesh, 'z', 0.21);
  const outline = { walls: sliceOutline(mesh, slice, duct.walls), boundary: sliceOutline(mesh, slice) };
  const rates = courantRates(mesh, geometry, duct.velocity);
  const plan = planRun({
    rates,
    centroids: geometry.cellCentroids,
    volumes: geometry.cellVolumes,
    velocity: mean,
    k,
    epsilon,
    secondsPerStep: 1.2,
  });
  const monitors = planMonitors(
    {
      centroids: geometry.cellCentroids,
      velocity: mean,
      k,
      epsilon,
      cellWidth: fields.cellWidth,
      direction: plan.bulkDirection,
    },
    { wake: 8, points: [{ name: zone, at: [2, 0.3, 0.2] }] },
  );
  const zoneOf = Int32Array.from({ length: n }, (_, i) => ((geometry.cellCentroids[3 * i] as number) < 0.6 ? 0 : 1));
  return appraisalReport({
    title,
    subtitle: 'precursor.vtu on target.vtu',
    wantedShare: 0.8,
    summary,
    zones: [
      { name: 'approach', summary: summariseResolution(input, fields, zoneOf, 0) },
      { name: zone, summary: summariseResolution(input, fields, zoneOf, 1) },
    ],
    regions: worstRegions(input, fields, geometry.cellCentroids),
    gridRatioHistogram: weightedHistogram(fields.gridRatio, geometry.cellVolumes, { scale: 'log' }),
    shareHistogram: weightedHistogram(fields.share, geometry.cellVolumes, { range: [0, 1] }),
    courantHistogram: weightedHistogram(
      rates.map((r) => r * plan.timeStep),
      undefined,
    ),
    plan,
    monitors,
    pictures: [
      gridRatioPicture(slice, sampleSlice(slice, fields.gridRatio), outline),
      sharePicture(slice, sampleSlice(slice, fields.share), 0.8, outline),
    ],
    monitorMap: slicePicture(slice, sampleSlice(slice, k), {
      title: 'Monitors on k',
      quantity: 'TurbulentEnergyKinetic',
      unit: 'm2/s2',
      points: pointsOnSlice(slice, monitors),
      ...outline,
    }),
    assumptions: ['Lengths follow L = k^(3/2) / epsilon.', 'nu = 1.5e-5 m2/s was given.'],
    remarks: [],
    footer: ['eddygraft 0.1.0', 'seed 20261201'],
  });
}

/** Plain data of a run page on the duct. */
export function sampleRunData(
  title = 'Louvre bay, invented: start',
  field = 'VelocityX',
  duct = ductCase(72, 36, 12),
  pixels = 480,
): RunReportData {
  const { mesh, geometry, k, epsilon, mean, velocity } = duct;
  const slice = sliceMesh(mesh, 'z', 0.21, pixels);
  const outline = { walls: sliceOutline(mesh, slice, duct.walls), boundary: sliceOutline(mesh, slice) };
  const picture = (t: string, values: Float32Array, diverging: boolean): PictureBlock =>
    slicePicture(slice, values, {
      title: t,
      quantity: field,
      unit: 'm/s',
      ramp: diverging ? 'diverging' : 'sequential',
      ...outline,
    });
  const before = sampleSlice(slice, mean, 3, 0);
  const after = sampleSlice(slice, velocity, 3, 0);
  const waves = Array.from({ length: 60 }, (_, i) => 5 * 1.08 ** i);
  const model = waves.map((w) => 0.3 * (w / 12) ** 4 * (1 + (w / 12) ** 2) ** (-17 / 6));
  const y = Array.from({ length: 41 }, (_, i) => i / 40);
  const bump = y.map((v) => 1.7 * Math.exp(-(((v - 0.55) / 0.2) ** 2)));
  const scaled = Float64Array.from(
    { length: mesh.cellCount },
    (_, i) => 0.02 + 0.2 * Math.abs(Math.sin(12.9898 * i) * Math.cos(78.233 * i)),
  );
  const rates = courantRates(mesh, geometry, velocity);
  return {
    title,
    subtitle: 'precursor.vtu on target.vtu, 640 modes',
    checks: [
      { name: 'divergence', limit: 1e-3, value: 2.4e-4, passed: true, meaning: 'scaled rms divergence after control' },
    ],
    steps: [
      'Fields were transferred linearly; 3.1 % of the cells lie outside the precursor and take the nearest value.',
      'Fluctuations: 40 shells of 16 directions, seed 20261201.',
      'Divergence control: projection to 1e-6 in 41 iterations.',
    ],
    audit: {
      cells: mesh.cellCount,
      volume: 1.6,
      energy: { wanted: 0.71, resolvable: 0.55, recovered: 0.548, modelled: 0.16 },
      divergence: {
        before: { scaledRms: 0.081, scaledP99: 0.22, scaledMax: 0.9 },
        after: { scaledRms: 2.4e-4, scaledP99: 7e-4, scaledMax: 4e-3 },
      },
      projectionLoss: 0.0012,
      covariance: [0.42, -0.05, 0.001, 0.33, 0, 0.35],
      covarianceWanted: [0.41, -0.06, 0, 0.33, 0, 0.36],
      velocityMax: 17.2,
      timeStepForCourantOne: 0.0016,
    },
    spectrum: {
      waveNumber: waves,
      measured: model.map(
        (e, i) => e * (1 + 0.25 * Math.sin(3 * i)) * (waves[i]! > 150 ? Math.exp(-(waves[i]! - 150) / 60) : 1),
      ),
      model: { waveNumber: waves, density: model },
      cutoffs: [
        { value: 150, label: 'seeded: 3 cells' },
        { value: 225, label: 'cut-off pi / CellWidth' },
      ],
      caption: 'Along x through the wake.',
    },
    profiles: [
      {
        title: 'Wanted and recovered along y at x = 2 m',
        caption: 'Means over z.',
        coordinate: 'y',
        unit: 'm',
        quantityUnit: 'm2/s2',
        curves: [
          { name: 'k', x: y, wanted: bump, recovered: bump.map((b, i) => b * (1 + 0.04 * Math.sin(9 * i))) },
          {
            name: 'uv',
            x: y,
            wanted: bump.map((b) => -0.2 * b),
            recovered: bump.map((b, i) => -0.2 * b * (1 + 0.1 * Math.sin(5 * i))),
          },
        ],
      },
    ],
    correlations: [{ name: 'x', longitudinal: 0.081, transverse: 0.043 }],
    divergenceBefore: weightedHistogram(scaled, geometry.cellVolumes, { scale: 'log', range: [1e-6, 1] }),
    divergenceAfter: weightedHistogram(
      scaled.map((s) => s * 3e-3),
      geometry.cellVolumes,
      { scale: 'log', range: [1e-6, 1] },
    ),
    operator: 'net outward flux over linearly interpolated faces',
    courant: {
      histogram: weightedHistogram(
        rates.map((r) => r * 1e-3),
        undefined,
      ),
      timeStep: 1e-3,
    },
    before: [
      picture(`${field}, transferred mean`, before, false),
      slicePicture(slice, sampleSlice(slice, k), {
        title: 'k of the precursor',
        quantity: 'TurbulentEnergyKinetic',
        unit: 'm2/s2',
        ...outline,
      }),
    ],
    pictures: [
      picture(`${field}, start`, after, false),
      picture(
        `${field}, fluctuation`,
        after.map((v, i) => v - (before[i] as number)),
        true,
      ),
    ],
    assumptions: [
      'Length from k and epsilon; L11 = 0.39 L because nu is not known.',
      `Rename: ${field} stands for VelocityX.`,
    ],
    remarks: ['epsilon was missing in 12 cells.'],
    files: [
      { role: 'precursor', path: 'precursor.vtu', sha256: '9f2c5b7d0f6e1a'.padEnd(64, '0') },
      { role: 'start', path: 'louvre-start.vtu' },
    ],
    plan: planRun({
      rates,
      centroids: geometry.cellCentroids,
      volumes: geometry.cellVolumes,
      velocity: mean,
      k,
      epsilon,
    }),
    seconds: { read: 0.4, transfer: 1.2, fluctuations: 8.8, projection: 3.1 },
    footer: ['eddygraft 0.1.0', 'seed 20261201'],
  };
}

export function sampleRun(title?: string, field?: string): ReportPage {
  return runReport(sampleRunData(title, field));
}

/** Page of an audit of the duct. */
export function sampleAudit(): ReportPage {
  const {
    checks: _checks,
    steps: _steps,
    files: _files,
    before: _before,
    plan: _plan,
    seconds: _seconds,
    ...audit
  } = sampleRunData('Audit of a start, invented');
  return auditReport(audit);
}

/** Page of a follow-up of two invented histories. */
export function sampleFollowup(): ReportPage {
  const n = 2048;
  const time = Float64Array.from({ length: n }, (_, i) => i * 1e-3);
  const readings = ['one.csv', 'two.csv'].map((file) => {
    const drag = ornsteinUhlenbeck(n, 1e-3, 0.02, 0.05, file).map((x, i) => 1.2 + x + Math.exp(-i / 120));
    const u = ['x', 'y', 'z'].map((c) => ornsteinUhlenbeck(n, 1e-3, 0.01, 1, file + c));
    const rows = Array.from(time, (t, i) => [t, drag[i], 10 + u[0]![i]!, u[1]![i], u[2]![i]].join(','));
    const history = readHistory(`Time,Drag,p.VelocityX,p.VelocityY,p.VelocityZ\n${rows.join('\n')}`, file);
    return { history, reading: followUp(history, { cellWidth: 0.02 }) };
  });
  return followupReport({
    title: 'Follow-up of two histories, invented',
    readings: readings.map((r) => r.reading),
    traces: readings.map((r) => ({
      file: r.history.file,
      name: 'Drag',
      time,
      values: r.history.signals.get('Drag')!,
      transientEnd: 0.3,
    })),
    comparison: compareHistories(readings.map((r) => r.reading)),
    meanError: 0.01,
    varianceError: 0.05,
    assumptions: ['Cell width 20 mm at the probe.'],
    footer: ['eddygraft 0.1.0'],
  });
}
