/** Words of the room Checks. */

export const checks = {
  title: 'Should the courses be believed?',
  lead: 'Each check asks whether the table speaks against one part of the model, and what that would do to the conclusion.',
  waiting: 'Checks appear when the table has been fitted.',
  working: 'Checking \u2026 every subject is left out once, tables that obey the model are simulated, and every remedy is tried.',
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
  /** @param {string} title @param {string} up @param {string} across @param {string} seen */
  label: (title, up, across, seen) => `${title}. ${up}, by ${across}. ${seen}`,
  verdict: 'What would change the conclusion',
  outcomes: {
    turns: 'Would change the conclusion', moves: 'Would move its times', stands: 'Would leave it as it is', unknown: 'Not tried',
  },
  stakesKey: 'Bars are the stretches where the groups are shown apart: pale with the plan, full with what the check asks about. Both rest on the quick bands.',
  topDown: (/** @type {string} */ pairs) => `From top to bottom: ${pairs}.`,
  untried: 'There is nothing to set for it, or the table is large: use its control below.',
  candidates: {
    title: 'Would another model say otherwise?',
    lead: 'Models one step from the plan are fitted beside it. The band is the plan\u2019s own; the dashed line is what the other model makes of the gap. Foreseeing is tried with each subject left out of the courses; variances stay those of the whole table. Looking at many models asks for more before one is proposed, widens no band, and is kept for the report.',
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
