/**
 * What else must be known beside the findings, and what the page's own words
 * mean.
 */

import { el, reconcile, show, whenChanged } from '../dom.js';
import { withDistribution, withTransform } from '../plan.js';
import { text } from '../text.js';

/** @param {HTMLElement} root @param {import('../types.js').Acts} acts @returns {import('../types.js').View} */
export function mountNotes(root, acts) {
  const proposal = el('p', { class: 'proposal', 'data-region': 'proposal-of-values' });
  const list = el('ul', { class: 'notes', 'data-region': 'notes' });
  const box = el('section', { class: 'notes-box' }, el('h3', {}, text.findings.notes), proposal, list);
  root.append(box, mountWords());
  return {
    update: whenChanged((state) => [state.findings, state.status], ({ findings, status }) => {
      const shown = findings !== null && status !== 'failed' && status !== 'question';
      const messages = shown ? [...findings.fit.remarks, ...findings.notes.map((row) => row.message)] : [];
      const once = Array.from(new Set(messages));
      reconcile(list, once, (message) => message, (message) => el('li', {}, message));
      const suggested = shown ? findings.proposal ?? null : null;
      proposal.replaceChildren(...(suggested ? proposed(suggested, acts) : []));
      show(proposal, suggested !== null);
      show(box, once.length > 0 || suggested !== null);
    }),
  };
}

/**
 * What the values suggest, with the control that takes it.
 * @param {{distribution: string, transform: 'identity'|'log', reason: string}} suggested
 * @param {import('../types.js').Acts} acts
 */
function proposed({ distribution, transform, reason }, acts) {
  const { choices } = text.plan;
  const log = transform === 'log';
  const name = log ? `${choices.scale.log[0]} ${text.findings.scale}` : String(/** @type {Record<string, any>} */ (choices.distribution)[distribution][0]);
  const take = () => acts.choose(`${choices.distribution.label}: ${name}`, (now) => ({
    ...now, plan: log ? withTransform(now.plan, 'log') : withDistribution(now.plan, distribution),
  }));
  return [`${reason} ${text.findings.mayFit(name)} `, el('button', { type: 'button', class: 'quiet', 'data-act': 'take-proposal', onclick: take }, text.findings.take)];
}

/** The page's own words, each opening its trade term and formula. */
function mountWords() {
  const entries = text.words.map(({ word, term, meaning }) =>
    el('details', { class: 'word', name: 'word' }, el('summary', {}, word), el('p', {}, term), el('p', { class: 'formula' }, meaning)));
  return el('section', { class: 'words' }, el('h3', {}, text.findings.words), el('div', { class: 'word-list' }, ...entries));
}
