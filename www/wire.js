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
  const layout = read.layout ?? layoutOf(read);
  return {
    columns: (read.columns ?? []).map((/** @type {any} */ column, /** @type {number} */ index) => ({
      name: column.name, role: column.role ?? null, reason: column.reason ?? '',
      measured: column.measured ?? isMeasured(read, layout, index),
    })),
    rows: read.rows ?? [],
    layout,
    totalRows: read.total_rows ?? 0,
    format: read.format ?? '',
    problems: (read.problems ?? []).map((/** @type {any} */ problem) => ({
      ...problem, kept: problem.kept ?? !/\bleft out\b/.test(problem.message),
    })),
    questions: (read.questions ?? []).map((/** @type {any} */ asked) => ({
      id: asked.id, text: asked.text, answers: asked.answers, blocking: asked.needs_answer,
    })),
    notes: read.notes ?? [],
    nearSpellings: read.near_spellings ?? [],
    refusal: read.refusal ?? null,
  };
}

/**
 * A table whose response is no column of its own holds it across columns.
 * @param {any} read
 * @returns {Preview['layout']}
 */
function layoutOf({ columns, questions }) {
  /** @param {string} role */
  const has = (role) => columns.some((/** @type {any} */ column) => column.role === role);
  if (has('response') || questions.some((/** @type {any} */ asked) => asked.needs_answer)) return 'long';
  return has('subject') || !has('time') ? 'wide-by-time' : 'wide-by-subject';
}

/**
 * Whether a column of a wide table holds measurements: it has no role, mostly
 * numbers and, where it stands for a time, a number in its name.
 * @param {any} read
 * @param {Preview['layout']} layout
 * @param {number} index
 */
function isMeasured({ columns, rows }, layout, index) {
  const { name, role } = columns[index];
  if (layout === 'long' || role || (layout === 'wide-by-time' && !/\d/.test(name))) return false;
  const filled = rows.filter((/** @type {any} */ row) => row.cells[index] !== '');
  return filled.filter((/** @type {any} */ row) => /\d/.test(row.cells[index])).length * 2 > filled.length;
}

/** @param {string} json @returns {Description} */
export function describedFrom(json) {
  const read = JSON.parse(json);
  return { rows: read.rows ?? [], nonPositive: read.non_positive ?? [] };
}
