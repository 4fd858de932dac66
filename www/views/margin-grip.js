/**
 * The grip at the first gap strip by which the margin is set: dragged up or
 * down, or moved by keys. It is let go before anything is fitted.
 */

import { el, setText, show } from '../dom.js';
import { withSection } from '../plan.js';
import { text } from '../text.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {{top: number, bottom: number, kind: string, low: number, high: number}} Axis */

const words = text.strips.grip;
const HALF = 12;

/**
 * Two digits that count.
 * @param {number} value
 */
function rounded(value) {
  if (!(value > 0)) return 0;
  const unit = 10 ** (Math.floor(Math.log10(value)) - 1);
  return Number((Math.round(value / unit) * unit).toPrecision(6));
}

/**
 * The margin that a height stands for: in the response's unit, or in percent on a ratio axis.
 * @param {number} y
 * @param {Axis} axis
 */
export function marginAt(y, axis) {
  const share = Math.min(1, Math.max(0, (axis.bottom - y) / (axis.bottom - axis.top)));
  if (axis.kind !== 'log') return rounded(Math.abs(axis.low + share * (axis.high - axis.low)));
  const ratio = axis.low * (axis.high / axis.low) ** share;
  return Math.min(99, rounded(100 * (1 - Math.min(ratio, 1 / ratio))));
}

/**
 * The height of a margin's upper rule.
 * @param {number} margin
 * @param {Axis} axis
 */
export function heightOf(margin, axis) {
  const share = axis.kind === 'log'
    ? Math.log(1 / (1 - Math.min(99, margin) / 100) / axis.low) / Math.log(axis.high / axis.low)
    : (margin - axis.low) / (axis.high - axis.low);
  return axis.bottom - Math.min(1, Math.max(0, share)) * (axis.bottom - axis.top);
}

/**
 * @param {HTMLElement} frame
 * @param {import('../types.js').Acts} acts
 */
export function mountMarginGrip(frame, acts) {
  const label = el('span', { class: 'grip-label', 'aria-hidden': 'true' });
  const grip = el('div', { class: 'margin-grip', role: 'slider', tabindex: '0', 'aria-label': text.plan.choices.margin.label, title: words.title }, label);
  frame.append(grip);
  /** @type {Axis|null} */
  let axis = null;
  let [margin, moving, ratio] = [0, false, false];
  let right = 0;

  function place() {
    if (!axis) return;
    grip.style.left = `${right - HALF}px`;
    grip.style.top = `${heightOf(margin, axis) - HALF}px`;
    const said = margin === 0 ? words.none : words.value(String(margin), ratio);
    grip.setAttribute('aria-valuenow', String(margin));
    grip.setAttribute('aria-valuemin', '0');
    grip.setAttribute('aria-valuetext', said);
    setText(label, moving || margin > 0 ? said : '');
  }

  function take() {
    const value = margin;
    const unit = ratio ? 'percent' : 'response';
    acts.choose(`${text.plan.choices.margin.label}: ${words.value(String(value), ratio)}`, (choices) => ({
      ...choices,
      plan: withSection(choices.plan, 'comparisons', {
        margin: value, margin_unit: unit, not_worse: value === 0 ? null : choices.plan.comparisons.not_worse,
      }),
    }));
  }

  grip.addEventListener('pointerdown', (event) => {
    moving = true;
    grip.setPointerCapture(event.pointerId);
    event.preventDefault();
    grip.focus();
  });
  grip.addEventListener('pointermove', (event) => {
    if (!moving || !axis) return;
    margin = marginAt(event.clientY - frame.getBoundingClientRect().top, axis);
    place();
  });
  const let_go = () => {
    if (!moving) return;
    moving = false;
    place();
    take();
  };
  grip.addEventListener('pointerup', let_go);
  grip.addEventListener('pointercancel', let_go);
  grip.addEventListener('keydown', (event) => {
    if (!axis || event.ctrlKey || event.metaKey || event.altKey) return;
    const up = event.key === 'ArrowUp' || event.key === 'ArrowRight';
    if (!up && event.key !== 'ArrowDown' && event.key !== 'ArrowLeft' && event.key !== 'Home') return;
    event.preventDefault();
    event.stopPropagation();
    const step = rounded(ratio ? 5 : Math.max(Math.abs(axis.low), Math.abs(axis.high)) / 20);
    const next = event.key === 'Home' ? 0 : margin + (up ? step : -step);
    margin = Math.max(0, Number((ratio ? Math.min(99, next) : next).toPrecision(6)));
    place();
    take();
  });

  return {
    /** @param {State} state @param {import('../types.js').Layout|null} layout */
    update(state, layout) {
      const strip = layout?.strips.find(({ kind, plot, y }) => kind === 'gap' && plot && y);
      axis = strip?.plot && strip.y ? { ...strip.plot, ...strip.y } : null;
      show(grip, axis !== null);
      if (moving || !layout) return;
      const { comparisons, response } = state.choices.plan;
      ratio = response.transform === 'log' || response.distribution !== 'normal';
      margin = (comparisons.margin_unit === 'percent') === ratio ? comparisons.margin : 0;
      right = layout.x.right;
      place();
    },
  };
}
