/** Words of the effect sizes. */

export const effects = {
  title: 'Effect sizes',
  lead: 'Each number with an interval by itself, at the level of the plan. They rest on the fitted model and on its degrees of freedom (df).',
  head: { what: 'What', value: 'Value', interval: 'Interval', df: 'df' },
  /** @param {string} word @param {string} time */
  landmark: (word, time) => `gap at ${word} ${time}`,
  average: 'gap averaged over the common follow-up',
  area: 'area between the courses',
  onset: (/** @type {string} */ margin) => `passes ${margin} for good`,
  later: (/** @type {number} */ target, /** @type {string} */ word) => `reaches ${target} later by (${word}s)`,
  shared: (/** @type {number} */ pairs) => `one shared course: chance of so large a largest gap${pairs > 1 ? `, over all ${pairs} at once` : ''}`,
  level: 'average gap is zero: chance of one so large',
  shape: 'gap is alike at all times: chance of one so uneven',
  group: {
    average: 'mean level', area: 'area under the course', growth: (/** @type {string} */ word) => `change per ${word}`,
    reaches: (/** @type {number} */ target) => `first reaches ${target}`, over: (/** @type {string} */ from, /** @type {string} */ to) => `, ${from} to ${to}`,
    doubling: 'time to double', halving: 'time to halve', peak: 'highest', nadir: 'lowest', when: (/** @type {string} */ what) => `${what}: when`,
    atEnd: 'at an end of the follow-up: it may lie beyond',
  },
  notReached: 'not reached',
  orBefore: 'at or before the first visit',
  /** @param {string} already @param {string} never */
  chances: (already, never) => `already at the start ${already}, never ${never}`,
  small: '< 0.001',
};
