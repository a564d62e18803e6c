/**
 * The page's own script: readings under the pointer or the arrow keys, and CSV downloads. Plain browser JavaScript that
 * writes text only (never markup), so strings from files stay text.
 */
export const pageScript = `
(() => {
'use strict';
const svgns = 'http://www.w3.org/2000/svg';
const show = (v) => {
  if (v === null || v === undefined || Number.isNaN(v)) return '-';
  if (v === 0) return '0';
  const size = Math.abs(v);
  return size < 1e-3 || size >= 1e6 ? Number(v.toPrecision(4)).toExponential().replace('e+', 'e') : String(Number(v.toPrecision(5)));
};
const quote = (v) => {
  let text = v === null || v === undefined ? '' : String(v);
  if (text !== '' && !Number.isFinite(Number(text)) && /^[=+\\-@\\t]/.test(text)) text = "'" + text;
  return /[",\\n\\r]/.test(text) ? '"' + text.replaceAll('"', '""') + '"' : text;
};
const save = (name, rows) => {
  const blob = new Blob([rows.map((row) => row.map(quote).join(',')).join('\\n') + '\\n'], { type: 'text/csv' });
  const link = document.createElement('a');
  link.href = URL.createObjectURL(blob);
  link.download = name;
  link.click();
  setTimeout(() => URL.revokeObjectURL(link.href), 10000);
};
const fileName = (text) => (text.toLowerCase().replace(/[^a-z0-9]+/g, '-').replace(/^-|-$/g, '').slice(0, 60) || 'figure') + '.csv';
const element = (name, attributes, parent) => {
  const node = document.createElementNS(svgns, name);
  for (const [key, value] of Object.entries(attributes)) node.setAttribute(key, value);
  parent.append(node);
  return node;
};

async function pixelsOf(data) {
  const bytes = Uint8Array.from(atob(data.codes), (c) => c.charCodeAt(0));
  const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream('deflate'));
  const raw = new Uint8Array(await new Response(stream).arrayBuffer());
  const n = data.width * data.height;
  const [low, high] = data.range;
  return (i) => {
    const code = raw[i] * 256 + raw[n + i];
    if (code === 0) return NaN;
    const t = (code - 1) / 65534;
    return data.log ? low * Math.pow(high / low, t) : low + t * (high - low);
  };
}

function reader(figure, data) {
  const plot = figure.querySelector('.plot');
  const svg = plot.querySelector('svg');
  const box = figure.querySelector('.reading');
  const layer = element('g', { 'aria-hidden': 'true' }, svg);
  const view = svg.viewBox.baseVal;
  const write = (text, x, y) => {
    box.textContent = text;
    box.hidden = false;
    const frame = figure.getBoundingClientRect();
    const drawn = svg.getBoundingClientRect();
    const px = drawn.left - frame.left + (x / view.width) * drawn.width;
    const py = drawn.top - frame.top + (y / view.height) * drawn.height;
    const left = px + 14 + box.offsetWidth > frame.width ? px - 14 - box.offsetWidth : px + 14;
    box.style.left = Math.max(0, Math.min(left, frame.width - box.offsetWidth)) + 'px';
    box.style.top = Math.max(0, py - box.offsetHeight - 10) + 'px';
  };
  const hide = () => { box.hidden = true; layer.replaceChildren(); };
  const inDrawing = (event) => {
    const drawn = svg.getBoundingClientRect();
    return [((event.clientX - drawn.left) / drawn.width) * view.width, ((event.clientY - drawn.top) / drawn.height) * view.height];
  };
  return { plot, svg, layer, write, hide, inDrawing };
}

function chart(figure, data) {
  const r = reader(figure, data);
  const [left, top, right, bottom] = data.plot;
  const part = (v, axis) => axis.log ? Math.log(v / axis.range[0]) / Math.log(axis.range[1] / axis.range[0]) : (v - axis.range[0]) / (axis.range[1] - axis.range[0]);
  const placeX = (v) => left + part(v, data.x) * (right - left);
  const placeY = (v) => bottom - part(v, data.y) * (bottom - top);
  const stops = [...new Set(data.series.flatMap((s) => s.x))].filter((v) => v !== null && part(v, data.x) >= -0.001 && part(v, data.x) <= 1.001).sort((a, b) => a - b);
  let at = -1;
  const valueAt = (s, x) => {
    let best = -1;
    if (s.steps) { for (let i = 0; i < s.x.length - 1; i++) if (s.x[i] <= x && x <= s.x[i + 1]) { best = i; if (x < s.x[i + 1]) break; } }
    else for (let i = 0; i < s.x.length; i++) if (s.x[i] !== null && (best < 0 || Math.abs(placeX(s.x[i]) - placeX(x)) < Math.abs(placeX(s.x[best]) - placeX(x)))) best = i;
    return best < 0 || (!s.steps && Math.abs(placeX(s.x[best]) - placeX(x)) > 12) ? null : s.y[best];
  };
  const read = (x) => {
    r.layer.replaceChildren();
    const px = placeX(x);
    element('path', { class: 'cross', d: 'M' + px + ' ' + top + 'V' + bottom }, r.layer);
    const bins = data.series.find((s) => s.steps);
    const next = bins === undefined ? undefined : bins.x[bins.x.indexOf(x) + 1];
    const lines = [data.x.label + ': ' + show(x) + (bins !== undefined && bins.x.includes(x) && next !== undefined ? ' to ' + show(next) : '')];
    for (const s of data.series) {
      const y = valueAt(s, x);
      if (y === null || y === undefined) continue;
      lines.push(s.name + ': ' + show(y));
      const py = placeY(y);
      if (py >= top - 2 && py <= bottom + 2) element('circle', { class: 'dot', cx: px, cy: py, r: 4 }, r.layer);
    }
    r.write(lines.join('\\n'), px, top + 40);
  };
  r.svg.addEventListener('pointermove', (event) => {
    const [px] = r.inDrawing(event);
    if (px < left - 5 || px > right + 5 || stops.length === 0) return r.hide();
    let best = 0;
    for (let i = 1; i < stops.length; i++) if (Math.abs(placeX(stops[i]) - px) < Math.abs(placeX(stops[best]) - px)) best = i;
    at = best;
    read(stops[at]);
  });
  r.svg.addEventListener('pointerleave', r.hide);
  r.plot.addEventListener('keydown', (event) => {
    const step = { ArrowRight: 1, ArrowLeft: -1, PageDown: 10, PageUp: -10 }[event.key];
    if (event.key === 'Escape') return r.hide();
    if (step === undefined || stops.length === 0) return;
    event.preventDefault();
    at = Math.max(0, Math.min(stops.length - 1, at + step));
    read(stops[at]);
  });
  r.plot.addEventListener('blur', r.hide);
  return () => [['series', data.x.label, data.y.label], ...data.series.flatMap((s) => s.x.map((x, i) => [s.name, x, s.y[i]]))];
}

function picture(figure, data) {
  const r = reader(figure, data);
  const [left, top, right, bottom] = data.plot;
  let values;
  const load = async () => (values ??= await pixelsOf(data));
  let column = Math.floor(data.width / 2), row = Math.floor(data.height / 2);
  const place = (c, w) => data.low[0] + ((c + 0.5) / data.width) * (data.high[0] - data.low[0]);
  const placeB = (w) => data.high[1] - ((w + 0.5) / data.height) * (data.high[1] - data.low[1]);
  const read = async () => {
    const valueOf = await load();
    r.layer.replaceChildren();
    const px = left + ((column + 0.5) / data.width) * (right - left);
    const py = top + ((row + 0.5) / data.height) * (bottom - top);
    for (const kind of ['under', 'over']) element('path', { class: 'cross on-picture ' + kind, d: 'M' + (px - 9) + ' ' + py + 'h18M' + px + ' ' + (py - 9) + 'v18' }, r.layer);
    const value = valueOf(row * data.width + column);
    r.write(data.axes[0] + ' ' + show(place(column)) + ' m, ' + data.axes[1] + ' ' + show(placeB(row)) + ' m\\n' + data.quantity + ': ' + (Number.isNaN(value) ? 'outside the mesh' : show(value) + ' ' + data.unit), px, py);
  };
  r.svg.addEventListener('pointermove', (event) => {
    const [px, py] = r.inDrawing(event);
    if (px < left || px > right || py < top || py > bottom) return r.hide();
    column = Math.min(data.width - 1, Math.floor(((px - left) / (right - left)) * data.width));
    row = Math.min(data.height - 1, Math.floor(((py - top) / (bottom - top)) * data.height));
    read();
  });
  r.svg.addEventListener('pointerleave', r.hide);
  r.plot.addEventListener('keydown', (event) => {
    const move = { ArrowRight: [4, 0], ArrowLeft: [-4, 0], ArrowDown: [0, 4], ArrowUp: [0, -4] }[event.key];
    if (event.key === 'Escape') return r.hide();
    if (move === undefined) return;
    event.preventDefault();
    column = Math.max(0, Math.min(data.width - 1, column + move[0]));
    row = Math.max(0, Math.min(data.height - 1, row + move[1]));
    read();
  });
  r.plot.addEventListener('blur', r.hide);
  return async () => {
    const valueOf = await load();
    const rows = [[data.axes[0] + ' (m)', data.axes[1] + ' (m)', data.quantity + (data.unit === '' ? '' : ' (' + data.unit + ')')]];
    for (let w = 0; w < data.height; w++) for (let c = 0; c < data.width; c++) {
      const value = valueOf(w * data.width + c);
      if (!Number.isNaN(value)) rows.push([Number(place(c).toPrecision(6)), Number(placeB(w).toPrecision(6)), Number(value.toPrecision(5))]);
    }
    return rows;
  };
}

for (const figure of document.querySelectorAll('figure')) {
  const data = JSON.parse(figure.querySelector('script').textContent);
  const rowsOf = data.kind === 'chart' ? chart(figure, data) : picture(figure, data);
  figure.querySelector('button').addEventListener('click', async () => save(fileName(figure.querySelector('h3').textContent), await rowsOf()));
}
for (const tabled of document.querySelectorAll('.tabled')) {
  tabled.querySelector('button').addEventListener('click', () => {
    const rows = [...tabled.querySelectorAll('tr')].map((tr) => [...tr.children].map((cell) => cell.dataset.value ?? cell.textContent.trim()));
    save(fileName(tabled.querySelector('h3').textContent), rows);
  });
}
})();
`;
