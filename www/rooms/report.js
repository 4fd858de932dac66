/**
 * The room Report: what was done and found, composed; figure, tables and files
 * to give out.
 */

import { el, setText, show, whenChanged } from '../dom.js';
import { text } from '../text.js';
import { mountChange } from '../views/change.js';
import { figurePart } from '../views/report-figure.js';
import { markersPart } from '../views/markers.js';
import { analysisPart, givePart, itemsPart, tablesPart } from '../views/report-parts.js';
import { sectionNode, withEdits, withResponses } from '../views/report-text.js';

const words = text.report;

/** @type {import('../types.js').Room} */
export const reportRoom = {
  id: 'report',
  title: text.rooms.report,
  mount(root, acts) {
    const wait = el('p', { class: 'hint', role: 'status', 'data-region': 'report-state' });
    const title = el('h2', {});
    const changed = el('p', { class: 'change' });
    const change = mountChange(changed, acts);
    const prose = el('div', { class: 'report-text', 'data-region': 'report' });
    const figure = figurePart(acts);
    const tables = el('section', { class: 'report-tables' });
    const markers = markersPart(acts);
    const items = el('section', { class: 'report-items' });
    const give = givePart(() => withResponses(current, acts.look(), acts.planText()), () => figure.drawing(), acts);
    const analysis = analysisPart(acts);
    root.append(el('div', { class: 'room-head' }, title, el('p', { class: 'room-lead' }, words.lead)), changed, wait,
      el('div', { class: 'report-body' },
        el('article', {}, prose, figure.node, tables, markers.node, items),
        el('div', { class: 'report-side' }, give.node, analysis.node)));
    /** @type {any} */
    let current = null;
    const drawn = whenChanged((state) => [state.answers.report?.value, state.choices.edits], (state) => {
      const report = state.answers.report?.value ?? null;
      current = report === null ? null : withEdits(report, state.choices.edits);
      setText(title, report?.title ?? words.title);
      prose.replaceChildren(...(report?.sections ?? []).map((/** @type {any} */ section) => sectionNode(section, state.choices.edits, acts)));
      tables.replaceChildren(...(report ? tablesPart(report, state) : []));
      items.replaceChildren(...(report ? itemsPart(report) : []));
    });
    return {
      update(state) {
        const answer = state.answers.report;
        drawn(state);
        change.update(state);
        figure.update(state);
        markers.update(state);
        analysis.update(state);
        const held = state.calibrating !== null;
        const message = answer === null ? words.waiting : held ? words.provisional
          : answer.status === 'working' ? words.working : answer.message ?? '';
        setText(wait, message);
        show(wait, message !== '');
        root.querySelectorAll('[data-gives]').forEach((button) => { /** @type {HTMLButtonElement} */ (button).disabled = held || current === null; });
      },
    };
  },
};
