/**
 * What the worker answers, as the page's own types. The only place that knows
 * the JSON of the computing module.
 */

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
      name: column.name, role: column.role ?? null, reason: column.reason ?? '', measured: column.measured ?? false,
    })),
    rows: read.rows ?? [],
    layout: read.layout ?? 'long',
    totalRows: read.total_rows ?? 0,
    format: read.format ?? '',
    problems: read.problems ?? [],
    questions: (read.questions ?? []).map((/** @type {any} */ asked) => ({
      id: asked.id, text: asked.text, answers: asked.answers, blocking: asked.needs_answer,
    })),
    notes: read.notes ?? [],
    nearSpellings: read.near_spellings ?? [],
    workbook: read.workbook ?? null,
    refusal: read.refusal ?? null,
  };
}

/** @param {string} json @returns {Description} */
export function describedFrom(json) {
  const read = JSON.parse(json);
  return { rows: read.rows ?? [], nonPositive: read.non_positive ?? [] };
}
