/**
 * What stood out, by row and column, each with a way to leave the row out.
 */

import { el, reconcile, setText, show, whenChanged } from '../dom.js';
import { parseNumber } from '../numbers.js';
import { maskedText } from '../masks.js';
import { withSection } from '../plan.js';
import { text } from '../text.js';

/** @typedef {import('../types.js').Problem} Problem */
/** @typedef {import('../types.js').Acts} Acts */

const words = text.data.problems;
const SHOWN = 12;

/** @param {HTMLElement} root @param {Acts} acts @returns {import('../types.js').View} */
export function mountProblems(root, acts) {
  const none = el('p', { class: 'hint' }, words.none);
  const offers = el('ul', { class: 'problem-list' });
  const list = el('ul', { class: 'problem-list' });
  const rest = el('ul', { class: 'problem-list' });
  const label = el('summary');
  const more = el('details', {}, label, rest);
  const other = mountOther(acts);
  root.append(el('h2', {}, words.title), none, offers, list, more, other.node);
  return {
    update: whenChanged((state) => [state.preview, state.findings, state.choices.leftOut, state.choices.masks, state.message], (state) => {
      const all = [...(state.preview?.problems ?? []), ...(state.findings?.problems ?? [])];
      const known = all.map((one) => ({ ...one, value: maskedText(one.value, state.choices.masks), message: maskedText(one.message, state.choices.masks) }));
      const open = unique(known).filter((problem) => !isOut(problem, state.choices.leftOut));
      const stopping = open.filter((problem) => problem.stops);
      const problems = [...stopping, ...open.filter((problem) => !problem.stops)];
      const draw = (/** @type {HTMLElement} */ to, /** @type {Problem[]} */ rows) =>
        reconcile(to, rows, keyOf, (problem) => mountProblem(problem, (state.preview?.layout ?? 'long') !== 'long', acts));
      draw(list, problems.slice(0, SHOWN));
      draw(rest, problems.slice(SHOWN, 200));
      reconcile(offers, state.preview?.nearSpellings ?? [], (row) => `${row.from}:${row.into}`, (row) => mountOffer(row, acts));
      show(none, problems.length === 0 && offers.children.length === 0 && state.preview !== null);
      other.suggest(state.status === 'problem' && stopping.length === 0 ? rowIn(state.message ?? '') : null);
      show(more, problems.length > SHOWN);
      setText(label, words.more(problems.length - SHOWN));
    }),
  };
}

/**
 * The row that a refusal names, if it names one.
 * @param {string} message
 */
function rowIn(message) {
  const named = /\b(?:row|line) (\d+)\b/i.exec(message);
  return named ? Number(named[1]) : null;
}

/** @param {{from: string, into: string}} near @param {Acts} acts */
function mountOffer({ from, into }, acts) {
  const unite = () => acts.choose(words.united(from, into), (choices) => ({
    ...choices,
    plan: withSection(choices.plan, 'reading', { merges: [...choices.plan.reading.merges, { from, into }] }),
  }));
  return el('li', {}, words.near(from, into), ' ', el('button', { type: 'button', class: 'quiet', onclick: unite }, words.unite));
}

/** @param {Problem} problem */
function keyOf(problem) {
  return `${problem.row}:${problem.column}:${problem.message}`;
}

/** @param {Problem[]} problems */
function unique(problems) {
  return Array.from(new Map(problems.map((problem) => [keyOf(problem), problem])).values());
}

/** @param {Problem} problem @param {import('../types.js').LeftOut[]} leftOut */
function isOut(problem, leftOut) {
  return leftOut.some((one) => one.row === problem.row && (one.column === null || one.column === problem.column));
}

/** @param {Problem} problem @param {boolean} wide @param {Acts} acts */
function mountProblem(problem, wide, acts) {
  const ask = askForReason(acts, () => problem.row, wide ? problem.column : null);
  const start = el('button', {
    type: 'button', class: 'quiet', 'aria-label': words.leaveOutLabel(problem.row), onclick: () => ask.open(start),
  }, wide ? words.leaveCellOut : words.leaveOut);
  const value = problem.value === '' ? null : el('code', {}, problem.value);
  return el('li', {}, el('strong', {}, words.where(problem.row, problem.column)), ' ', value, ' ',
    el('span', {}, problem.message), ' ', ...(problem.kept === false ? [] : [start, ask.node]));
}

/**
 * A small form for the reason, which the record keeps.
 * @param {Acts} acts
 * @param {() => number|null} row
 * @param {string|null} column
 */
function askForReason(acts, row, column) {
  const reason = el('input', { type: 'text', autocomplete: 'off', required: true });
  const node = el('form', { class: 'ask', hidden: true, novalidate: true },
    el('label', { class: 'field' }, el('span', {}, words.reason), reason),
    el('button', { type: 'submit' }, words.confirm),
    el('button', { type: 'button', class: 'quiet', onclick: () => close() }, words.cancel));
  /** @type {HTMLElement|null} */
  let opener = null;
  function close() {
    show(node, false);
    opener?.focus();
  }
  node.addEventListener('keydown', (event) => {
    if (event.key === 'Escape') close();
  });
  node.addEventListener('submit', (event) => {
    event.preventDefault();
    const line = row();
    const why = reason.value.trim();
    reason.setAttribute('aria-invalid', String(why === ''));
    if (line === null || why === '') return reason.focus();
    close();
    acts.leaveOut(line, column, why);
  });
  return {
    node,
    /** @param {HTMLElement} from */
    open(from) {
      opener = from;
      show(node, true);
      reason.focus();
    },
  };
}

/** A row that nothing flagged. @param {Acts} acts */
function mountOther(acts) {
  const line = el('input', { type: 'text', inputmode: 'numeric', class: 'time-field', 'data-field': 'leave-out' });
  const number = () => {
    const value = parseNumber(line.value);
    return value !== null && Number.isInteger(value) && value > 1 ? value : null;
  };
  const ask = askForReason(acts, number, null);
  const start = el('button', { type: 'button', class: 'quiet' }, words.leaveOut);
  start.addEventListener('click', () => (number() === null ? line.focus() : ask.open(start)));
  const node = el('details', { class: 'other-row' }, el('summary', {}, words.any),
    el('p', {}, el('label', { class: 'field' }, el('span', {}, words.line), line), ' ', start), ask.node);
  return {
    node,
    /** @param {number|null} row */
    suggest(row) {
      if (row === null) return;
      node.open = true;
      line.value = String(row);
    },
  };
}
