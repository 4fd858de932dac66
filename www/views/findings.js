/**
 * The findings: at most five sentences, then how many more, and what they
 * depend on.
 */

import { el, reconcile, setText, show, whenChanged } from '../dom.js';
import { text } from '../text.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../types.js').Sentence} Sentence */
/** @typedef {import('../types.js').Findings} Findings */

const words = text.findings;
const SHOWN = 5;

/** @param {HTMLElement} root @returns {import('../types.js').View} */
export function mountFindings(root) {
  const provisional = el('span', { class: 'provisional', hidden: true }, text.provisional);
  const title = el('h2', {}, words.title, ' ', provisional);
  const list = el('div', { class: 'sentences', 'data-region': 'findings', 'aria-label': words.title, role: 'region' });
  const first = el('div', {});
  const rest = el('div', {});
  const moreLabel = el('summary');
  const more = el('details', { class: 'more', hidden: true }, moreLabel, rest);
  const empty = el('p', { class: 'hint' });
  const depends = el('p', { class: 'depends', 'data-region': 'depends' });
  list.append(first, more, empty);
  root.append(title, list, depends);

  const drawn = whenChanged((state) => [state.findings, state.status], draw);
  return {
    update(state) {
      drawn(state);
      show(provisional, state.calibrating !== null);
    },
  };

  /** @param {State} state */
  function draw(state) {
    const { findings } = state;
    const shown = findings !== null && state.status !== 'failed' && state.status !== 'question';
    const sentences = shown ? findings.sentences : [];
    drawSentences(first, sentences.slice(0, SHOWN), findings);
    drawSentences(rest, sentences.slice(SHOWN), findings);
    show(more, sentences.length > SHOWN);
    const later = sentences.slice(SHOWN);
    setText(moreLabel, words.more(later.length, later.every((row) => row.kind === 'undecided' || row.kind === 'none-apart')));
    setText(empty, emptyWords(state, sentences.length));
    show(empty, sentences.length === 0);
    const on = sentences[0]?.depends ?? '';
    setText(depends, on ? `${words.depends} ${on}` : '');
  }
}

/** @param {State} state @param {number} count */
function emptyWords(state, count) {
  if (state.status === 'question') return words.question;
  if (state.status === 'failed') return words.failed;
  if (state.findings && state.findings.groups.length < 2 && count === 0) return words.onlyOne;
  return words.waiting;
}

/** @param {HTMLElement} root @param {Sentence[]} sentences @param {Findings|null} findings */
function drawSentences(root, sentences, findings) {
  reconcile(root, sentences, (row, index) => `${index}${row.headline}${row.text}`, (row) => {
    const to = row.pair === null ? undefined : findings?.differences[row.pair]?.to;
    const index = findings?.groups.findIndex((group) => group.name === to) ?? -1;
    const group = index < 0 ? '' : ` of-group-${(index % 6) + 1}`;
    return el('p', { class: `sentence${group}`, 'data-kind': row.kind }, el('strong', {}, row.headline), ' ', row.text);
  });
}
