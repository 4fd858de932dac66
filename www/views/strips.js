/**
 * The strips: drawn once per fit and size, with the cursor on a canvas of its
 * own above them. The cursor is a slider; it moves by mouse, touch and keys.
 */

import { span } from '../changes.js';
import { el, setText, show, whenChanged } from '../dom.js';
import { drawStrips } from '../drawing.js';
import { plainTime } from '../numbers.js';
import { readingAt, step, stops } from '../reading.js';
import { spoken } from '../spoken.js';
import { text } from '../text.js';
import { drawCursor } from './cursor.js';
import { mountMarginGrip } from './margin-grip.js';
import { followPointer } from './pointer.js';

/** Strips narrower than this carry letters, which the reading spells out. */
const NARROW = 552;
/** Free room above the strips, for the cursor's flag. */
const HEAD_ROOM = 24;

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../types.js').Layout} Layout */

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountStrips(root, acts) {
  const canvas = el('canvas', { class: 'strips-drawing', 'aria-hidden': 'true' });
  const overlay = el('canvas', { class: 'strips-overlay', 'aria-hidden': 'true' });
  const slider = el('div', {
    class: 'strips-slider', role: 'slider', tabindex: '0', 'aria-label': text.strips.slider, 'aria-describedby': 'strips-keys', title: text.strips.hold,
  });
  const frame = el('div', { class: 'strips-frame' }, canvas, overlay, slider);
  const grip = mountMarginGrip(frame, acts);
  const caption = el('p', { class: 'unseen' });
  const grey = el('p', { class: 'strips-grey' }, text.strips.grey);
  const over = el('p', { class: 'strips-over', role: 'status' });
  const takeAway = el('button', { type: 'button', class: 'quiet', 'data-act': 'over-away', onclick: () => acts.layOver(null) }, text.strips.overAway);
  root.append(el('h2', { class: 'unseen' }, text.strips.label), caption, grey, over, frame,
    el('p', { class: 'unseen', id: 'strips-keys' }, text.strips.keys));

  /** @type {State|null} */
  let last = null;
  /** @type {Layout|null} */
  let layout = null;

  let printing = false;
  window.addEventListener('beforeprint', () => { printing = true; redraw(); });
  window.addEventListener('afterprint', () => { printing = false; redraw(); });

  function redraw() {
    const width = Math.floor(root.clientWidth);
    if (!last?.drawing || width < 100) return;
    layout = drawStrips(canvas, last.drawing, {
      width, ratio: window.devicePixelRatio || 1, head_room: HEAD_ROOM, 
      theme: printing ? 'print' : matchMedia('(prefers-color-scheme: dark)').matches ? 'dark' : 'light',
      letters: width < NARROW, open_pairs: last.openPairs, noun: last.choices.noun.many, over: last.over?.lines ?? [],
    });
    document.body.classList.toggle('with-letters', width < NARROW);
    frame.style.height = `${layout.height}px`;
    grip.update(last, layout);
    moveCursor(last);
  }

  /** @param {State} state */
  function moveCursor(state) {
    const { findings, cursor } = state;
    if (!layout || !findings || cursor === null) return;
    const time = plainTime(cursor, span(findings));
    const flag = text.strips.at(time, findings.scale.time_word);
    drawCursor(overlay, layout, cursor, pointer.isHeld() ? text.strips.held(flag) : flag);
    slider.setAttribute('aria-valuemin', String(layout.x.start));
    slider.setAttribute('aria-valuemax', String(layout.x.end));
    slider.setAttribute('aria-valuenow', String(cursor));
    slider.setAttribute('aria-valuetext', spoken(readingAt(findings, cursor), findings));
  }

  const pointer = followPointer(slider, () => layout, acts, () => last && moveCursor(last));
  slider.addEventListener('keydown', (event) => {
    const to = last ? keyTarget(event, last) : null;
    if (to === null) return;
    event.preventDefault();
    acts.moveCursor(to);
  });
  new ResizeObserver(redraw).observe(root);
  matchMedia('(prefers-color-scheme: dark)').addEventListener('change', redraw);
  watchRatio(redraw);

  const drawn = whenChanged((state) => [state.drawing, state.openPairs, state.choices.noun, state.over], redraw);
  const moved = whenChanged((state) => [state.cursor, state.findings], moveCursor);
  return {
    update(state) {
      last = state;
      const stale = state.status === 'failed';
      show(frame, state.drawing !== null && state.status !== 'question' && state.status !== 'problem');
      show(caption, !frame.hidden);
      show(grey, stale && state.drawing !== null);
      frame.classList.toggle('stale', stale);
      const log = state.findings?.scale.ratio ? ` ${text.strips.log(state.choices.noun.one)}` : '';
      setText(caption, text.strips.caption + log);
      over.replaceChildren(...(state.over ? [`${text.strips.over(state.over.name)} `, takeAway] : []));
      show(over, state.over !== null && !frame.hidden);
      drawn(state);
      moved(state);
    },
  };
}

/**
 * Where a key leads; `null` for keys that are not ours.
 * @param {KeyboardEvent} event
 * @param {State} state
 * @returns {number|null}
 */
function keyTarget(event, { findings, cursor }) {
  if (!findings || cursor === null || event.ctrlKey || event.metaKey || event.altKey) return null;
  const all = stops(findings);
  switch (event.key) {
    case 'ArrowLeft':
    case 'ArrowDown':
      return event.shiftKey ? step(findings.visits, cursor, -1) : step(all, cursor, -1);
    case 'ArrowRight':
    case 'ArrowUp':
      return event.shiftKey ? step(findings.visits, cursor, 1) : step(all, cursor, 1);
    case 'PageDown':
      return step(findings.visits, cursor, -1);
    case 'PageUp':
      return step(findings.visits, cursor, 1);
    case 'Home':
      return all[0] ?? null;
    case 'End':
      return all[all.length - 1] ?? null;
    default:
      return null;
  }
}

/**
 * A window moved to a screen of another density.
 * @param {() => void} then
 */
function watchRatio(then) {
  const listen = () => matchMedia(`(resolution: ${window.devicePixelRatio}dppx)`)
    .addEventListener('change', () => { then(); listen(); }, { once: true });
  listen();
}
