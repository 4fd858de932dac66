/** Keeping work on this device: the choice in Data, and the offer at the next visit. */

import { el, setText, show, whenChanged } from '../dom.js';
import { text } from '../text.js';

const words = text.data.keeping;

/** @param {HTMLElement} root @param {import('../types.js').Acts} acts @returns {import('../types.js').View} */
export function mountKeeping(root, acts) {
  const box = el('input', { type: 'checkbox', 'data-act': 'keep-work', onchange: () => (box.checked ? acts.keepWork() : acts.eraseWork()) });
  const erase = el('button', { type: 'button', 'data-act': 'erase-work', onclick: acts.eraseWork }, words.erase);
  const said = el('p', { class: 'hint', role: 'status', 'data-region': 'keeping-state' });
  const fold = el('details', {}, el('summary', {}, words.title), el('p', { class: 'hint' }, words.hint),
    window.location.protocol === 'file:' ? el('p', { class: 'hint' }, words.disk) : null,
    el('p', { class: 'keeping-choice' }, el('label', {}, box, ' ', words.label), erase), said);
  root.append(fold);
  return {
    update: whenChanged((state) => [state.keeping], ({ keeping }) => {
      box.checked = keeping.on;
      show(erase, keeping.on);
      setText(said, keeping.message ?? (keeping.on ? words.on : ''));
      if (keeping.on) fold.open = true;
    }),
  };
}

/** @param {import('../types.js').Acts} acts */
export function mountFound(acts) {
  const said = el('strong');
  const node = el('section', { class: 'mark', 'data-region': 'kept', 'aria-label': words.region, hidden: true }, said,
    el('button', { type: 'button', 'data-act': 'open-kept', onclick: acts.openKept }, words.open),
    el('button', { type: 'button', class: 'quiet', 'data-act': 'erase-kept', onclick: acts.eraseWork }, words.foundErase));
  const update = whenChanged((state) => [state.keeping.found], ({ keeping: { found } }) => {
    show(node, found !== null);
    setText(said, found === null ? '' : words.found(found.name, new Date(found.when).toLocaleString()));
  });
  return { node, update };
}
