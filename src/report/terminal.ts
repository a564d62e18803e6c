import Table from 'cli-table3';
import { type FactsBlock, figure, type ReportPage, type TableBlock, type TableCell } from './page.js';

const chars = {
  top: '',
  'top-mid': '',
  'top-left': '',
  'top-right': '',
  bottom: '',
  'bottom-mid': '',
  'bottom-left': '',
  'bottom-right': '',
  left: '',
  'left-mid': '',
  mid: '',
  'mid-mid': '',
  right: '',
  'right-mid': '',
  middle: '  ',
};

/** Control characters of strings from files must not reach the terminal. */
function plain(text: string): string {
  return text.replace(/[\p{Cc}\p{Cf}]/gu, '?');
}

function cellText(cell: TableCell): string {
  return cell === null ? '-' : typeof cell === 'number' ? figure(cell) : plain(cell);
}

function factsTable(block: FactsBlock): string {
  const table = new Table({
    chars,
    style: { head: [], border: [], 'padding-left': 0, 'padding-right': 0 },
    colAligns: ['left', 'right', 'left'],
  });
  for (const item of block.items) table.push([plain(item.label), plain(item.value), plain(item.note ?? '')]);
  return table.toString();
}

function dataTable(block: TableBlock): string {
  const numeric = block.columns.map((_, c) => block.rows.some((row) => typeof row[c] === 'number'));
  const table = new Table({
    head: block.columns.map((c) => plain(c.unit === undefined || c.unit === '' ? c.label : `${c.label}, ${c.unit}`)),
    chars,
    style: { head: [], border: [], 'padding-left': 0, 'padding-right': 0 },
    colAligns: numeric.map((n) => (n ? 'right' : 'left')),
  });
  for (const row of block.rows) table.push(row.map(cellText));
  return `${plain(block.title)}\n${table.toString()}`;
}

/** The summary of a page as compact text tables: verdict, key figures and the tables marked for the terminal. */
export function summaryTables(page: ReportPage): string {
  const parts: string[] = [plain(page.title)];
  if (page.verdict !== undefined) parts.push(plain(page.verdict.words));
  for (const section of page.sections) {
    for (const block of section.blocks) {
      if (block.type === 'facts') parts.push(factsTable(block));
      if (block.type === 'table' && block.terminal === true) parts.push(dataTable(block));
    }
  }
  return parts.map((part) => part.replace(/[ \t]+$/gm, '')).join('\n\n');
}
