/** A table of texts, its first column heads of rows. */

import { el } from '../dom.js';

/** @param {{heads: string[], rows: string[][]}} table */
export function plainTable({ heads, rows }) {
  return el('table', { class: 'plain-table' },
    el('thead', {}, el('tr', {}, ...heads.map((head) => el('th', { scope: 'col' }, head)))),
    el('tbody', {}, ...rows.map((row) => el('tr', {}, ...row.map((cell, k) => (k === 0 ? el('th', { scope: 'row' }, cell) : el('td', {}, cell)))))));
}
