/**
 * What a subject is called.
 */

import { el, whenChanged } from '../dom.js';
import { text } from '../text.js';
import { mountNoun } from './choice-fields.js';

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountWording(root, acts) {
  const fields = el('div', { class: 'choice-fields' });
  root.append(el('h2', {}, text.data.noun.title), el('p', { class: 'hint' }, text.data.noun.label), fields);
  const noun = mountNoun(fields, acts);
  return { update: whenChanged((state) => [state.choices.noun], (state) => noun.update(state)) };
}
