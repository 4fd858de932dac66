/**
 * What the worker answers, as the page's own types. The only place that knows
 * the JSON of the computing module.
 */

import { text } from './text.js';

/** @typedef {import('./types.js').Preview} Preview */
/** @typedef {import('./types.js').Description} Description */
/** @typedef {import('./types.js').Findings} Findings */

/** @param {string} json @returns {Findings} */
export function findingsFrom(json) {
  return JSON.parse(json);
}

/** @param {string} json @returns {Preview} */
export function previewFrom(json) {
  const read = JSON.parse(json);
  return {
    columns: (read.columns ?? []).map((/** @type {any} */ column) => ({
      name: column.name, role: column.role ?? null, reason: column.reason ?? aboutColumn(column),
    })),
    rows: read.rows ?? [],
    totalRows: read.total_rows ?? 0,
    format: text.data.table.layouts[/** @type {'long'} */ (read.layout)] ?? '',
    problems: read.problems ?? [],
    questions: (read.questions ?? []).map(questionFrom),
    notes: read.notes ?? [],
  };
}

/**
 * A column without a role, by what it holds.
 * @param {{samples?: string[], numbers?: number}} column
 */
function aboutColumn({ samples }) {
  return samples && samples.length > 0 ? text.data.table.holds(samples.slice(0, 3).join(', ')) : '';
}

/**
 * A question about a role, its answers as partial plans.
 * @param {{topic: string, text: string, choices: string[], needs_answer: boolean}} asked
 * @returns {import('./types.js').Question}
 */
function questionFrom({ topic, text: sentence, choices, needs_answer: blocking }) {
  return {
    id: `${topic}:${sentence}`,
    text: sentence,
    blocking,
    answers: choices.map((choice) => ({ label: choice, detail: '', columns: { [topic]: choice } })),
  };
}

/** @param {string} json @returns {Description} */
export function describedFrom(json) {
  const read = JSON.parse(json);
  return { rows: read.rows ?? [], nonPositive: read.non_positive ?? [] };
}
