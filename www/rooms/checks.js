/**
 * The room Checks: does the table speak against the model, and would that
 * change the conclusion.
 */

import { el, fillByFrames, setText, show, whenChanged } from '../dom.js';
import { text } from '../text.js';
import { mountCandidates } from '../views/candidates.js';
import { checkArticle } from '../views/check.js';
import { stakes, stakesKey } from '../views/stakes.js';

const words = text.checks;

/** @type {import('../types.js').Room} */
export const checksRoom = {
  id: 'checks',
  title: text.rooms.checks,
  mount(root, acts) {
    const wait = el('p', { class: 'hint', role: 'status', 'data-region': 'checks-state' });
    const verdict = el('p', { class: 'verdict', 'data-region': 'verdict' });
    const strip = el('section', { class: 'verdict-strip', 'aria-label': words.verdict });
    const key = el('p', { class: 'hint' });
    const list = el('div', { class: 'checks', 'data-region': 'checks' });
    const others = el('section', { class: 'other-models' });
    const change = el('p', { class: 'change' });
    const undo = el('button', { type: 'button', class: 'quiet', onclick: acts.undo }, text.change.undo);
    root.append(el('div', { class: 'room-head' }, el('h2', {}, words.title), el('p', { class: 'room-lead' }, words.lead)),
      change, wait, verdict, key, strip, list, others);
    const candidates = mountCandidates(others, acts);
    const drawn = whenChanged((state) => [state.answers.checks?.value], (state) => {
      const value = state.answers.checks?.value ?? null;
      setText(verdict, value?.verdict ?? '');
      strip.replaceChildren(...stakes(value?.checks ?? [], state));
      setText(key, stakesKey(value?.checks ?? []));
      show(key, key.textContent !== '');
      fillByFrames(list, value?.checks ?? [], (/** @type {any} */ check) => checkArticle(check, state, acts));
    });
    return {
      update(state) {
        const answer = state.answers.checks;
        drawn(state);
        candidates.update(state);
        const message = answer === null ? words.waiting : answer.status === 'working' ? words.working : answer.message ?? '';
        setText(wait, message);
        show(wait, message !== '');
        list.classList.toggle('stale', answer?.status === 'working');
        const label = state.change && !state.change.back ? state.change.label : '';
        change.replaceChildren(...(label ? [`${label} \u00b7 `, undo] : []));
      },
    };
  },
};
