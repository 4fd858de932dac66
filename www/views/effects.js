/**
 * The effect sizes that findings carry, per compared pair and per group: folded,
 * since the sentences say the ones that matter most.
 */

import { el, show, whenChanged } from '../dom.js';
import { fixed, plainTime, withInterval } from '../numbers.js';
import { text } from '../text.js';
import { span } from '../changes.js';
import { groupClass } from './small-plot.js';

const words = text.effects;

/** @param {HTMLElement} root @returns {import('../types.js').View} */
export function mountEffects(root) {
  const body = el('div', {});
  const details = el('details', { class: 'as-tables' }, el('summary', {}, words.title), el('p', { class: 'hint' }, words.lead), body);
  root.append(details);
  const drawn = whenChanged((state) => [state.findings, state.status], (state) => {
    /** @type {any} */
    const findings = state.findings;
    const shown = findings !== null && state.status !== 'failed' && findings.group_effects?.length > 0;
    show(details, shown);
    body.replaceChildren(...(shown ? [...findings.pair_effects.map((/** @type {any} */ e, /** @type {number} */ k) => pairTable(e, findings, k)),
      ...findings.group_effects.map((/** @type {any} */ e, /** @type {number} */ k) => groupTable(e, findings, k))] : []));
  });
  return { update: drawn };
}

/** @param {number|null|undefined} df */
const dfText = (df) => (df === null || df === undefined ? '\u2013' : fixed(df, 1));

/** @param {string} what @param {any} effect @returns {string[]|null} */
function row(what, effect) {
  if (!effect) return null;
  const made = withInterval(effect.estimate, effect.lower, effect.upper);
  return made ? [what, made.value, text.reading.range(made.lower, made.upper), dfText(effect.df)] : null;
}

/** @param {string} what @param {number|null} p @returns {string[]|null} */
const chance = (what, p) => (p === null || p === undefined ? null : [what, p < 0.001 ? words.small : fixed(p, p < 0.1 ? 3 : 2), '', '']);

/** @param {any} effects @param {any} findings @param {number} k */
function pairTable(effects, findings, k) {
  const d = findings.differences[k];
  const word = findings.scale.time_word;
  const times = (/** @type {number} */ t) => plainTime(t, span(findings));
  const { margin, margin_unit: unit } = findings.plan.comparisons;
  const onset = effects.onset && [
    words.onset(`${margin}${unit === 'percent' ? '\u00a0%' : ''}`),
    effects.onset.estimate === null ? words.notReached : `${word} ${times(effects.onset.estimate)}`,
    text.reading.range(effects.onset.at_or_before_start || effects.onset.lower === null ? words.orBefore : times(effects.onset.lower),
      effects.onset.upper === null ? words.notReached : times(effects.onset.upper)),
    words.chances(fixed(effects.onset.already_at_start, 2), fixed(effects.onset.never, 2)),
  ];
  const name = text.reading.gap(d, findings.scale.ratio, findings.scale.link);
  const later = row(words.later(findings.plan.comparisons.target, word), effects.to_level);
  return table(name, groupClass(findings.groups, d.to), [
    row(words.landmark(word, effects.landmark_time === null ? '' : times(effects.landmark_time)), effects.landmark),
    row(words.average, effects.average), row(words.area, effects.area), onset, later, chance(words.shared(findings.differences.length), d.p_adjusted), chance(words.level, effects.level_p), chance(words.shape, effects.shape_p),
  ]);
}

/** @param {any} effects @param {any} findings @param {number} k */
function groupTable(effects, findings, k) {
  const { group } = words;
  const name = findings.groups[k].name;
  const halves = effects.doubling_time && effects.doubling_time.estimate < 0;
  const turned = halves && {
    ...effects.doubling_time, estimate: -effects.doubling_time.estimate,
    lower: effects.doubling_time.upper === null ? null : -effects.doubling_time.upper, upper: effects.doubling_time.lower === null ? null : -effects.doubling_time.lower,
  };
  const word = findings.scale.time_word;
  const when = (/** @type {number} */ t) => plainTime(t, span(findings));
  const level = effects.to_level;
  const reached = level && [
    group.reaches(findings.plan.comparisons.target), level.estimate === null ? words.notReached : `${word} ${when(level.estimate)}`,
    text.reading.range(level.at_or_before_start || level.lower === null ? words.orBefore : when(level.lower), level.upper === null ? words.notReached : when(level.upper)),
    words.chances(fixed(level.already_at_start, 2), fixed(level.never, 2)),
  ];
  const [from, to] = effects.growth_over ?? [0, 0];
  const over = findings.plan.comparisons.growth_over === null ? '' : group.over(when(from), when(to));
  const extreme = (/** @type {string} */ what, /** @type {any} */ one) => (one ? [
    row(one.at_end ? `${what} (${group.atEnd})` : what, one.height), row(group.when(what), one.time),
  ] : []);
  return table(name, groupClass(findings.groups, name), [
    row(group.average, effects.average), row(group.area, effects.area), reached, row(`${group.growth(word)}${over}`, effects.growth),
    row(halves ? group.halving : group.doubling, halves ? turned : effects.doubling_time), ...extreme(group.peak, effects.peak), ...extreme(group.nadir, effects.nadir),
  ]);
}

/** @param {string} name @param {string} group @param {(string[]|null)[]} rows */
function table(name, group, rows) {
  const { what, value, interval, df } = words.head;
  const kept = /** @type {string[][]} */ (rows.filter((one) => one !== null && one !== undefined));
  return el('div', { class: 'table-scroller', tabindex: '0', role: 'region', 'aria-label': name }, el('table', { class: 'plain-table' },
    el('caption', {}, el('strong', { class: `lane-name ${group}` }, name)),
    el('thead', {}, el('tr', {}, ...[what, value, interval, df].map((head) => el('th', { scope: 'col' }, head)))),
    el('tbody', {}, ...kept.map((cells) => el('tr', {}, ...cells.map((cell, at) => (at === 0 ? el('th', { scope: 'row' }, cell) : el('td', {}, cell))))))));
}
