/**
 * Small plots: points, lines and bands in a frame with few ticks. They draw numbers
 * that came from the computation and compute none.
 */

import { svg } from '../dom.js';
import { fixed } from '../numbers.js';

/**
 * @typedef {Object} Series
 * @property {readonly number[]} x
 * @property {readonly (number|null)[]} y
 * @property {boolean} [joined]
 * @property {string} [group] Class that colours it, such as `of-group-2`.
 * @property {string} [kind] Further class: `faint`, `dashed`, `marked`.
 * @property {string} [name] Written at its end.
 */

/**
 * @typedef {Object} PlotAsk
 * @property {string} label What the plot shows, for those who do not see it.
 * @property {string} across
 * @property {string} up
 * @property {Series[]} series
 * @property {{x: readonly number[], low: readonly (number|null)[], high: readonly (number|null)[], group?: string}[]} [bands]
 * @property {number[]} [levels] Horizontal lines to compare with.
 * @property {number} [width]
 * @property {number} [height]
 * @property {[number, number]} [yRange]
 */

const LEFT = 46;
const BOTTOM = 34;
const TOP = 8;
const RIGHT = 12;
/** More named lines than this are not named at their ends. */
const MOST_NAMES = 8;

/**
 * Round numbers in a range: at most `most`.
 * @param {number} low
 * @param {number} high
 * @param {number} most
 */
export function ticksIn(low, high, most) {
  const span = high - low;
  if (!(span > 0)) return [low];
  const raw = span / most;
  const power = 10 ** Math.floor(Math.log10(raw));
  const step = [1, 2, 5, 10].map((factor) => factor * power).find((one) => one >= raw) ?? raw;
  const ticks = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high + 1e-9 * span; k += 1) ticks.push(k * step);
  return ticks;
}

/** @param {number[]} ticks */
function written(ticks) {
  const step = ticks.length > 1 ? Math.abs((ticks[1] ?? 0) - (ticks[0] ?? 0)) : Math.abs(ticks[0] ?? 1) || 1;
  const decimals = Math.max(0, Math.min(6, -Math.floor(Math.log10(step) + 1e-9)));
  return ticks.map((tick) => fixed(tick, decimals));
}

/** @param {Iterable<number|null|undefined>} values @param {number[]} more */
function extent(values, more) {
  let [low, high] = [Infinity, -Infinity];
  for (const value of [...values, ...more]) {
    if (value === null || value === undefined || !Number.isFinite(value)) continue;
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  if (!(high >= low)) return /** @type {[number, number]} */ ([0, 1]);
  const room = high > low ? (high - low) * 0.05 : Math.max(1e-9, Math.abs(high) * 0.1);
  return /** @type {[number, number]} */ ([low - room, high + room]);
}

/**
 * The drawing as one element.
 * @param {PlotAsk} ask
 * @returns {SVGElement}
 */
export function smallPlot(ask) {
  const { width = 420, height = 190, series, bands = [], levels = [] } = ask;
  const named = series.filter((one) => one.joined && one.name);
  const longest = named.length > MOST_NAMES ? 0 : Math.max(0, ...named.map((one) => one.name?.length ?? 0));
  const right = RIGHT + Math.min(0.3 * width, 6.6 * longest);
  const xs = extent([...series.flatMap((one) => one.x), ...bands.flatMap((band) => band.x)], []);
  const ys = ask.yRange ?? extent(
    [...series.flatMap((one) => one.y), ...bands.flatMap((band) => [...band.low, ...band.high])], levels);
  const px = (/** @type {number} */ x) => LEFT + ((x - xs[0]) / (xs[1] - xs[0])) * (width - LEFT - right);
  const py = (/** @type {number} */ y) => height - BOTTOM - ((y - ys[0]) / (ys[1] - ys[0])) * (height - BOTTOM - TOP);
  const parts = [
    ...frame(ask, xs, ys, px, py, { width, height, right }),
    ...bands.map((band) => bandPath(band, px, py)),
    ...levels.map((level) => svg('line', { class: 'plot-level', x1: LEFT, x2: width - right, y1: py(level), y2: py(level) })),
    ...series.flatMap((one) => drawn(one, px, py)),
    ...(longest > 0 ? names(named, px, py, width) : []),
  ];
  return svg('svg', { class: 'small-plot', viewBox: `0 0 ${width} ${height}`, role: 'img', 'aria-label': ask.label }, ...parts);
}

/**
 * @param {PlotAsk} ask
 * @param {[number, number]} xs
 * @param {[number, number]} ys
 * @param {(x: number) => number} px
 * @param {(y: number) => number} py
 * @param {{width: number, height: number, right: number}} size
 */
function frame(ask, xs, ys, px, py, { width, height, right }) {
  const across = ticksIn(xs[0], xs[1], Math.max(3, Math.floor(width / 70)));
  const up = ticksIn(ys[0], ys[1], 4);
  const text = (/** @type {string} */ words, /** @type {Record<string, any>} */ attributes) => {
    const node = svg('text', attributes);
    node.textContent = words;
    return node;
  };
  const yNames = written(up);
  const xNames = written(across);
  return [
    ...up.map((y) => svg('line', { class: 'plot-grid', x1: LEFT, x2: width - right, y1: py(y), y2: py(y) })),
    svg('line', { class: 'plot-axis', x1: LEFT, x2: width - right, y1: height - BOTTOM, y2: height - BOTTOM }),
    ...up.map((y, k) => text(yNames[k] ?? '', { class: 'plot-tick', x: LEFT - 6, y: py(y) + 4, 'text-anchor': 'end' })),
    ...across.map((x, k) => text(xNames[k] ?? '', { class: 'plot-tick', x: px(x), y: height - BOTTOM + 14, 'text-anchor': 'middle' })),
    text(ask.across, { class: 'plot-title', x: width - right, y: height - 4, 'text-anchor': 'end' }),
  ];
}

/** @param {{x: readonly number[], low: readonly (number|null)[], high: readonly (number|null)[], group?: string}} band @param {(x: number) => number} px @param {(y: number) => number} py */
function bandPath(band, px, py) {
  /** @type {string[]} */
  const top = [];
  /** @type {string[]} */
  const bottom = [];
  band.x.forEach((x, k) => {
    const low = band.low[k];
    const high = band.high[k];
    if (low === null || low === undefined || high === null || high === undefined) return;
    top.push(`${px(x).toFixed(1)},${py(high).toFixed(1)}`);
    bottom.unshift(`${px(x).toFixed(1)},${py(low).toFixed(1)}`);
  });
  return svg('polygon', { class: `plot-band ${band.group ?? ''}`, points: [...top, ...bottom].join(' ') });
}

/** @param {Series} one @param {(x: number) => number} px @param {(y: number) => number} py */
function drawn(one, px, py) {
  const classes = `${one.group ?? ''} ${one.kind ?? ''}`.trim();
  /** @type {[number, number][]} */
  const points = one.x.flatMap((x, k) => {
    const y = one.y[k];
    return y === null || y === undefined || !Number.isFinite(y) ? [] : [/** @type {[number, number]} */ ([px(x), py(y)])];
  });
  if (!one.joined) {
    // One path of round dots: thousands of elements would hold the page up.
    return [svg('path', { class: `plot-point ${classes}`, d: points.map(([x, y]) => `M${x.toFixed(1)},${y.toFixed(1)}h0`).join('') })];
  }
  return [svg('polyline', { class: `plot-line ${classes}`, points: points.map(([x, y]) => `${x.toFixed(1)},${y.toFixed(1)}`).join(' ') })];
}

/** Lines of text do not come closer than this, in pixels. */
const LINE = 12;

/**
 * Names at the ends of joined series, kept from lying on each other.
 * @param {Series[]} series
 * @param {(x: number) => number} px
 * @param {(y: number) => number} py
 * @param {number} width
 */
function names(series, px, py, width) {
  const ends = series.flatMap((one) => {
    const last = one.y.reduce((/** @type {number} */ found, y, k) => (y === null || y === undefined ? found : k), -1);
    const y = last < 0 ? null : one.y[last];
    return y === null || y === undefined ? [] : [{ one, x: px(one.x[last] ?? 0), y: py(y) + 4 }];
  }).sort((a, b) => a.y - b.y);
  ends.forEach((end, k) => {
    const above = ends[k - 1];
    if (above && end.y - above.y < LINE) end.y = above.y + LINE;
  });
  return ends.map(({ one, x, y }) => {
    const name = svg('text', { class: `plot-name ${one.group ?? ''}`, x: x + 5, y });
    const room = Math.floor((width - x - 5) / 6);
    const full = one.name ?? '';
    name.textContent = full.length > room ? `${full.slice(0, Math.max(1, room - 1))}\u2026` : full;
    return name;
  });
}

/**
 * Class of a group's colour.
 * @param {readonly {name: string}[]} groups
 * @param {string} name
 */
export function groupClass(groups, name) {
  const index = groups.findIndex((group) => group.name === name);
  return index < 0 ? '' : `of-group-${(index % 6) + 1}`;
}
