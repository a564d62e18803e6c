// Mode sum with potential, gradient term and shell weights (40 shells x 16 directions) against the same sum in numpy,
// one thread each, in turns. Needs a build; numpy through /usr/bin/python3.
import { spawnSync } from 'node:child_process';
import { openModeKernel } from '../../dist/kernels/modes.js';

const shells = 40;
const directions = 16;
const n = shells * directions;
const rounds = 5;
const python = `
import numpy as np, time
S,D,n=${shells},${directions},2000
rng=np.random.default_rng(1)
K=rng.normal(size=(S*D,3));a=rng.normal(size=(S*D,3));b=rng.normal(size=(S*D,3));ph=rng.uniform(0,6.28,S*D)
x=rng.uniform(0,10,(n,3));w=rng.uniform(0,1,(n,S));gw=rng.normal(size=(n,S,3))
def f():
    p=x@K.T+ph; s=np.sin(p).reshape(n,S,D); c=np.cos(p).reshape(n,S,D)
    B=np.einsum('nsd,sdk->nsk',s,a.reshape(S,D,3),optimize=True); C=np.einsum('nsd,sdk->nsk',c,b.reshape(S,D,3),optimize=True)
    return (w[:,:,None]*C).sum(1), (w[:,:,None]*B+np.cross(gw,C)).sum(1)
f();t=time.process_time();f();f();f();print((time.process_time()-t)/3/n/S/D*1e9)
`;

const kernel = openModeKernel({
  count: n,
  phases: Float64Array.from({ length: 4 * n }, (_, i) => Math.sin(1.7 * i)),
  vectors: Float32Array.from({ length: 24 * n }, (_, i) => 0.1 * Math.sin(2.3 * i)),
});
for (let i = 0; i < 64; i++) {
  kernel.x[i] = 0.1 * i;
  kernel.y[i] = 0.3 * i;
  kernel.z[i] = 0.2 * i;
}
for (const row of kernel.rows) row.fill(0.1);

const kinds = {
  plain: (s) => kernel.plainShell(64, s * directions, directions),
  'cut-off': (s) => kernel.shapedShell(64, s * directions, directions, 5, 2.5),
  'cut-off and stresses': (s) => kernel.shapedShell(64, s * directions, directions, 7, 2.5),
};

function cost(run) {
  const blocks = 200;
  const begin = process.cpuUsage().user;
  for (let block = 0; block < blocks; block++) for (let s = 0; s < shells; s++) run(s);
  return ((process.cpuUsage().user - begin) * 1e3) / blocks / 64 / n;
}

const median = (values) => values.sort((a, b) => a - b)[values.length >> 1];
const numpy = [];
const ours = Object.fromEntries(Object.keys(kinds).map((kind) => [kind, []]));
for (const run of Object.values(kinds)) cost(run);
for (let round = 0; round < rounds; round++) {
  for (const [kind, run] of Object.entries(kinds)) ours[kind].push(cost(run));
  const env = { ...process.env, OMP_NUM_THREADS: '1', OPENBLAS_NUM_THREADS: '1' };
  const child = spawnSync('/usr/bin/python3', ['-c', python], { encoding: 'utf8', env });
  if (child.status === 0) numpy.push(Number(child.stdout));
}
const reference = numpy.length > 0 ? median(numpy) : Number.NaN;
if (numpy.length === 0) console.log('numpy is not at hand: no comparison');
else console.log(`numpy: ${reference.toFixed(1)} ns per point and mode`);
for (const [kind, values] of Object.entries(ours)) {
  const ns = median(values);
  console.log(`${kind}: ${ns.toFixed(2)} ns per point and mode, ${(reference / ns).toFixed(1)} x numpy (target 12)`);
}
