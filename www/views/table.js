/**
 * The table as it was read: roles and short names under the column heads,
 * cells as written, problem cells and rows left out marked.
 */

import { ROLES, columnsUsed } from '../context.js';
import { el, reconcile, setText, show, whenChanged } from '../dom.js';
import { maskedCell, maskedText } from '../masks.js';
import { withRole } from '../plan.js';
import { text } from '../text.js';
import { mountSheetChoice } from './sheet-choice.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../types.js').Preview} Preview */
/** @typedef {import('../types.js').Acts} Acts */
/** @typedef {import('../types.js').Role} Role */

const words = text.data.table;
const FIRST_ROWS = 8;
const STEP = 50;

/** @param {HTMLElement} root @param {Acts} acts @returns {import('../types.js').View} */
export function mountTable(root, acts) {
  const format = el('p', { class: 'hint' });
  const heads = el('tr');
  const body = el('tbody');
  const caption = el('caption', { class: 'unseen' }, words.caption);
  const scroller = el('div', { class: 'table-scroller', tabindex: '0', role: 'region', 'aria-label': words.title },
    el('table', { class: 'preview' }, caption, el('thead', {}, heads), body));
  const count = el('span', { class: 'hint' });
  const more = el('button', { type: 'button', class: 'quiet' }, words.more);
  const notes = el('ul', { class: 'notes' });
  const place = el('div', { class: 'sheet-choice', hidden: true });
  const choice = mountSheetChoice(place, acts);
  root.append(el('h2', {}, words.title), place, format, scroller, el('p', { class: 'table-more' }, count, ' ', more), notes);

  let limit = FIRST_ROWS;
  /** @type {State|null} */
  let last = null;
  /** The table shown: its source and columns. */
  let shown = /** @type {unknown[]} */ ([]);
  more.addEventListener('click', () => {
    limit += STEP;
    if (last) draw(last);
  });

  /** @param {State} state */
  function draw(state) {
    last = state;
    const { preview } = state;
    const names = (preview?.columns ?? []).map((column) => column.name).join('\n');
    if (state.source !== shown[0] || names !== shown[1]) {
      shown = [state.source, names];
      limit = FIRST_ROWS;
      body.replaceChildren();
    }
    if (!preview) return;
    setText(format, preview.format);
    drawHeads(heads, state, preview, acts);
    const rows = shownRows(preview, limit);
    drawRows(body, rows, state, preview);
    setText(count, rows.length < preview.totalRows ? words.shown(rows.length, preview.totalRows) : words.all(preview.totalRows));
    show(more, rows.length < preview.rows.length);
    reconcile(notes, preview.notes, (note) => note, (note) => el('li', {}, maskedText(note, state.choices.masks)));
  }
  const update = whenChanged((state) => [state.preview, state.choices, state.source], draw);
  return {
    update(state) {
      choice.update(state);
      update(state);
    },
  };
}

/**
 * The first rows, and those further down where a cell stops the reading.
 * @param {Preview} preview
 * @param {number} limit
 */
function shownRows({ rows, problems }, limit) {
  const stopping = new Set(problems.filter((problem) => problem.stops).slice(0, STEP).map((problem) => problem.row));
  return rows.filter((row, index) => index < limit || stopping.has(row.line));
}

/** @param {HTMLElement} heads @param {State} state @param {Preview} preview @param {Acts} acts */
function drawHeads(heads, state, preview, acts) {
  const used = columnsUsed(state);
  const corner = { name: '', role: null, reason: '', measured: false };
  reconcile(heads, [corner, ...preview.columns], (column, index) => `${index}:${column.name}`,
    (column, index) => (index === 0 ? el('th', { scope: 'col', class: 'line' }, words.line) : mountHead(column.name, acts)),
    (node, column, index) => {
      if (index === 0) return;
      const role = ROLES.find((one) => used[one] === column.name) ?? 'unused';
      const select = /** @type {HTMLSelectElement} */ (node.querySelector('select'));
      const called = /** @type {HTMLInputElement} */ (node.querySelector('input'));
      const chosen = role !== 'unused' && state.choices.plan.columns[role] === column.name;
      select.value = role;
      node.dataset.role = column.measured ? 'measured' : role;
      setText(/** @type {Element} */ (node.querySelector('.measured')), column.measured ? words.measured[preview.layout] : '');
      show(select, !column.measured);
      show(called, !column.measured);
      node.used = used;
      setText(/** @type {Element} */ (node.querySelector('.why')), chosen || role === 'unused' && !column.reason ? '' : maskedText(column.reason, state.choices.masks));
      setText(/** @type {Element} */ (node.querySelector('.column-name')), maskedText(column.name, state.choices.masks));
      if (document.activeElement !== called) called.value = state.choices.called[column.name] ?? '';
    });
}

/** @param {string} column @param {Acts} acts */
function mountHead(column, acts) {
  /** @type {(Role|'unused')[]} */
  const roles = [...ROLES, 'unused'];
  const select = el('select', { 'aria-label': words.role(column), 'data-role-of': column },
    ...roles.map((role) => el('option', { value: role }, words.roles[role])));
  const called = el('input', {
    type: 'text', maxlength: '24', autocomplete: 'off', spellcheck: 'false', 'aria-label': words.called(column),
    placeholder: words.calledShort,
  });
  const head = el('th', { scope: 'col' }, el('span', { class: 'column-name', title: column, tabindex: '-1' }, column),
    select, el('span', { class: 'measured' }), called, el('span', { class: 'why' }));
  select.addEventListener('change', () => {
    const role = /** @type {Role|'unused'} */ (select.value);
    const { used } = /** @type {any} */ (head);
    acts.choose(text.data.labels.role(column, words.roles[role]), (choices) => ({
      ...choices, plan: withRole(choices.plan, used, column, role),
    }));
  });
  called.addEventListener('input', () => acts.choose(text.data.labels.called(column, called.value), (choices) => ({
    ...choices, called: { ...choices.called, [column]: called.value.trim() },
  }), true));
  return head;
}

/** @param {HTMLElement} body @param {Preview['rows']} rows @param {State} state @param {Preview} preview */
function drawRows(body, rows, state, preview) {
  const out = new Set(state.choices.leftOut.map((one) => `${one.row}:${one.column ?? ''}`));
  /** @type {Map<string, string>} */
  const troubled = new Map(preview.problems.map((problem) => [`${problem.row}:${problem.column}`, problem.message]));
  const { masks } = state.choices;
  const grouped = columnsUsed(state).group;
  const stopping = new Set(preview.problems.filter((problem) => problem.stops).map((problem) => `${problem.row}:${problem.column}`));
  reconcile(body, rows, (row) => String(row.line), (row) => el('tr', {}, el('th', { scope: 'row', class: 'line' }, String(row.line)),
    ...preview.columns.map(() => el('td'))), (node, row) => {
    node.classList.toggle('is-out', out.has(`${row.line}:`));
    preview.columns.forEach((column, index) => {
      const cell = /** @type {HTMLTableCellElement} */ (node.children[index + 1]);
      setText(cell, (column.name === grouped ? maskedCell : maskedText)(row.cells[index] ?? '', masks));
      const message = troubled.get(`${row.line}:${column.name}`);
      cell.classList.toggle('is-troubled', message !== undefined);
      cell.classList.toggle('is-stopping', stopping.has(`${row.line}:${column.name}`));
      cell.classList.toggle('is-out', out.has(`${row.line}:${column.name}`));
      if (message) cell.title = message;
      else cell.removeAttribute('title');
    });
  });
}
