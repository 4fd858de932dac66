/**
 * Measuring days as knobs on an axis: dragged, or moved with the arrow keys.
 */

import { el } from '../dom.js';
import { text } from '../text.js';

const words = text.size.designs;

/** @param {(days: number[]) => void} moved */
export function dayAxis(moved) {
  const rail = el('div', { class: 'day-rail' });
  const node = el('div', { class: 'day-axis', role: 'group', 'aria-label': words.axis }, el('p', { class: 'hint' }, words.axis), rail);
  /** @type {number[]} */
  let days = [];
  let range = [0, 1];
  const span = () => /** @type {number} */ (range[1]) - /** @type {number} */ (range[0]) || 1;
  /** One step, and what a dragged day is rounded to. */
  const step = () => (span() > 4 ? 1 : span() / 20);

  /** @param {number} k @param {number} to */
  function put(k, to) {
    const rounded = Math.round(to / step()) * step();
    const low = k > 0 ? /** @type {number} */ (days[k - 1]) + step() : /** @type {number} */ (range[0]);
    const high = k < days.length - 1 ? /** @type {number} */ (days[k + 1]) - step() : /** @type {number} */ (range[1]);
    const day = Number(Math.min(high, Math.max(low, rounded)).toFixed(3));
    if (day !== days[k]) moved(days.map((one, at) => (at === k ? day : one)));
  }

  /** @param {number} k */
  function knob(k) {
    const button = el('button', { type: 'button', class: 'day-knob', role: 'slider', onkeydown: (/** @type {KeyboardEvent} */ event) => {
      const by = { ArrowLeft: -1, ArrowDown: -1, ArrowRight: 1, ArrowUp: 1 }[event.key];
      if (by === undefined) return;
      event.preventDefault();
      put(k, /** @type {number} */ (days[k]) + by * step());
    } });
    button.addEventListener('pointerdown', (event) => button.setPointerCapture(event.pointerId));
    button.addEventListener('pointermove', (event) => {
      if (!button.hasPointerCapture(event.pointerId)) return;
      const box = rail.getBoundingClientRect();
      put(k, /** @type {number} */ (range[0]) + ((event.clientX - box.left) / box.width) * span());
    });
    return button;
  }

  return {
    node,
    /** @param {number[]} next @param {number[]} known */
    update(next, known) {
      days = next;
      const all = [...days, ...known];
      if (all.length === 0) return;
      range = [Math.min(...all), Math.max(...all)];
      while (rail.children.length > days.length) rail.lastElementChild?.remove();
      while (rail.children.length < days.length) rail.append(knob(rail.children.length));
      days.forEach((day, k) => {
        const button = /** @type {HTMLElement} */ (rail.children[k]);
        button.style.left = `${(((day - /** @type {number} */ (range[0])) / span()) * 100).toFixed(2)}%`;
        button.textContent = String(day);
        button.setAttribute('aria-label', words.dayKnob(String(day)));
        button.setAttribute('aria-valuenow', String(day));
        button.setAttribute('aria-valuemin', String(range[0]));
        button.setAttribute('aria-valuemax', String(range[1]));
      });
    },
  };
}
