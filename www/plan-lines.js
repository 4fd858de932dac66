/**
 * The plan as three lines of words, some of which are choices. Pure functions:
 * the view only turns parts into text and buttons.
 */

import { alternativesOf } from './alternatives.js';
import { calledName, responseName } from './context.js';
import { percentLevel } from './numbers.js';
import { text } from './text.js';

/** @typedef {import('./alternatives.js').ChoiceId} ChoiceId */
/** @typedef {import('./context.js').Context} Context */
/** @typedef {import('./types.js').Choices} Choices */
/** @typedef {{text: string, choice?: ChoiceId}} Part */
/** @typedef {{id: 'followed'|'vary'|'compared', label: string, parts: Part[], folded: number}} Line */

const words = text.plan;

/**
 * The three lines. Choices at their default may be folded away; `folded`
 * counts them.
 * @param {Choices} choices
 * @param {Context} context
 * @param {boolean} open Write the finer choices out although they have their default.
 * @returns {Line[]}
 */
export function planLines(choices, context, open) {
  return [followed(choices, context, open), vary(choices, context, open), compared(choices, context, open)];
}

/**
 * The plan in one string, for reading aloud.
 * @param {Line} line
 */
export function lineText(line) {
  return `${line.label}: ${line.parts.map((part) => part.text).join('')}.`;
}

/**
 * The chosen alternative as a part.
 * @param {ChoiceId} choice
 * @param {Choices} choices
 * @param {Context} context
 * @returns {Part}
 */
function chosen(choice, choices, context) {
  const row = alternativesOf(choice, choices.plan, context).find((one) => one.chosen);
  return { text: row?.name ?? '', choice };
}

/**
 * Finer choices: written out where they differ from the default or are asked for.
 * @param {{lead: string, part: Part, isDefault: boolean}[]} finer
 * @param {boolean} open
 * @returns {{parts: Part[], folded: number}}
 */
function withFiner(finer, open) {
  const shown = finer.filter((row) => open || !row.isDefault);
  return {
    parts: shown.flatMap((row) => [{ text: row.lead }, row.part]),
    folded: finer.filter((row) => row.isDefault).length,
  };
}

/** @param {Choices} choices @param {Context} context @param {boolean} open @returns {Line} */
function followed(choices, context, open) {
  const { plan } = choices;
  const { response, time, group } = context.columns;
  const { dimension } = plan.curves;
  const roomPart = typeof dimension === 'number'
    ? { text: words.choices.dimension.written(dimension), choice: /** @type {const} */ ('dimension') }
    : chosen('dimension', choices, context);
  const curved = plan.curves.shape === 'smooth';
  const basis = chosen('basis', choices, context);
  if (plan.curves.basis === 'cyclic') basis.text = words.choices.basis.every(String(plan.curves.period), context.timeWord);
  const finerOfCurve = curved ? [
    { lead: words.made, part: basis, isDefault: plan.curves.basis === 'cubic' },
    { lead: words.bends, part: roomPart, isDefault: dimension === 'auto' },
    { lead: words.smoothness, part: chosen('smoothness', choices, context), isDefault: plan.curves.smoothness === 'per-group' },
  ] : [];
  const called = (/** @type {string} */ name) => calledName(choices, name, name);
  const { covariates, bending, block, crossed } = plan.columns;
  const adjusted = covariates
    .map((name) => (bending.includes(name) ? words.choices.covariates.bent(called(name)) : called(name))).join(words.and);
  const { distribution } = plan.response;
  const finer = withFiner([
    { lead: words.valuesAre, part: chosen('distribution', choices, context), isDefault: distribution === 'normal' },
    ...(context.limits > 0 || plan.response.detection === 'limits' ? [{
      lead: words.beyond, part: chosen('detection', choices, context), isDefault: false,
    }] : []),
    ...finerOfCurve,
    { lead: words.start, part: chosen('start', choices, context), isDefault: plan.response.start === 'as-measured' },
    {
      lead: words.adjusted, isDefault: adjusted === '',
      part: { text: adjusted || words.choices.covariates.none, choice: /** @type {const} */ ('covariates') },
    },
    {
      lead: words.repeated, isDefault: block === null,
      part: { text: block === null ? words.choices.block.none : called(block), choice: /** @type {const} */ ('block') },
    },
    ...(group === null ? [] : [{
      lead: words.crossedWith, isDefault: crossed === null,
      part: { text: crossed === null ? words.choices.crossed.none : called(crossed), choice: /** @type {const} */ ('crossed') },
    }, {
      lead: words.ordered, isDefault: plan.reading.group_order.length === 0,
      part: { text: plan.reading.group_order.length === 0 ? words.choices.order.asRead : context.groups.join(', '), choice: /** @type {const} */ ('order') },
    }]),
  ], open);
  /** @type {Part[]} */
  const parts = [
    { text: responseName(choices, context), choice: 'response' },
    { text: words.by },
    { text: calledName(choices, time, context.timeWord), choice: 'time' },
    { text: words.aCourse },
    chosen('shape', choices, context),
    { text: group === null ? words.oneCourse : words.coursePer },
    { text: calledName(choices, group, words.choices.group.none), choice: 'group' },
    { text: words.onScale },
    chosen('scale', choices, context),
    { text: words.scaleEnd },
    ...finer.parts,
  ];
  return { id: 'followed', label: words.lines.followed, parts, folded: finer.folded };
}

/** @param {Choices} choices @param {Context} context @param {boolean} open @returns {Line} */
function vary(choices, context, open) {
  const { plan } = choices;
  const finer = withFiner(plan.subjects === 'none' ? [] : [
    { lead: words.vary, part: chosen('subjects_spread', choices, context), isDefault: plan.subjects_spread === 'common' },
  ], open);
  const { cluster } = context.columns;
  /** @type {Part[]} */
  const housed = cluster === null ? [] : [
    { text: words.eachCluster(calledName(choices, cluster, cluster)) }, clusterPart(choices, context),
  ];
  /** @type {Part[]} */
  const parts = [
    { text: words.each },
    { text: choices.noun.one, choice: 'noun' },
    { text: words.has },
    chosen('subjects', choices, context),
    { text: words.otherwise },
    chosen('serial', choices, context),
    { text: words.spread },
    chosen('spread', choices, context),
    ...housed,
    ...finer.parts,
  ];
  return { id: 'vary', label: words.lines.vary, parts, folded: finer.folded };
}

/**
 * Clusters: where the table decides, what it decided.
 * @param {Choices} choices
 * @param {Context} context
 * @returns {Part}
 */
function clusterPart(choices, context) {
  const part = chosen('clusters', choices, context);
  if (choices.plan.clusters !== 'auto' || context.clusters === null) return part;
  return { ...part, text: words.choices.clusters[context.clusters][0] ?? part.text };
}

/**
 * The margin: its words, and what they mean as a ratio.
 * @param {Choices} choices
 * @returns {Part[]}
 */
function marginParts(choices) {
  const { margin, margin_unit: unit, pairs, control } = choices.plan.comparisons;
  if (margin === 0) {
    return [{ text: words.gapOf }, { text: words.choices.margin.none, choice: 'margin' }, { text: words.anyMatters }];
  }
  if (unit === 'response') {
    return [{ text: words.gapUnder }, { text: String(margin), choice: 'margin' }, { text: words.noMatter }];
  }
  const of = pairs === 'against-control' && control ? control : words.choices.margin.ofOther;
  const low = 1 - margin / 100;
  return [
    { text: words.gapUnder },
    { text: words.choices.margin.written(String(margin), of), choice: 'margin' },
    { text: words.ratio(low.toFixed(2), (1 / low).toFixed(2)) },
    { text: words.noMatter },
  ];
}

/** @param {Choices} choices @param {Context} context @param {boolean} open @returns {Line} */
function compared(choices, context, open) {
  const { comparisons } = choices.plan;
  const alone = context.columns.group === null || context.groups.length === 1;
  const { trend, rates, target, growth_over: over, not_worse: notWorse } = comparisons;
  const { also } = words.choices;
  const told = [
    ...(trend ? [also.trend] : []), ...(rates ? [also.rates] : []), ...(target === null ? [] : [also.targetWritten(String(target))]),
    ...(over === null ? [] : [also.growthWritten(String(over[0]), String(over[1]))]),
  ];
  const finer = withFiner([
    ...(alone ? [] : [{ lead: words.notWorse, part: chosen('not_worse', choices, context), isDefault: notWorse === null }]),
    {
      lead: words.also, isDefault: told.length === 0,
      part: { text: told.join(words.and) || also.none, choice: /** @type {const} */ ('also') },
    },
    { lead: words.small, part: chosen('small_sample', choices, context), isDefault: comparisons.small_sample !== 'none' },
  ], open);
  /** @type {Part[]} */
  const what = alone ? [{ text: words.nothingCompared }] : [chosen('pairs', choices, context), ...marginParts(choices)];
  /** @type {Part[]} */
  const parts = [
    ...what,
    { text: percentLevel(comparisons.level), choice: 'level' },
    { text: words.bandsHold },
    chosen('band', choices, context),
    ...finer.parts,
  ];
  return { id: 'compared', label: words.lines.compared, parts, folded: finer.folded };
}
