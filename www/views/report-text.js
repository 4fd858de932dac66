/**
 * The report's paragraphs, which the author may rewrite. A rewritten one keeps
 * the composed text that it replaced, so that a change of its numbers shows.
 */

import { el, setText } from '../dom.js';
import { text } from '../text.js';

const words = text.report;

/** @typedef {Record<string, {text: string, base: string}>} Edits */

/** @param {string} key @param {number} index */
const idOf = (key, index) => `${key}.${index}`;

/**
 * The report with the author's paragraphs where the numbers behind them still hold.
 * @param {any} report
 * @param {Edits} edits
 */
export function withEdits(report, edits) {
  const own = (/** @type {string} */ key, /** @type {string} */ composed, /** @type {number} */ index) => {
    const edit = edits[idOf(key, index)];
    return edit && edit.base === composed ? edit.text : composed;
  };
  return {
    ...report,
    sections: report.sections.map((/** @type {any} */ section) => ({
      ...section, paragraphs: section.paragraphs.map((/** @type {string} */ one, /** @type {number} */ k) => own(section.key, one, k)),
    })),
  };
}

/**
 * @param {any} section
 * @param {Edits} edits
 * @param {import('../types.js').Acts} acts
 */
export function sectionNode(section, edits, acts) {
  return el('section', { 'data-section': section.key }, el('h3', {}, section.title),
    ...section.paragraphs.map((/** @type {string} */ composed, /** @type {number} */ index) => paragraph(section, composed, idOf(section.key, index), edits, acts)));
}

/**
 * @param {any} section
 * @param {string} composed
 * @param {string} id
 * @param {Edits} edits
 * @param {import('../types.js').Acts} acts
 */
function paragraph(section, composed, id, edits, acts) {
  const edit = edits[id];
  const holds = edit !== undefined && edit.base === composed;
  const shown = el('p', { class: edit ? 'rewritten' : null }, edit ? edit.text : composed);
  const node = el('div', { class: 'paragraph', 'data-paragraph': id }, shown);
  const set = (/** @type {{text: string, base: string}|null} */ value) => acts.choose(words.editing(section.title), (choices) => {
    const { [id]: _, ...others } = choices.edits;
    return { ...choices, edits: value === null ? others : { ...others, [id]: value } };
  });
  const begin = () => {
    const field = el('textarea', { rows: '6', 'aria-label': words.editing(section.title) });
    field.value = edit ? edit.text : composed;
    const done = el('button', { type: 'button', onclick: () => set(field.value.trim() === composed ? null : { text: field.value.trim(), base: composed }) }, words.done);
    node.replaceChildren(field, el('p', {}, done));
    field.focus();
  };
  const tools = el('p', { class: 'paragraph-tools' }, el('button', { type: 'button', class: 'quiet', onclick: begin }, words.edit));
  if (edit) tools.append(' ', el('button', { type: 'button', class: 'quiet', onclick: () => set(null) }, words.drop));
  if (edit && !holds) {
    const flag = el('p', { class: 'complaint', 'data-moved': '' });
    setText(flag, words.moved);
    node.append(flag, el('p', { class: 'hint' }, composed));
  }
  node.append(tools);
  return node;
}
