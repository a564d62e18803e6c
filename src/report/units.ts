import { figure } from './page.js';

/** Metres with a unit that keeps one to three digits before the point. */
export function lengthText(metres: number): string {
  if (!Number.isFinite(metres)) return '-';
  const size = Math.abs(metres);
  if (size === 0 || size >= 1) return `${figure(metres, 3)} m`;
  return size >= 1e-3 ? `${figure(metres * 1e3, 3)} mm` : `${figure(metres * 1e6, 3)} um`;
}

/** Seconds likewise. */
export function timeText(seconds: number): string {
  if (!Number.isFinite(seconds)) return '-';
  const size = Math.abs(seconds);
  if (size === 0 || size >= 1) return `${figure(seconds, 3)} s`;
  return size >= 1e-3 ? `${figure(seconds * 1e3, 3)} ms` : `${figure(seconds * 1e6, 3)} us`;
}

/** A share in percent; one digit after the point below ten. */
export function percentText(x: number): string {
  if (Number.isNaN(x)) return '-';
  if (x > 0 && x < 5e-4) return 'below 0.1 %';
  return `${(100 * x).toFixed(x > 0 && x < 0.1 ? 1 : 0)} %`;
}
