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

/** The numbers of a text, in order. @param {string} text */
const numbersOf = (text) => text.match(/[\u2212-]?\d+(?:[.,]\d+)*/g)?.join(' ') ?? '';

/**
 * What the author wrote still holds: the composed text, or every number in it, is as it was then.
 * @param {string} base
 * @param {string} composed
 */
export const holds = (base, composed) => base === composed || (numbersOf(base) !== '' && numbersOf(base) === numbersOf(composed));

/**
 * Which edit belongs to which paragraph of a section now: the one whose numbers hold, wherever it stands; what holds
 * nowhere stays at its place, to be flagged.
 * @param {string} key
 * @param {string[]} paragraphs As composed.
 * @param {Edits} edits
 * @returns {(string|null)[]} By paragraph, the id of its edit.
 */
export function editsIn(key, paragraphs, edits) {
  const ids = Object.keys(edits).filter((id) => id.startsWith(`${key}.`)).sort((a, b) => Number(a.slice(key.length + 1)) - Number(b.slice(key.length + 1)));
  /** @type {(string|null)[]} */
  const found = paragraphs.map(() => null);
  /** @type {string[]} */
  const left = [];
  for (const id of ids) {
    const { base } = /** @type {{text: string, base: string}} */ (edits[id]);
    const own = Number(id.slice(key.length + 1));
    const fits = (/** @type {number} */ k) => found[k] === null && holds(base, paragraphs[k] ?? '');
    const exact = paragraphs.findIndex((one, k) => found[k] === null && one === base);
    const at = own < paragraphs.length && fits(own) ? own : exact >= 0 ? exact : paragraphs.findIndex((_, k) => fits(k));
    if (at >= 0) found[at] = id;
    else left.push(id);
  }
  for (const id of left) {
    const own = Math.min(Number(id.slice(key.length + 1)), paragraphs.length - 1);
    const at = found[own] === null ? own : found.findIndex((one) => one === null);
    if (at >= 0) found[at] = id;
  }
  return found;
}

/**
 * The report with the author's paragraphs where the numbers behind them still hold.
 * @param {any} report
 * @param {Edits} edits
 */
export function withEdits(report, edits) {
  return {
    ...report,
    sections: report.sections.map((/** @type {any} */ section) => {
      const ids = editsIn(section.key, section.paragraphs, edits);
      return {
        ...section,
        paragraphs: section.paragraphs.map((/** @type {string} */ composed, /** @type {number} */ k) => {
          const edit = edits[ids[k] ?? ''];
          return edit && holds(edit.base, composed) ? edit.text : composed;
        }),
      };
    }),
  };
}

/**
 * @param {any} section
 * @param {Edits} edits
 * @param {import('../types.js').Acts} acts
 */
export function sectionNode(section, edits, acts) {
  const ids = editsIn(section.key, section.paragraphs, edits);
  return el('section', { 'data-section': section.key }, el('h3', {}, section.title),
    ...section.paragraphs.map((/** @type {string} */ composed, /** @type {number} */ index) => paragraph(section, composed, idOf(section.key, index), ids[index] ?? null, edits, acts)));
}

/**
 * @param {any} section
 * @param {string} composed
 * @param {string} id Its place.
 * @param {string|null} from The edit that belongs to it, by the place where it was made.
 * @param {Edits} edits
 * @param {import('../types.js').Acts} acts
 */
function paragraph(section, composed, id, from, edits, acts) {
  const edit = from === null ? undefined : edits[from];
  const stands = edit !== undefined && holds(edit.base, composed);
  const shown = el('p', { class: edit ? 'rewritten' : null }, edit ? edit.text : composed);
  const node = el('div', { class: 'paragraph', 'data-paragraph': id }, shown);
  const set = (/** @type {{text: string, base: string}|null} */ value) => acts.choose(words.editing(section.title), (choices) => {
    const { [from ?? id]: _, ...others } = choices.edits;
    // Another edit may have been made at this place, and have moved from it since.
    const free = id in others ? `${section.key}.${Math.max(...Object.keys(others).filter((one) => one.startsWith(`${section.key}.`)).map((one) => Number(one.slice(section.key.length + 1)))) + 1}` : id;
    return { ...choices, edits: value === null ? others : { ...others, [free]: value } };
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
  if (edit && !stands) {
    const flag = el('p', { class: 'complaint', 'data-moved': '' });
    setText(flag, words.moved);
    node.append(flag, el('p', { class: 'hint' }, composed));
  }
  node.append(tools);
  return node;
}

/**
 * The report with what the same plan said of other columns, where that is of this plan.
 * @param {any} report
 * @param {import('../types.js').State} state
 * @param {string} plan As sent.
 */
export function withResponses(report, { markers: { answer, of } }, plan) {
  if (report === null || answer === null || of !== plan) return report;
  const section = { key: 'responses', title: text.markers.title, paragraphs: [answer.sentence, answer.method] };
  return { ...report, sections: [...report.sections, section], tables: [...report.tables, answer.table] };
}
