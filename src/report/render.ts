import { createHash } from 'node:crypto';
import { drawChart, legend } from './chart.js';
import { embedJson, escapeHtml, prettyUnits } from './escape.js';
import {
  type Block,
  type ChartBlock,
  caution,
  figure,
  type PictureBlock,
  type ReportPage,
  type TableBlock,
  type TableCell,
} from './page.js';
import { drawPicture } from './picture.js';
import { pageScript } from './script.js';
import { styleSheet } from './style.js';

const verdictNames = { good: 'Good', watch: 'Look closer', bad: 'Not good' } as const;
const verdictShapes = {
  good: '<circle cx="16" cy="16" r="11"/><path d="M10.5 16.5l4 4 7-8"/>',
  watch: '<path d="M16 4L29 27H3Z"/><path d="M16 13v6M16 22.5v.8"/>',
  bad: '<path d="M5 5H27V27H5Z"/><path d="M11 11L21 21M21 11L11 21"/>',
} as const;

const kinds = {
  run: 'start of a run',
  appraisal: 'appraisal of a mesh',
  audit: 'audit of a start',
  'follow-up': 'follow-up of a run',
} as const;

const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);

function figureHead(title: string): string {
  return `<div class="head"><h3>${escapeHtml(title)}</h3><button type="button" aria-label="Download ${escapeHtml(title)} as CSV">CSV</button></div>`;
}

function renderFigure(block: ChartBlock | PictureBlock, number: number): string {
  const drawn = block.type === 'chart' ? drawChart(block) : drawPicture(block);
  const svg = drawn.svg.replaceAll('clip-@', `clip-${number}`);
  const caption = block.caption === '' ? '' : `<figcaption>${escapeHtml(capital(block.caption))}</figcaption>`;
  return (
    `<figure>${figureHead(block.title)}${block.type === 'chart' ? legend(block) : ''}` +
    `<div class="plot ${block.type}" tabindex="0" role="group" aria-label="${escapeHtml(block.title)}; arrow keys read values">${svg}</div>` +
    `<div class="reading" role="status" hidden></div>${caption}` +
    `<script type="application/json">${embedJson(drawn.data)}</script></figure>`
  );
}

function cellText(cell: TableCell): string {
  if (cell === null) return '-';
  return typeof cell === 'number' ? figure(cell) : cell;
}

function renderTable(block: TableBlock): string {
  const numeric = block.columns.map((_, c) => block.rows.some((row) => typeof row[c] === 'number'));
  const heads = block.columns.map((column, c) => {
    const unit =
      column.unit === undefined || column.unit === '' ? '' : ` <small>${escapeHtml(prettyUnits(column.unit))}</small>`;
    return `<th scope="col"${numeric[c] ? ' class="number"' : ''}>${escapeHtml(column.label)}${unit}</th>`;
  });
  const rows = block.rows.map((row) => {
    const cells = row.map((cell, c) => {
      const value = typeof cell === 'number' && Number.isFinite(cell) ? ` data-value="${cell}"` : '';
      const text = cellText(cell);
      const kind = numeric[c] ? 'number' : text.length > 40 ? 'long' : text.length <= 26 ? 'short' : '';
      const attributes = `${kind === '' ? '' : ` class="${kind}"`}${value}`;
      const shown = escapeHtml(typeof cell === 'string' && text.length <= 14 ? prettyUnits(text) : text);
      return c === 0 ? `<th scope="row"${attributes}>${shown}</th>` : `<td${attributes}>${shown}</td>`;
    });
    return `<tr>${cells.join('')}</tr>`;
  });
  return (
    `<div class="tabled">${figureHead(block.title)}<div class="scroll" tabindex="0" role="region" aria-label="${escapeHtml(block.title)}">` +
    `<table><thead><tr>${heads.join('')}</tr></thead><tbody>${rows.join('')}</tbody></table></div>` +
    `${block.note === undefined ? '' : `<p class="note-below">${escapeHtml(block.note)}</p>`}</div>`
  );
}

function renderBlock(block: Block, nextNumber: () => number): string {
  switch (block.type) {
    case 'text':
      return `<p>${escapeHtml(block.text)}</p>`;
    case 'list':
      return `<ul>${block.items.map((item) => `<li>${escapeHtml(item)}</li>`).join('')}</ul>`;
    case 'facts':
      return `<dl class="facts">${block.items
        .map(
          (item) =>
            `<div><dt>${escapeHtml(item.label)}</dt><dd><span class="value">${escapeHtml(prettyUnits(item.value))}</span>` +
            `${item.note === undefined ? '' : `<br><span class="note">${escapeHtml(prettyUnits(item.note))}</span>`}</dd></div>`,
        )
        .join('')}</dl>`;
    case 'table':
      return renderTable(block);
    default:
      return renderFigure(block, nextNumber());
  }
}

/**
 * The whole page as one HTML file that needs no network: its policy forbids every request, and the only script allowed
 * is the page's own (by its hash).
 */
export function renderReport(page: ReportPage): string {
  let figures = 0;
  const nextNumber = (): number => ++figures;
  const hash = createHash('sha256').update(pageScript).digest('base64');
  const policy = `default-src 'none'; img-src data:; style-src 'unsafe-inline'; script-src 'sha256-${hash}'; base-uri 'none'; form-action 'none'`;
  const title = escapeHtml(page.title);
  const sections = page.sections
    .map(
      (section, i) =>
        `<section id="s${i + 1}"><h2>${escapeHtml(section.title)}</h2>${section.blocks
          .map((block) => renderBlock(block, nextNumber))
          .join('\n')}</section>`,
    )
    .join('\n');
  const verdict =
    page.verdict === undefined
      ? ''
      : `<div class="verdict ${page.verdict.level}"><svg viewBox="0 0 32 32" aria-hidden="true">${verdictShapes[page.verdict.level]}</svg>` +
        `<p><strong>${verdictNames[page.verdict.level]}.</strong> ${escapeHtml(capital(page.verdict.words))}</p></div>`;
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${policy}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="color-scheme" content="light dark">
<title>${title} - ${kinds[page.kind]}</title>
<link rel="icon" href="data:,">
<style>${styleSheet}</style>
</head>
<body>
<header>
<p class="kind"><b>eddygraft</b> ${kinds[page.kind]}</p>
<h1>${title}</h1>
${page.subtitle === undefined ? '' : `<p class="subtitle">${escapeHtml(page.subtitle)}</p>`}
${verdict}
</header>
<div class="sheet">
<nav aria-label="Sections"><ol>${page.sections.map((section, i) => `<li><a href="#s${i + 1}">${escapeHtml(section.title)}</a></li>`).join('')}</ol></nav>
<main>
${sections}
<p class="caution"><strong>Caution.</strong> ${escapeHtml(caution)}</p>
<footer>${page.footer.map((line) => `<p>${escapeHtml(line)}</p>`).join('')}</footer>
</main>
</div>
<script>${pageScript}</script>
</body>
</html>
`;
}
