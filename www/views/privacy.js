/**
 * The privacy line, and the explanation it opens.
 */

import { el } from '../dom.js';
import { text } from '../text.js';

const words = text.privacy;

export function mountPrivacy() {
  const sections = words.sections.map(({ title, points }) =>
    el('section', {}, el('h3', {}, title), el('ul', {}, ...points.map((point) => el('li', {}, point)))));
  const close = el('button', { type: 'button', onclick: () => dialog.close() }, words.close);
  const dialog = el('dialog', { class: 'privacy', 'aria-labelledby': 'privacy-title' },
    el('h2', { id: 'privacy-title' }, words.title), ...sections, close);
  dialog.addEventListener('click', (event) => {
    if (event.target === dialog) dialog.close();
  });
  const button = el('button', { type: 'button', class: 'privacy-line', onclick: () => dialog.showModal() },
    `${words.line} \u00b7 `, el('span', { class: 'underlined' }, words.check));
  return { button, dialog };
}
