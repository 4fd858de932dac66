/**
 * What a refit changed: for the line "was day 7.1, now 8.0" and for one
 * announcement. Pure functions over two findings.
 */

import { estimatedTime } from './numbers.js';

/** @typedef {import('./types.js').Findings} Findings */

/** @param {Findings} findings */
export function span(findings) {
  const { visits } = findings;
  return (visits[visits.length - 1] ?? 1) - (visits[0] ?? 0) || 1;
}

/**
 * When a pair is first shown apart, as written; `null` where it never is.
 * @param {Findings} findings
 * @param {{from: string, to: string}} pair
 * @returns {string|null}
 */
export function onset(findings, { from, to }) {
  const difference = findings.differences.find((row) => row.from === from && row.to === to);
  const first = difference?.stretches[0];
  return first ? estimatedTime(first.start, span(findings)) : null;
}

/**
 * The first pair whose day changed, with both days; else the first pair that
 * has one and still does.
 * @param {Findings|null} before
 * @param {Findings} after
 * @returns {{pair: {from: string, to: string}, before: string|null, after: string|null}|null}
 */
export function onsetChange(before, after) {
  if (!before) return null;
  // Pairs that are there before and after: one that is new, or has another name, was not hidden before.
  const known = after.differences.filter((row) => before.differences.some(({ from, to }) => from === row.from && to === row.to));
  const rows = known.map((row) => ({
    pair: { from: row.from, to: row.to },
    before: onset(before, row),
    after: onset(after, row),
  }));
  return rows.find((row) => row.before !== row.after) ?? rows.find((row) => row.after !== null) ?? null;
}

/**
 * The findings that are new or read differently.
 * @param {Findings|null} before
 * @param {Findings} after
 * @returns {import('./types.js').Sentence[]}
 */
export function changedSentences(before, after) {
  const known = new Set((before?.sentences ?? []).map((row) => `${row.headline} ${row.text}`));
  return after.sentences.filter((row) => !known.has(`${row.headline} ${row.text}`));
}
