/** The report's tables, items, and the files that are given out. */

import { departures } from '../analysis-file.js';
import { el, setText, whenChanged } from '../dom.js';
import { reportDocx, tablesXlsx } from '../drawing.js';
import { csvOf, fileName, givenOf, htmlOf, pngOf, save } from '../exports.js';
import { text } from '../text.js';
import { plainTable } from './plain-table.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../types.js').Acts} Acts */

const words = text.report;
const XLSX = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';

/** @param {any} report @param {State} state */
export function tablesPart(report, state) {
  const remark = state.source?.kind === 'demo' ? text.demo.mark(state.source.name) : '';
  const xlsx = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-xlsx', onclick: () =>
    save(`${fileName(report.title)}-tables.xlsx`, /** @type {any} */ (tablesXlsx(report.tables, [report.title, remark].filter((line) => line !== ''))), XLSX) }, words.xlsx);
  return [el('h3', {}, words.tables), el('p', {}, xlsx), ...report.tables.map((/** @type {any} */ table) => el('details', { class: 'as-tables', open: table.key === 'stretches' },
    el('summary', {}, table.title),
    el('div', { class: 'table-scroller tall', tabindex: '0', role: 'region', 'aria-label': table.title }, plainTable(table)),
    el('p', {}, el('button', { type: 'button', class: 'quiet', 'data-gives': '', 'data-act': `csv-${table.key}`, 'aria-label': words.asCsv(table.title),
      onclick: () => save(`${fileName(report.title)}-${table.key}.csv`, csvOf(table, remark), 'text/csv') }, words.csv))))];
}

/** @param {any} report */
export function itemsPart(report) {
  const rows = report.items.map((/** @type {any} */ item) => el('tr', { 'data-author': String(item.answer === '') },
    el('th', { scope: 'row' }, item.standard), el('td', {}, item.asks), el('td', {}, item.answer || el('em', {}, words.author))));
  return [
    el('h3', {}, words.references), ...report.references.map((/** @type {string} */ one) => el('p', { class: 'reference' }, one)),
    el('h3', {}, words.items), el('p', { class: 'hint' }, words.itemsHint),
    el('table', { class: 'items-table' }, el('tbody', {}, ...rows)),
  ];
}

/**
 * @param {() => any} report
 * @param {() => string} drawing
 * @param {Acts} acts
 */
export function givePart(report, drawing, acts) {
  const said = el('span', { class: 'hint', role: 'status' });
  const marks = { figure: words.figure, items: words.items, references: words.references, author: words.author, heads: [words.standard, words.asks, words.answer] };
  const mark = () => (acts.look().source?.kind === 'demo' ? `${text.demo.label}. ${text.demo.strip}` : '');
  const html = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-html', onclick: () =>
    save(`${fileName(report().title)}.html`, htmlOf(report(), drawing(), { ...marks, mark: mark() }), 'text/html') }, words.asHtml);
  const docx = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-docx', onclick: async () => {
    const png = await pngOf(drawing(), 300);
    const picture = png ? new Uint8Array(await png.arrayBuffer()) : new Uint8Array();
    const bytes = reportDocx(givenOf(report(), drawing(), { ...marks, mark: mark() }), picture);
    save(`${fileName(report().title)}.docx`, /** @type {any} */ (bytes), 'application/vnd.openxmlformats-officedocument.wordprocessingml.document');
    setText(said, png ? '' : words.noPicture);
  } }, words.asDocx);
  const print = el('button', { type: 'button', 'data-gives': '', onclick: () => window.print() }, words.print);
  const copy = el('button', { type: 'button', 'data-gives': '', 'data-act': 'copy-report', onclick: async () => {
    const whole = report().sections.map((/** @type {any} */ s) => `${s.title}\n${s.paragraphs.join('\n')}`).join('\n\n');
    try {
      await navigator.clipboard.writeText(mark() ? `${mark()}\n\n${whole}` : whole);
      setText(said, words.copied);
    } catch {
      const node = document.querySelector('.report-text');
      if (node) window.getSelection()?.selectAllChildren(node);
      setText(said, words.copyRefused);
    }
  } }, words.copy);
  return { node: el('section', { class: 'give' }, el('h3', {}, words.give), el('p', {}, html), el('p', {}, docx), el('p', {}, print), el('p', {}, copy, ' ', said)) };
}

/** @param {Acts} acts */
export function analysisPart(acts) {
  const whole = el('button', { type: 'button', 'data-act': 'save-analysis', onclick: () => void acts.saveAnalysis(true) }, words.saveWhole);
  const plan = el('button', { type: 'button', 'data-act': 'save-plan', onclick: () => void acts.saveAnalysis(false) }, words.savePlan);
  const fix = el('button', { type: 'button', 'data-act': 'fix-plan', onclick: acts.fixPlan }, words.fix);
  const state = el('div', { 'data-region': 'departures' });
  const node = el('section', { class: 'give' }, el('h3', {}, words.analysis), el('p', { class: 'hint' }, words.analysisHint),
    el('p', {}, whole), el('p', {}, plan), el('p', { class: 'hint' }, words.open), el('p', {}, fix), el('p', { class: 'hint' }, words.fixHint), state);
  const changed = whenChanged(({ fixed, choices }) => [fixed, choices.plan], ({ fixed, choices }) => {
    const list = fixed === null ? [] : departures(fixed, choices.plan);
    state.replaceChildren(...(fixed === null ? [] : [
      el('p', {}, list.length > 0 ? words.fixed : words.noDepartures), el('ul', {}, ...list.map((one) => el('li', {}, one))),
    ]));
  });
  return { node, update: changed };
}
