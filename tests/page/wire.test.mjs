import assert from 'node:assert/strict';
import test from 'node:test';
import { previewFrom } from '../../www/wire.js';

const column = (name, role = null) => ({ name, role, reason: '' });
const preview = (columns, rows, more = {}) =>
  previewFrom(JSON.stringify({ columns, rows: rows.map((cells, index) => ({ line: index + 2, cells })), total_rows: rows.length, questions: [], problems: [], ...more }));

test('a table with a response column is long', () => {
  const read = preview([column('id', 'subject'), column('day', 'time'), column('size', 'response'), column('x1')], [['a', '0', '5', '7']]);
  assert.equal(read.layout, 'long');
  assert.deepEqual(read.columns.map((one) => one.measured), [false, false, false, false]);
});

test('a wide table says which columns hold measurements', () => {
  const read = preview([column('id', 'subject'), column('sex'), column('week 0'), column('week 1')], [['a', 'f', '5', ''], ['b', 'm', '', '6.5']]);
  assert.equal(read.layout, 'wide-by-time');
  assert.deepEqual(read.columns.map((one) => one.measured), [false, false, true, true]);
});

test('one column per subject', () => {
  const read = preview([column('day', 'time'), column('anna'), column('bert')], [['0', '5', '6']]);
  assert.equal(read.layout, 'wide-by-subject');
  assert.deepEqual(read.columns.map((one) => one.measured), [false, true, true]);
});

test('an open question leaves the layout open', () => {
  const read = preview([column('id', 'subject'), column('a1'), column('b2')], [['x', '1', '2']],
    { questions: [{ id: 'response', text: '?', answers: [], needs_answer: true }] });
  assert.equal(read.layout, 'long');
  assert.equal(read.questions[0].blocking, true);
});

test('rows that are out already are not offered again', () => {
  const problem = (message) => ({ row: 2, column: 'size', value: '', message });
  const read = preview([column('size', 'response')], [], { problems: [problem('No response: the row is left out.'), problem('Far from the others; kept.')] });
  assert.deepEqual(read.problems.map((one) => one.kept), [false, true]);
});
