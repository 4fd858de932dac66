/**
 * The reading: one fixed table at the cursor, groups in the order in which the
 * curves stand there, with the buttons and the field that move the cursor.
 */

import { span } from '../changes.js';
import { el, reconcile, setText, show, svg, whenChanged } from '../dom.js';
import { parseNumber, plainTime, withInterval } from '../numbers.js';
import { readingAt, step } from '../reading.js';
import { placeAmongVisits, whyNone, writtenGap } from '../spoken.js';
import { text } from '../text.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../types.js').Acts} Acts */

const words = text.reading;
/** Above so many pairs each has its own strip only when opened. */
const MANY_PAIRS = 3;
/** Pairs of longer names are written in letters, which the rows of the groups spell out. */
const LONG_PAIR = 32;

/** @param {HTMLElement} root @param {Acts} acts @returns {import('../types.js').View} */
export function mountReading(root, acts) {
  const stepper = mountStepper(acts);
  const groups = el('tbody');
  const gaps = el('tbody', { class: 'pairs' });
  const gapHead = head([words.pairs, words.value, words.interval, words.state]);
  const place = el('span', { class: 'hint' });
  const table = el('table', { class: 'reading-table' },
    head([words.groups, words.value, words.interval, words.followed]), groups,
    gapHead, gaps);
  root.append(stepper.node, place, table);
  const draw = whenChanged((state) => [state.findings, state.cursor, state.status, state.openPairs], (state) => {
    const { findings, cursor } = state;
    const readable = findings !== null && cursor !== null && state.status !== 'failed' && state.status !== 'question';
    show(root, readable);
    if (!readable) return;
    const reading = readingAt(findings, cursor);
    setText(place, [findings.scale.response, placeAmongVisits(reading, findings)].filter(Boolean).join(' \u00b7 '));
    stepper.update(findings, cursor);
    reconcile(groups, reading.groups, (row) => `${row.index}:${row.group}`, (row) => mountRow(row.index, row.group), (node, row) => {
      const numbers = withInterval(row.value, row.lower, row.upper);
      fillRow(node, row.group, numbers?.value ?? '\u2013', numbers, String(row.followed), words.none);
    });
    const many = reading.gaps.length > MANY_PAIRS;
    const lettered = many || reading.gaps.some(({ from, to }) => from.length + to.length > LONG_PAIR);
    table.classList.toggle('many', many);
    table.classList.toggle('with-letters', lettered);
    show(gapHead, reading.gaps.length > 0);
    reconcile(gaps, reading.gaps, (row) => `${row.pair}:${row.from}:${row.to}:${many}`,
      (row) => mountRow(row.kind === 'pair' ? groupIndex(findings, row.to) : -1, '', many ? stripButton(row.pair, acts) : null),
      (node, row) => {
        const { name, unit, numbers } = writtenGap(row, findings.scale);
        fillRow(node, lettered && row.kind === 'pair' ? inLetters(findings, row) : name, numbers ? numbers.value + unit : '\u2013', numbers, words.states[row.state], whyNone(row));
        node.cells[0]?.setAttribute('aria-label', name);
        node.cells[0]?.setAttribute('title', name);
        node.dataset.lane = row.state;
        const button = node.querySelector('button');
        if (!button) return;
        const isOpen = state.openPairs.includes(row.pair);
        setText(button, isOpen ? '\u2212' : '+');
        button.setAttribute('aria-pressed', String(isOpen));
        button.setAttribute('aria-label', words.openLabel(name));
      });
  });
  return { update: draw };
}

/**
 * A pair in letters, which the rows of the groups spell out.
 * @param {import('../types.js').Findings} findings
 * @param {import('../reading.js').GapReading} gap
 */
function inLetters(findings, gap) {
  const [to, from] = [gap.to, gap.from].map((group) => letterOf(groupIndex(findings, group)));
  return findings.scale.ratio ? words.ratio(to ?? '', from ?? '') : words.difference(to ?? '', from ?? '');
}

/** @param {number} index */
function letterOf(index) {
  return String.fromCharCode(65 + index);
}

/** @param {string[]} titles */
function head(titles) {
  return el('thead', {}, el('tr', {}, ...titles.map((title) => el('th', { scope: 'col' }, title))));
}

/** @param {import('../types.js').Findings} findings @param {string} group */
function groupIndex(findings, group) {
  return Math.max(0, findings.groups.findIndex((row) => row.name === group));
}

/**
 * A short piece of a group's line, as in the strips.
 * @param {number} index
 */
export function lineSample(index) {
  const number = (index % 6) + 1;
  return svg('svg', { class: `sample group-${number}`, viewBox: '0 0 26 8', width: '26', height: '8', 'aria-hidden': 'true' },
    svg('line', { x1: '0', x2: '26', y1: '4', y2: '4' }));
}

/** @param {number} index @param {string} name @param {Node|null} [extra] */
function mountRow(index, name, extra = null) {
  const label = el('span', { class: 'row-name' });
  const letter = name === '' ? null : el('b', { class: 'letter', 'aria-hidden': 'true' }, letterOf(index));
  return el('tr', { class: `of-group-${(index % 6) + 1}` },
    el('th', { scope: 'row' }, extra, lineSample(index), letter, label), el('td', { class: 'number' }), el('td', { class: 'interval' }), el('td', { class: 'last' }));
}

/** @param {HTMLTableRowElement} row @param {string} name @param {string} value @param {{lower: string, upper: string}|null} numbers @param {string} last @param {string} none */
function fillRow(row, name, value, numbers, last, none) {
  const label = /** @type {HTMLElement} */ (row.querySelector('.row-name'));
  setText(label, name);
  const [, number, interval, end] = Array.from(row.cells);
  if (number) setText(number, value);
  if (interval) setText(interval, numbers ? words.range(numbers.lower, numbers.upper) : none);
  if (end) setText(end, last);
}

/** @param {number} pair @param {Acts} acts */
function stripButton(pair, acts) {
  return el('button', { type: 'button', class: 'quiet open-strip', onclick: () => acts.togglePair(pair) });
}

/** @param {Acts} acts */
function mountStepper(acts) {
  const label = el('span');
  const field = el('input', { type: 'text', inputmode: 'decimal', class: 'time-field', autocomplete: 'off', 'data-field': 'cursor' });
  const unit = el('span', { class: 'hint' });
  /** @type {{visits: number[], cursor: number}} */
  let now = { visits: [], cursor: 0 };
  /** @param {number} count */
  const button = (count) => el('button', {
    type: 'button', class: 'round', 'aria-label': count < 0 ? text.strips.earlier : text.strips.later, 'data-step': count,
    onclick: () => acts.moveCursor(step(now.visits, now.cursor, count)),
  }, count < 0 ? '\u2190' : '\u2192');
  field.addEventListener('change', () => {
    const time = parseNumber(field.value);
    if (time !== null) acts.moveCursor(time);
  });
  field.addEventListener('keydown', (event) => {
    if (event.key === 'Enter') field.dispatchEvent(new Event('change'));
  });
  setText(label, text.strips.field);
  const node = el('div', { class: 'stepper' }, el('label', { class: 'stepper-field' }, label, unit, field), button(-1), button(1));
  return {
    node,
    /** @param {import('../types.js').Findings} findings @param {number} cursor */
    update(findings, cursor) {
      now = { visits: findings.visits, cursor };
      setText(unit, findings.scale.time_word);
      if (document.activeElement !== field) field.value = plainTime(cursor, span(findings));
    },
  };
}
