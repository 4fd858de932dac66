/**
 * The plan: its defaults, filling in what a shorter plan leaves out, and what
 * is sent to the worker. Pure functions.
 */

import { maskedPlan } from './masks.js';

/** @typedef {import('./types.js').Plan} Plan */
/** @typedef {import('./types.js').Choices} Choices */

/** @returns {Plan} */
export function defaultPlan() {
  return {
    columns: { subject: null, time: null, group: null, response: null, cluster: null, covariates: [], bending: [], block: null, crossed: null, removal: null, total: null },
    exclusions: [],
    removed: [],
    response: { distribution: 'normal', transform: 'identity', power: null, detection: 'as-written', start: 'as-measured' },
    curves: { shape: 'smooth', basis: 'cubic', dimension: 'auto', smoothness: 'per-group', period: null, range: null, roughness: '5/2' },
    subjects: 'intercept',
    subjects_spread: 'common',
    clusters: 'auto',
    errors: { serial: 'none', spread: 'common', nugget: false },
    comparisons: {
      pairs: 'all', control: null, level: 0.95, margin: 0, margin_unit: 'response',
      band: 'simultaneous', small_sample: 'auto', refits: 1000, landmark: null,
      trend: false, target: null, growth_over: null, not_worse: null, rates: false,
    },
    grid: { start: null, end: null, count: 101 },
    reading: { day_zero: 'common', date_order: null, layout: null, merges: [], shared_ids: null, sheet: null, cells: null, group_order: [] },
    words: { subject: 'subject', subjects: 'subjects', time: null, response: null },
    seed: 20260,
  };
}

/**
 * A plan with every default filled in.
 * @param {Record<string, any>} partial
 * @returns {Plan}
 */
export function completePlan(partial) {
  /** @type {any} */
  const plan = defaultPlan();
  for (const [key, value] of Object.entries(partial ?? {})) {
    const nested = value !== null && typeof value === 'object' && !Array.isArray(value);
    plan[key] = nested ? { ...plan[key], ...value } : value;
  }
  return plan;
}

/**
 * A copy of the plan with some keys of one section replaced.
 * @template {'columns'|'response'|'curves'|'errors'|'comparisons'|'grid'|'reading'} Section
 * @param {Plan} plan
 * @param {Section} section
 * @param {Partial<Plan[Section]>} values
 * @returns {Plan}
 */
export function withSection(plan, section, values) {
  return { ...plan, [section]: { ...plan[section], ...values } };
}

/**
 * The plan as the worker takes it: rows left out come with their reasons, and
 * the page's words for subjects and response go into the sentences.
 * @param {Choices} choices
 * @param {{time: string|null, response: string|null}} columns The columns in use.
 * @returns {Plan}
 */
export function planToSend(choices, columns) {
  const { noun, called, leftOut } = choices;
  const plan = maskedPlan(choices.plan, choices.masks);
  /** @param {string|null} column */
  const byHand = (column) => (column === null ? null : called[column] || null);
  return {
    ...plan,
    exclusions: leftOut.map(({ row, column, reason }) => (column === null ? { row, reason } : { row, column, reason })),
    words: {
      ...plan.words, subject: noun.one, subjects: noun.many,
      time: byHand(columns.time) ?? plan.words.time,
      response: byHand(columns.response) ?? plan.words.response,
    },
  };
}

/**
 * A change of scale. A margin has a meaning on its own scale only, so it is set
 * aside where it would lose it.
 * @param {Plan} plan
 * @param {Plan['response']['transform']} transform
 * @returns {Plan}
 */
export function withTransform(plan, transform) {
  const changed = withSection(plan, 'response', { transform });
  const unit = plan.comparisons.margin_unit;
  const lost = transform === 'log' ? unit === 'response' : unit === 'percent';
  if (!lost) return changed;
  return withSection(changed, 'comparisons', {
    margin: 0,
    margin_unit: transform === 'log' ? 'percent' : 'response',
  });
}

/**
 * Another distribution. What it cannot have beside it is set back; a log link makes gaps ratios, so a margin in
 * the response's unit is set aside.
 * @param {Plan} plan
 * @param {string} distribution
 * @returns {Plan}
 */
export function withDistribution(plan, distribution) {
  const log = distribution !== 'normal';
  const changed = withSection(withTransform(plan, log ? 'log' : 'identity'), 'response', {
    distribution, ...(log ? { transform: 'identity', start: 'as-measured' } : {}),
  });
  if (!log) return changed;
  const plain = withSection(changed, 'errors', { serial: 'none', spread: 'common', nugget: false });
  const bare = withSection(plain, 'columns', { covariates: [], bending: [], block: null, total: distribution === 'binomial' ? plan.columns.total : null });
  return { ...bare, subjects: bare.subjects === 'curve' ? 'slope' : bare.subjects };
}

/**
 * A role given to a column by hand. The column loses its other role, and a
 * role without a column is said to be absent.
 * @param {Plan} plan
 * @param {Record<import('./types.js').Role, string|null>} now Columns as used.
 * @param {string} column
 * @param {import('./types.js').Role|'unused'} role
 * @returns {Plan}
 */
export function withRole(plan, now, column, role) {
  /** @type {Partial<Plan['columns']>} */
  const columns = {};
  for (const [other, name] of Object.entries(now)) {
    const key = /** @type {import('./types.js').Role} */ (other);
    columns[key] = name === null ? plan.columns[key] : name;
    if (name === column && key !== role) columns[key] = key === 'group' || key === 'cluster' ? false : null;
  }
  if (role !== 'unused') columns[role] = column;
  const changed = withSection(plan, 'columns', columns);
  // What shared ids mean was said of the subjects and groups of before.
  const others = columns.subject !== now.subject || columns.group !== (now.group ?? plan.columns.group);
  return others ? withSection(changed, 'reading', { shared_ids: null }) : changed;
}

const LIKE_A_CONTROL =
  /(^|[^a-z])(control|ctrl|placebo|vehicle|saline|sham|untreated|standard|usual|baseline|wild.?type|wt)([^a-z]|$)/i;

/**
 * The first group that is named like a control, if any.
 * @param {readonly string[]} groups
 * @returns {string|null}
 */
export function controlLike(groups) {
  return groups.find((name) => LIKE_A_CONTROL.test(name)) ?? null;
}

/**
 * How many pairs are compared.
 * @param {Plan} plan
 * @param {number} groups
 */
export function pairCount(plan, groups) {
  return plan.comparisons.pairs === 'all' ? (groups * (groups - 1)) / 2 : Math.max(0, groups - 1);
}
