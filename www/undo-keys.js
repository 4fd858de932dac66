/** The keys that take a choice back and do it again, as everywhere; not while text is typed, which has its own. */

/** @param {import('./types.js').Acts} acts */
export function listenForUndo(acts) {
  document.addEventListener('keydown', (event) => {
    if (!(event.ctrlKey || event.metaKey) || event.altKey || event.defaultPrevented) return;
    const key = event.key.toLowerCase();
    if (key !== 'z' && key !== 'y') return;
    const { activeElement } = document;
    const typed = activeElement instanceof HTMLTextAreaElement
      || (activeElement instanceof HTMLInputElement && !['checkbox', 'radio', 'range', 'button', 'file'].includes(activeElement.type));
    if (typed || document.querySelector('dialog[open]')) return;
    event.preventDefault();
    if (key === 'y' || event.shiftKey) acts.redo();
    else acts.undo();
  });
}
