/**
 * The plan: three lines of words, the underlined ones are choices.
 */

import { contextOf } from '../context.js';
import { el, reconcile, setText, show, whenChanged } from '../dom.js';
import { controlLike, pairCount, withSection } from '../plan.js';
import { lineText, planLines } from '../plan-lines.js';
import { text } from '../text.js';
import { ChoiceList } from './choice-list.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../plan-lines.js').Part} Part */

const words = text.plan;

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountPlan(root, acts) {
  const list = new ChoiceList(acts);
  const lines = el('div', { class: 'plan-lines' });
  const aloud = el('p', { class: 'unseen' });
  const finer = el('button', { type: 'button', class: 'quiet', 'aria-expanded': 'false', 'data-act': 'finer' });
  const undo = el('button', { type: 'button', class: 'quiet', 'data-act': 'undo', onclick: acts.undo }, words.undo);
  const redo = el('button', { type: 'button', class: 'quiet', 'data-act': 'redo', onclick: acts.redo }, words.redo);
  const proposal = mountProposal(acts);
  const body = el('div', { class: 'plan-body' }, aloud, lines,
    el('div', { class: 'plan-tools' }, finer, undo, redo), proposal.node);
  const fold = el('button', { type: 'button', class: 'plan-fold', 'aria-expanded': 'false' });
  root.append(el('h2', { class: 'unseen' }, words.title), fold, body, list.node);

  let open = false;
  /** @type {State|null} */
  let last = null;
  finer.addEventListener('click', () => {
    open = !open;
    if (last) draw(last);
  });
  fold.addEventListener('click', () => {
    const shown = root.classList.toggle('unfolded');
    fold.setAttribute('aria-expanded', String(shown));
  });

  /** @param {State} state */
  function draw(state) {
    last = state;
    const rows = planLines(state.choices, contextOf(state), open);
    setText(aloud, rows.map(lineText).join(' '));
    setText(fold, `${words.fold}: ${rows[0]?.parts.map((part) => part.text).join('') ?? ''}`);
    reconcile(lines, rows, (row) => row.id, (row) => el('p', { class: 'plan-line' },
      el('span', { class: 'plan-label' }, row.label), el('span', { class: 'plan-words' })),
    (node, row) => reconcile(node.children[1], row.parts, partKey, (part) => mountPart(part, list),
      (child, part) => setText(child, part.text)));
    const folded = rows.reduce((sum, row) => sum + row.folded, 0);
    show(finer, folded > 0);
    setText(finer, open ? words.coarser : words.finer);
    finer.setAttribute('aria-expanded', String(open));
    undo.disabled = state.history.past.length === 0;
    redo.disabled = state.history.future.length === 0;
    proposal.update(state);
    list.update(state);
  }
  return {
    update: whenChanged(
      (state) => [state.choices, state.preview, state.description, state.findings, state.history], draw),
  };
}

/** @param {Part} part @param {number} index */
function partKey(part, index) {
  return part.choice ?? `words-${index}`;
}

/** @param {Part} part @param {ChoiceList} list */
function mountPart(part, list) {
  const { choice } = part;
  if (!choice) return el('span');
  const label = words.choices[choice].label;
  const button = el('button', {
    type: 'button', class: 'choice', 'data-choice': choice, 'aria-haspopup': 'dialog', 'aria-expanded': 'false', title: label,
    onclick: () => list.toggle(choice, button),
  });
  return button;
}

/** @param {import('../types.js').Acts} acts */
function mountProposal(acts) {
  const sentence = el('span');
  const act = el('button', { type: 'button', class: 'quiet' });
  const node = el('p', { class: 'proposal', hidden: true }, sentence, ' ', act);
  /** @type {string|null} */
  let control = null;
  act.addEventListener('click', () => {
    const name = control;
    if (name === null) return;
    acts.choose(words.choices.pairs.with(name), (choices) => ({
      ...choices, plan: withSection(choices.plan, 'comparisons', { pairs: 'against-control', control: name }),
    }));
  });
  return {
    node,
    /** @param {State} state */
    update(state) {
      const { groups } = contextOf(state);
      const { plan } = state.choices;
      control = plan.comparisons.pairs === 'all' && groups.length > 2 ? controlLike(groups) : null;
      show(node, control !== null);
      if (control === null) return;
      setText(sentence, words.propose(control, pairCount(plan, groups.length), groups.length - 1));
      setText(act, words.proposeAct(control));
    },
  };
}
