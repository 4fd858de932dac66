/**
 * The sensitivity part of the room Dropout: shifts from one end to the other,
 * pooled one by one, and where the conclusion is lost.
 */

import { el, setText, show } from '../dom.js';
import { parseNumber, significant } from '../numbers.js';
import { text } from '../text.js';
import { groupClass, smallPlot } from './small-plot.js';

const words = text.dropout.sensitivity;
const MOST_SHIFTS = 41;

/** @param {string} label @param {HTMLElement} input */
const field = (label, input) => el('label', { class: 'field' }, el('span', {}, label), input);

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountSensitivity(root, acts) {
  const number = (/** @type {string} */ name, /** @type {string} */ value) => el('input', { type: 'text', inputmode: 'decimal', value, 'data-field': name });
  const from = number('delta-from', '-1');
  const to = number('delta-to', '1');
  const step = number('delta-step', '0.25');
  const tables = number('tables', '50');
  const who = el('select', { 'data-field': 'who' });
  const after = el('select', { 'data-field': 'after' }, ...['own', 'jump', 'increments'].map((one) => el('option', { value: one }, words[/** @type {'own'} */ (one)])));
  const reference = el('select', { 'data-field': 'reference' });
  const referenceField = field(words.reference, reference);
  const run = el('button', { type: 'button', 'data-act': 'sensitivity', onclick: () => void start() }, words.run);
  const stop = el('button', { type: 'button', hidden: true, onclick: () => { turn += 1; } }, words.stop);
  const said = el('span', { class: 'hint', role: 'status', 'data-region': 'sensitivity-state' });
  const refused = el('p', { class: 'hint' });
  const results = el('div', { 'data-region': 'sensitivity' });
  const form = el('div', { class: 'sensitivity-form' },
    el('div', { class: 'field-row' }, field(words.delta, from), field(words.to, to), field(words.steps, step), field(words.tables, tables)),
    el('p', { class: 'hint' }, words.unit),
    el('div', { class: 'field-row' }, field(words.who, who), field(words.after, after), referenceField),
    el('p', {}, run, ' ', stop, ' ', said));
  root.append(el('h3', {}, words.title), el('p', { class: 'room-lead' }, words.lead), refused, form, results);
  after.addEventListener('change', () => show(referenceField, after.value !== 'own'));
  show(referenceField, false);
  let turn = 0;
  /** @type {string[]} */
  let names = [];
  /** The plan that the results belong to. */
  let plan = '';

  function shifts() {
    const [a, b, by] = [from, to, step].map((input) => parseNumber(input.value));
    if (a === null || b === null || by === null || a === undefined || b === undefined || by === undefined || by <= 0) return null;
    const [low, high] = [Math.min(a, b), Math.max(a, b)];
    const count = Math.floor((high - low) / by + 1e-9) + 1;
    if (count > MOST_SHIFTS) return null;
    const all = Array.from({ length: count }, (_, k) => Number((low + k * by).toFixed(9)));
    // The one without a shift first: it is what others are compared with.
    return [0, ...all.filter((one) => one !== 0).sort((x, y) => Math.abs(x) - Math.abs(y))];
  }

  async function start() {
    const deltas = shifts();
    if (!deltas) return setText(said, words.number);
    const mine = (turn += 1);
    /** @type {any[]} */
    const done = [];
    plan = acts.planText();
    show(stop, true);
    run.disabled = true;
    try {
      for (const delta of deltas) {
        if (mine !== turn) break;
        setText(said, words.progress(done.length, deltas.length));
        const asked = {
          delta, groups: who.value === '' ? [] : [who.value], after: after.value,
          reference: after.value === 'own' ? null : reference.value, tables: Math.round(parseNumber(tables.value) ?? 50),
        };
        done.push(await acts.sensitivity(asked));
        draw(done);
      }
      setText(said, mine === turn ? '' : words.stopped);
    } catch (cause) {
      setText(said, cause instanceof Error ? cause.message : String(cause));
    }
    show(stop, false);
    run.disabled = false;
  }

  /** @param {any[]} done */
  function draw(done) {
    const sorted = done.slice().sort((a, b) => a.asked.delta - b.asked.delta);
    const plainOne = done[0];
    results.replaceChildren(...plainOne.pairs.flatMap((/** @type {any} */ pair, /** @type {number} */ k) => pairPart(sorted, plainOne, pair, k, acts)));
  }

  return {
    update(state) {
      const reason = state.answers.dropout?.value?.no_sensitivity ?? null;
      setText(refused, reason ?? '');
      show(form, reason === null && state.answers.dropout?.value != null);
      const now = (state.findings?.groups ?? []).map((group) => group.name);
      if (now.join('\u0000') !== names.join('\u0000')) {
        names = now;
        who.replaceChildren(el('option', { value: '' }, words.everyone), ...names.map((name) => el('option', { value: name }, name)));
        reference.replaceChildren(...names.map((name) => el('option', { value: name }, name)));
      }
      if (plan !== '' && plan !== acts.planText()) {
        plan = '';
        turn += 1;
        results.replaceChildren();
      }
    },
  };
}

/**
 * @param {any[]} sorted
 * @param {any} plainOne
 * @param {any} pair
 * @param {number} k
 * @param {import('../types.js').Acts} acts
 */
function pairPart(sorted, plainOne, pair, k, acts) {
  const { findings } = acts.look();
  const name = `${findings?.scale.ratio ? 'log ' : ''}${text.reading.gap(pair, findings?.scale.ratio ?? false)}`;
  const group = groupClass(findings?.groups ?? [], pair.to);
  const last = pair.time.length - 1;
  const at = (/** @type {'estimate'|'lower'|'upper'} */ key) => sorted.map((one) => one.pairs[k][key][last]);
  const deltas = sorted.map((one) => one.asked.delta);
  const byShift = smallPlot({
    label: words.curve(name), across: words.across, up: '', width: 420, height: 180, levels: [0],
    bands: [{ x: deltas, low: at('lower'), high: at('upper'), group }], series: [{ x: deltas, y: at('estimate'), joined: true, group }, { x: deltas, y: at('estimate'), group }],
  });
  const overTime = smallPlot({
    label: words.gaps(name), across: findings?.scale.time_word ?? '', up: '', width: 420, height: 180, levels: [0],
    bands: [{ x: pair.time, low: plainOne.pairs[k].lower, high: plainOne.pairs[k].upper, group }],
    series: sorted.map((one) => ({ x: pair.time, y: one.pairs[k].estimate, joined: true, group, kind: one.asked.delta === 0 ? '' : 'faint' })),
  });
  const rows = sorted.map((one) => {
    const p = one.pairs[k];
    return el('tr', {}, el('th', { scope: 'row' }, significant(one.asked.delta)),
      ...[p.estimate[last], p.lower[last], p.upper[last]].map((value) => el('td', { class: 'number' }, significant(value))),
      el('td', { class: 'number' }, `${Math.round(100 * p.missing_share[last])}\u00a0%`), el('td', {}, p.still_apart.join(', ') || '\u2013'));
  });
  return [
    el('p', { class: 'tipping', 'data-pair': String(k) }, tipping(sorted, pair, k, name)),
    el('div', { class: 'dropout-plots' },
      el('figure', { class: 'plot-figure' }, el('figcaption', { class: 'hint' }, words.curve(name)), byShift),
      el('figure', { class: 'plot-figure' }, el('figcaption', { class: 'hint' }, words.gaps(name)), overTime)),
    el('details', { class: 'as-tables' }, el('summary', {}, words.numbers), el('table', { class: 'plain-table' },
      el('thead', {}, el('tr', {}, ...words.head.map((head) => el('th', { scope: 'col' }, head)))), el('tbody', {}, ...rows))),
  ];
}

/** @param {any[]} sorted @param {any} pair @param {number} k @param {string} name */
function tipping(sorted, pair, k, name) {
  if (pair.main_apart.length === 0) return words.none(name);
  const lost = sorted.filter((one) => one.pairs[k].still_apart.length === 0).map((one) => one.asked.delta);
  if (lost.length === 0) return words.kept(name, significant(sorted[0].asked.delta), significant(sorted[sorted.length - 1].asked.delta));
  const nearest = lost.reduce((best, one) => (Math.abs(one) < Math.abs(best) ? one : best));
  return words.lost(name, significant(nearest));
}
