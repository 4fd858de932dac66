/** The report's figure: few choices, what is seen, and the files of it. */

import { el, setText, show, whenChanged } from '../dom.js';
import { stripsPdf, stripsSvg } from '../drawing.js';
import { fileName, pngOf, save } from '../exports.js';
import { orderOf, sharedName, viewOf } from '../figure-choices.js';
import { text } from '../text.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../types.js').Acts} Acts */
/** @typedef {import('../types.js').FigureChoices} FigureChoices */

const words = text.report;
const labels = words.figureChoices;

/** @param {string} label @param {HTMLElement} input */
const field = (label, input) => el('label', { class: 'field' }, el('span', {}, label), input);

/** @param {Acts} acts */
export function figurePart(acts) {
  /** @type {State|null} */
  let last = null;
  let svgText = '';
  const choices = choicesPart(acts);
  const dpi = el('select', {}, el('option', { value: '300' }, '300'), el('option', { value: '600' }, '600'));
  const picture = el('img', { class: 'report-figure', alt: '' });
  const said = el('span', { class: 'hint', role: 'status', 'data-region': 'figure-state' });
  const name = () => `${fileName(last?.answers.report?.value?.title ?? 'courseband')}${last?.source?.kind === 'demo' ? '-invented' : ''}`;
  const view = () => last && viewOf(last.choices.figure, (last.findings?.groups ?? []).map((group) => group.name), { openPairs: last.openPairs, noun: last.choices.noun.many });
  const asSvg = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-svg', onclick: () => save(`${name()}.svg`, svgText, 'image/svg+xml') }, words.asSvg);
  const asPdf = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-pdf', onclick: () => {
    const wanted = view();
    if (!last?.drawing || !wanted) return;
    try {
      save(`${name()}.pdf`, /** @type {any} */ (stripsPdf(last.drawing, wanted, last.answers.report?.value?.title ?? '')), 'application/pdf');
      setText(said, '');
    } catch (cause) {
      setText(said, cause instanceof Error ? cause.message : String(cause));
    }
  } }, words.asPdf);
  const asPng = el('button', { type: 'button', 'data-gives': '', 'data-act': 'save-png', onclick: async () => {
    const png = await pngOf(svgText, Number(dpi.value));
    if (png) save(`${name()}.png`, png, 'image/png');
    setText(said, png ? '' : words.noPng);
  } }, words.asPng);

  function redraw() {
    const wanted = view();
    if (!last?.drawing || !last.findings || !wanted) return;
    svgText = stripsSvg(last.drawing, wanted);
    picture.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(svgText)}`;
    picture.alt = last.findings.sentences.map((sentence) => sentence.headline).join(' ');
  }
  const changed = whenChanged((state) => [state.drawing, state.openPairs, state.status, state.choices.figure, state.choices.noun], redraw);
  const node = el('section', { class: 'report-figure-part' }, el('h3', {}, words.figure), picture, choices.node,
    el('p', { class: 'figure-files' }, asSvg, ' ', asPdf, ' ', asPng, ' ', el('label', { class: 'inline-field' }, `${words.resolution} `, dpi), ' ', said));
  return {
    node,
    drawing: () => svgText,
    /** @param {State} state */
    update(state) {
      last = state;
      show(node, state.drawing !== null && state.findings !== null);
      choices.update(state);
      changed(state);
    },
  };
}

/** @param {Acts} acts */
function choicesPart(acts) {
  const choose = (/** @type {string} */ label, /** @type {Partial<FigureChoices>} */ part, typing = false) =>
    acts.choose(`${labels.title}: ${label}`, (choices) => ({ ...choices, figure: { ...choices.figure, ...part } }), typing);
  const typed = (/** @type {'width'|'font'|'valueTitle'|'timeTitle'} */ key, /** @type {string} */ label, /** @type {Record<string, any>} */ more) => {
    const input = el('input', { type: 'text', autocomplete: 'off', ...more });
    input.addEventListener('input', () => choose(label, { [key]: input.value }, true));
    return input;
  };
  const width = typed('width', words.figureWidth, { inputmode: 'decimal', 'data-field': 'figure-width' });
  const font = typed('font', words.figureFont, { inputmode: 'decimal', 'data-field': 'figure-font' });
  const valueTitle = typed('valueTitle', labels.valueTitle, { 'data-field': 'value-title', maxlength: '80' });
  const timeTitle = typed('timeTitle', labels.timeTitle, { 'data-field': 'time-title', maxlength: '40' });
  const column = el('select', {}, el('option', { value: '170' }, words.columns.two), el('option', { value: '85' }, words.columns.one), el('option', { value: '' }, words.columns.own));
  column.addEventListener('change', () => { if (column.value !== '') choose(words.columnsLabel, { width: column.value }); });
  const ticks = /** @type {const} */ (['courses', 'gaps', 'followed', 'bands', 'points', 'captions']).map((key) => {
    const box = el('input', { type: 'checkbox', 'data-figure': key, onchange: () => {
      const figure = acts.look().choices.figure;
      if (key === 'bands' || key === 'points' || key === 'captions') choose(labels[key], { [key]: box.checked });
      else choose(labels[key], { panels: { ...figure.panels, [key]: box.checked } });
    } });
    return { key, box };
  });
  const groups = el('ol', { class: 'figure-groups' });
  const complaint = el('p', { class: 'complaint', hidden: true });
  const node = el('div', {},
    el('div', { class: 'field-row' }, field(words.columnsLabel, column), field(words.figureWidth, width), field(words.figureFont, font)),
    el('details', { class: 'figure-choices' }, el('summary', {}, labels.more),
      el('fieldset', { class: 'tick-row' }, el('legend', {}, labels.shown), ...ticks.map(({ key, box }) => el('label', {}, box, ' ', labels[key]))),
      el('div', { class: 'field-row' }, field(labels.valueTitle, valueTitle), field(labels.timeTitle, timeTitle)),
      el('h4', {}, labels.groups), groups, complaint));

  const drawGroups = whenChanged((state) => [(state.findings?.groups ?? []).map((group) => group.name).join('\n'), state.choices.figure.order], (state) => {
    const names = (state.findings?.groups ?? []).map((group) => group.name);
    const order = orderOf(state.choices.figure, names);
    groups.replaceChildren(...order.map((name, k) => groupRow(name, k, order, acts, choose)));
  });
  return {
    node,
    /** @param {State} state */
    update(state) {
      const { figure } = state.choices;
      const names = (state.findings?.groups ?? []).map((group) => group.name);
      const set = (/** @type {HTMLInputElement} */ input, /** @type {string} */ value) => { if (document.activeElement !== input && input.value !== value) input.value = value; };
      set(width, figure.width);
      set(font, figure.font);
      set(valueTitle, figure.valueTitle);
      set(timeTitle, figure.timeTitle);
      valueTitle.placeholder = state.findings?.scale.response ?? '';
      timeTitle.placeholder = state.findings?.scale.time_word ?? '';
      column.value = ['85', '170'].includes(figure.width) ? figure.width : '';
      for (const { key, box } of ticks) box.checked = key === 'bands' || key === 'points' || key === 'captions' ? figure[key] : figure.panels[key];
      drawGroups(state);
      for (const input of groups.querySelectorAll('input')) set(input, figure.names[input.dataset.group ?? ''] ?? '');
      const shared = sharedName(figure, names);
      show(complaint, shared !== null);
      setText(complaint, shared === null ? '' : labels.shared(shared));
    },
  };
}

/**
 * @param {string} name
 * @param {number} k
 * @param {string[]} order
 * @param {Acts} acts
 * @param {(label: string, part: Partial<FigureChoices>, typing?: boolean) => void} choose
 */
function groupRow(name, k, order, acts, choose) {
  const input = el('input', { type: 'text', autocomplete: 'off', maxlength: '60', placeholder: name, 'data-group': name, 'aria-label': labels.nameOf(name) });
  input.addEventListener('input', () => choose(labels.nameOf(name), { names: { ...acts.look().choices.figure.names, [name]: input.value } }, true));
  const up = el('button', { type: 'button', class: 'quiet', 'data-up': name, disabled: k === 0, 'aria-label': labels.upOf(name), onclick: () => {
    const next = order.slice();
    [next[k - 1], next[k]] = [/** @type {string} */ (order[k]), /** @type {string} */ (order[k - 1])];
    choose(labels.upOf(name), { order: next });
    /** @type {HTMLElement|null} */ (document.querySelector(`[data-up="${CSS.escape(name)}"]`))?.focus();
  } }, labels.up);
  return el('li', {}, input, ' ', up);
}
