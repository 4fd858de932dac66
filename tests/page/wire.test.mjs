import assert from 'node:assert/strict';
import test from 'node:test';
import { previewFrom } from '../../www/wire.js';

const column = { name: 'id', role: 'subject', reason: 'The name says so.', unit: null, missing: 0, measured: false };
const preview = (more) => previewFrom(JSON.stringify({ columns: [column], rows: [], total_rows: 3, layout: 'wide-by-time', refusal: null, ...more }));

test('layout, measured columns and totals are passed on', () => {
  const read = preview({ columns: [column, { ...column, name: 'day 0', role: null, measured: true }] });
  assert.equal(read.layout, 'wide-by-time');
  assert.deepEqual(read.columns.map((one) => one.measured), [false, true]);
  assert.equal(read.totalRows, 3);
});

test('a question that needs an answer blocks', () => {
  const read = preview({ questions: [{ id: 'ids', text: '?', answers: [], needs_answer: true }] });
  assert.equal(read.questions[0].blocking, true);
});

test('a refusal comes with the table and its problems', () => {
  const problem = { row: 2, column: 'day', value: 'soon', message: 'No time.', kept: true, stops: true };
  const read = preview({ refusal: 'Row 2 is no time.', problems: [problem] });
  assert.equal(read.refusal, 'Row 2 is no time.');
  assert.deepEqual(read.problems, [problem]);
  assert.equal(read.columns.length, 1);
});
