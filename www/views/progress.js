/**
 * The one fixed line that says what the page is doing, and stops it.
 */

import { el, setText, show } from '../dom.js';
import { fixed } from '../numbers.js';
import { counted, text } from '../text.js';

/** @typedef {import('../types.js').State} State */

/** @param {State} state */
function sentence(state) {
  const { status, findings } = state;
  if (status === 'fitting' && state.slow) return text.states.slow;
  if (state.calibrating) return text.calibrating(state.calibrating.done, state.calibrating.total, state.calibrating.secondsLeft);
  if (status === 'ready' && findings) {
    const subjects = counted(findings.subjects, state.choices.noun.one, state.choices.noun.many);
    return text.states.ready(subjects, counted(findings.rows, 'visit', 'visits'), fixed(state.took ?? 0, 0));
  }
  return text.states[status === 'ready' ? 'fitting' : status];
}

/** @param {import('../types.js').Acts} acts */
export function mountProgress(acts) {
  const line = el('span', { 'data-region': 'progress' });
  const detail = el('span', { class: 'progress-detail', 'data-region': 'message' });
  const stop = el('button', { type: 'button', class: 'quiet', onclick: acts.stop }, text.stop);
  const retry = el('button', { type: 'button', class: 'quiet', onclick: acts.retry }, text.retry);
  const toData = el('a', { href: '#/data' }, text.seeTable);
  const node = el('section', { class: 'progress', 'aria-label': text.progress }, line, detail, toData, stop, retry);
  return {
    node,
    /** @param {State} state */
    update(state) {
      setText(line, sentence(state));
      const message = state.message ?? state.notice ?? '';
      setText(detail, state.status === 'failed' && !state.notice ? `${message} ${text.tryInstead}` : message);
      show(detail, message !== '');
      show(stop, (state.status === 'fitting' && state.slow) || state.calibrating !== null);
      show(toData, (state.status === 'problem' || state.status === 'empty') && state.room !== 'data');
      show(retry, state.status === 'failed');
    },
  };
}
