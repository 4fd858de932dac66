/**
 * The room Data: bring a table, see how it was read, set it right.
 */

import { el, show } from '../dom.js';
import { text } from '../text.js';
import { mountDescription } from '../views/description.js';
import { mountIntake } from '../views/intake.js';
import { mountLeftOut } from '../views/left-out.js';
import { mountProblems } from '../views/problems.js';
import { mountQuestion } from '../views/question.js';
import { mountTable } from '../views/table.js';
import { mountWording } from '../views/wording.js';

/** @type {import('../types.js').Room} */
export const dataRoom = {
  id: 'data',
  title: text.rooms.data,
  mount(root, acts) {
    const intake = el('section', { class: 'intake' });
    const question = el('section', { class: 'question', hidden: true });
    const table = el('section', { class: 'table-view', 'data-region': 'table' });
    const problems = el('section', { class: 'problems', 'data-region': 'problems' });
    const leftOut = el('section', { class: 'left-out', 'data-region': 'left-out' });
    const wording = el('section', { class: 'wording' });
    const description = el('section', { class: 'description', 'data-region': 'description' });
    const next = el('p', { class: 'next' }, el('a', { href: '#/courses' }, text.data.next));
    const columns = el('div', { class: 'data-columns' },
      el('div', {}, problems, leftOut, wording), description);
    root.append(intake, question, table, next, columns);
    const views = [
      mountIntake(intake, acts), mountQuestion(question, acts), mountTable(table, acts), mountProblems(problems, acts),
      mountLeftOut(leftOut, acts), mountWording(wording, acts), mountDescription(description),
    ];
    return {
      update(state) {
        views.forEach((view) => view.update(state));
        show(table, state.preview !== null);
        show(columns, state.source !== null);
        show(next, state.status === 'ready' || state.status === 'boundary');
      },
    };
  },
};
