/**
 * Ways in: paste, choose a file, drop one, or open an invented example.
 */

import { el, reconcile, setText, show, whenChanged } from '../dom.js';
import { text } from '../text.js';

const words = text.data;
/** Typing into the paste box settles for this long before it is read. */
const PAUSE = 450;

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountIntake(root, acts) {
  const box = mountPasteBox(acts);
  const file = el('input', {
    type: 'file', class: 'unseen', id: 'table-file', accept: '.csv,.tsv,.txt,.tab,.xlsx,.xlsm,.ods,.json,text/*',
    onchange: () => {
      const [chosen] = Array.from(file.files ?? []);
      if (chosen) acts.openFile(chosen);
      file.value = '';
    },
  });
  const choose = el('label', { class: 'button', for: 'table-file' }, words.paste.choose);
  const problem = el('p', { class: 'complaint', 'data-region': 'problem', hidden: true });
  const demos = el('ul', { class: 'demos' });
  root.append(
    el('div', { class: 'intake-own' }, el('h2', {}, words.paste.title), box, problem,
      el('div', { class: 'intake-file' }, file, choose, el('span', { class: 'hint' }, words.paste.hint))),
    el('div', { class: 'intake-demos' }, el('h2', {}, words.demos.title), demos),
  );
  return {
    update: whenChanged((state) => [state.status, state.message, state.source, state.demos], (state) => {
      const refused = state.status === 'problem' || state.status === 'failed';
      show(problem, refused);
      setText(problem, refused ? state.message ?? '' : '');
      const open = state.source?.kind === 'demo' ? state.source.name : null;
      reconcile(demos, state.demos, (demo) => demo.file, (demo) => mountDemo(demo, acts), (node, demo) => {
        const button = /** @type {HTMLButtonElement} */ (node.querySelector('button'));
        button.setAttribute('aria-pressed', String(demo.title === open));
        setText(/** @type {Element} */ (button.lastElementChild), demo.title === open ? words.demos.isOpen : words.demos.open);
      });
    }),
  };
}

/** @param {import('../types.js').Acts} acts */
function mountPasteBox(acts) {
  const area = el('textarea', {
    rows: '6', spellcheck: 'false', autocomplete: 'off', wrap: 'off', placeholder: words.paste.example, id: 'paste-box',
  });
  let timer = 0;
  /** @param {number} pause */
  const readAfter = (pause) => {
    window.clearTimeout(timer);
    timer = window.setTimeout(() => {
      if (area.value.trim() !== '') acts.openText(area.value);
    }, pause);
  };
  let pasted = false;
  area.addEventListener('paste', () => { pasted = true; });
  area.addEventListener('input', () => {
    readAfter(pasted ? 0 : PAUSE);
    pasted = false;
  });
  return el('div', { 'data-region': 'paste' }, el('label', { for: 'paste-box' }, words.paste.label), area);
}

/** @param {import('../types.js').Demo} demo @param {import('../types.js').Acts} acts */
function mountDemo(demo, acts) {
  return el('li', {}, el('button', { type: 'button', 'data-demo': demo.file, onclick: () => acts.openDemo(demo) },
    el('span', { class: 'alternative-name' }, demo.title), el('span', { class: 'alternative-fits' }, demo.blurb), el('span', { class: 'demo-open' })));
}
