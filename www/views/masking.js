/** Masks the names of the groups while rows are judged, and shows them again. */

import { el, setText, show, whenChanged } from '../dom.js';
import { contextOf } from '../context.js';
import { masksFor, unmasked } from '../masks.js';
import { text } from '../text.js';

const words = text.data.masking;

/** @param {HTMLElement} root @param {import('../types.js').Acts} acts @returns {import('../types.js').View} */
export function mountMasking(root, acts) {
  const button = el('button', { type: 'button', 'data-act': 'mask-groups' });
  const hint = el('p', { class: 'hint' });
  root.append(el('h2', {}, words.title), hint, el('p', {}, button));
  button.addEventListener('click', () => {
    const state = acts.look();
    if (state.choices.masks !== null) acts.choose(words.shown, unmasked);
    else {
      const masks = masksFor(contextOf(state).groups, words.named);
      acts.choose(words.hidden, (choices) => ({ ...choices, masks }));
    }
  });
  return {
    update: whenChanged((state) => [state.choices.masks, state.choices.plan, state.findings, state.description], (state) => {
      const masked = state.choices.masks !== null;
      // The names of crossed factors are put together after masking.
      const crossed = state.choices.plan.columns.crossed !== null;
      show(root, masked || contextOf(state).groups.length > 1);
      show(button, masked || !crossed);
      setText(button, masked ? words.unmask : words.mask);
      setText(hint, crossed ? words.crossed : masked ? words.isMasked : words.hint);
    }),
  };
}
