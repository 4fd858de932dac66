/**
 * Other models beside the plan's: the gap of each laid over the plan's own band,
 * so that one sees whether the choice matters, and one sentence on how well it
 * foresees and fits.
 */

import { el, fillByFrames, setText, show, whenChanged } from '../dom.js';
import { completePlan } from '../plan.js';
import { text } from '../text.js';
import { groupClass, smallPlot } from './small-plot.js';

const words = text.checks.candidates;

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountCandidates(root, acts) {
  const ask = el('button', { type: 'button', 'data-act': 'candidates', onclick: () => acts.ask('candidates') }, words.ask);
  const wait = el('span', { class: 'hint', role: 'status' });
  const reason = el('p', { class: 'verdict', 'data-region': 'proposal' });
  const list = el('div', { class: 'candidates', 'data-region': 'candidates' });
  root.append(el('h3', {}, words.title), el('p', { class: 'room-lead' }, words.lead), el('p', {}, ask, ' ', wait), reason, list);
  const drawn = whenChanged((state) => [state.answers.candidates?.value, state.findings], (state) => {
    const value = state.answers.candidates?.value ?? null;
    setText(reason, value?.reason ?? '');
    fillByFrames(list, value?.models ?? [], (/** @type {any} */ model, k) => article(model, k, value, state, acts));
  });
  return {
    update(state) {
      const answer = state.answers.candidates;
      drawn(state);
      const old = answer !== null && answer.value !== null && answer.plan !== state.answers.checks?.plan;
      setText(wait, answer?.status === 'working' ? words.working : old ? words.old : answer?.message ?? '');
      list.classList.toggle('stale', answer?.status === 'working' || old);
      show(reason, answer?.value != null);
    },
  };
}

/**
 * @param {any} model
 * @param {number} index
 * @param {any} all
 * @param {import('../types.js').State} state
 * @param {import('../types.js').Acts} acts
 */
function article(model, index, all, state, acts) {
  const node = el('article', { class: 'candidate', 'data-proposed': String(index === all.proposed) },
    el('h4', {}, index === 0 ? words.plan : model.name.charAt(0).toUpperCase() + model.name.slice(1)), el('p', {}, model.sentence));
  if (index > 0 && model.fitted) {
    const use = () => acts.choose(words.used(model.name), (choices) => ({
      ...choices, plan: { ...completePlan(model.plan), exclusions: choices.plan.exclusions, words: choices.plan.words },
    }));
    node.append(el('p', {}, el('button', { type: 'button', class: 'quiet', onclick: use }, words.use)));
  }
  if (model.gaps.length > 0) {
    node.append(el('div', { class: 'candidate-gaps' }, ...all.pairs.slice(0, 3).map((/** @type {string[]} */ pair, /** @type {number} */ k) => {
      const [from = '', to = ''] = pair;
      const group = groupClass(state.findings?.groups ?? [], to);
      const plot = smallPlot({
        label: words.label(model.name, to, from), across: state.findings?.scale.time_word ?? '', up: '', width: 260, height: 120, levels: [0],
        bands: [{ x: all.time, low: all.lower[k], high: all.upper[k], group }],
        series: [{ x: all.time, y: all.models[0].gaps[k], joined: true, group, kind: 'faint' }, { x: all.time, y: model.gaps[k], joined: true, group, kind: index === 0 ? '' : 'dashed' }],
      });
      return el('figure', {}, el('figcaption', { class: 'hint' }, state.findings?.scale.ratio ? words.logGap(to, from) : text.reading.difference(to, from)), plot);
    })));
  }
  return node;
}
