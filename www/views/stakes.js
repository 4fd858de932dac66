/**
 * What would change the conclusion and what not: for every check the stretches
 * apart with what it asks about, under those of the plan, on one time axis.
 */

import { el, svg } from '../dom.js';
import { fixed } from '../numbers.js';
import { text } from '../text.js';
import { groupClass } from './small-plot.js';

const words = text.checks;
const OUTCOMES = /** @type {const} */ (['turns', 'moves', 'stands', 'unknown']);
const LANE = { width: 320, pair: 18, left: 2, right: 318 };

/**
 * Moves to a place in the room, for the eye and for the keyboard.
 * @param {string} id
 */
export function goTo(id) {
  const place = document.getElementById(id);
  place?.scrollIntoView({ block: 'start' });
  place?.focus({ preventScroll: true });
}

/**
 * @param {any[]} checks
 * @param {import('../types.js').State} state
 * @returns {HTMLElement[]}
 */
export function stakes(checks, state) {
  return OUTCOMES.flatMap((outcome) => {
    const own = checks.filter((check) => (check.consequence?.outcome ?? 'unknown') === outcome);
    if (own.length === 0) return [];
    return [el('section', { class: 'stakes', 'data-outcome': outcome },
      el('h3', {}, words.outcomes[outcome]),
      el('ul', {}, ...own.map((check) => item(check, state))))];
  });
}

/**
 * What the bars are, pair by pair.
 * @param {any[]} checks
 */
export function stakesKey(checks) {
  const told = checks.find((check) => (check.consequence?.pairs.length ?? 0) > 0);
  const pairs = (told?.consequence.pairs ?? []).map((/** @type {any} */ pair) => text.reading.gap(pair, false));
  return told ? `${words.stakesKey} ${pairs.length > 1 ? words.topDown(pairs.join('; ')) : ''}`.trim() : '';
}

/** @param {any} check @param {import('../types.js').State} state */
function item(check, state) {
  const { consequence } = check;
  return el('li', { 'data-lit': String(check.lit), 'data-key': check.key },
    el('div', { class: 'stake-name' },
      el('button', { type: 'button', class: 'quiet', onclick: () => goTo(`check-${check.key}`) }, check.title), ' ',
      el('span', { class: 'stake-state' }, check.lit ? words.speaks : words.quiet)),
    consequence && consequence.pairs.length > 0 ? lane(check, consequence, state) : null,
    el('p', { class: 'hint' }, consequence ? consequence.sentence : words.untried));
}

/** @param {any} check @param {any} consequence @param {import('../types.js').State} state */
function lane(check, consequence, state) {
  const visits = state.findings?.visits ?? [];
  const [start, end] = [visits[0] ?? 0, visits[visits.length - 1] ?? 1];
  const px = (/** @type {number} */ t) => LANE.left + ((t - start) / (end - start || 1)) * (LANE.right - LANE.left);
  const bars = consequence.pairs.flatMap((/** @type {any} */ pair, /** @type {number} */ k) => {
    const group = groupClass(state.findings?.groups ?? [], pair.to);
    const bar = (/** @type {any} */ s, /** @type {string} */ kind, /** @type {number} */ y) =>
      svg('rect', { class: `stake-bar ${kind} ${group}`, x: px(s.start), width: Math.max(2, px(s.end) - px(s.start)), y: k * LANE.pair + y, height: 6 });
    return [
      ...pair.plan.map((/** @type {any} */ s) => bar(s, 'of-plan', 2)),
      ...pair.trial.map((/** @type {any} */ s) => bar(s, 'of-trial', 9)),
      svg('line', { class: 'plot-grid', x1: LANE.left, x2: LANE.right, y1: (k + 1) * LANE.pair - 1, y2: (k + 1) * LANE.pair - 1 }),
    ];
  });
  const height = consequence.pairs.length * LANE.pair + 2;
  const drawing = svg('svg', { class: 'stake-lane', viewBox: `0 0 ${LANE.width} ${height}`, role: 'img', 'aria-label': `${check.title}. ${consequence.sentence}` }, ...bars);
  return el('figure', { class: 'stake-figure' }, drawing,
    el('p', { class: 'lane-ends hint', 'aria-hidden': 'true' }, el('span', {}, fixed(start, 0)), el('span', {}, fixed(end, 0))));
}
