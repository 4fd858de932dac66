/**
 * The room Dropout: who leaves when and after which values, and what becomes of
 * the conclusion if those who left had gone on otherwise.
 */

import { el, setText, show, whenChanged } from '../dom.js';
import { plainTime, significant } from '../numbers.js';
import { text } from '../text.js';
import { mountEndings, steps } from '../views/endings.js';
import { mountSensitivity } from '../views/sensitivity.js';
import { groupClass, smallPlot } from '../views/small-plot.js';

const words = text.dropout;

/** @type {import('../types.js').Room} */
export const dropoutRoom = {
  id: 'dropout',
  title: text.rooms.dropout,
  mount(root, acts) {
    const wait = el('p', { class: 'hint', role: 'status', 'data-region': 'dropout-state' });
    const told = el('div', { class: 'dropout-told', 'data-region': 'dropout' });
    const plots = el('div', { class: 'dropout-plots' });
    const estimand = el('p', {});
    const about = el('section', { hidden: true }, el('h3', {}, words.estimand), estimand);
    const what = el('section', { class: 'sensitivity' });
    const sensitivity = mountSensitivity(what, acts);
    const ends = el('section', {}, el('h3', {}, words.endings.title));
    const endings = mountEndings(ends, acts);
    root.append(el('div', { class: 'room-head' }, el('h2', {}, words.title)), wait, told, plots, ends, about, what);
    const drawn = whenChanged((state) => [state.answers.dropout?.value, state.findings], (state) => {
      const value = state.answers.dropout?.value ?? null;
      told.replaceChildren(...(value?.sentences ?? []).map((/** @type {string} */ one) => el('p', {}, one)));
      plots.replaceChildren(...(value && state.findings ? [followedPlot(value, state), ...leaversPlot(value, state, acts)] : []));
      setText(estimand, value?.estimand ?? '');
      show(about, value !== null);
    });
    return {
      update(state) {
        const answer = state.answers.dropout;
        drawn(state);
        endings.update(state);
        sensitivity.update(state);
        const message = answer === null ? words.waiting : answer.status === 'working' ? words.working : answer.message ?? '';
        setText(wait, message);
        show(wait, message !== '');
      },
    };
  },
};

/** @param {any} value @param {import('../types.js').State} state */
function followedPlot(value, state) {
  const groups = state.findings?.groups ?? [];
  const [first = 0, last = 1] = [state.findings?.visits[0], state.findings?.visits[state.findings.visits.length - 1]];
  const plot = smallPlot({
    label: `${words.followed}. ${value.sentences.join(' ')}`, across: state.findings?.scale.time_word ?? '', up: words.followed, yRange: [0, 1.04], width: 480, height: 220,
    series: value.groups.map((/** @type {any} */ g) => ({ ...steps(g.time, g.share, [first, last]), joined: true, name: g.group, group: groupClass(groups, g.group) })),
  });
  return el('figure', { class: 'plot-figure' }, el('figcaption', { class: 'hint' }, words.followedHint), plot);
}

/** @param {any} value @param {import('../types.js').State} state @param {import('../types.js').Acts} acts */
function leaversPlot(value, state, acts) {
  const { findings } = state;
  if (value.leavers.length === 0 || !findings) return [];
  const span = (findings.visits[findings.visits.length - 1] ?? 1) - (findings.visits[0] ?? 0);
  const plot = smallPlot({
    label: `${words.leavers}. ${words.leaversHint}`, across: findings.scale.time_word, up: words.leavers, width: 480, height: 220,
    series: [
      ...findings.curves.map((curve) => ({ x: curve.time, y: curve.response_mean, joined: true, name: curve.group, group: groupClass(findings.groups, curve.group) })),
      ...findings.groups.map((group) => {
        const own = value.leavers.filter((/** @type {any} */ one) => one.group === group.name);
        return { x: own.map((/** @type {any} */ one) => one.last_time), y: own.map((/** @type {any} */ one) => one.last_value), group: groupClass(findings.groups, group.name) };
      }),
    ],
  });
  const heads = words.heads;
  const rows = value.leavers.map((/** @type {any} */ one) => el('tr', {}, el('th', { scope: 'row' }, one.subject), el('td', {}, one.group),
    el('td', { class: 'number' }, plainTime(one.last_time, span)), el('td', { class: 'number' }, significant(one.last_value)), el('td', { class: 'number' }, significant(one.course)), el('td', {}, removedCell(one, acts))));
  return [el('figure', { class: 'plot-figure' }, el('figcaption', { class: 'hint' }, words.leaversHint), plot,
    el('details', { class: 'as-tables' }, el('summary', {}, words.leaversTable),
      el('div', { class: 'table-scroller tall', tabindex: '0', role: 'region', 'aria-label': words.leaversTable },
        el('table', { class: 'plain-table' }, el('thead', {}, el('tr', {}, ...Object.values(heads).map((head) => el('th', { scope: 'col' }, head)))), el('tbody', {}, ...rows)))))];
}

/**
 * Whether one who leaves was removed as planned: told by the table, or by hand.
 * @param {{subject: string, removed: string|null}} one
 * @param {import('../types.js').Acts} acts
 */
function removedCell(one, acts) {
  const byHand = acts.look().choices.plan.removed.includes(one.subject);
  if (one.removed !== null && !byHand) return one.removed;
  const box = el('input', { type: 'checkbox', 'aria-label': words.endings.mark(one.subject) });
  box.checked = byHand;
  box.addEventListener('change', () => acts.choose(words.endings.mark(one.subject), (choices) => {
    const others = choices.plan.removed.filter((name) => name !== one.subject);
    return { ...choices, plan: { ...choices.plan, removed: box.checked ? [...others, one.subject] : others } };
  }));
  return box;
}
