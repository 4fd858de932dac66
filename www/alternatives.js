/**
 * The alternatives of every choice in the plan: what each is called, when it
 * fits, whether it can be had here, and the plan that results. Pure functions.
 */

import { pairCount, withDistribution, withSection, withTransform } from './plan.js';
import { text } from './text.js';
import { percentLevel } from './numbers.js';

/** @typedef {import('./types.js').Plan} Plan */
/** @typedef {import('./context.js').Context} Context */
/** @typedef {{id: string, name: string, fits: string, chosen: boolean, greyed?: string, plan: Plan}} Alternative */
/** @typedef {'response'|'time'|'group'|'shape'|'basis'|'dimension'|'smoothness'|'scale'|'noun'|'subjects'|'serial'|'spread'|'subjects_spread'|'clusters'|'distribution'|'start'|'covariates'|'block'|'crossed'|'order'|'also'|'not_worse'|'detection'|'pairs'|'margin'|'level'|'band'|'small_sample'} ChoiceId */

const words = text.plan.choices;

/**
 * @param {Plan} plan
 * @param {string} current
 * @param {Record<string, any>} named Name and fit of each alternative.
 * @param {(id: any) => Plan} set
 * @param {string[]} ids
 * @returns {Alternative[]}
 */
function list(plan, current, named, set, ids) {
  return ids.map((id) => ({
    id, name: named[id][0], fits: named[id][1], chosen: id === current, plan: id === current ? plan : set(id),
  }));
}

/**
 * @param {Plan} plan
 * @param {Context} context
 * @param {'response'|'time'|'group'} role
 * @returns {Alternative[]}
 */
function columnAlternatives(plan, context, role) {
  const columns = context.candidates.map(({ name, reason }) => ({
    id: `column:${name}`,
    name,
    fits: reason,
    chosen: context.columns[role] === name,
    plan: withSection(plan, 'columns', { [role]: name }),
  }));
  if (role !== 'group') return columns;
  const absent = {
    id: 'absent',
    name: words.group.absent,
    fits: words.group.absentFits,
    chosen: context.columns.group === null,
    plan: withSection(plan, 'columns', { group: false }),
  };
  return [...columns, absent];
}

/**
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
function scaleAlternatives(plan, context) {
  const rows = context.nonPositive;
  const shown = rows.slice(0, 6).join(', ') + (rows.length > 6 ? ' \u2026' : '');
  return list(plan, plan.response.transform, words.scale, (id) => withTransform(plan, id), ['identity', 'log']).map(
    (row) => (row.id === 'log' && rows.length > 0 ? { ...row, greyed: words.scale.greyed(shown, rows.length) } : row),
  );
}

/**
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
function pairAlternatives(plan, context) {
  const count = context.groups.length;
  const { pairs, control } = plan.comparisons;
  const allPlan = withSection(plan, 'comparisons', { pairs: 'all', control: null });
  const all = {
    id: 'all',
    name: plan.columns.crossed === null ? words.pairs.all(pairCount(allPlan, count)) : words.pairs.cells,
    fits: plan.columns.crossed === null ? words.pairs.allFits(pairCount(allPlan, count)) : words.pairs.cellsFits,
    chosen: pairs === 'all',
    plan: allPlan,
  };
  const each = context.groups.map((group) => ({
    id: `control:${group}`,
    name: words.pairs.with(group),
    fits: words.pairs.withFits(count - 1, group),
    chosen: pairs === 'against-control' && control === group,
    plan: withSection(plan, 'comparisons', { pairs: 'against-control', control: group }),
  }));
  return [all, ...each];
}

/**
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
function bandAlternatives(plan, context) {
  const more = plan.columns.crossed !== null || plan.comparisons.trend;
  const pairs = (more ? context.compared : null) ?? pairCount(plan, context.groups.length);
  const simultaneous = pairs > 1 ? words.band.simultaneousPairs(pairs) : words.band.simultaneous;
  const named = {
    simultaneous: [simultaneous, words.band.simultaneousFits],
    pointwise: [words.band.pointwise, words.band.pointwiseFits],
  };
  const set = (/** @type {any} */ id) => withSection(plan, 'comparisons', { band: id });
  return list(plan, plan.comparisons.band, named, set, ['simultaneous', 'pointwise']);
}

/**
 * Explanatory columns: each is added or taken away by itself.
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
function covariateAlternatives(plan, context) {
  const taken = [...Object.values(context.columns), plan.columns.block, plan.columns.crossed];
  const { covariates: now, bending } = plan.columns;
  /** @param {string[]} covariates @param {string[]} bent */
  const set = (covariates, bent) => withSection(plan, 'columns', {
    covariates, bending: bent.filter((name) => covariates.includes(name)),
  });
  const none = { id: 'none', name: words.covariates.none, fits: words.covariates.noneFits, chosen: now.length === 0, plan: set([], []) };
  const free = context.candidates.filter(({ name }) => !taken.includes(name) || now.includes(name));
  const each = free.flatMap(({ name }) => {
    const chosen = now.includes(name);
    const bent = bending.includes(name);
    const row = {
      id: `column:${name}`, name, fits: chosen ? words.covariates.away : words.covariates.add, chosen,
      plan: set(chosen ? now.filter((other) => other !== name) : [...now, name], bending),
    };
    const bend = {
      id: `bend:${name}`, name: words.covariates.bent(name), fits: words.covariates.bentFits, chosen: bent,
      plan: set(now, bent ? bending.filter((other) => other !== name) : [...bending, name]),
    };
    return chosen ? [row, bend] : [row];
  });
  return [none, ...each];
}

/**
 * Repeats of the experiment, batches, plates.
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
function blockAlternatives(plan, context) {
  const taken = [...Object.values(context.columns), ...plan.columns.covariates, plan.columns.crossed];
  const { block } = plan.columns;
  const set = (/** @type {string|null} */ name) => withSection(plan, 'columns', { block: name });
  const none = { id: 'none', name: words.block.none, fits: words.block.noneFits, chosen: block === null, plan: set(null) };
  const free = context.candidates.filter(({ name }) => !taken.includes(name));
  return [none, ...free.map(({ name }) => ({
    id: `column:${name}`, name, fits: words.block.fits, chosen: block === name, plan: set(name),
  }))];
}

/**
 * A second factor, crossed with the groups.
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
function crossedAlternatives(plan, context) {
  const taken = [...Object.values(context.columns), ...plan.columns.covariates, plan.columns.block];
  const { crossed } = plan.columns;
  /** @param {string|null} name */
  const set = (name) => {
    const next = withSection(plan, 'columns', { crossed: name });
    return name === null ? next : withSection(next, 'comparisons', { trend: false });
  };
  const none = { id: 'none', name: words.crossed.none, fits: words.crossed.noneFits, chosen: crossed === null, plan: set(null) };
  const free = context.candidates.filter(({ name }) => !taken.includes(name) || name === crossed);
  return [none, ...free.map(({ name }) => ({
    id: `column:${name}`, name, fits: words.crossed.fits, chosen: crossed === name, plan: set(name),
  }))];
}

/**
 * The order of the groups: each can be put first.
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
function orderAlternatives(plan, context) {
  const { group_order: order } = plan.reading;
  const asRead = { id: 'as-read', name: words.order.asRead, fits: words.order.asReadFits, chosen: order.length === 0, plan: withSection(plan, 'reading', { group_order: [] }) };
  const each = context.groups.map((group, k) => ({
    id: `first:${group}`, name: words.order.first(group), fits: k === 0 ? words.order.isFirst : words.order.firstFits, chosen: k === 0 && order.length > 0,
    plan: withSection(plan, 'reading', { group_order: [group, ...context.groups.filter((other) => other !== group)] }),
  }));
  return [asRead, ...each];
}

/**
 * What is told beside the pairs: each is added or taken away by itself.
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
function alsoAlternatives(plan, context) {
  const { trend, rates } = plan.comparisons;
  const { also } = words;
  const set = (/** @type {Partial<Plan['comparisons']>} */ values) => withSection(plan, 'comparisons', values);
  const lone = context.groups.length < 3 ? also.trendFew : plan.columns.crossed !== null ? also.trendCrossed : undefined;
  return [
    { id: 'none', name: also.none, fits: also.noneFits, chosen: !trend && !rates, plan: set({ trend: false, rates: false }) },
    { id: 'trend', name: also.trend, fits: also.trendFits(context.groups.join(', ')), chosen: trend, plan: set({ trend: !trend }), ...(lone ? { greyed: lone } : {}) },
    { id: 'rates', name: also.rates, fits: also.ratesFits, chosen: rates, plan: set({ rates: !rates }) },
  ];
}

/**
 * @param {Plan} plan
 * @returns {Alternative[]}
 */
function notWorseAlternatives(plan) {
  const rows = list(plan, plan.comparisons.not_worse ?? 'none', words.not_worse,
    (id) => withSection(plan, 'comparisons', { not_worse: id === 'none' ? null : id }), ['none', 'lower', 'higher']);
  return rows.map((row) => (row.id !== 'none' && plan.comparisons.margin === 0 ? { ...row, greyed: words.not_worse.greyed } : row));
}

/**
 * What differs from one subject to another. A curve of its own cannot be told from serial likeness.
 * @param {Plan} plan
 * @returns {Alternative[]}
 */
function subjectAlternatives(plan) {
  const rows = list(plan, plan.subjects, words.subjects,
    (id) => ({ ...plan, subjects: id }), ['curve', 'slope', 'intercept', 'none']);
  const alike = plan.errors.serial === 'ar1' && !plan.errors.nugget;
  return rows.map((row) => (row.id === 'curve' && alike ? { ...row, greyed: words.subjects.curveGreyed } : row));
}

/**
 * @param {Plan} plan
 * @returns {Alternative[]}
 */
function startAlternatives(plan) {
  const rows = list(plan, plan.response.start, words.start,
    (id) => withSection(plan, 'response', { start: id }), ['as-measured', 'common', 'covariate', 'change', 'percent']);
  const log = plan.response.transform === 'log';
  return rows.map((row) => (row.id === 'percent' && log ? { ...row, greyed: words.start.percentGreyed } : row));
}

/**
 * @param {Plan} plan
 * @returns {Alternative[]}
 */
function levelAlternatives(plan) {
  return /** @type {const} */ ([90, 95, 99]).map((percent) => ({
    id: String(percent),
    name: percentLevel(percent / 100),
    fits: words.level[percent],
    chosen: Math.abs(plan.comparisons.level * 100 - percent) < 1e-9,
    plan: withSection(plan, 'comparisons', { level: percent / 100 }),
  }));
}

/** @param {Plan} plan */
export function serialId(plan) {
  return plan.errors.serial === 'ar1' && plan.errors.nugget ? 'ar1-nugget' : plan.errors.serial;
}

/**
 * @param {Plan} plan
 * @returns {Alternative[]}
 */
function serialAlternatives(plan) {
  const rows = list(plan, serialId(plan), words.serial,
    (id) => withSection(plan, 'errors', { serial: id === 'none' ? 'none' : 'ar1', nugget: id === 'ar1-nugget' }),
    ['none', 'ar1', 'ar1-nugget']);
  const curved = plan.subjects === 'curve';
  return rows.map((row) => (row.id === 'ar1' && curved ? { ...row, greyed: words.serial.ar1Greyed } : row));
}

/**
 * The alternatives of one choice; empty where it is a field only.
 * @param {ChoiceId} choice
 * @param {Plan} plan
 * @param {Context} context
 * @returns {Alternative[]}
 */
export function alternativesOf(choice, plan, context) {
  switch (choice) {
    case 'response':
    case 'time':
    case 'group':
      return columnAlternatives(plan, context, choice);
    case 'scale':
      return scaleAlternatives(plan, context);
    case 'pairs':
      return pairAlternatives(plan, context);
    case 'band':
      return bandAlternatives(plan, context);
    case 'level':
      return levelAlternatives(plan);
    case 'covariates':
      return covariateAlternatives(plan, context);
    case 'block':
      return blockAlternatives(plan, context);
    case 'crossed':
      return crossedAlternatives(plan, context);
    case 'order':
      return orderAlternatives(plan, context);
    case 'also':
      return alsoAlternatives(plan, context);
    case 'not_worse':
      return notWorseAlternatives(plan);
    default:
      return plainAlternatives(choice, plan);
  }
}

/**
 * @param {ChoiceId} choice
 * @param {Plan} plan
 * @returns {Alternative[]}
 */
function plainAlternatives(choice, plan) {
  switch (choice) {
    case 'shape':
      return list(plan, plan.curves.shape, words.shape,
        (id) => withSection(plan, 'curves', { shape: id }), ['smooth', 'straight', 'by-time']);
    case 'basis':
      return list(plan, plan.curves.basis, words.basis,
        (id) => withSection(plan, 'curves', { basis: id, period: id === 'cyclic' ? plan.curves.period ?? 24 : plan.curves.period }),
        ['cubic', 'thin-plate', 'p-spline', 'gaussian-process', 'cyclic']);
    case 'dimension':
      return list(plan, String(plan.curves.dimension), words.dimension,
        (id) => withSection(plan, 'curves', { dimension: id }), ['auto', 'full']);
    case 'smoothness':
      return list(plan, plan.curves.smoothness, words.smoothness,
        (id) => withSection(plan, 'curves', { smoothness: id }), ['per-group', 'shared']);
    case 'subjects':
      return subjectAlternatives(plan);
    case 'clusters':
      return list(plan, plan.clusters, words.clusters,
        (id) => ({ ...plan, clusters: id }), ['auto', 'slope', 'intercept', 'none']);
    case 'distribution':
      return list(plan, plan.response.distribution, words.distribution, (id) => withDistribution(plan, id),
        ['normal', 'poisson', 'negative-binomial', 'gamma', 'tweedie', 'binomial', 'beta']);
    case 'detection':
      return list(plan, plan.response.detection, words.detection,
        (id) => withSection(plan, 'response', { detection: id }), ['as-written', 'limits']);
    case 'start':
      return startAlternatives(plan);
    case 'serial':
      return serialAlternatives(plan);
    case 'spread':
      return list(plan, plan.errors.spread, words.spread,
        (id) => withSection(plan, 'errors', { spread: id }), ['common', 'by-group']);
    case 'subjects_spread':
      return list(plan, plan.subjects_spread, words.subjects_spread,
        (id) => ({ ...plan, subjects_spread: id }), ['common', 'by-group']);
    case 'small_sample':
      return list(plan, plan.comparisons.small_sample === 'none' ? 'none' : 'auto', words.small_sample,
        (id) => withSection(plan, 'comparisons', { small_sample: id }), ['auto', 'none']);
    default:
      return [];
  }
}
