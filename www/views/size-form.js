/**
 * The fields of the sample-size form, with the expected courses drawn beside
 * them and the measuring days on an axis of their own.
 */

import { el, setText, show } from '../dom.js';
import { significant } from '../numbers.js';
import { numbersIn, requestOf } from '../size-form.js';
import { text } from '../text.js';
import { dayAxis } from './day-axis.js';
import { smallPlot } from './small-plot.js';

/** @typedef {import('../size-form.js').SizeForm} SizeForm */

const words = text.size;

/**
 * @param {SizeForm} first
 * @param {(form: SizeForm) => void} changed
 */
export function mountSizeForm(first, changed) {
  let form = first;
  /** @type {Map<string, {input: HTMLInputElement|HTMLSelectElement, complaint: HTMLElement}>} */
  const fields = new Map();
  const plot = el('div', { class: 'size-plot' });
  const asSd = el('p', { class: 'hint' });
  const axis = dayAxis((days) => set({ days: days.join(', ') }));

  /** @param {Partial<SizeForm>} values */
  function set(values) {
    form = { ...form, ...values };
    changed(form);
    refresh();
  }

  /** @param {string} key @param {string} label @param {(typed: string) => Partial<SizeForm>} make @param {Record<string, any>} [attributes] */
  function field(key, label, make, attributes = {}) {
    const input = el('input', { type: 'text', autocomplete: 'off', 'data-field': key, ...attributes });
    const complaint = el('span', { class: 'complaint', role: 'alert' });
    input.addEventListener('input', () => set(make(input.value)));
    fields.set(key, { input, complaint });
    return el('label', { class: 'field' }, el('span', {}, label), input, complaint);
  }

  /** @param {keyof SizeForm} key @param {string} label @param {Record<string, any>} [attributes] */
  const plain = (key, label, attributes) => field(key, label, (typed) => ({ [key]: typed }), { inputmode: 'decimal', ...attributes });

  /** @param {keyof SizeForm} key @param {string} label @param {[string, string][]} options */
  function choice(key, label, options) {
    const input = el('select', { 'data-field': key }, ...options.map(([value, name]) => el('option', { value }, name)));
    const complaint = el('span', { class: 'complaint' });
    input.addEventListener('change', () => set(/** @type {any} */ ({ [key]: input.value })));
    fields.set(key, { input, complaint });
    return el('label', { class: 'field' }, el('span', {}, label), input);
  }

  const means = el('tbody');
  const meansHead = el('tr', {}, el('th', { scope: 'col' }, words.courses.day),
    el('th', { scope: 'col' }, plain('controlName', words.courses.control, { inputmode: 'text', maxlength: '24' })),
    el('th', { scope: 'col' }, plain('treatedName', words.courses.treated, { inputmode: 'text', maxlength: '24' })), el('td'));
  const add = el('button', { type: 'button', class: 'quiet', onclick: () => {
    set({ means: [...form.means, { day: '', control: '', treated: '' }] });
    drawMeans();
  } }, words.courses.add);

  /** @param {number} k @param {'day'|'control'|'treated'} key */
  function cell(k, key) {
    const name = key === 'day' ? words.courses.day : words.courses.mean(key === 'control' ? form.controlName : form.treatedName, form.means[k]?.day ?? '');
    const input = el('input', { type: 'text', inputmode: 'decimal', autocomplete: 'off', 'aria-label': name, 'data-field': `${key}-${k}`, value: form.means[k]?.[key] ?? '' });
    const complaint = el('span', { class: 'complaint' });
    input.addEventListener('input', () => set({ means: form.means.map((row, at) => (at === k ? { ...row, [key]: input.value } : row)) }));
    fields.set(`${key}-${k}`, { input, complaint });
    return el('td', {}, input, complaint);
  }

  function drawMeans() {
    means.replaceChildren(...form.means.map((row, k) => el('tr', {}, cell(k, 'day'), cell(k, 'control'), cell(k, 'treated'),
      el('td', {}, el('button', { type: 'button', class: 'quiet', 'aria-label': words.courses.remove(row.day), disabled: form.means.length < 2, onclick: () => {
        set({ means: form.means.filter((_, at) => at !== k) });
        drawMeans();
      } }, '\u00d7')))));
  }

  const sem = plain('n', words.spread.n);
  const day = plain('day', words.goal.day);
  const onset = el('div', { class: 'field-row' }, plain('margin', words.goal.margin), plain('width', words.goal.width));
  const clusterAlike = plain('clusterAlike', words.spread.clusterAlike);
  const slider = el('input', { type: 'range', min: '10', max: '100', step: '5', 'aria-label': words.goal.effect });
  slider.addEventListener('input', () => set({ effect: slider.value }));
  const node = el('form', { class: 'size-form' },
    el('fieldset', {}, el('legend', {}, words.courses.title), el('p', { class: 'hint' }, words.courses.hint),
      el('table', { class: 'means' }, el('thead', {}, meansHead), means), add, plot,
      choice('transform', words.courses.scale, [['identity', words.courses.identity], ['log', words.courses.log]])),
    el('fieldset', {}, el('legend', {}, words.spread.title),
      el('div', { class: 'field-row' }, choice('known', words.spread.known, [['sd', words.spread.sd], ['sem', words.spread.sem]]), sem),
      el('div', { class: 'field-row' }, plain('spread', words.spread.value), plain('spreadLow', words.spread.low), plain('spreadHigh', words.spread.high)),
      asSd, plain('alike', words.spread.alike), plain('trend', words.spread.trend),
      el('div', { class: 'field-row' }, plain('clusterSize', words.spread.clusterSize), clusterAlike), el('p', { class: 'hint' }, words.spread.more)),
    el('fieldset', {}, el('legend', {}, words.goal.title),
      choice('find', words.goal.title, [
        ['stretch', words.goal.stretch], ['landmark', words.goal.landmark], ['average', words.goal.average], ['slope', words.goal.slope], ['onset', words.goal.onset],
      ]), day, onset,
      plain('power', words.goal.power), el('div', { class: 'field-row' }, plain('effect', words.goal.effect), slider), el('p', { class: 'hint' }, words.goal.effectHint)),
    el('fieldset', {}, el('legend', {}, words.designs.title),
      plain('designs', words.designs.subjects, { inputmode: 'text' }), el('p', { class: 'hint' }, words.designs.subjectsHint),
      plain('days', words.designs.days, { inputmode: 'text' }), axis.node,
      el('div', { class: 'field-row' }, plain('losses', words.designs.losses), plain('studies', words.designs.studies)),
      el('div', { class: 'field-row' }, plain('one', words.designs.one, { inputmode: 'text', maxlength: '24' }), plain('many', words.designs.many, { inputmode: 'text', maxlength: '24' }))),
  );
  node.addEventListener('submit', (event) => event.preventDefault());

  function refresh() {
    for (const [key, { input }] of fields) {
      const value = /** @type {any} */ (form)[key];
      if (value !== undefined && document.activeElement !== input) input.value = String(value);
    }
    show(sem, form.known === 'sem');
    show(day, form.find === 'landmark');
    show(onset, form.find === 'onset');
    show(clusterAlike, Number(form.clusterSize) > 1);
    slider.value = form.effect;
    const { request } = requestOf(form);
    const sd = request ? request['spread'].on_a_day : null;
    setText(asSd, form.transform === 'log' ? words.spread.logHint : form.known === 'sem' && sd !== null ? words.spread.asSd(significant(sd)) : '');
    const days = numbersIn(form.days).filter((one) => one !== null);
    axis.update(/** @type {number[]} */ (days), form.means.map((row) => Number(row.day)).filter((t) => Number.isFinite(t)));
    if (!request) return;
    const series = ['control', 'treated'].map((key, k) => ({
      x: request[key].means.map((/** @type {number[]} */ m) => m[0]), y: request[key].means.map((/** @type {number[]} */ m) => m[1]),
      joined: true, name: request[key].name, group: `of-group-${k + 1}`,
    }));
    plot.replaceChildren(smallPlot({ label: words.courses.plot, across: words.courses.day, up: '', series, height: 150 }));
  }

  drawMeans();
  refresh();
  return {
    node,
    /** @param {SizeForm} next */
    fill(next) {
      form = next;
      drawMeans();
      refresh();
    },
    /** @param {Record<string, string>} problems */
    complain(problems) {
      for (const [key, { input, complaint }] of fields) {
        setText(complaint, problems[key] ?? '');
        if (problems[key]) input.setAttribute('aria-invalid', 'true');
        else input.removeAttribute('aria-invalid');
      }
      const [firstKey] = Object.keys(problems);
      if (firstKey) fields.get(firstKey)?.input.focus();
    },
  };
}
