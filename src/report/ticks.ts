/** Round numbers that divide a linear range into about `count` steps of 1, 2 or 5 times a power of ten. */
export function linearTicks(low: number, high: number, count = 5): readonly number[] {
  const span = high - low;
  if (!(span > 0)) return [low];
  const raw = span / count;
  const power = 10 ** Math.floor(Math.log10(raw));
  const step = ([1, 2, 5, 10].find((m) => m * power >= raw * 0.999) as number) * power;
  const first = Math.ceil(low / step - 1e-9);
  const last = Math.floor(high / step + 1e-9);
  return Array.from({ length: last - first + 1 }, (_, i) => Number(((first + i) * step).toPrecision(12)));
}

/** Powers of ten in the range; with fewer than three of them also 2 and 5 times. */
export function logTicks(low: number, high: number): readonly number[] {
  const from = Math.floor(Math.log10(low) - 1e-9);
  const to = Math.ceil(Math.log10(high) + 1e-9);
  const inside = (x: number): boolean => x >= low * (1 - 1e-9) && x <= high * (1 + 1e-9);
  const build = (multiples: readonly number[]): number[] => {
    const ticks: number[] = [];
    for (let e = from; e <= to; e++) for (const m of multiples) ticks.push(Number(`${m}e${e}`));
    return ticks.filter(inside);
  };
  const tens = build([1]);
  if (tens.length > 8) return tens.filter((_, i) => i % Math.ceil(tens.length / 7) === 0);
  if (tens.length >= 3) return tens;
  const few = build([1, 2, 5]);
  return few.length >= 2 ? few : linearTicks(low, high, 3);
}
