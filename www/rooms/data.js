/**
 * The room Data: bring a table, see how it was read, set it right.
 */

import { el, show } from '../dom.js';
import { text } from '../text.js';
import { mountDescription } from '../views/description.js';
import { mountChange } from '../views/change.js';
import { mountIntake } from '../views/intake.js';
import { mountKeeping } from '../views/keeping.js';
import { mountLeftOut } from '../views/left-out.js';
import { mountMasking } from '../views/masking.js';
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
    const masking = el('section', { class: 'masking', 'data-region': 'masking' });
    const keeping = el('section', { class: 'keeping', 'data-region': 'keeping' });
    const change = el('p', { class: 'change' });
    const wording = el('section', { class: 'wording' });
    const description = el('section', { class: 'description', 'data-region': 'description' });
    const next = el('p', { class: 'next' }, el('a', { href: '#/courses' }, text.data.next));
    const columns = el('div', { class: 'data-columns' },
      el('div', {}, problems, leftOut, masking, wording, keeping), description);
    root.append(intake, question, change, table, next, columns);
    const views = [
      mountIntake(intake, acts), mountQuestion(question, acts), mountTable(table, acts), mountProblems(problems, acts),
      mountLeftOut(leftOut, acts), mountWording(wording, acts), mountDescription(description),
      mountMasking(masking, acts), mountKeeping(keeping, acts), mountChange(change, acts),
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
