/**
 * One check: its small plot, what is seen, what it means, what to try, and the
 * one control that tries it.
 */

import { el } from '../dom.js';
import { fixed, significant } from '../numbers.js';
import { completePlan } from '../plan.js';
import { text } from '../text.js';
import { groupClass, smallPlot } from './small-plot.js';

const words = text.checks;
/** Rows of a plot's table that are written out. */
const MOST_ROWS = 200;

/**
 * @param {any} check
 * @param {import('../types.js').State} state
 * @param {import('../types.js').Acts} acts
 */
export function checkArticle(check, state, acts) {
  const told = el('div', { class: 'check-told' }, el('h3', {}, check.title),
    el('p', {}, check.seen), check.means ? el('p', {}, check.means) : null,
    check.advice ? el('p', {}, el('strong', {}, `${words.advice}: `), check.advice) : null);
  if (check.trial) {
    const tryIt = () => acts.choose(words.tried(check.title), trying(check.trial));
    told.append(el('p', {}, el('button', { type: 'button', 'data-act': `try-${check.key}`, onclick: tryIt }, words.try), ' ',
      el('span', { class: 'hint' }, words.tries)));
  }
  if (check.p !== null) {
    told.append(el('p', { class: 'hint' }, words.chance(check.p < 0.001 ? words.small : fixed(check.p, check.p < 0.1 ? 3 : 2))));
  }
  const article = el('article', { class: 'check', id: `check-${check.key}`, tabindex: '-1', 'data-key': check.key, 'data-lit': String(check.lit) }, told);
  const plots = [check.plot, ...check.more].filter((plot) => plot.series.length > 0);
  article.append(el('div', { class: 'check-plots' }, ...plots.map((plot) => figure(check, plot, state))));
  return article;
}

/**
 * The choices with a trial: its plan, and the rows that it leaves out beside those left out already.
 * @param {any} trial
 * @returns {(choices: import('../types.js').Choices) => import('../types.js').Choices}
 */
function trying(trial) {
  return (choices) => {
    /** @param {{row: number, column?: string|null}} one */
    const key = (one) => `${one.row}:${one.column ?? ''}`;
    const known = new Set(choices.leftOut.map(key));
    const fresh = trial.exclusions.filter((/** @type {any} */ one) => !known.has(key(one)))
      .map((/** @type {any} */ { row, column = null, reason }) => ({ row, column, reason, seen: true }));
    return {
      ...choices,
      plan: { ...completePlan(trial), exclusions: choices.plan.exclusions, words: choices.plan.words },
      leftOut: [...choices.leftOut, ...fresh].sort((a, b) => a.row - b.row),
    };
  };
}

/** @param {any} check @param {any} plot @param {import('../types.js').State} state */
function figure(check, plot, state) {
  const groups = state.findings?.groups ?? [];
  const first = plot.series[0];
  const order = first.x.map((/** @type {number} */ x, /** @type {number} */ k) => [x, k]).sort((/** @type {number[]} */ a, /** @type {number[]} */ b) => (a[0] ?? 0) - (b[0] ?? 0));
  const bands = plot.envelope.length === 0 ? [] : [{
    x: order.map((/** @type {number[]} */ one) => one[0]),
    low: order.map((/** @type {number[]} */ one) => plot.envelope[one[1] ?? 0][0]),
    high: order.map((/** @type {number[]} */ one) => plot.envelope[one[1] ?? 0][1]),
  }];
  const drawing = smallPlot({
    label: words.label(check.title, plot.up, plot.across, check.seen), across: plot.across, up: plot.up, bands,
    levels: plot !== check.plot || check.key === 'spread' ? [] : check.key === 'robust' ? [1] : [0],
    series: plot.series.map((/** @type {any} */ one, /** @type {number} */ k) => ({
      ...one, group: groupClass(groups, one.group ?? one.name),
      // Of those left out in turn only the one that matters most is named.
      ...(check.key === 'influence' && k > 0 ? { kind: k === 1 ? 'dashed' : 'faint', name: k === 1 ? one.name : '' } : {}),
    })),
  });
  const caption = plot.says ? `${plot.up} \u00b7 ${plot.says}` : plot.up;
  return el('figure', { class: 'plot-figure' }, el('figcaption', { class: 'hint' }, caption), drawing, values(plot));
}

/** @param {any} plot */
function values(plot) {
  const rows = plot.series.flatMap((/** @type {any} */ one) => one.x.map((/** @type {number} */ x, /** @type {number} */ k) => [one.name, x, one.y[k]]));
  const body = rows.slice(0, MOST_ROWS).map((/** @type {any[]} */ row) => el('tr', {},
    el('th', { scope: 'row' }, row[0] || '\u2013'), el('td', { class: 'number' }, significant(row[1])), el('td', { class: 'number' }, significant(row[2]))));
  return el('details', { class: 'as-tables' }, el('summary', {}, words.values),
    el('div', { class: 'table-scroller tall', tabindex: '0', role: 'region', 'aria-label': words.values },
      el('table', { class: 'plain-table' },
        el('thead', {}, el('tr', {}, el('th', { scope: 'col' }, text.reading.groups), el('th', { scope: 'col', class: 'number' }, plot.across), el('th', { scope: 'col', class: 'number' }, plot.up))),
        el('tbody', {}, ...body))));
}
