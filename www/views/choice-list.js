/**
 * The list that an underlined word opens: its alternatives, each with a line
 * on when it fits, and below them the fields that some choices have.
 */

import { alternativesOf } from '../alternatives.js';
import { contextOf } from '../context.js';
import { el, reconcile, setText, show } from '../dom.js';
import { text } from '../text.js';
import { mountField } from './choice-fields.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../alternatives.js').ChoiceId} ChoiceId */
/** @typedef {import('../alternatives.js').Alternative} Alternative */

export class ChoiceList {
  /** @param {import('../types.js').Acts} acts */
  constructor(acts) {
    this.acts = acts;
    /** @type {ChoiceId|null} */
    this.choice = null;
    /** @type {HTMLElement|null} */
    this.word = null;
    /** @type {State|null} */
    this.state = null;
    /** @type {{update: (state: State) => void}|null} */
    this.field = null;
    this.title = el('h3', { id: 'choice-title' });
    this.list = el('ul', {});
    this.fields = el('div', { class: 'choice-fields' });
    const close = el('button', { type: 'button', class: 'quiet choice-close', onclick: () => this.close() }, text.plan.close);
    this.node = el('div', { class: 'choice-list', popover: 'auto', role: 'dialog', 'aria-labelledby': 'choice-title' },
      this.title, this.list, this.fields, close);
    this.node.addEventListener('toggle', (event) => this.#toggled(/** @type {any} */ (event).newState === 'open'));
    this.node.addEventListener('keydown', (event) => this.#keys(event));
  }

  /** @param {ChoiceId} choice @param {HTMLElement} word */
  toggle(choice, word) {
    if (this.choice === choice && this.node.matches(':popover-open')) return this.close();
    this.choice = choice;
    this.word = word;
    setText(this.title, text.plan.choices[choice].label);
    this.fields.replaceChildren();
    this.list.replaceChildren();
    this.field = this.state ? mountField(choice, this.fields, this.acts) : null;
    this.#draw();
    this.node.showPopover();
    this.#place(word);
    const first = this.node.querySelector('button[aria-pressed="true"]') ?? this.node.querySelector('input, button');
    /** @type {HTMLElement|null} */ (first)?.focus();
  }

  close() {
    if (this.node.matches(':popover-open')) this.node.hidePopover();
  }

  /** @param {State} state */
  update(state) {
    this.state = state;
    if (this.node.matches(':popover-open')) this.#draw();
  }

  /** @param {boolean} open */
  #toggled(open) {
    this.word?.setAttribute('aria-expanded', String(open));
    const lost = document.activeElement === document.body || this.node.contains(document.activeElement);
    if (!open && lost) this.word?.focus();
  }

  #draw() {
    const { state, choice } = this;
    if (!state || !choice) return;
    const rows = alternativesOf(choice, state.choices.plan, contextOf(state));
    reconcile(this.list, rows, (row) => row.id, (row) => this.#mountRow(row.id), (node, row) => drawRow(node, row));
    show(this.list, rows.length > 0);
    this.field?.update(state);
  }

  /** @param {string} id */
  #mountRow(id) {
    const button = el('button', { type: 'button', 'data-alternative': id, onclick: () => this.#take(id) },
      el('span', { class: 'alternative-name' }), el('span', { class: 'alternative-fits' }));
    return el('li', {}, button);
  }

  /** @param {string} id */
  #take(id) {
    const { state, choice } = this;
    if (!state || !choice) return;
    const row = alternativesOf(choice, state.choices.plan, contextOf(state)).find((one) => one.id === id);
    if (!row || row.greyed) return;
    this.close();
    if (row.chosen) return;
    const lost = row.plan.comparisons.margin !== state.choices.plan.comparisons.margin;
    const label = `${text.plan.choices[choice].label}: ${row.name}${lost ? `. ${text.plan.marginLost}` : ''}`;
    this.acts.choose(label, (choices) => ({ ...choices, plan: row.plan }));
  }

  /** @param {KeyboardEvent} event */
  #keys(event) {
    const step = event.key === 'ArrowDown' ? 1 : event.key === 'ArrowUp' ? -1 : 0;
    if (step === 0 || event.target instanceof HTMLInputElement) return;
    const buttons = Array.from(this.list.querySelectorAll('button'));
    const at = buttons.indexOf(/** @type {any} */ (document.activeElement));
    if (at < 0) return;
    event.preventDefault();
    buttons[(at + step + buttons.length) % buttons.length]?.focus();
  }

  /** @param {HTMLElement} word */
  #place(word) {
    const below = word.getBoundingClientRect();
    const own = this.node.getBoundingClientRect();
    const room = document.documentElement.clientWidth;
    const left = Math.max(8, Math.min(below.left, room - own.width - 8));
    const top = Math.max(8, Math.min(below.bottom + 6, window.innerHeight - own.height - 8));
    this.node.style.left = `${left}px`;
    this.node.style.top = `${top}px`;
  }
}

/** @param {HTMLElement} node @param {Alternative} row */
function drawRow(node, row) {
  const button = /** @type {HTMLButtonElement} */ (node.firstElementChild);
  setText(/** @type {Element} */ (button.children[0]), row.name);
  setText(/** @type {Element} */ (button.children[1]), row.greyed ?? row.fits);
  button.setAttribute('aria-pressed', String(row.chosen));
  button.setAttribute('aria-disabled', String(row.greyed !== undefined));
}
