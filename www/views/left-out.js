/**
 * The record of rows left out, each with its reason, whether findings had been
 * seen by then, and the way back.
 */

import { el, reconcile, show, whenChanged } from '../dom.js';
import { text } from '../text.js';

const words = text.data.leftOut;

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountLeftOut(root, acts) {
  const list = el('ul', { class: 'problem-list' });
  root.append(el('h2', {}, words.title), list);
  return {
    update: whenChanged((state) => [state.choices.leftOut], ({ choices: { leftOut } }) => {
      show(root, leftOut.length > 0);
      reconcile(list, leftOut, (row) => `${row.row}:${row.column}:${row.reason}`, (row) => el('li', {},
        el('strong', {}, text.data.problems.where(row.row, row.column ?? '')), ' ', row.reason, ' ',
        el('span', { class: 'hint' }, `(${row.seen ? words.seen : words.before}${row.masked ? `, ${words.masked}` : ''})`), ' ',
        el('button', { type: 'button', class: 'quiet', onclick: () => acts.takeBack(row.row, row.column) }, words.takeBack)));
    }),
  };
}
