/** What was chosen for the figure that is given out, and the view that it makes. Pure functions. */

import { parseNumber } from './numbers.js';

/** @typedef {import('./types.js').FigureChoices} FigureChoices */

const PX_PER_MM = 96 / 25.4;
const PX_PER_POINT = 96 / 72;

/** @returns {FigureChoices} */
export function freshFigure() {
  return {
    width: '170', font: '8', panels: { courses: true, gaps: true, followed: true }, bands: true, points: true, captions: true,
    order: [], names: {}, valueTitle: '', timeTitle: '',
  };
}

/** Millimetres and points as they are taken. @param {FigureChoices} figure */
export function sizesOf({ width, font }) {
  return {
    mm: Math.min(400, Math.max(50, parseNumber(width) ?? 170)),
    points: Math.min(16, Math.max(5, parseNumber(font) ?? 8)),
  };
}

/**
 * Groups in the order asked for; those it does not name follow as they stand.
 * @param {FigureChoices} figure
 * @param {readonly string[]} groups
 * @returns {string[]}
 */
export function orderOf(figure, groups) {
  const asked = figure.order.filter((name) => groups.includes(name));
  return [...asked, ...groups.filter((name) => !asked.includes(name))];
}

/**
 * The view of the figure that is given out.
 * @param {FigureChoices} figure
 * @param {readonly string[]} groups As in the findings.
 * @param {{openPairs: number[], noun: string}} look
 */
export function viewOf(figure, groups, { openPairs, noun }) {
  const { mm, points } = sizesOf(figure);
  const title = (/** @type {string} */ text) => (text.trim() === '' ? null : text.trim());
  return {
    width: Math.round(mm * PX_PER_MM), ratio: 1, head_room: 0, theme: /** @type {'print'} */ ('print'), letters: mm < 120, open_pairs: openPairs, noun,
    font: points * PX_PER_POINT, panels: figure.panels, bands: figure.bands, points: figure.points, captions: figure.captions,
    order: orderOf(figure, groups).map((name) => groups.indexOf(name)), names: groups.map((name) => figure.names[name] ?? ''),
    value_title: title(figure.valueTitle), time_title: title(figure.timeTitle),
  };
}

/**
 * A name that two groups would have; `null` where all differ.
 * @param {FigureChoices} figure
 * @param {readonly string[]} groups
 */
export function sharedName(figure, groups) {
  const names = groups.map((name) => (figure.names[name] ?? '').trim() || name);
  return names.find((name, k) => names.indexOf(name) !== k) ?? null;
}
