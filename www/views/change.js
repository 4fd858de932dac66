/**
 * The line after each change: what was chosen, which day was, which is now.
 */

import { el, setText, show, whenChanged } from '../dom.js';
import { text } from '../text.js';

/** @param {import('../types.js').State} state */
function sentence({ change, findings, status }) {
  if (!change) return '';
  const settled = status === 'ready' || status === 'boundary';
  if (!settled || change.pair === null) return change.label;
  return text.change.line(change.label, change.pair.to, change.before, change.after, findings?.scale.time_word ?? '');
}

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountChange(root, acts) {
  const line = el('span');
  // One button for both ways, so that the focus stays where it was.
  let back = false;
  const turn = el('button', { type: 'button', class: 'quiet', onclick: () => (back ? acts.redo() : acts.undo()) });
  const dot = el('span', { 'aria-hidden': 'true' }, ' \u00b7 ');
  root.append(line, dot, turn);
  return {
    update: whenChanged((state) => [state.change, state.status, state.history], (state) => {
      const words = sentence(state);
      setText(line, words);
      back = state.change?.back ?? false;
      const can = words !== '' && (back ? state.history.future : state.history.past).length > 0;
      setText(turn, back ? text.change.redo : text.change.undo);
      show(dot, can);
      show(turn, can);
    }),
  };
}
