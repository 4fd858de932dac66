/**
 * Planned removal and the time to a level: what tells of them, and the shares
 * without the event over time.
 */

import { contextOf } from '../context.js';
import { el, setText, whenChanged } from '../dom.js';
import { parseNumber } from '../numbers.js';
import { withSection } from '../plan.js';
import { text } from '../text.js';
import { groupClass, smallPlot } from './small-plot.js';

const words = text.dropout.endings;

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountEndings(root, acts) {
  const column = el('select', { 'data-field': 'removal' });
  column.addEventListener('change', () => acts.choose(words.chosen(column.value), (choices) => ({
    ...choices, plan: withSection(choices.plan, 'columns', { removal: column.value || null }),
  })));
  const complaint = el('span', { class: 'complaint', role: 'alert' });
  const level = el('input', { type: 'text', inputmode: 'decimal', autocomplete: 'off', 'data-field': 'level-sought' });
  level.addEventListener('input', () => {
    const typed = level.value.trim();
    const value = typed === '' ? null : parseNumber(typed);
    setText(complaint, typed !== '' && value === null ? words.number : '');
    if (typed !== '' && value === null) return;
    acts.choose(words.level, (choices) => ({ ...choices, plan: withSection(choices.plan, 'comparisons', { target: value }) }), true);
  });
  const plots = el('div', { class: 'dropout-plots' });
  root.append(el('div', { class: 'field-row' },
    el('label', { class: 'field' }, el('span', {}, words.column), column),
    el('label', { class: 'field' }, el('span', {}, words.level), level, complaint)), plots);
  const listed = whenChanged((state) => [state.preview, state.choices.plan], (state) => {
    const { candidates } = contextOf(state);
    column.replaceChildren(el('option', { value: '' }, words.none), ...candidates.map(({ name }) => el('option', { value: name }, name)));
    column.value = state.choices.plan.columns.removal ?? '';
    const { target } = state.choices.plan.comparisons;
    if (document.activeElement !== level) level.value = target === null ? '' : String(target);
  });
  const drawn = whenChanged((state) => [state.answers.dropout?.value, state.findings], (state) => {
    const value = state.answers.dropout?.value ?? null;
    const of = (/** @type {any} */ times, /** @type {string} */ title) => (times && state.findings ? [eventPlot(times, title, state)] : []);
    plots.replaceChildren(...of(value?.removal, words.removal), ...of(value?.level, words.reached));
  });
  return {
    update(state) {
      listed(state);
      drawn(state);
    },
  };
}

/**
 * A share that falls in steps from the first to the last visit.
 * @param {number[]} times
 * @param {number[]} heights
 * @param {[number, number]} ends
 */
export function steps(times, heights, [first, last]) {
  const x = [first];
  const y = [1];
  times.forEach((time, k) => {
    x.push(time, time);
    y.push(k === 0 ? 1 : heights[k - 1] ?? 1, heights[k] ?? 1);
  });
  x.push(last);
  y.push(heights[heights.length - 1] ?? 1);
  return { x, y };
}

/** @param {any} times @param {string} title @param {import('../types.js').State} state */
function eventPlot(times, title, state) {
  const visits = state.findings?.visits ?? [];
  const ends = /** @type {[number, number]} */ ([visits[0] ?? 0, visits[visits.length - 1] ?? 1]);
  const plot = smallPlot({
    label: `${title}. ${times.sentence}`, across: state.findings?.scale.time_word ?? '', up: title, yRange: [0, 1.04], width: 480, height: 220,
    series: times.groups.map((/** @type {any} */ one) => ({
      ...steps(one.time, one.share, ends), joined: true, name: one.group, group: groupClass(state.findings?.groups ?? [], one.group),
    })),
  });
  return el('figure', { class: 'plot-figure' }, el('figcaption', { class: 'hint' }, title), plot);
}
