import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import { componentRms, divergenceFigures } from '../../src/audit/divergence-figures.js';
import { InputError } from '../../src/basis/errors.js';
import { boundaryCode, createFaceOperator, divergence, scaledAdjoint } from '../../src/divergence/face-operator.js';
import { buildPreconditioner, project, projectionLoss } from '../../src/divergence/projection.js';
import { hexBox } from '../helpers/meshes.js';
import { inner, kinds, norm, open, operatorOf, sample, wallStretch } from './meshes.js';

const turn = 2 * Math.PI;
const same = (s: number): number => s;

function noise(length: number, seed: string): Float64Array {
  const draw = seedrandom(seed);
  const normal = (): number => Math.sqrt(-2 * Math.log(1 - draw())) * Math.cos(turn * draw());
  return Float64Array.from({ length }, normal);
}

function netOf(op: Parameters<typeof divergence>[0], u: Float64Array, held?: Float64Array): Float64Array {
  const out = new Float64Array(op.cellCount);
  divergence(op, u, out, held);
  return out;
}

describe.each(kinds)('%s', (_, make, boundary) => {
  const opened = make();
  const op = operatorOf(opened, boundary);
  const volumes = opened.geometry.cellVolumes;
  const cells = op.cellCount;
  const hierarchy = buildPreconditioner(op);

  it('D^T is the adjoint of D: <D u, p> = <u, W D^T p> weighted by volume', () => {
    const u = noise(3 * cells, 'u');
    const p = noise(cells, 'p');
    const adjoint = new Float64Array(3 * cells);
    scaledAdjoint(op, p, adjoint);
    const left = netOf(op, u).reduce((sum, v, c) => sum + v * p[c]!, 0);
    const right = inner(u, adjoint, volumes);
    const size = Math.sqrt(inner(u, u, volumes) * inner(adjoint, adjoint, volumes));
    expect(Math.abs(left - right)).toBeLessThan(1e-13 * size);
  });

  it('removes W D^T p', () => {
    const p = noise(cells, 'p');
    const u = new Float64Array(3 * cells);
    scaledAdjoint(op, p, u);
    const result = project(op, u, { tolerance: 1e-10, hierarchy });
    expect(result.converged).toBe(true);
    expect(result.energyBefore).toBeGreaterThan(0);
    expect(Math.sqrt(result.energyAfter / result.energyBefore)).toBeLessThan(1e-8);
  });

  it('makes noise solenoidal once for all, takes energy only, by Pythagoras', () => {
    const u = noise(3 * cells, 'white');
    const before = u.slice();
    const result = project(op, u, { tolerance: 1e-10, hierarchy });
    expect(result.converged).toBe(true);
    expect(u).toEqual(before);
    expect(norm(netOf(op, result.velocity))).toBeLessThan(1.01e-10 * norm(netOf(op, u)));
    expect(result.energyAfter).toBeLessThan(result.energyBefore);
    expect(result.energyAfter + result.energyOfChange).toBeCloseTo(result.energyBefore, 8);
    expect(Math.abs(result.energyAfter + result.energyOfChange - result.energyBefore)).toBeLessThan(
      1e-9 * result.energyBefore,
    );
    // Idempotent: the second projection changes nothing that the first did not leave.
    const again = project(op, result.velocity, { tolerance: 1e-3, hierarchy });
    expect(Math.sqrt(again.energyOfChange / result.energyBefore)).toBeLessThan(1e-8);
    // The change is a potential's: orthogonal to the solenoidal remainder.
    const change = u.map((v, i) => v - result.velocity[i]!);
    expect(Math.abs(inner(change, result.velocity, volumes))).toBeLessThan(1e-8 * result.energyBefore);
  });

  it('never adds energy, stopped after any number of iterations', () => {
    const u = noise(3 * cells, 'stopped');
    let last = Infinity;
    for (let iterations = 1; iterations <= 5; iterations++) {
      const { energyAfter, energyBefore } = project(op, u, { tolerance: 1e-12, iterations, hierarchy });
      expect(energyAfter).toBeLessThan(energyBefore);
      expect(energyAfter).toBeLessThanOrEqual(last * (1 + 1e-12));
      last = energyAfter;
    }
  });

  it('leaves no net flux over the whole mesh but that of free boundaries', () => {
    const u = noise(3 * cells, 'net');
    let through = 0;
    for (let f = 0; f < op.freeCells.length; f++)
      for (let c = 0; c < 3; c++) through += op.freeAreas[3 * f + c]! * u[3 * op.freeCells[f]! + c]!;
    const net = netOf(op, u);
    expect(Math.abs(net.reduce((s, v) => s + v, 0) - through)).toBeLessThan(1e-12 * norm(net) * Math.sqrt(cells));
  });
});

describe('discretely solenoidal fields stay as they are', () => {
  const n = 12;
  const box = open(hexBox(n, n, n, { lengths: [turn, turn, turn], periodic: ['x', 'y', 'z'] }), ['x', 'y', 'z']);
  const op = operatorOf(box, 'wall');

  // Central differences of sin(kx) are cos(kx) sin(kh)/h: fields below satisfy the sum of the three exactly.
  it.each<[string, (x: number, y: number, z: number) => readonly [number, number, number]]>([
    [
      'Taylor-Green vortices (Taylor & Green 1937)',
      (x, y, z) => [Math.sin(x) * Math.cos(y) * Math.cos(z), -Math.cos(x) * Math.sin(y) * Math.cos(z), 0],
    ],
    [
      'Arnold-Beltrami-Childress flow',
      (x, y, z) => [
        Math.sin(z) + 0.7 * Math.cos(y),
        1.3 * Math.sin(x) + Math.cos(z),
        0.7 * Math.sin(y) + 1.3 * Math.cos(x),
      ],
    ],
    [
      'a wave across its modified wave vector (Saad et al. 2017)',
      (x, y, z) => {
        const h = turn / n;
        const s = [Math.sin(h), Math.sin(2 * h), Math.sin(3 * h)] as const;
        const phase = Math.cos(x + 2 * y + 3 * z + 0.4);
        return [s[1] * phase, -s[0] * phase, 0];
      },
    ],
  ])('%s', (_, u) => {
    const start = sample(box.geometry, u);
    const result = project(op, start);
    const moved = result.velocity.map((v, i) => v - start[i]!);
    expect(norm(start)).toBeGreaterThan(1);
    expect(norm(moved)).toBeLessThan(1e-12 * norm(start));
    expect(projectionLoss(op, start)).toBeLessThan(1e-12);
  });

  it('rigid rotation on wall-stretched bricks with free boundaries', () => {
    const bricks = open(hexBox(7, 9, 5, { stretch: [same, wallStretch, same] }));
    const free = operatorOf(bricks, 'free');
    const start = sample(bricks.geometry, (x, y, z) => [0.3 * z - 2 * y, 2 * x - 0.5 * z, 0.5 * y - 0.3 * x]);
    expect(norm(netOf(free, start))).toBeLessThan(1e-14);
    // Halves are not the linear interpolation on a stretched mesh; the rotation shows no difference, a strain does.
    const strain = sample(bricks.geometry, (x, y) => [x * y, -0.5 * y * y, 0]);
    const net = (weights: 'distance' | 'equal'): number => norm(netOf(operatorOf(bricks, 'free', weights), strain));
    expect(net('distance')).not.toBeCloseTo(net('equal'), 4);
  });

  it.each(kinds)('uniform flow through closed cells, %s', (_, make) => {
    const opened = make();
    const { geometry } = opened;
    const free = operatorOf(opened, 'free');
    const start = sample(geometry, () => [1, -2, 0.5]);
    expect(norm(netOf(free, start))).toBeLessThan(1e-14 * norm(start));
  });
});

describe('white noise', () => {
  it('on uniform bricks has scaled divergence sqrt(3/2) and loses (N - 8) / 3N of its energy', () => {
    // Each wave vector but the eight that central differences do not see loses one of three components.
    const n = 20;
    const box = open(hexBox(n, n, n, { periodic: ['x', 'y', 'z'] }), ['x', 'y', 'z']);
    const op = operatorOf(box, 'wall');
    const u = noise(3 * n ** 3, 'bricks');
    const { cellVolumes, cellCentroids } = box.geometry;
    const figures = divergenceFigures(netOf(op, u), cellVolumes, cellCentroids, componentRms(u, cellVolumes));
    expect(figures.scaledRms).toBeGreaterThan(0.98 * Math.sqrt(1.5));
    expect(figures.scaledRms).toBeLessThan(1.02 * Math.sqrt(1.5));
    const lost = projectionLoss(op, u);
    expect(Math.abs(lost - (1 - 8 / n ** 3) / 3)).toBeLessThan(0.01);
  });

  it('on warped wall-stretched hexahedra is about as far from solenoidal and loses about a third', () => {
    const box = open(hexBox(16, 16, 16, { warp: 0.1, stretch: [same, wallStretch, same], periodic: ['x', 'z'] }), [
      'x',
      'z',
    ]);
    const op = operatorOf(box, 'wall');
    const u = noise(3 * op.cellCount, 'warped');
    const { cellVolumes, cellCentroids } = box.geometry;
    const figures = divergenceFigures(netOf(op, u), cellVolumes, cellCentroids, componentRms(u, cellVolumes));
    expect(figures.scaledRms).toBeGreaterThan(1.2);
    expect(figures.scaledRms).toBeLessThan(1.5);
    const lost = projectionLoss(op, u);
    expect(lost).toBeGreaterThan(0.3);
    expect(lost).toBeLessThan(0.38);
  });
});

describe('a smooth potential field, energy varying 50-fold', () => {
  const n = 24;
  const box = open(hexBox(n, n, n, { warp: 0.15, stretch: [same, wallStretch, same], periodic: ['x', 'z'] }), [
    'x',
    'z',
  ]);
  const op = operatorOf(box, 'wall');
  const waves = Array.from({ length: 12 }, (_, i) => {
    const draw = seedrandom(`wave ${i}`);
    const K = [turn * Math.round(6 * draw() - 3), turn * (4 * draw() - 2), turn * Math.round(6 * draw() - 3)] as const;
    const b = [draw() - 0.5, draw() - 0.5, draw() - 0.5] as const;
    return { K, b, phase: turn * draw() };
  });
  // u = curl (w A): w curl A + grad w x A; w^2 is the energy's weight and vanishes at the walls.
  const weight = (y: number): readonly [number, number] => {
    const rise = Math.log(50) / 2;
    const s = Math.sin(Math.PI * y) ** 2;
    const e = Math.exp(2 * rise * y);
    return [s * e, (Math.PI * Math.sin(2 * Math.PI * y) + 2 * rise * s) * e];
  };
  const u = sample(box.geometry, (x, y, z) => {
    const [w, slope] = weight(y);
    const out: [number, number, number] = [0, 0, 0];
    for (const { K, b, phase } of waves) {
      const a = K[0] * x + K[1] * y + K[2] * z + phase;
      const c = Math.cos(a);
      const s = -Math.sin(a);
      out[0] += w * s * (K[1] * b[2] - K[2] * b[1]) + slope * c * b[2];
      out[1] += w * s * (K[2] * b[0] - K[0] * b[2]);
      out[2] += w * s * (K[0] * b[1] - K[1] * b[0]) - slope * c * b[0];
    }
    return out;
  });

  it('is projected to a scaled rms divergence of 1e-6 with less than 1 % of its energy changed', () => {
    const { cellVolumes, cellCentroids } = box.geometry;
    expect((weight(0.75)[0] / weight(0.25)[0]) ** 2).toBeGreaterThan(45);
    const scale = componentRms(u, cellVolumes);
    const before = divergenceFigures(netOf(op, u), cellVolumes, cellCentroids, scale);
    const result = project(op, u, { tolerance: 1e-6 });
    const after = divergenceFigures(netOf(op, result.velocity), cellVolumes, cellCentroids, scale);
    expect(before.scaledRms).toBeGreaterThan(1e-3);
    expect(after.scaledRms).toBeLessThan(1e-6);
    expect(result.energyOfChange / result.energyBefore).toBeLessThan(0.01);
    expect(result.energyAfter / result.energyBefore).toBeGreaterThan(0.99);
    expect(result.iterations).toBeLessThan(30);
  });
});

describe('held fluxes', () => {
  const box = open(hexBox(8, 6, 6));
  const { mesh, geometry } = box;
  const inner6 = mesh.innerFaceCount;
  const onEnd = (face: number, at: number): boolean => Math.abs(geometry.faceCentroids[3 * face]! - at) < 1e-9;
  const boundary = Uint8Array.from({ length: mesh.faceCount - inner6 }, (_, b) =>
    onEnd(inner6 + b, 0) || onEnd(inner6 + b, 1) ? boundaryCode.held : boundaryCode.wall,
  );
  const op = createFaceOperator(mesh, geometry, { boundary });
  const flux = (out: number): Float64Array =>
    Float64Array.from(op.heldFaces, (face) => (onEnd(face, 0) ? -1 : out) * Math.abs(geometry.faceAreas[3 * face]!));

  it('that do not balance are named', () => {
    expect(() => project(op, noise(3 * op.cellCount, 'a'), { heldFluxes: flux(1.1) })).toThrow(InputError);
    expect(() => project(op, noise(3 * op.cellCount, 'a'), { heldFluxes: flux(1.1) })).toThrow(/1\.000e-1 m3\/s/);
  });

  it('that balance are kept: the flow inside carries them from end to end', () => {
    const start = noise(3 * op.cellCount, 'held').map((v) => 0.2 * v);
    const held = flux(1);
    const result = project(op, start, { heldFluxes: held, tolerance: 1e-9 });
    expect(result.converged).toBe(true);
    expect(norm(netOf(op, result.velocity, held))).toBeLessThan(1e-8);
    // Through every plane across passes the flux of the ends; walls take none.
    for (let plane = 1; plane < 8; plane++) {
      let through = 0;
      for (let link = 0; link < op.linkCount; link++) {
        if (Math.abs(geometry.faceCentroids[3 * link]! - plane / 8) > 1e-9) continue;
        if (Math.abs(geometry.faceAreas[3 * link]!) < 1e-9) continue;
        for (let c = 0; c < 3; c++) {
          through += op.ownerWeights[3 * link + c]! * result.velocity[3 * op.owner[link]! + c]!;
          through += op.neighbourWeights[3 * link + c]! * result.velocity[3 * op.neighbour[link]! + c]!;
        }
      }
      expect(through).toBeCloseTo(1, 7);
    }
  });

  it('that do not balance are taken up by a free boundary', () => {
    const codes = boundary.map((code, b) => (onEnd(inner6 + b, 1) ? boundaryCode.free : code));
    const open6 = createFaceOperator(mesh, geometry, { boundary: codes });
    const held = Float64Array.from(open6.heldFaces, (face) => -Math.abs(geometry.faceAreas[3 * face]!));
    const result = project(open6, new Float64Array(3 * open6.cellCount), { heldFluxes: held, tolerance: 1e-9 });
    let out = 0;
    for (let f = 0; f < open6.freeCells.length; f++)
      out += open6.freeAreas[3 * f]! * result.velocity[3 * open6.freeCells[f]!]!;
    expect(out).toBeCloseTo(1, 7);
  });
});
