/**
 * What the words of the plan need to know about the table at hand: columns in
 * use, groups, unit of time. Pure functions.
 */

import { text } from './text.js';

/** @typedef {import('./types.js').State} State */
/** @typedef {import('./types.js').Role} Role */

/**
 * @typedef {Object} Context
 * @property {Record<Role, string|null>} columns Column used for each role.
 * @property {string[]} groups In a crossed design those of the group column.
 * @property {number|null} compared Differences in the findings.
 * @property {string} timeWord
 * @property {{name: string, reason: string}[]} candidates All columns.
 * @property {'none'|'intercept'|'slope'|null} clusters What differs from cluster to cluster in the model.
 * @property {number} limits Responses given as below or above a limit.
 * @property {number[]} nonPositive Lines that forbid the log scale.
 */

/** @type {Role[]} */
export const ROLES = ['subject', 'time', 'group', 'response', 'cluster'];

/**
 * The column used for each role: as chosen, else as fitted, else as read.
 * @param {State} state
 * @returns {Record<Role, string|null>}
 */
export function columnsUsed(state) {
  const columns = /** @type {Record<Role, string|null>} */ ({});
  for (const role of ROLES) {
    const chosen = state.choices.plan.columns[role];
    if (chosen === false) columns[role] = null;
    else if (chosen !== null) columns[role] = chosen;
    else if (state.preview) columns[role] = state.preview.columns.find((column) => column.role === role)?.name ?? null;
    else columns[role] = state.findings?.columns[role] ?? null;
  }
  return columns;
}

/**
 * @param {State} state
 * @returns {Context}
 */
export function contextOf(state) {
  const { findings, preview, description } = state;
  const crossed = findings?.cells ?? [];
  const groups = crossed.length > 0 ? Array.from(new Set(crossed.map(([own]) => own)))
    : findings ? findings.groups.map((group) => group.name)
    : Array.from(new Set((description?.rows ?? []).map((row) => row.group)));
  const columns = columnsUsed(state);
  return {
    columns,
    groups,
    compared: findings?.differences.length ?? null,
    timeWord: findings?.scale.time_word ?? columns.time ?? text.plan.choices.time.none,
    candidates: (preview?.columns ?? []).map(({ name, reason }) => ({ name, reason })),
    clusters: findings?.clusters?.effects ?? null,
    limits: (preview?.problems ?? []).filter(({ value }) => /^[<>\u2264\u2265]/.test(value.trim())).length,
    nonPositive: description?.nonPositive ?? [],
  };
}

/**
 * The short name of a column, or the column's own.
 * @param {import('./types.js').Choices} choices
 * @param {string|null} column
 * @param {string} otherwise
 */
export function calledName(choices, column, otherwise) {
  if (column === null) return otherwise;
  return choices.called[column] || shortened(column);
}

/**
 * What the response is called: by hand, else by the plan, else its column.
 * @param {import('./types.js').Choices} choices
 * @param {Pick<Context, 'columns'>} context
 */
export function responseName(choices, { columns: { response } }) {
  const byHand = response === null ? '' : choices.called[response];
  return byHand || choices.plan.words.response || calledName(choices, response, text.plan.choices.response.none);
}

/**
 * At most 24 characters, the rest cut with a mark.
 * @param {string} name
 */
export function shortened(name) {
  const letters = Array.from(name);
  return letters.length > 24 ? `${letters.slice(0, 23).join('')}\u2026` : name;
}
