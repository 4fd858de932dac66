/**
 * The reading at the cursor: where it may stand, and what the curves and gaps
 * are there. Pure functions over the findings.
 */

/** @typedef {import('./types.js').Findings} Findings */

/**
 * Times where the cursor may stand: the grid and the visits.
 * @param {Findings} findings
 * @returns {number[]}
 */
export function stops(findings) {
  const grid = findings.curves[0]?.time ?? [];
  return Array.from(new Set([...grid, ...findings.visits])).sort((a, b) => a - b);
}

/**
 * The entry nearest to a time. The list ascends and is not empty.
 * @param {readonly number[]} times
 * @param {number} time
 */
export function nearest(times, time) {
  let best = times[0] ?? time;
  for (const candidate of times) {
    if (Math.abs(candidate - time) < Math.abs(best - time)) best = candidate;
  }
  return best;
}

/**
 * The entry so many steps from the one nearest to a time, held at the ends.
 * From between two entries, a step leads to the next one on that side.
 * @param {readonly number[]} times
 * @param {number} time
 * @param {number} count
 */
export function step(times, time, count) {
  if (times.length === 0) return time;
  const at = times.indexOf(time);
  if (at >= 0) return /** @type {number} */ (times[Math.min(times.length - 1, Math.max(0, at + count))]);
  const after = times.findIndex((candidate) => candidate > time);
  const next = count > 0 ? (after < 0 ? times.length - 1 : after) : (after < 0 ? times.length : after) - 1;
  const rest = count > 0 ? count - 1 : count + 1;
  return /** @type {number} */ (times[Math.min(times.length - 1, Math.max(0, next + rest))]);
}

/**
 * Where the cursor stands first: the visit nearest two thirds of the way.
 * @param {Findings} findings
 * @returns {number|null}
 */
export function firstStop(findings) {
  const { visits } = findings;
  const start = visits[0];
  const end = visits[visits.length - 1];
  if (start === undefined || end === undefined) return null;
  return nearest(visits, start + ((end - start) * 2) / 3);
}

/**
 * A value at a time: on the grid, else at a visit.
 * @template {{time: number[]}} Points
 * @param {Points & {at_visits: Points}} row
 * @param {keyof Points} key
 * @param {number} time
 * @returns {number|null}
 */
function valueAt(row, key, time) {
  for (const points of [row, row.at_visits]) {
    const index = points.time.indexOf(time);
    if (index >= 0) return /** @type {any} */ (points)[key][index] ?? null;
  }
  return null;
}

/** @typedef {'beyond'|'apart'|'inside'|'undecided'|'outside'} GapState */

/**
 * @typedef {Object} GapReading
 * @property {number} pair
 * @property {string} kind What it is between: `pair`, `factor`, `interaction`, `trend`.
 * @property {string} from
 * @property {string} to
 * @property {number|null} value Difference, or ratio on the log scale.
 * @property {number|null} lower
 * @property {number|null} upper
 * @property {GapState} state
 * @property {string[]} followed Which of the two groups had visits until this time or later.
 */

/**
 * @typedef {Object} Reading
 * @property {number} time
 * @property {boolean} visit
 * @property {{group: string, index: number, value: number|null, lower: number|null, upper: number|null, followed: number}[]} groups
 * @property {GapReading[]} gaps
 */

/**
 * What the strips show at a time, groups in the order in which the curves
 * stand there, from the top.
 * @param {Findings} findings
 * @param {number} time
 * @returns {Reading}
 */
export function readingAt(findings, time) {
  const groups = findings.curves.map((curve, index) => {
    const seen = isWithin(curve.support, time);
    return {
      group: curve.group,
      index,
      value: seen ? valueAt(curve, 'response_mean', time) : null,
      lower: seen ? valueAt(curve, 'response_lower', time) : null,
      upper: seen ? valueAt(curve, 'response_upper', time) : null,
      followed: followedAt(findings, index, time),
    };
  });
  groups.sort((a, b) => (b.value ?? -Infinity) - (a.value ?? -Infinity) || a.index - b.index);
  const gaps = findings.differences.map((difference, pair) => {
    const seen = isWithin(difference.support, time);
    return {
      pair,
      kind: difference.kind ?? 'pair',
      from: difference.from,
      to: difference.to,
      value: seen ? valueAt(difference, 'response_estimate', time) : null,
      lower: seen ? valueAt(difference, 'response_lower', time) : null,
      upper: seen ? valueAt(difference, 'response_upper', time) : null,
      state: gapState(difference, time),
      followed: findings.curves.filter(({ group, support }) =>
        (group === difference.from || group === difference.to) && isWithin(support, time)).map(({ group }) => group),
    };
  });
  gaps.sort((a, b) => (b.value ?? -Infinity) - (a.value ?? -Infinity) || a.pair - b.pair);
  return { time, visit: findings.visits.includes(time), groups, gaps };
}

/** @param {[number, number]|null} support @param {number} time */
function isWithin(support, time) {
  return support !== null && support[0] <= time && time <= support[1];
}

/**
 * Subjects of a group with a visit at this time or after it.
 * @param {Findings} findings
 * @param {number} group
 * @param {number} time
 */
export function followedAt(findings, group, time) {
  return findings.groups[group]?.last_times.filter((last) => last >= time).length ?? 0;
}

/**
 * The lane's state at a time.
 * @param {import('./types.js').Difference} difference
 * @param {number} time
 * @returns {GapState}
 */
export function gapState(difference, time) {
  if (!isWithin(difference.support, time)) return 'outside';
  /** @param {import('./types.js').Stretch[]} stretches */
  const within = (stretches) => stretches.some(({ start, end }) => start <= time && time <= end);
  const hasMargin = difference.margin[0] !== difference.margin[1];
  if (hasMargin && within(difference.beyond)) return 'beyond';
  if (within(difference.stretches)) return 'apart';
  if (hasMargin && within(difference.inside)) return 'inside';
  return 'undecided';
}
