/** A button that copies a sentence, and says that it did. */

import { el, setText } from '../dom.js';

/**
 * @param {() => string} sentence
 * @param {HTMLElement} shown Selected where the browser refuses to copy.
 * @param {{copy: string, copied: string, copyRefused: string}} words
 */
export function copyButton(sentence, shown, words) {
  const said = el('span', { class: 'hint', role: 'status' });
  const act = async () => {
    try {
      await navigator.clipboard.writeText(sentence());
      setText(said, words.copied);
    } catch {
      window.getSelection()?.selectAllChildren(shown);
      setText(said, words.copyRefused);
    }
  };
  return el('p', { class: 'copy-line' }, el('button', { type: 'button', class: 'quiet', onclick: () => void act() }, words.copy), ' ', said);
}
