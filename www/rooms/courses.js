/**
 * The room Time courses: plan, strips, reading and findings.
 */

import { el } from '../dom.js';
import { text } from '../text.js';
import { mountChange } from '../views/change.js';
import { mountEffects } from '../views/effects.js';
import { mountFindings } from '../views/findings.js';
import { mountNotes } from '../views/notes.js';
import { mountPlan } from '../views/plan.js';
import { mountQuestion } from '../views/question.js';
import { mountReading } from '../views/reading.js';
import { mountStrips } from '../views/strips.js';
import { mountTables } from '../views/tables.js';

/** @typedef {import('../types.js').Room} Room */

/** On a phone the plan is folded to a line and stands after what it leads to. */
const NARROW = '(max-width: 719px)';

/** @type {Room} */
export const coursesRoom = {
  id: 'courses',
  title: text.rooms.courses,
  mount(root, acts) {
    const plan = el('section', { class: 'plan', 'aria-label': text.plan.title });
    const change = el('p', { class: 'change', 'data-region': 'change' });
    const question = el('section', { class: 'question', hidden: true });
    const strips = el('section', { class: 'strips' });
    const tables = el('section', { class: 'tables', 'data-region': 'tables' });
    const effects = el('section', { class: 'tables', 'data-region': 'effects' });
    const column = el('div', { class: 'strips-column' }, strips, effects, tables);
    const reading = el('section', { class: 'reading' });
    const findings = el('section', { class: 'findings' });
    const notes = el('section', { class: 'beside' });
    const views = [
      mountPlan(plan, acts), mountChange(change, acts), mountQuestion(question, acts), mountStrips(strips, acts),
      mountReading(reading, acts), mountFindings(findings), mountNotes(notes, acts), mountEffects(effects), mountTables(tables),
    ];
    const aside = el('div', { class: 'aside' });
    const body = el('div', { class: 'courses-body' });
    const narrow = matchMedia(NARROW);
    const arrange = () => {
      if (narrow.matches) {
        column.replaceChildren(strips);
        body.replaceChildren(column, reading);
        root.replaceChildren(question, change, findings, body, plan, notes, effects, tables);
      } else {
        aside.replaceChildren(reading, findings, notes);
        column.replaceChildren(strips, effects, tables);
        body.replaceChildren(column, aside);
        root.replaceChildren(question, plan, change, body);
      }
    };
    narrow.addEventListener('change', arrange);
    arrange();
    return { update: (state) => views.forEach((view) => view.update(state)) };
  },
};
