import { describe, expect, it } from 'vitest';
import { compareHistories, followUp, readExpectations } from '../../src/appraisal/followup.js';
import { readHistory } from '../../src/appraisal/history.js';
import { ornsteinUhlenbeck, withSpectrum } from './signals.js';

function csv(columns: Readonly<Record<string, ArrayLike<number>>>): string {
  const names = Object.keys(columns);
  const rows = Array.from({ length: (columns[names[0]!] as ArrayLike<number>).length }, (_, i) =>
    names.map((name) => (columns[name] as ArrayLike<number>)[i]).join(','),
  );
  return `${names.join(',')}\n${rows.join('\n')}\n`;
}

const n = 1 << 13;
const step = 1 / 2000;
const time = Float64Array.from({ length: n }, (_, i) => 0.5 + i * step);
// Speed 10 m/s, u' = 1 m/s, L11 = 0.2 m: T_int = 0.02 s; one-sided von Karman density 4 sigma^2 T (1 + (f / f_e)^2)^(-5/6).
const integral = 0.02;
const bend = 0.7468 / (2 * Math.PI * integral);
const karman = (f: number): number => 4 * integral * (1 + (f / bend) ** 2) ** (-5 / 6);

function probe(density: (f: number) => number, seed: string): Record<string, Float64Array> {
  return {
    Time: time,
    'p1.VelocityX': withSpectrum(n, step, density, `${seed} x`).map((x) => 10 + x),
    'p1.VelocityY': withSpectrum(n, step, density, `${seed} y`),
    'p1.VelocityZ': withSpectrum(n, step, density, `${seed} z`),
  };
}

describe('reading histories', () => {
  it('takes commas, semicolons, tabs, blanks, quotes and commented headers', () => {
    const rows = Array.from({ length: 70 }, (_, i) => [i * 0.1, Math.sin(i)]);
    for (const separator of [',', ';', '\t', '  ']) {
      const text = `# made for a check\n# Time${separator}"C1"\n${rows.map((r) => r.join(separator)).join('\r\n')}`;
      const history = readHistory(text, 'h.csv');
      expect([...history.signals.keys()]).toEqual(['C1']);
      expect(history.step).toBeCloseTo(0.1, 12);
      expect(history.signals.get('C1')![3]).toBe(Math.sin(3));
    }
  });

  it('lets a restart overwrite and evens out time steps', () => {
    const rows: [number, number][] = [];
    for (let i = 0; i < 100; i++) rows.push([i, 0]);
    for (let i = 90; i < 200; i++) rows.push([i, 2 * i]);
    const text = `t,a\n${rows.map((r) => r.join(',')).join('\n')}`;
    const history = readHistory(text, 'h.csv');
    expect(history.samples).toBe(200);
    expect(history.signals.get('a')![95]).toBe(190);
    expect(history.remarks[0]).toContain('10 lines');
    const uneven = Array.from({ length: 80 }, (_, i) => `${i + 0.3 * (i % 2)},${i + 0.3 * (i % 2)}`).join('\n');
    const even = readHistory(`t,a\n${uneven}`, 'h.csv');
    expect(even.remarks[0]).toContain('unequal');
    expect(even.signals.get('a')![33]).toBeCloseTo(even.start + 33 * even.step, 9);
  });

  it.each([
    ['', 'empty'],
    ['a,b\n1,2\n', 'Time'],
    ['t,b\n1,x\n', 'line 2, column b'],
    ['t,b\n1\n', 'line 2'],
    ['t,b,b\n1,2,3\n', 'two columns'],
    ['1,2\n3,4\n', 'no names'],
    ['t,b\n1,2\n', '64'],
  ])('refuses %j', (text, message) => {
    expect(() => readHistory(text, 'h.csv')).toThrow(message);
  });
});

describe('followup', () => {
  it('calls a probe resolving that follows -5/3 to half of the cut-off, and reads its figures', () => {
    // Cell width 12.5 mm: cut-off 400 Hz; the spectrum falls to half of the line at 200 Hz (waves of four cells).
    const cut = (f: number): number => karman(f) * 0.5 ** ((f / 200) ** 4);
    const history = readHistory(csv(probe(cut, 'good')), 'h.csv');
    const reading = followUp(history, {
      expectations: readExpectations('Monitor,CellWidth,TurbulentEnergyKinetic\np1,0.0125,1.5\n', 'm.csv'),
    });
    const p = reading.probes[0]!;
    expect(p.name).toBe('p1');
    expect(p.cutoffFrequency).toBeCloseTo(400, -1);
    expect(p.verdict).toBe('resolving');
    expect(Math.abs(p.slope!.leaves! / 200 - 1)).toBeLessThan(0.15);
    expect(Math.abs(p.speed / 10 - 1)).toBeLessThan(0.02);
    // All but the energy above 200 Hz: sigma^2 of 1 a component, within the scatter of 200 integral times.
    expect(Math.abs(p.resolvedK / 1.5 - 1)).toBeLessThan(0.25);
    expect(p.kRatio).toBeCloseTo(p.resolvedK / 1.5, 9);
    expect(Math.abs(p.streamwise.integralTime / integral - 1)).toBeLessThan(0.35);
    // 5 % of the variance: 800 integral times = 16 s, the record holds 4.
    expect(reading.remaining).toBeGreaterThan(8);
  });

  it('calls it too dissipative when it drops at a tenth of the cut-off', () => {
    const cut = (f: number): number => karman(f) * 0.5 ** ((f / 80) ** 4);
    const p = followUp(readHistory(csv(probe(cut, 'bad')), 'h.csv'), { cellWidth: 0.00625 }).probes[0]!;
    expect(p.cutoffFrequency).toBeCloseTo(800, -2);
    expect(p.verdict).toBe('too dissipative here');
  });

  it('does not judge without a cell width', () => {
    const p = followUp(readHistory(csv(probe(karman, 'free')), 'h.csv')).probes[0]!;
    expect(p.verdict).toBe('undecided');
    expect(p.words).toContain('CellWidth');
  });

  it('finds the ramp of a drag coefficient and the Strouhal number of a lift coefficient', () => {
    const count = 20_000;
    const dt = 1e-3;
    const noise = ornsteinUhlenbeck(count, dt, 0.01, 0.05, 'drag');
    const swing = ornsteinUhlenbeck(count, dt, 0.01, 0.05, 'lift');
    const columns = {
      Time: Float64Array.from({ length: count }, (_, i) => i * dt),
      Drag: noise.map((x, i) => 1.2 + x + (i < 4000 ? 1 - i / 4000 : 0)),
      // Square cylinder, St = 0.132 (Lyn et al. 1995) at D = 0.04 m, U = 2 m/s: 6.6 Hz.
      Lift: swing.map((x, i) => x + 0.8 * Math.sin(2 * Math.PI * 6.6 * i * dt)),
    };
    const reading = followUp(readHistory(csv(columns), 'forces.csv'), { referenceLength: 0.04, referenceSpeed: 2 });
    const [drag, lift] = reading.signals;
    expect(reading.transientEnded).toBe(true);
    expect(drag!.transientEnd).toBeGreaterThan(3.2);
    expect(drag!.transientEnd).toBeLessThan(5);
    expect(Math.abs(drag!.mean - 1.2)).toBeLessThan(2 * drag!.meanHalfWidth);
    expect(lift!.peaks[0]!.strouhal).toBeCloseTo(0.132, 2);
    expect(drag!.peaks).toEqual([]);
  });

  it('says when a transient has not ended, and respects a discard time', () => {
    const count = 4000;
    const noise = ornsteinUhlenbeck(count, 1, 3, 0.01, 'slow');
    const columns = { t: Float64Array.from({ length: count }, (_, i) => i), a: noise.map((x, i) => x + i / 1000) };
    const history = readHistory(csv(columns), 'slow.csv');
    expect(followUp(history).transientEnded).toBe(false);
    expect(followUp(history, { discard: 1000 }).signals[0]!.transientEnd).toBe(1000);
    expect(() => followUp(history, { discard: 3990 })).toThrow('32 samples');
  });

  it('tells histories that differ from those that do not', () => {
    const make = (mean: number, seed: string) =>
      followUp(
        readHistory(
          csv({
            t: Float64Array.from({ length: 8000 }, (_, i) => i * 0.1),
            a: ornsteinUhlenbeck(8000, 0.1, 1, 0.2, seed).map((x) => x + mean),
          }),
          `${seed}.csv`,
        ),
        { discard: 0 },
      );
    const [comparison] = compareHistories([make(1, 'one'), make(1, 'two'), make(1.2, 'three')]);
    expect(comparison!.standardErrors[0]).toBe(0);
    expect(comparison!.standardErrors[1]).toBeLessThan(3);
    expect(comparison!.standardErrors[2]).toBeGreaterThan(5);
    expect(compareHistories([make(1, 'alone')])).toEqual([]);
  });
});
