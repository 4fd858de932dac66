/**
 * One usual analysis: its sentence to copy, what it assumes, whether the data
 * bear that, and where it parts from the courses.
 */

import { el, svg } from '../dom.js';
import { fixed } from '../numbers.js';
import { counted, text } from '../text.js';
import { copyButton } from './copy.js';
import { groupClass, smallPlot } from './small-plot.js';

/** @typedef {import('../types.js').State} State */

const words = text.usual;

/**
 * @param {any} analysis
 * @param {any} usual
 * @param {State} state
 * @param {import('../types.js').Acts} acts
 */
export function analysisArticle(analysis, usual, state, acts) {
  const result = el('p', { class: 'usual-result' }, analysis.result);
  const article = el('article', { class: 'analysis', id: `usual-${analysis.kind}`, tabindex: '-1', 'data-kind': analysis.kind },
    el('h3', {}, analysis.name), result);
  if (!analysis.done) {
    article.append(el('p', { class: 'hint' }, uses(analysis.used, state)));
    return article;
  }
  article.append(copyButton(() => analysis.result, result, words));
  article.append(el('dl', { class: 'told' },
    el('dt', {}, words.assumes), el('dd', {}, analysis.assumption, ' ', uses(analysis.used, state)),
    el('dt', {}, words.bears), el('dd', { 'data-borne': analysis.bearing.verdict },
      el('strong', {}, words.verdicts[/** @type {'yes'} */ (analysis.bearing.verdict)]), ' ', capital(analysis.bearing.sentence)),
    el('dt', {}, words.beside), el('dd', { 'data-agrees': String(analysis.beside.agrees) }, analysis.beside.sentence),
  ));
  if (analysis.beside.pairs.length > 0) article.append(lanes(analysis, usual, state));
  if (analysis.lines.length > 0 && state.findings) {
    article.append(overlay(analysis, state), el('p', {}, el('button', {
      type: 'button', 'data-act': 'lay-over', onclick: () => acts.layOver({ name: analysis.name, lines: analysis.lines }),
    }, words.lines.lay)));
  }
  article.append(el('details', { class: 'as-tables' }, el('summary', {}, words.numbers),
    ...analysis.tables.map(numbersTable)));
  return article;
}

/** @param {string} sentence */
const capital = (sentence) => sentence.charAt(0).toUpperCase() + sentence.slice(1);

/** @param {{subjects: number, rows: number, dropped_subjects: number, dropped_rows: number}} used @param {State} state */
function uses(used, state) {
  const { one, many } = state.choices.noun;
  const count = (/** @type {number} */ subjects) => counted(subjects, one, many);
  const rows = (/** @type {number} */ n) => counted(n, 'visit', 'visits');
  const kept = words.uses(count(used.subjects), rows(used.rows));
  return used.dropped_rows > 0 ? `${kept} ${words.drops(count(used.dropped_subjects), rows(used.dropped_rows))}` : kept;
}

/** @param {{title: string, label_heads: string[], heads: string[], rows: {labels: string[], cells: {text: string}[]}[], note: string}} table */
function numbersTable(table) {
  const head = [...table.label_heads, ...table.heads];
  const rows = table.rows.map((row) => el('tr', {},
    ...row.labels.map((label) => el('th', { scope: 'row' }, label)),
    ...row.cells.map((cell) => el('td', { class: 'number' }, cell.text))));
  return el('div', { class: 'table-scroller', tabindex: '0', role: 'region', 'aria-label': table.title },
    el('table', { class: 'plain-table' },
      el('caption', {}, table.note ? `${table.title}. ${table.note}` : table.title),
      el('thead', {}, el('tr', {}, ...head.map((name, k) => el('th', { scope: 'col', class: k < table.label_heads.length ? null : 'number' }, name)))),
      el('tbody', {}, ...rows)));
}

const LANE = { width: 640, height: 46, left: 8, right: 632 };

/**
 * One lane per pair on the courses' own time: above where the courses are apart, below the days this analysis names.
 * @param {any} analysis
 * @param {any} usual
 * @param {State} state
 */
function lanes(analysis, usual, state) {
  const visits = state.findings?.visits ?? [];
  const [start, end] = [visits[0] ?? 0, visits[visits.length - 1] ?? 1];
  const px = (/** @type {number} */ t) => LANE.left + ((t - start) / (end - start || 1)) * (LANE.right - LANE.left);
  return el('div', { class: 'usual-lanes' }, ...analysis.beside.pairs.map((/** @type {any} */ row) => {
    const pair = usual.pairs[row.pair];
    const name = usual.ratio ? text.reading.ratio(pair.to, pair.from) : text.reading.difference(pair.to, pair.from);
    const group = groupClass(state.findings?.groups ?? [], pair.to);
    const apart = (pair.curves_apart ?? []).map((/** @type {any} */ s) =>
      svg('rect', { class: `lane-courses ${group}`, x: px(s.start), width: Math.max(2, px(s.end) - px(s.start)), y: 6, height: 8 }));
    const days = row.days.map((/** @type {number} */ day) => svg('circle', {
      class: `lane-day ${group} ${row.only_here.includes(day) ? 'only-here' : ''}`, cx: px(day), cy: 26, r: 4.5,
    }));
    const missed = row.only_curves.map((/** @type {number} */ day) => svg('path', {
      class: `lane-missed ${group}`, d: `M${px(day) - 4} 26h8`,
    }));
    const ticks = visits.map((t) => svg('line', { class: 'plot-grid', x1: px(t), x2: px(t), y1: 36, y2: 40 }));
    const drawing = svg('svg', { class: 'usual-lane', viewBox: `0 0 ${LANE.width} ${LANE.height}`, role: 'img', 'aria-label': words.lane.label(name, row.sentence) },
      svg('line', { class: 'plot-axis', x1: LANE.left, x2: LANE.right, y1: 36, y2: 36 }), ...ticks, ...apart, ...days, ...missed);
    const key = `${words.lane.curves} \u25ac  ${words.lane.here} \u25cf  ${words.lane.onlyHere} \u25cb  ${words.lane.onlyCurves} \u2013`;
    return el('figure', { class: 'lane-figure' },
      el('figcaption', {}, el('strong', { class: `lane-name ${group}` }, name), ' ', el('span', { class: 'hint' }, key)),
      drawing,
      el('p', { class: 'lane-ends hint', 'aria-hidden': 'true' }, el('span', {}, fixed(start, 0)), el('span', {}, `${usual.time_word} ${fixed(end, 0)}`)));
  }));
}

/** @param {any} analysis @param {State} state */
function overlay(analysis, state) {
  const { findings } = state;
  if (!findings) return '';
  const curves = findings.curves.map((/** @type {any} */ curve) => ({ curve, group: groupClass(findings.groups, curve.group) }));
  const plot = smallPlot({
    label: words.lines.label, across: findings.scale.time_word, up: findings.scale.response, width: 640, height: 260,
    bands: curves.map(({ curve, group }) => ({ x: curve.time, low: curve.response_lower, high: curve.response_upper, group })),
    series: [
      ...curves.map(({ curve, group }) => ({ x: curve.time, y: curve.response_mean, joined: true, group, name: curve.group })),
      ...analysis.lines.map((/** @type {any} */ line) => ({
        x: line.time, y: line.response_mean, joined: true, kind: 'dashed', group: groupClass(findings.groups, line.group),
      })),
    ],
  });
  return el('figure', { class: 'plot-figure' }, el('figcaption', { class: 'hint' }, words.lines.title), plot);
}
