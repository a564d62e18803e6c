import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import type { NumberArray } from '../../src/basis/dataset.js';
import { readNpy, writeNpy } from '../../src/formats/npy.js';
import { hasPythonModule, runPython } from '../helpers/python.js';

const folder = mkdtempSync(join(tmpdir(), 'npy-'));
afterAll(() => rmSync(folder, { recursive: true }));
const path = join(folder, 'array.npy');

const arrays: readonly [string, NumberArray, readonly number[]][] = [
  ['float64', Float64Array.of(0, -1.5, Math.PI, 1e300, -0, 4.9e-324), [6]],
  ['float32', Float32Array.of(1, 2, 3, 4, 5, 0.1), [2, 3]],
  ['int32', Int32Array.of(-2147483648, 0, 2147483647, 5), [2, 2]],
  ['int64', BigInt64Array.of(-9007199254740993n, 7n), [2]],
  ['uint8', Uint8Array.of(0, 255), [2, 1, 1]],
  ['float64', new Float64Array(0), [0]],
];

describe.each(arrays)('%s %o', (type, values, shape) => {
  it('comes back as it was', async () => {
    await writeNpy(path, values, shape);
    const back = readNpy(path);
    expect(back.values).toEqual(values);
    expect(back.shape).toEqual(shape);
    expect((readFileSync(path).length - values.byteLength) % 64).toBe(0);
  });

  it.skipIf(!hasPythonModule('numpy'))('is the same array to numpy, and numpy writes what is read', async () => {
    await writeNpy(path, values, shape);
    const script = `import numpy, json, sys
a = numpy.load(sys.argv[1])
assert a.flags['C_CONTIGUOUS']
print(json.dumps({'type': str(a.dtype), 'shape': a.shape, 'values': [repr(v) for v in a.ravel().tolist()]}))
numpy.save(sys.argv[2], a)`;
    const other = join(folder, 'other.npy');
    const seen = JSON.parse(runPython(['-c', script, path, other])) as {
      type: string;
      shape: number[];
      values: string[];
    };
    expect(seen.type).toBe(type);
    expect(seen.shape).toEqual(shape);
    if (values instanceof BigInt64Array) expect(seen.values).toEqual([...values].map(String));
    else expect(seen.values.map(Number)).toEqual([...values].map(Number));
    const back = readNpy(other);
    expect(back.values).toEqual(values);
    expect(back.shape).toEqual(shape);
  });
});

describe('refusals', () => {
  it('name the file and what is wrong', async () => {
    await expect(writeNpy(path, new Float64Array(5), [2, 3])).rejects.toThrow(/5 numbers do not fill the shape 2 x 3/);
    writeFileSync(path, 'CoordinateX,VelocityX\n1,2\n');
    expect(() => readNpy(path)).toThrow(/array\.npy: this is no NPY file/);
    await writeNpy(path, new Float64Array(4));
    const whole = readFileSync(path);
    writeFileSync(path, whole.subarray(0, whole.length - 8));
    expect(() => readNpy(path)).toThrow(/24 bytes of numbers where the shape \(4,\) needs 32/);
    writeFileSync(path, whole.subarray(0, 40));
    expect(() => readNpy(path)).toThrow(/ends within its header/);
    writeFileSync(path, Buffer.from(whole.toString('latin1').replace('False', 'True '), 'latin1'));
    expect(() => readNpy(path)).toThrow(/first index fastest/);
    writeFileSync(path, Buffer.from(whole.toString('latin1').replace('<f8', '>f8'), 'latin1'));
    expect(() => readNpy(path)).toThrow(/no little-endian numbers/);
  });
});
