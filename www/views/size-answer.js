/**
 * The answer of the sample-size room: one sentence, power by size, the
 * paragraph, and everything it rests on.
 */

import { el, svg } from '../dom.js';
import { fixed } from '../numbers.js';
import { text } from '../text.js';
import { copyButton } from './copy.js';
import { smallPlot } from './small-plot.js';

/** @typedef {import('../sizing.js').Job} Job */

const words = text.size.answer;
const percent = (/** @type {number} */ share) => `${fixed(100 * share, 0)}\u00a0%`;

/**
 * @param {HTMLElement} root
 * @param {{best: Job, low: Job|null, high: Job|null, schedules: {name: string, job: Job}[]}|null} jobs
 * @param {import('../types.js').Acts} acts
 * @param {() => void} compare
 */
export async function drawAnswer(root, jobs, acts, compare) {
  if (!jobs) {
    root.replaceChildren(el('p', { class: 'hint' }, words.none));
    return;
  }
  const of = async (/** @type {Job|null} */ job) => (job ? acts.sizing().answer(job) : null);
  const [best, low, high] = await Promise.all([of(jobs.best), of(jobs.low), of(jobs.high)]);
  const target = JSON.parse(jobs.best.request).target;
  const paragraph = el('p', { class: 'size-paragraph', 'data-region': 'size-paragraph' }, best.paragraph);
  const schedules = await Promise.all(jobs.schedules.map(async ({ name, job }) => ({ name, job, answer: await of(job) })));
  root.replaceChildren(
    el('p', { class: 'size-sentence' }, best.sentence),
    powerPlot(best, low, high, target),
    ...(best.paragraph ? [el('h3', {}, words.paragraph), paragraph, copyButton(() => best.paragraph, paragraph, words)] : []),
    el('h3', {}, words.model), el('p', {}, best.model),
    ...best.cautions.map((/** @type {string} */ caution) => el('p', { class: 'hint' }, caution)),
    numbers(best),
    el('p', {}, el('button', { type: 'button', class: 'quiet', onclick: compare }, words.schedules), ' ', el('span', { class: 'hint' }, words.schedulesHint)),
    ...(schedules.length > 0 ? [scheduleTable(schedules)] : []),
  );
}

/** @param {any} best @param {any} low @param {any} high @param {number} target */
function powerPlot(best, low, high, target) {
  const total = (/** @type {any} */ d) => d.per_group[0] + d.per_group[1];
  const done = (/** @type {any} */ answer) => answer.designs.filter((/** @type {any} */ d) => d.counts.studies > 0)
    .sort((/** @type {any} */ a, /** @type {any} */ b) => total(a) - total(b));
  const line = (/** @type {any} */ answer, /** @type {string} */ name, /** @type {string} */ kind) => ({
    x: done(answer).map(total), y: done(answer).map((/** @type {any} */ d) => 100 * d.power), joined: true, name, kind,
  });
  const shown = done(best);
  if (shown.length === 0) return svg('svg', { class: 'small-plot', viewBox: '0 0 1 1', 'aria-hidden': 'true' });
  const plot = smallPlot({
    label: `${words.curve(fixed(100 * target, 0))}. ${shown.map((/** @type {any} */ d) => `${total(d)}: ${percent(d.power)}`).join(', ')}`,
    across: words.across, up: words.up, height: 240, width: 520, yRange: [0, 102], levels: [100 * target],
    bands: [{ x: shown.map(total), low: shown.map((/** @type {any} */ d) => 100 * d.interval[0]), high: shown.map((/** @type {any} */ d) => 100 * d.interval[1]) }],
    series: [
      line(best, low || high ? words.best : '', ''), { x: shown.map(total), y: shown.map((/** @type {any} */ d) => 100 * d.power) },
      ...(low ? [line(low, words.low, 'dashed')] : []), ...(high ? [line(high, words.high, 'dashed')] : []),
    ],
  });
  return el('figure', { class: 'plot-figure' }, el('figcaption', { class: 'hint' }, words.curve(fixed(100 * target, 0))), plot);
}

/** @param {any} answer */
function numbers(answer) {
  const head = [words.design, words.enrol, words.power, words.interval, words.failed];
  const rows = answer.designs.map((/** @type {any} */ d) => el('tr', {},
    el('th', { scope: 'row' }, d.per_group[0] === d.per_group[1] ? String(d.per_group[0]) : d.per_group.join(':')),
    ...[String(d.enrolled[0] + d.enrolled[1]), percent(d.power), `${percent(d.interval[0])} to ${percent(d.interval[1])}`, `${d.counts.failed} of ${d.counts.studies}`]
      .map((cell) => el('td', { class: 'number' }, cell))));
  return el('details', { class: 'as-tables' }, el('summary', {}, words.numbers), el('table', { class: 'plain-table' },
    el('thead', {}, el('tr', {}, ...head.map((name) => el('th', { scope: 'col' }, name)))), el('tbody', {}, ...rows)));
}

/** @param {{name: string, job: Job, answer: any}[]} schedules */
function scheduleTable(schedules) {
  const rows = schedules.map(({ name, job, answer }) => {
    const [design] = answer.designs;
    return el('tr', {}, el('th', { scope: 'row' }, words.schedule[/** @type {'even'} */ (name)]),
      el('td', {}, JSON.parse(job.request).days.join(', ')), el('td', { class: 'number' }, percent(design.power)),
      el('td', { class: 'number' }, `${percent(design.interval[0])} to ${percent(design.interval[1])}`));
  });
  return el('table', { class: 'plain-table', 'data-region': 'schedules' }, el('tbody', {}, ...rows));
}
