/**
 * One blocking question: findings wait until it is answered.
 */

import { el, reconcile, setText, show, whenChanged } from '../dom.js';
import { withSection } from '../plan.js';
import { openQuestions } from '../state.js';
import { text } from '../text.js';

/**
 * @param {HTMLElement} root
 * @param {import('../types.js').Acts} acts
 * @returns {import('../types.js').View}
 */
export function mountQuestion(root, acts) {
  const sentence = el('p', { class: 'question-text' });
  const answers = el('ul', {});
  root.append(el('h2', {}, text.data.question.title), sentence, answers);
  root.dataset.region = 'question';
  return {
    update: whenChanged((state) => [state.preview, state.status], (state) => {
      const [question] = state.status === 'question' ? openQuestions(state) : [];
      show(root, question !== undefined);
      if (!question) return;
      setText(sentence, question.text);
      reconcile(answers, question.answers, (row) => `${question.id}${row.label}`, (row) => el('li', {}, el('button', {
        type: 'button', 'data-answer': row.label,
        onclick: () => acts.choose(`${text.data.labels.answered}: ${row.label}`, (choices) => ({
          ...choices,
          plan: withSection(withSection(choices.plan, 'columns', row.columns), 'reading', row.reading),
        })),
      }, el('span', { class: 'alternative-name' }, row.label), el('span', { class: 'alternative-fits' }, row.detail))));
    }),
  };
}
