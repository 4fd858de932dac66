/** What the report knows of the author's doings, as the computing module takes it. */

import { departures } from './analysis-file.js';

/**
 * @param {import('./types.js').State} state
 * @param {string} plan The plan as sent: checks count where they were of the same.
 */
export function reportContext(state, plan) {
  const { source, choices, answers, fixed } = state;
  const checks = answers.checks?.plan === plan ? answers.checks.value?.verdict ?? '' : '';
  return JSON.stringify({
    table: source?.name ?? '', invented: source?.kind === 'demo',
    excluded_late: choices.leftOut.filter((row) => row.seen).map((row) => row.row),
    excluded_masked: choices.leftOut.filter((row) => row.masked).map((row) => row.row),
    looked_at: state.lookedAt, checks,
    departures: fixed === null ? [] : departures(fixed, choices.plan),
  });
}
