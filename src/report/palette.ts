export type Rgb = readonly [number, number, number];

function linearToByte(value: number): number {
  const x = Math.min(1, Math.max(0, value));
  return Math.round(255 * (x <= 0.0031308 ? 12.92 * x : 1.055 * x ** (1 / 2.4) - 0.055));
}

/**
 * Colour from perceptual lightness (0 to 1), chroma and hue (degrees); what lies outside sRGB is brought in by reducing
 * chroma, so that lightness and hue stay.
 *
 * @see Ottosson 2020, Oklab (matrices); IEC 61966-2-1 (transfer function)
 */
export function fromOklch(lightness: number, chroma: number, hue: number): Rgb {
  const angle = (hue * Math.PI) / 180;
  for (let c = chroma; ; c = Math.max(0, c - 0.002)) {
    const a = c * Math.cos(angle);
    const b = c * Math.sin(angle);
    const l = (lightness + 0.3963377774 * a + 0.2158037573 * b) ** 3;
    const m = (lightness - 0.1055613458 * a - 0.0638541728 * b) ** 3;
    const s = (lightness - 0.0894841775 * a - 1.291485548 * b) ** 3;
    const linear = [
      4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s,
      -1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s,
      -0.0041960863 * l - 0.7034186147 * m + 1.707614701 * s,
    ];
    if (c === 0 || linear.every((x) => x >= -1e-4 && x <= 1 + 1e-4)) {
      return linear.map(linearToByte) as unknown as Rgb;
    }
  }
}

/** Oklab lightness of an sRGB colour, 0 to 1. */
export function oklabLightness(colour: Rgb): number {
  const [r, g, b] = colour.map((byte) => {
    const x = byte / 255;
    return x <= 0.04045 ? x / 12.92 : ((x + 0.055) / 1.055) ** 2.4;
  }) as unknown as Rgb;
  const l = Math.cbrt(0.4122214708 * r + 0.5363325363 * g + 0.0514459929 * b);
  const m = Math.cbrt(0.2119034982 * r + 0.6806995451 * g + 0.1073969566 * b);
  const s = Math.cbrt(0.0883024619 * r + 0.2817188376 * g + 0.6299787005 * b);
  return 0.2104542553 * l + 0.793617785 * m - 0.0040720468 * s;
}

export const rampSteps = 255;

/**
 * Sequential ramp: lightness rises in equal steps while the hue drifts from deep water to dry sand, so that order is read
 * from lightness alone.
 */
export function sequentialRamp(): readonly Rgb[] {
  return Array.from({ length: rampSteps }, (_, i) => {
    const t = i / (rampSteps - 1);
    return fromOklch(0.23 + 0.73 * t, 0.03 + 0.075 * Math.sin(Math.PI * t) ** 0.8, 252 - 170 * t ** 1.7);
  });
}

/** Diverging ramp: pale middle, equally dark ends of blue-green and rust; magnitude is read from lightness alone. */
export function divergingRamp(): readonly Rgb[] {
  return Array.from({ length: rampSteps }, (_, i) => {
    const t = (2 * i) / (rampSteps - 1) - 1;
    const size = Math.abs(t);
    return fromOklch(0.96 - 0.58 * size, 0.004 + 0.12 * size ** 0.8, t < 0 ? 222 : 42);
  });
}

export function css(colour: Rgb): string {
  return `#${colour.map((byte) => byte.toString(16).padStart(2, '0')).join('')}`;
}

/** Colours of the page by role. Charts carry stand-in colours of these roles, which become CSS variables. */
export const roles = ['ink', 'soft', 'rule', 'paper', 'one', 'two', 'three', 'four', 'mark'] as const;
export type Role = (typeof roles)[number];

const light: Readonly<Record<Role, Rgb>> = {
  ink: fromOklch(0.25, 0.02, 240),
  soft: fromOklch(0.46, 0.025, 240),
  rule: fromOklch(0.85, 0.012, 100),
  paper: fromOklch(0.985, 0.006, 95),
  one: fromOklch(0.44, 0.09, 222),
  two: fromOklch(0.5, 0.14, 42),
  three: fromOklch(0.42, 0.11, 330),
  four: fromOklch(0.52, 0.1, 130),
  mark: fromOklch(0.4, 0.03, 60),
};

const dark: Readonly<Record<Role, Rgb>> = {
  ink: fromOklch(0.92, 0.012, 95),
  soft: fromOklch(0.75, 0.02, 220),
  rule: fromOklch(0.38, 0.02, 230),
  paper: fromOklch(0.2, 0.018, 235),
  one: fromOklch(0.78, 0.09, 215),
  two: fromOklch(0.76, 0.13, 50),
  three: fromOklch(0.76, 0.11, 330),
  four: fromOklch(0.8, 0.11, 130),
  mark: fromOklch(0.82, 0.04, 80),
};

/** `--ink: #...;` declarations of a theme. */
export function themeVariables(theme: 'light' | 'dark'): string {
  const table = theme === 'light' ? light : dark;
  return roles.map((role) => `--${role}:${css(table[role])};`).join('');
}

/** A colour that stands for a role inside a chart until the page replaces it. */
export function standIn(role: Role): string {
  return `#fe00${(0xa0 + roles.indexOf(role)).toString(16)}`;
}

/** Puts CSS variables where stand-in colours are. */
export function replaceStandIns(svg: string): string {
  return svg.replace(/#fe00(a[0-9a-f])/g, (whole, tail: string) => {
    const role = roles[Number.parseInt(tail, 16) - 0xa0];
    return role === undefined ? whole : `var(--${role})`;
  });
}
