/**
 * The pointer on the strips. A mouse moves the cursor by hovering; a click
 * holds it, so that one can go and read, and a second click lets go. A finger
 * moves it sideways, while up and down scrolls the page. A click on a pair's
 * row opens its strip.
 */

/** @typedef {import('../types.js').Layout} Layout */

/**
 * @param {HTMLElement} slider
 * @param {() => Layout|null} layoutNow
 * @param {import('../types.js').Acts} acts
 * @param {() => void} changed The cursor is held, or let go.
 */
export function followPointer(slider, layoutNow, acts, changed) {
  let held = false;

  /** @param {PointerEvent} event */
  const point = (event) => {
    const layout = layoutNow();
    if (!layout || (held && event.buttons === 0)) return;
    const { left, right, start, end } = layout.x;
    const at = event.clientX - slider.getBoundingClientRect().left;
    if (right > left) acts.moveCursor(start + ((at - left) / (right - left)) * (end - start));
  };
  slider.addEventListener('pointermove', point);
  slider.addEventListener('pointerdown', point);

  slider.addEventListener('click', (event) => {
    const y = event.clientY - slider.getBoundingClientRect().top;
    const row = layoutNow()?.strips.find(({ kind, top, bottom }) => kind === 'row' && top <= y && y < bottom);
    if (row && row.pair !== null) {
      acts.togglePair(row.pair);
    } else if (/** @type {PointerEvent} */ (event).pointerType === 'mouse') {
      held = !held;
      changed();
    }
  });
  return { isHeld: () => held };
}
