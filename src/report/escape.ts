/** Text for HTML content and attributes. */
export function escapeHtml(text: string): string {
  return text
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;')
    .replaceAll("'", '&#39;');
}

/** Units as people write them: raised exponents and the micro sign. */
export function prettyUnits(text: string): string {
  return text
    .replace(
      /\b([ms])([23])(?![\w.])/g,
      (_, unit: string, power: string) => unit + (power === '2' ? '\u00b2' : '\u00b3'),
    )
    .replace(/(\d) u([ms])\b/g, '$1 \u00b5$2');
}

/** JSON that can stand inside a script element whatever its strings hold. */
export function embedJson(value: unknown): string {
  return JSON.stringify(value)
    .replaceAll('<', '\\u003c')
    .replaceAll('>', '\\u003e')
    .replaceAll('&', '\\u0026')
    .replaceAll('\u2028', '\\u2028')
    .replaceAll('\u2029', '\\u2029');
}
