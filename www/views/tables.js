/**
 * The strips as tables, for reading aloud and for copying: values at the
 * visits, and the stretches of every gap. The grid between is left to the
 * cursor.
 */

import { span } from '../changes.js';
import { el, whenChanged } from '../dom.js';
import { estimatedTime, plainTime, withInterval } from '../numbers.js';
import { readingAt } from '../reading.js';
import { writtenGap } from '../spoken.js';
import { text } from '../text.js';

/** @typedef {import('../types.js').Findings} Findings */
/** @typedef {import('../types.js').Stretch} Stretch */

const words = text.tables;
/** Visits listed; with more, they are spread over the course. */
const MOST_VISITS = 60;

/** @param {HTMLElement} root @returns {import('../types.js').View} */
export function mountTables(root) {
  const body = el('div');
  const box = el('details', { class: 'as-tables' }, el('summary', {}, words.title), body);
  root.append(box);
  /** @type {Findings|null} */
  let waiting = null;
  const fill = () => {
    if (!box.open || !waiting) return;
    body.replaceChildren(visitTable(waiting), stretchTable(waiting));
    waiting = null;
  };
  box.addEventListener('toggle', fill);
  return {
    update: whenChanged((state) => [state.findings, state.status], ({ findings, status }) => {
      root.hidden = findings === null || status === 'failed' || status === 'question';
      waiting = findings;
      fill();
    }),
  };
}

/** @param {string} caption @param {string[]} heads @param {string[][]} rows */
function table(caption, heads, rows) {
  return el('div', { class: 'table-scroller', tabindex: '0', role: 'region', 'aria-label': caption }, el('table', { class: 'plain-table' },
    el('caption', { class: 'hint' }, caption),
    el('thead', {}, el('tr', {}, ...heads.map((head) => el('th', { scope: 'col' }, head)))),
    el('tbody', {}, ...rows.map(([first = '', ...rest]) =>
      el('tr', {}, el('th', { scope: 'row' }, first), ...rest.map((cell) => el('td', {}, cell)))))));
}

/** @param {{value: string, lower: string, upper: string}|null} numbers @param {string} unit */
function cell(numbers, unit) {
  return numbers ? `${numbers.value}${unit} (${text.reading.range(numbers.lower, numbers.upper)})` : '\u2013';
}

/** @param {Findings} findings */
function visitTable(findings) {
  const every = Math.ceil(findings.visits.length / MOST_VISITS);
  const visits = findings.visits.filter((_, index) => index % every === 0);
  const { ratio, time_word: word, response } = findings.scale;
  const first = readingAt(findings, visits[0] ?? 0);
  const pairs = first.gaps.slice().sort((a, b) => a.pair - b.pair);
  const heads = [word, ...findings.curves.map((curve) => curve.group), ...pairs.map((gap) => writtenGap(gap, findings.scale).name)];
  const rows = visits.map((visit) => {
    const reading = readingAt(findings, visit);
    const groups = reading.groups.slice().sort((a, b) => a.index - b.index);
    const gaps = reading.gaps.slice().sort((a, b) => a.pair - b.pair).map((gap) => writtenGap(gap, findings.scale));
    return [
      plainTime(visit, span(findings)),
      ...groups.map((row) => cell(withInterval(row.value, row.lower, row.upper), '')),
      ...gaps.map(({ numbers, unit }) => cell(numbers, unit)),
    ];
  });
  return table(words.visits(response), heads, rows);
}

/** @param {Findings} findings */
function stretchTable(findings) {
  const { ratio, time_word: word } = findings.scale;
  const rows = findings.differences.flatMap((difference) => {
    const name = text.reading.gap(difference, ratio, findings.scale.link);
    const hasMargin = difference.margin[0] !== difference.margin[1];
    /** @param {Stretch[]} stretches @param {string} state */
    const of = (stretches, state) => stretches.map((stretch) => [
      name, stretch.direction ? `${state}, ${words.directions[stretch.direction]}` : state, edge(findings, stretch, 'start'), edge(findings, stretch, 'end'),
    ]);
    const { apart, beyond, inside } = text.reading.states;
    const listed = [
      ...of(difference.stretches, apart),
      ...(hasMargin ? [...of(difference.beyond, beyond), ...of(difference.inside, inside)] : []),
    ];
    return listed.length > 0 ? listed : [[name, text.reading.states.undecided, '', '']];
  });
  return table(words.stretches, [text.reading.pairs, text.reading.state, words.from(word), words.to(word)], rows);
}

/** @param {Findings} findings @param {Stretch} stretch @param {'start'|'end'} which */
function edge(findings, stretch, which) {
  const open = which === 'start' ? stretch.open_start : stretch.open_end;
  if (open) return which === 'start' ? words.first : words.last;
  return estimatedTime(stretch[which], span(findings));
}
