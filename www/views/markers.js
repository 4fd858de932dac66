/** One plan over many response columns: which, how far, what was found. */

import { el, setText, show, whenChanged } from '../dom.js';
import { csvOf, fileName, save } from '../exports.js';
import { tablesXlsx } from '../drawing.js';
import { parseNumber } from '../numbers.js';
import { text } from '../text.js';
import { plainTable } from './plain-table.js';

/** @typedef {import('../types.js').State} State */

const words = text.markers;
const XLSX = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';

/** @param {import('../types.js').Acts} acts */
export function markersPart(acts) {
  const boxes = el('fieldset', { class: 'tick-row marker-columns' });
  const rate = el('input', { type: 'text', inputmode: 'decimal', 'data-field': 'marker-rate', autocomplete: 'off' });
  const run = el('button', { type: 'button', 'data-act': 'run-markers' }, words.run);
  const stop = el('button', { type: 'button', 'data-act': 'stop-markers', onclick: () => acts.stopMarkers() }, words.stop);
  const bar = el('progress', { max: '1', value: '0', 'aria-label': words.progress(0, 0) });
  const said = el('p', { class: 'hint', role: 'status', 'data-region': 'markers-state' });
  const found = el('div', { 'data-region': 'markers' });
  const none = el('p', { class: 'hint' }, words.none);
  const form = el('div', {}, boxes,
    el('div', { class: 'field-row' }, el('label', { class: 'field' }, el('span', {}, words.rate), rate), run, stop, bar));
  const node = el('details', { class: 'as-tables markers', 'data-region': 'markers-part' },
    el('summary', {}, words.title), el('p', { class: 'hint' }, words.lead), none, form, said, found);
  node.addEventListener('toggle', () => { if (node.open) acts.lookForMarkers(); });

  /** @type {State|null} */
  let last = null;
  /** What is wrong with what was asked, until something else is asked. */
  let complaint = '';
  const complain = (/** @type {string} */ words) => { complaint = words; setText(said, words); };
  const ticked = () => Array.from(boxes.querySelectorAll('input'), (box) => ({ name: box.value, on: box.checked }));
  const choose = (/** @type {string[]} */ columns) => acts.choose(words.choice, (choices) => ({ ...choices, markers: { ...choices.markers, columns } }));
  rate.addEventListener('input', () => {
    const percent = parseNumber(rate.value);
    if (percent !== null && percent > 0 && percent < 50) {
      acts.choose(words.rate, (choices) => ({ ...choices, markers: { ...choices.markers, rate: percent / 100 } }), true);
    }
  });
  run.addEventListener('click', () => {
    const columns = ticked().filter((one) => one.on).map((one) => one.name);
    const percent = parseNumber(rate.value);
    complain(columns.length < 2 ? words.few : percent === null || !(percent > 0 && percent < 50) ? words.badRate : '');
    if (complaint === '' && percent !== null) acts.runMarkers(columns, percent / 100);
  });

  const offered = whenChanged((state) => [state.markers.offered, state.choices.markers], ({ markers: { offered }, choices }) => {
    const chosen = choices.markers.columns;
    show(form, offered !== null && offered.length > 1);
    show(none, offered !== null && offered.length < 2);
    const focus = document.activeElement instanceof HTMLInputElement && boxes.contains(document.activeElement) ? document.activeElement.value : null;
    boxes.replaceChildren(el('legend', {}, words.columns), ...(offered ?? []).map((name) => {
      const box = el('input', { type: 'checkbox', value: name, checked: chosen === null || chosen.includes(name),
        onchange: () => choose(ticked().filter((one) => one.on).map((one) => one.name)) });
      return el('label', {}, box, ' ', name);
    }), el('span', { class: 'marker-all' },
      el('button', { type: 'button', class: 'quiet', onclick: () => choose((offered ?? []).slice()) }, words.all), ' ',
      el('button', { type: 'button', class: 'quiet', onclick: () => choose([]) }, words.nothing)));
    if (focus !== null) Array.from(boxes.querySelectorAll('input')).find((box) => box.value === focus)?.focus();
    if (document.activeElement !== rate) rate.value = String(Math.round(choices.markers.rate * 1e6) / 1e4);
  });

  const answered = whenChanged((state) => [state.markers.answer, state.source], (state) => {
    const { answer } = state.markers;
    found.replaceChildren(...(answer === null ? [] : answerNodes(answer, () => last)));
  });
  return {
    node,
    /** @param {State} state */
    update(state) {
      last = state;
      const { progress, message, of } = state.markers;
      if (node.open && (state.status === 'ready' || state.status === 'boundary')) acts.lookForMarkers();
      offered(state);
      answered(state);
      show(stop, progress !== null);
      show(bar, progress !== null);
      run.disabled = progress !== null;
      if (progress) {
        bar.max = progress.total;
        bar.value = progress.done;
        bar.setAttribute('aria-label', words.progress(progress.done, progress.total));
      }
      const old = of !== null && of !== acts.planText();
      setText(said, complaint !== '' ? complaint : progress ? words.progress(progress.done, progress.total) : message ?? (old ? words.old : ''));
      found.classList.toggle('stale', old);
    },
  };
}

/** @param {any} answer @param {() => State|null} look */
function answerNodes(answer, look) {
  const name = () => `${fileName(look()?.answers.report?.value?.title ?? 'courseband')}-responses`;
  const remark = () => { const source = look()?.source; return source?.kind === 'demo' ? text.demo.mark(source.name) : ''; };
  const csv = el('button', { type: 'button', class: 'quiet', 'data-act': 'csv-responses', onclick: () =>
    save(`${name()}.csv`, csvOf(answer.table, remark()), 'text/csv') }, words.asCsv);
  const xlsx = el('button', { type: 'button', class: 'quiet', 'data-act': 'xlsx-responses', onclick: () =>
    save(`${name()}.xlsx`, /** @type {any} */ (tablesXlsx([answer.table], [remark(), answer.sentence, answer.method].filter((line) => line !== ''))), XLSX) }, words.asXlsx);
  return [
    el('p', { class: 'marker-sentence' }, answer.sentence),
    el('div', { class: 'table-scroller tall', tabindex: '0', role: 'region', 'aria-label': answer.table.title }, plainTable(answer.table)),
    el('p', { class: 'hint' }, answer.method), el('p', {}, csv, ' ', xlsx),
  ];
}
