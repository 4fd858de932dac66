/**
 * Which sheet of a workbook, and which of its cells.
 */

import { el, reconcile, show, whenChanged } from '../dom.js';
import { defaultPlan, withSection } from '../plan.js';
import { text } from '../text.js';

/** @typedef {import('../types.js').Choices} Choices */

const words = text.data.sheet;

/** @param {HTMLElement} root @param {import('../types.js').Acts} acts @returns {import('../types.js').View} */
export function mountSheetChoice(root, acts) {
  const select = el('select', { 'data-field': 'sheet' });
  const cells = el('input', { type: 'text', autocomplete: 'off', spellcheck: 'false', placeholder: words.all, 'data-field': 'cells' });
  const sheet = el('label', { class: 'field' }, el('span', {}, words.sheet), select);
  root.append(sheet, el('label', { class: 'field' }, el('span', {}, words.cells), cells), el('span', { class: 'hint' }, words.hint));
  select.addEventListener('change', () =>
    acts.choose(words.chosen(select.value), (choices) => elsewhere(choices, { sheet: select.value, cells: null })));
  cells.addEventListener('change', () => {
    const asked = cells.value.trim() || null;
    acts.choose(words.cut(asked ?? ''), (choices) => elsewhere(choices, { cells: asked }));
  });
  return {
    update: whenChanged((state) => [state.preview, state.choices], ({ preview, choices }) => {
      const workbook = preview?.workbook ?? null;
      show(root, workbook !== null);
      if (!workbook) return;
      show(sheet, workbook.sheets.length > 1);
      reconcile(select, workbook.sheets, (name) => name, (name) => el('option', { value: name }, name));
      select.value = choices.plan.reading.sheet ?? workbook.sheet;
      if (document.activeElement !== cells) cells.value = choices.plan.reading.cells ?? '';
    }),
  };
}

/**
 * Other cells are another table: columns, rows left out and answers of the one before do not hold.
 * @param {Choices} choices
 * @param {Partial<import('../types.js').Plan['reading']>} place
 * @returns {Choices}
 */
function elsewhere(choices, place) {
  const fresh = defaultPlan();
  const { sheet } = choices.plan.reading;
  const plan = { ...choices.plan, columns: fresh.columns, reading: { ...fresh.reading, sheet } };
  return { ...choices, leftOut: [], plan: withSection(plan, 'reading', place) };
}
