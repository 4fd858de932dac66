/**
 * Look before modelling: n, mean, SD and median of every group at every visit.
 */

import { el, show, whenChanged } from '../dom.js';
import { plainTime, significant } from '../numbers.js';
import { text } from '../text.js';

const words = text.data.description;

/** @typedef {import('../types.js').DescriptionRow} DescriptionRow */

/** @param {HTMLElement} root @returns {import('../types.js').View} */
export function mountDescription(root) {
  const body = el('tbody');
  const none = el('p', { class: 'hint' }, words.none);
  const heads = [words.group, words.time, words.n, words.mean, words.sd, words.median];
  const table = el('table', { class: 'description-table' }, el('caption', { class: 'hint' }, words.caption),
    el('thead', {}, el('tr', {}, ...heads.map((head) => el('th', { scope: 'col' }, head)))), body);
  const scroller = el('div', { class: 'table-scroller tall', tabindex: '0', role: 'region', 'aria-label': words.title }, table);
  root.append(el('h2', {}, words.title), none, scroller);
  return {
    update: whenChanged((state) => [state.description], ({ description }) => {
      const rows = description?.rows ?? [];
      show(none, rows.length === 0);
      show(scroller, rows.length > 0);
      body.replaceChildren(...rows.map((row, index) => mountRow(row, rows[index - 1])));
    }),
  };
}

/** @param {DescriptionRow} row @param {DescriptionRow|undefined} before */
function mountRow(row, before) {
  const opens = before?.group !== row.group;
  const cells = [String(row.n), significant(row.mean), significant(row.sd), significant(row.median)];
  return el('tr', { class: opens ? 'opens' : '' },
    el('th', { scope: 'row' }, opens ? row.group : el('span', { class: 'unseen' }, row.group)),
    el('td', { class: 'number' }, plainTime(row.time, row.time || 1)),
    ...cells.map((cell) => el('td', { class: 'number' }, cell)));
}
