/** Words of the room Checks. */

export const checks = {
  title: 'Should the courses be believed?',
  lead: 'Each check asks whether the table speaks against one part of the model, and what that would do to the conclusion.',
  waiting: 'Checks appear when the table has been fitted.',
  working: 'Checking \u2026 every subject is left out once.',
  quiet: 'Checked and quiet',
  speaks: 'Speaks against the model',
  seen: 'Seen',
  means: 'Means',
  advice: 'Try',
  try: 'Try it',
  tried: (/** @type {string} */ title) => `Tried: ${title}`,
  tries: 'Changes the plan at once; Undo brings the present one back.',
  values: 'The plotted values',
  chance: (/** @type {string} */ p) => `Chance of so much if the model held: ${p}.`,
  small: 'under 0.001',
  envelope: 'what the model would give, in 95 of 100 tables',
  /** @param {string} title @param {string} up @param {string} across @param {string} seen */
  label: (title, up, across, seen) => `${title}. ${up}, by ${across}. ${seen}`,
  verdict: 'What would change the conclusion',
};
