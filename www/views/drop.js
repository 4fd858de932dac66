/**
 * A file dropped anywhere on the page.
 */

import { text } from '../text.js';

/**
 * @param {HTMLElement} body
 * @param {import('../types.js').Acts} acts
 */
export function acceptDrops(body, acts) {
  body.dataset.dropHint = text.data.paste.drop;
  body.addEventListener('dragover', (event) => {
    if (!event.dataTransfer?.types.includes('Files')) return;
    event.preventDefault();
    body.classList.add('dropping');
  });
  body.addEventListener('dragleave', (event) => {
    if (event.relatedTarget === null) body.classList.remove('dropping');
  });
  body.addEventListener('drop', (event) => {
    body.classList.remove('dropping');
    const file = event.dataTransfer?.files[0];
    if (!file) return;
    event.preventDefault();
    acts.go('data');
    acts.openFile(file);
  });
}
