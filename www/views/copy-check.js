/** The dialog of "Check this copy": runs at once, shows the table, prints it. */

import { el, setText } from '../dom.js';
import { reference } from '../copy-check.js';
import { text } from '../text.js';
import { copyButton } from './copy.js';

/** @typedef {import('../copy-check.js').CopyReport} CopyReport */
/** @typedef {import('../copy-check.js').CaseResult} CaseResult */

const words = text.copyCheck;
const DIGITS = 12;

/** @param {import('../types.js').Acts} acts */
export function mountCopyCheck(acts) {
  const verdict = el('p', { class: 'copy-verdict', role: 'status' });
  const outcome = el('div', { class: 'copy-outcome' });
  const copy = copyButton(() => asText(outcome, verdict.textContent ?? ''), outcome, words.copyWords);
  const print = el('button', { type: 'button', onclick: () => window.print() }, words.print);
  const close = el('button', { type: 'button', onclick: () => dialog.close() }, words.close);
  const tools = el('div', { class: 'copy-tools' }, print, close, copy);
  const dialog = el('dialog', { class: 'copy-check', 'aria-labelledby': 'copy-check-title' },
    el('h2', { id: 'copy-check-title' }, words.title), el('p', { class: 'hint' }, words.lead), verdict, outcome, tools);
  let running = false;

  async function run() {
    const held = reference();
    if (held === null) {
      setText(verdict, words.none);
      print.disabled = true;
      copy.hidden = true;
      return;
    }
    if (running) return;
    running = true;
    print.disabled = true;
    copy.hidden = true;
    outcome.replaceChildren();
    delete dialog.dataset.agrees;
    try {
      const report = await acts.checkCopy(held, (done, total) => setText(verdict, words.working(done, total)));
      show(report);
    } catch (cause) {
      setText(verdict, `${words.differs(held.cases.length, held.cases.length)} ${cause instanceof Error ? cause.message : ''}`);
    } finally {
      running = false;
      print.disabled = false;
    }
  }

  /** @param {CopyReport} report */
  function show(report) {
    const failed = report.results.filter((result) => result.first !== null).length;
    const altered = report.digest !== null && report.digest !== report.expectedDigest;
    const numbers = report.results.reduce((sum, result) => sum + result.numbers, 0);
    const said = failed > 0 ? words.differs(failed, report.results.length) : words.agrees(report.results.length, numbers);
    setText(verdict, altered ? `${said} ${words.altered}` : said);
    outcome.replaceChildren(facts(report), table(report.results));
    copy.hidden = false;
    dialog.dataset.agrees = String(failed === 0 && !altered);
  }

  const button = el('button', {
    type: 'button', class: 'quiet', 'data-act': 'check-copy',
    onclick: () => { dialog.showModal(); void run(); },
  }, words.open);
  return { button, dialog };
}

/** @param {CopyReport} report */
function facts({ version, made, digest, expectedDigest }) {
  const same = digest === expectedDigest ? words.same : words.other(expectedDigest);
  const rows = [
    [words.facts.version, words.version(version, made)],
    [words.facts.digest, digest === null ? words.noDigest : `${digest} (${same})`],
    [words.facts.browser, navigator.userAgent],
    [words.facts.when, new Date().toLocaleString()],
  ];
  return el('dl', { class: 'copy-facts' }, ...rows.flatMap(([name, value]) => [el('dt', {}, name ?? ''), el('dd', {}, value ?? '')]));
}

/** @param {CaseResult[]} results */
function table(results) {
  const { heads } = words;
  const head = (/** @type {string} */ name) => el('th', { scope: 'col' }, name);
  const rows = results.map((result) => {
    const { example } = result;
    const time = example ? Number(example.time.toPrecision(4)).toString() : '';
    const got = result.message ?? example?.got?.toPrecision(DIGITS) ?? words.nothing;
    const agrees = result.first === null ? words.yes : `${words.no}${result.first === '' ? '' : ` (${result.first})`}`;
    return el('tr', { 'data-agrees': String(result.first === null) },
      el('th', { scope: 'row' }, `${result.title}: ${result.name}`),
      el('td', {}, String(result.numbers)),
      el('td', {}, example ? words.gap(example.what, time) : ''),
      el('td', { class: 'digits' }, example?.expected.toPrecision(DIGITS) ?? ''),
      el('td', { class: 'digits' }, got),
      el('td', {}, result.worst === 0 ? words.zero : result.worst.toExponential(1)),
      el('td', {}, agrees));
  });
  const whole = el('table', {},
    el('caption', {}, words.caption),
    el('thead', {}, el('tr', {}, ...Object.values(heads).map(head))),
    el('tbody', {}, ...rows));
  return el('div', { class: 'copy-scroll', tabindex: '0', role: 'region', 'aria-label': words.caption }, whole);
}

/**
 * The same as lines, cells with tabs between.
 * @param {HTMLElement} outcome
 * @param {string} verdict
 */
function asText(outcome, verdict) {
  const names = Array.from(outcome.querySelectorAll('dt'), (name) => `${name.textContent}: ${name.nextElementSibling?.textContent ?? ''}`);
  const rows = Array.from(outcome.querySelectorAll('tr'), (row) => Array.from(row.children, (cell) => cell.textContent ?? '').join('\t'));
  return [text.name, verdict, ...names, ...rows].join('\n');
}
