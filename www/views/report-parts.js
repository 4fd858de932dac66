/** The report's figure, tables, items, and the files that are given out. */

import { departures } from '../analysis-file.js';
import { el, setText, show, whenChanged } from '../dom.js';
import { stripsSvg, tablesXlsx } from '../drawing.js';
import { csvOf, fileName, htmlOf, pngOf, save } from '../exports.js';
import { parseNumber } from '../numbers.js';
import { text } from '../text.js';
import { plainTable } from './plain-table.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../types.js').Acts} Acts */

const words = text.report;
const PX_PER_MM = 96 / 25.4;
const XLSX = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';

/** @param {string} label @param {HTMLElement} input */
const field = (label, input) => el('label', { class: 'field' }, el('span', {}, label), input);

/** @param {Acts} acts */
export function figurePart(acts) {
  /** @type {State|null} */
  let last = null;
  let svgText = '';
  const width = el('input', { type: 'text', inputmode: 'decimal', value: '170', 'data-field': 'figure-width' });
  const font = el('input', { type: 'text', inputmode: 'decimal', value: '8', 'data-field': 'figure-font' });
  const column = el('select', {}, el('option', { value: '170' }, words.columns.two), el('option', { value: '85' }, words.columns.one), el('option', { value: '' }, words.columns.own));
  const dpi = el('select', {}, el('option', { value: '300' }, '300'), el('option', { value: '600' }, '600'));
  const picture = el('img', { class: 'report-figure', alt: '' });
  const said = el('span', { class: 'hint', role: 'status' });
  const name = () => fileName(last?.answers.report?.value?.title ?? 'courseband');
  const mark = () => (last?.source?.kind === 'demo' ? '-invented' : '');
  const asSvg = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-svg', onclick: () => save(`${name()}${mark()}.svg`, svgText, 'image/svg+xml') }, words.asSvg);
  const asPng = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-png', onclick: async () => {
    const png = await pngOf(svgText, Number(dpi.value));
    if (png) save(`${name()}${mark()}.png`, png, 'image/png');
    else setText(said, words.noPng);
  } }, words.asPng);
  column.addEventListener('change', () => { if (column.value !== '') width.value = column.value; redraw(); });
  width.addEventListener('input', () => { column.value = ['85', '170'].includes(width.value) ? width.value : ''; redraw(); });
  font.addEventListener('input', redraw);

  function redraw() {
    if (!last?.drawing || !last.findings) return;
    const mm = Math.min(400, Math.max(50, parseNumber(width.value) ?? 170));
    const points = Math.min(16, Math.max(5, parseNumber(font.value) ?? 8));
    svgText = stripsSvg(last.drawing, {
      width: Math.round(mm * PX_PER_MM), ratio: 1, head_room: 0, theme: 'print', letters: mm < 120, open_pairs: last.openPairs,
      noun: last.choices.noun.many, font: (points * 96) / 72,
    });
    picture.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(svgText)}`;
    picture.alt = last.findings.sentences.map((sentence) => sentence.headline).join(' ');
  }
  const changed = whenChanged((state) => [state.drawing, state.openPairs, state.status], redraw);
  const node = el('section', { class: 'report-figure-part' }, el('h3', {}, words.figure), picture,
    el('div', { class: 'field-row' }, field(words.columnsLabel, column), field(words.figureWidth, width), field(words.figureFont, font), field(words.resolution, dpi)),
    el('p', {}, asSvg, ' ', asPng, ' ', said));
  return {
    node,
    drawing: () => svgText,
    /** @param {State} state */
    update(state) {
      last = state;
      show(node, state.drawing !== null && state.findings !== null);
      changed(state);
    },
  };
}

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
  const marks = { figure: words.figure, items: words.items, references: words.references, author: words.author };
  const mark = () => (acts.look().source?.kind === 'demo' ? `${text.demo.label}. ${text.demo.strip}` : '');
  const html = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-html', onclick: () =>
    save(`${fileName(report().title)}.html`, htmlOf(report(), drawing(), { ...marks, mark: mark() }), 'text/html') }, words.asHtml);
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
  return { node: el('section', { class: 'give' }, el('h3', {}, words.give), el('p', {}, html), el('p', {}, print), el('p', {}, copy, ' ', said)) };
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
