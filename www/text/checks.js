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
  candidates: {
    title: 'Would another model say otherwise?',
    lead: 'Models one step from the plan are fitted beside it. The band is the plan\u2019s own; the dashed line is what the other model makes of the gap. Choosing among models widens no band: what was looked at is kept for the report.',
    ask: 'Fit other models beside the plan',
    working: 'Fitting other models \u2026',
    old: 'These belong to the plan before the last change.',
    plan: 'The plan',
    use: 'Use it',
    used: (/** @type {string} */ name) => `Model: ${name}`,
    /** @param {string} name @param {string} to @param {string} from */
    label: (name, to, from) => `Gap of ${to} to ${from} under ${name}, over the band of the plan`,
    /** @param {string} to @param {string} from */
    logGap: (to, from) => `${to} / ${from}, log`,
  },
};
