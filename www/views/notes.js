/**
 * What else must be known beside the findings, and what the page's own words
 * mean.
 */

import { el, reconcile, show, whenChanged } from '../dom.js';
import { text } from '../text.js';

/** @param {HTMLElement} root @returns {import('../types.js').View} */
export function mountNotes(root) {
  const list = el('ul', { class: 'notes', 'data-region': 'notes' });
  const box = el('section', { class: 'notes-box' }, el('h3', {}, text.findings.notes), list);
  root.append(box, mountWords());
  return {
    update: whenChanged((state) => [state.findings, state.status], ({ findings, status }) => {
      const shown = findings !== null && status !== 'failed' && status !== 'question';
      const messages = shown ? [...findings.fit.remarks, ...findings.notes.map((row) => row.message)] : [];
      const once = Array.from(new Set(messages));
      reconcile(list, once, (message) => message, (message) => el('li', {}, message));
      show(box, once.length > 0);
    }),
  };
}

/** The page's own words, each opening its trade term and formula. */
function mountWords() {
  const entries = text.words.map(({ word, term, meaning }) =>
    el('details', { class: 'word', name: 'word' }, el('summary', {}, word), el('p', {}, term), el('p', { class: 'formula' }, meaning)));
  return el('section', { class: 'words' }, el('h3', {}, text.findings.words), el('div', { class: 'word-list' }, ...entries));
}
