import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/basis/random.js';
import { cloudTransferRange, prepareCloudTransfer } from '../../src/transfer/cloud.js';
import { hasPythonModule, runPython } from '../helpers/python.js';

// Reference: scipy's cKDTree (inverse distance computed there) and LinearNDInterpolator on the same cloud.
const script = `
import sys, numpy as np
from scipy.interpolate import LinearNDInterpolator
from scipy.spatial import cKDTree
folder = sys.argv[1]
points = np.fromfile(folder + '/points').reshape(-1, 3)
values = np.fromfile(folder + '/values')
targets = np.fromfile(folder + '/targets').reshape(-1, 3)
d, i = cKDTree(points).query(targets, k=8)
w = 1 / d**2
(np.sum(w * values[i], axis=1) / np.sum(w, axis=1)).tofile(folder + '/idw')
LinearNDInterpolator(points, values)(targets).tofile(folder + '/linear')
`;

describe.skipIf(!hasPythonModule('scipy'))('transfer against scipy', () => {
  it.each([
    ['cube', [1, 1, 1]],
    ['layer 50:1', [1, 0.02, 1]],
  ] as const)('%s: inverse distance and linear agree to 1e-10', (name, sides) => {
    const folder = mkdtempSync(join(tmpdir(), 'eddygraft-scipy-'));
    try {
      const random = randomStream(1, `scipy ${name}`);
      const draw = (n: number): Float64Array =>
        Float64Array.from({ length: 3 * n }, (_, i) => random() * (sides[i % 3] as number));
      const points = draw(5000);
      const targets = draw(4000);
      const values = Float64Array.from(
        { length: 5000 },
        (_, i) =>
          Math.sin(5 * (points[3 * i] as number)) +
          ((points[3 * i + 1] as number) / sides[1]) ** 2 +
          (points[3 * i + 2] as number),
      );
      for (const [file, data] of Object.entries({ points, values, targets })) {
        writeFileSync(join(folder, file), new Uint8Array(data.buffer));
      }
      runPython(['-c', script, folder]);
      const read = (file: string): Float64Array => {
        const bytes = readFileSync(join(folder, file));
        return new Float64Array(
          bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength) as ArrayBuffer,
        );
      };
      const worst: Record<string, number> = {};
      for (const [method, reference] of [
        ['inverse-distance', read('idw')],
        ['linear', read('linear')],
      ] as const) {
        const out = {
          fields: [new Float64Array(4000)],
          outside: new Uint8Array(4000),
          distance: new Float64Array(4000),
        };
        cloudTransferRange(
          prepareCloudTransfer(points, { method }),
          [{ components: 1, values }],
          targets,
          0,
          4000,
          out,
        );
        let compared = 0;
        worst[method] = 0;
        for (let i = 0; i < 4000; i += 1) {
          const wanted = reference[i] as number;
          if (method === 'linear') expect(Number.isNaN(wanted)).toBe(out.outside[i] !== 0);
          if (Number.isNaN(wanted)) continue;
          compared += 1;
          worst[method] = Math.max(worst[method], Math.abs((out.fields[0]?.[i] as number) - wanted));
        }
        expect(compared).toBeGreaterThan(2500);
        expect(worst[method]).toBeLessThan(1e-10);
      }
      console.log(`${name}: largest difference to scipy`, worst);
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  });
});
