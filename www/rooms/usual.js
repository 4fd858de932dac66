/**
 * The room Usual analyses: what a reviewer may ask for, on the same rows, each
 * with what it assumes and where it parts from the courses.
 */

import { el, setText, show, whenChanged } from '../dom.js';
import { text } from '../text.js';
import { goTo } from '../views/stakes.js';
import { analysisArticle } from '../views/usual-analysis.js';

const words = text.usual;

/** @type {import('../types.js').Room} */
export const usualRoom = {
  id: 'usual',
  title: text.rooms.usual,
  mount(root, acts) {
    const wait = el('p', { class: 'hint', role: 'status', 'data-region': 'usual-state' });
    const jump = el('ul', { class: 'asked-for', 'aria-label': words.jump });
    const list = el('div', { class: 'analyses', 'data-region': 'usual' });
    const notes = el('div', { class: 'notes' });
    root.append(el('div', { class: 'room-head' }, el('h2', {}, words.title), el('p', { class: 'room-lead' }, words.lead)), wait, jump, notes, list);
    const drawn = whenChanged((state) => [state.answers.usual?.value, state.findings], (state) => {
      const value = state.answers.usual?.value ?? null;
      jump.replaceChildren(...(value?.analyses ?? []).map(jumpItem));
      notes.replaceChildren(...(value?.notes ?? []).map((/** @type {{message: string}} */ note) => el('p', { class: 'hint' }, note.message)));
      list.replaceChildren(...(value?.analyses ?? []).map((/** @type {any} */ analysis) => analysisArticle(analysis, value, state, acts)));
    });
    return {
      update(state) {
        const answer = state.answers.usual;
        drawn(state);
        const message = answer === null ? words.waiting : answer.status === 'working' ? words.working : answer.message ?? '';
        setText(wait, message);
        show(wait, message !== '');
        list.classList.toggle('stale', answer?.status === 'working');
      },
    };
  },
};

/** @param {{kind: string, name: string, done: boolean, beside: {agrees: boolean|null}}} analysis */
function jumpItem(analysis) {
  const { agrees } = analysis.beside;
  const stands = !analysis.done ? words.notDone : agrees === null ? words.incomparable : agrees ? words.agrees : words.disagrees;
  const to = () => goTo(`usual-${analysis.kind}`);
  return el('li', {}, el('button', { type: 'button', class: 'quiet', onclick: to }, analysis.name), ` ${stands}`);
}

