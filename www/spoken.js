/**
 * A reading as written values, and as one sentence for the slider. Pure
 * functions.
 */

import { span } from './changes.js';
import { plainTime, withInterval } from './numbers.js';
import { text } from './text.js';

/** @typedef {import('./reading.js').Reading} Reading */
/** @typedef {import('./reading.js').GapReading} GapReading */
/** @typedef {import('./types.js').Findings} Findings */

/**
 * A gap's name and values as written: ratios in percent.
 * @param {GapReading} gap
 * @param {{ratio: boolean, link?: string}} scale
 */
export function writtenGap(gap, { ratio, link }) {
  const name = text.reading.gap(gap, ratio, link);
  const percent = ratio && link !== 'logit';
  /** @param {number|null} value */
  const scaled = (value) => (value === null ? null : value * (percent ? 100 : 1));
  return { name, unit: percent ? '\u00a0%' : '', numbers: withInterval(scaled(gap.value), scaled(gap.lower), scaled(gap.upper)) };
}

/**
 * Why there is no gap to read, in words.
 * @param {GapReading} gap
 */
export function whyNone({ followed }) {
  const [one, other] = followed;
  if (one === undefined) return text.reading.neither;
  return other === undefined ? text.reading.onlyOne(one) : text.reading.states.outside;
}

/**
 * The reading in one sentence.
 * @param {Reading} reading
 * @param {Findings} findings
 */
export function spoken(reading, findings) {
  const { time_word: word } = findings.scale;
  const groups = reading.groups.map(({ group, value, lower, upper }) => {
    const numbers = withInterval(value, lower, upper);
    return numbers ? `${group} ${numbers.value}, ${text.reading.range(numbers.lower, numbers.upper)}` : `${group} ${text.reading.none}`;
  });
  const gaps = reading.gaps.slice(0, 3).map((gap) => {
    const { name, unit, numbers } = writtenGap(gap, findings.scale);
    return numbers ? `${name} ${numbers.value}${unit}, ${text.reading.states[gap.state]}` : `${name} ${whyNone(gap)}`;
  });
  return `${text.strips.at(plainTime(reading.time, span(findings)), word)}. ${[...groups, ...gaps].join('; ')}.`;
}

/**
 * Where the time lies among the visits, in words.
 * @param {Reading} reading
 * @param {Findings} findings
 */
export function placeAmongVisits(reading, findings) {
  if (reading.visit) return text.reading.visit;
  const length = span(findings);
  const before = findings.visits.filter((visit) => visit < reading.time).pop();
  const after = findings.visits.find((visit) => visit > reading.time);
  if (before === undefined || after === undefined) return '';
  return text.reading.between(plainTime(before, length), plainTime(after, length));
}
