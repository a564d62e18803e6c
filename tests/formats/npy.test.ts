import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { InputError } from '../../src/basis/errors.js';
import { readNpy, writeNpy } from '../../src/formats/npy.js';
import { hasPythonModule, runPython } from '../helpers/python.js';

const folder = mkdtempSync(join(tmpdir(), 'npy-'));
afterAll(() => rmSync(folder, { recursive: true }));

describe('NPY files', () => {
  it('reads what it writes, for every type and shape', async () => {
    for (const values of [Float64Array.of(1.5, -2, Math.PI), Float32Array.of(1, 2, 3), Int32Array.of(-7, 8, 9)]) {
      for (const shape of [[3], [3, 1], [1, 3]]) {
        const path = join(folder, 'a.npy');
        await writeNpy(path, { shape, values });
        expect(await readNpy(path)).toEqual({ shape, values });
      }
    }
  });

  it('begins its data on a multiple of 64 bytes', async () => {
    const path = join(folder, 'aligned.npy');
    await writeNpy(path, { shape: [2], values: Float64Array.of(1, 2) });
    expect((readFileSync(path).length - 16) % 64).toBe(0);
  });

  it('refuses other files, other types, cut files', async () => {
    const path = join(folder, 'b.npy');
    writeFileSync(path, 'CoordinateX,CoordinateY');
    await expect(readNpy(path)).rejects.toThrow(/not an \.npy file/);
    await writeNpy(path, { shape: [100], values: new Float64Array(100) });
    writeFileSync(path, readFileSync(path).subarray(0, 500));
    await expect(readNpy(path)).rejects.toThrow(InputError);
    await expect(writeNpy(path, { shape: [2], values: new Float64Array(3) })).rejects.toThrow(/holds 2, not 3/);
  });

  it.skipIf(!hasPythonModule('numpy'))('exchanges arrays with numpy', async () => {
    const ours = join(folder, 'ours.npy');
    const theirs = join(folder, 'theirs.npy');
    await writeNpy(ours, { shape: [2, 3], values: Float64Array.of(1, 2, 3, 4, 5, 6.25) });
    const script =
      'import numpy, sys; a = numpy.load(sys.argv[1]); numpy.save(sys.argv[2], a * 2); ' +
      'numpy.save(sys.argv[3], a.astype("f4").T); print(a.dtype.str, a.shape, a.tolist())';
    const fortran = join(folder, 'fortran.npy');
    expect(runPython(['-c', script, ours, theirs, fortran]).trim()).toBe(
      '<f8 (2, 3) [[1.0, 2.0, 3.0], [4.0, 5.0, 6.25]]',
    );
    expect(await readNpy(theirs)).toEqual({ shape: [2, 3], values: Float64Array.of(2, 4, 6, 8, 10, 12.5) });
    await expect(readNpy(fortran)).rejects.toThrow(/Fortran order/);
  });
});
