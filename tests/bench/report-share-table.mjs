// Prints the table of src/appraisal/README.md again. By hand, after a build: node tests/bench/report-share-table.mjs
import { resolvedShare, shareModel, vonKarmanShare, waveForShare } from '../../dist/appraisal/share.js';

const karman = shareModel('von-karman-pao');
const pope = shareModel('pope');
const three = (x) => x.toFixed(3);
console.log(
  '| GridRatio | von Karman | Pope | von Karman-Pao, L / eta = 1000 | L / eta = 100 | von Karman with L11 / CellWidth |',
);
console.log('| --- | --- | --- | --- | --- | --- |');
for (const ratio of [1, 2, 3, 5, 8, 10, 12, 16, 20, 32]) {
  const wave = Math.PI * ratio;
  const cells = [
    resolvedShare(karman, wave),
    resolvedShare(pope, wave),
    resolvedShare(karman, wave, 1000),
    resolvedShare(karman, wave, 100),
    vonKarmanShare(wave),
  ];
  console.log(`| ${ratio} | ${cells.map(three).join(' | ')} |`);
}
for (const share of [0.8, 0.9]) {
  const needed = [
    waveForShare(karman, share),
    waveForShare(pope, share),
    waveForShare(karman, share, 1000),
    waveForShare(karman, share, 100),
  ];
  console.log(`| for ${share} | ${needed.map((w) => (w / Math.PI).toFixed(1)).join(' | ')} | |`);
}
