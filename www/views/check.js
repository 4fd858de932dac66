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
    const tryIt = () => acts.choose(words.tried(check.title), (choices) => ({
      ...choices, plan: { ...completePlan(check.trial), exclusions: choices.plan.exclusions, words: choices.plan.words },
    }));
    told.append(el('p', {}, el('button', { type: 'button', 'data-act': `try-${check.key}`, onclick: tryIt }, words.try), ' ',
      el('span', { class: 'hint' }, words.tries)));
  }
  if (check.p !== null) {
    told.append(el('p', { class: 'hint' }, words.chance(check.p < 0.001 ? words.small : fixed(check.p, check.p < 0.1 ? 3 : 2))));
  }
  const article = el('article', { class: 'check', id: `check-${check.key}`, 'data-key': check.key, 'data-lit': String(check.lit) }, told);
  if (check.plot.series.length > 0) article.append(figure(check, state));
  return article;
}

/** @param {any} check @param {import('../types.js').State} state */
function figure(check, state) {
  const { plot } = check;
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
    levels: check.key === 'robust' ? [1] : check.key === 'spread' ? [] : [0],
    series: plot.series.map((/** @type {any} */ one, /** @type {number} */ k) => ({
      ...one, group: groupClass(groups, one.name),
      // Of those left out in turn only the one that matters most is named.
      ...(check.key === 'influence' && k > 0 ? { kind: k === 1 ? 'dashed' : 'faint', name: k === 1 ? one.name : '' } : {}),
    })),
  });
  const caption = plot.envelope.length > 0 && check.key !== 'influence' ? `${plot.up} \u00b7 ${words.envelope}` : plot.up;
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
