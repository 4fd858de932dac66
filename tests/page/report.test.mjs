/** The analysis file, exports and rewritten paragraphs. */

import assert from 'node:assert/strict';
import { test } from 'node:test';
import { NotOpened, analysisFrom, analysisText, departures, fingerprintOf } from '../../www/analysis-file.js';
import { csvCell, csvOf, htmlOf } from '../../www/exports.js';
import { freshFigure, orderOf, sharedName, viewOf } from '../../www/figure-choices.js';
import { defaultPlan } from '../../www/plan.js';
import { editsIn, withEdits } from '../../www/views/report-text.js';
import { designsIn, freshForm, numbersIn, requestOf, schedulesOf } from '../../www/size-form.js';

const choices = { plan: { ...defaultPlan(), subjects: 'slope' }, called: { a: 'b' }, noun: { one: 'mouse', many: 'mice' }, leftOut: [{ row: 3, column: null, reason: 'lost', seen: true }], edits: {}, figure: { ...freshFigure(), width: '85', order: ['b'] }, masks: { a: 'Group B' }, markers: { columns: ['x'], rate: 0.1 } };

test('an analysis comes back as it was saved, to the byte', async () => {
  const table = new Uint8Array(70000).map((_, k) => k % 251);
  const fingerprint = await fingerprintOf(table);
  const back = analysisFrom(analysisText({ choices, source: { kind: 'own', name: 'x.csv' }, table, fingerprint, fixed: { ...defaultPlan(), subjects: 'none' } }, '1.2.3'));
  assert.deepEqual(back.choices, choices);
  assert.deepEqual(back.table, table);
  assert.equal(back.fingerprint, fingerprint);
  assert.equal(fingerprint.length, 64);
  // The plan as it was fixed, not as it stands now: departures are kept.
  assert.equal(back.fixed.subjects, 'none');
  const without = analysisFrom(analysisText({ choices, source: { kind: 'own', name: 'x.csv' }, table: null, fingerprint, fixed: null }, '1.2.3'));
  assert.equal(without.table, null);
  assert.equal(without.fixed, null);
});

test('what is no analysis, or a later one, is refused in words', () => {
  for (const bad of ['{', '{}', '[]', '{"courseband": 1}', 'null']) assert.throws(() => analysisFrom(bad), NotOpened, bad);
  assert.throws(() => analysisFrom('{"courseband": "9.0.0", "format": 99, "choices": {"plan": {}}}'), /later version \(9\.0\.0\)/);
});

test('departures are named key by key', () => {
  const now = { ...defaultPlan(), subjects: 'slope', errors: { serial: 'ar1', spread: 'common', nugget: false } };
  assert.deepEqual(departures(defaultPlan(), now), ['subjects: "intercept" \u2192 "slope"', 'errors.serial: "none" \u2192 "ar1"']);
  assert.deepEqual(departures(now, now), []);
});

test('no cell of an exported table is taken for a formula', () => {
  for (const cell of ['=1+1', '+cmd', '-cmd|x', '@sum', '\tx', '\r=1']) assert.match(csvCell(cell), /^"?'/, cell);
  assert.equal(csvCell('\u22123.2'), '-3.2');
  assert.equal(csvCell('-3.2'), '-3.2');
  assert.equal(csvCell('a "b", c'), '"a ""b"", c"');
  assert.equal(csvOf({ heads: ['a'], rows: [['=x'], ['1']] }, 'invented'), '\ufeffinvented\r\na\r\n\'=x\r\n1\r\n');
});

test('cells are text in the report file, never markup', () => {
  const report = { title: '<b>', sections: [{ title: 'R', paragraphs: ['a < b & "c"'] }], tables: [{ title: 't', heads: ['<i>'], rows: [['<script>']] }], items: [], references: [] };
  const html = htmlOf(report, '<svg></svg>', { figure: 'f', items: 'i', references: 'r', author: 'a', mark: 'm' });
  assert.doesNotMatch(html, /<script>|<i>|<b>/);
  assert.match(html, /a &lt; b &amp; &quot;c&quot;/);
});

test('a rewritten paragraph stands while the numbers behind it do', () => {
  const report = { sections: [{ key: 'results', paragraphs: ['gap 3', 'gap 4'] }] };
  const edits = { 'results.0': { text: 'my words', base: 'gap 3' }, 'results.1': { text: 'old words', base: 'gap 9' } };
  assert.deepEqual(withEdits(report, edits).sections[0].paragraphs, ['my words', 'gap 4']);
});

test('the sample-size form makes a request or says what is wrong where', () => {
  const made = requestOf({ ...freshForm(), known: 'sem', spread: '2', n: '9' });
  assert.equal(made.request.spread.on_a_day, 6);
  assert.deepEqual(designsIn('6, 8:12'), [[6, 6], [8, 12]]);
  assert.equal(designsIn('1'), null);
  assert.deepEqual(numbersIn('0, 3, 7 10.5'), [0, 3, 7, 10.5]);
  assert.deepEqual(numbersIn('0; 3,5; 7'), [0, 3.5, 7]);
  const wrong = requestOf({ ...freshForm(), days: '3, 2', alike: '1', power: 'x' });
  assert.deepEqual(Object.keys(wrong.problems).sort(), ['alike', 'days', 'power']);
  assert.deepEqual(schedulesOf([0, 1, 4]).find((one) => one.name === 'even').days, [0, 2, 4]);
});

test('what was chosen for the figure makes its view', () => {
  const figure = { ...freshFigure(), width: '85', font: '7', order: ['c', 'gone', 'a'], names: { a: 'Control' }, valueTitle: ' mass (g) ' };
  const groups = ['a', 'b', 'c'];
  assert.deepEqual(orderOf(figure, groups), ['c', 'a', 'b']);
  const view = viewOf(figure, groups, { openPairs: [1], noun: 'mice' });
  assert.deepEqual([view.width, view.letters, view.order, view.names, view.value_title, view.time_title], [321, true, [2, 0, 1], ['Control', '', ''], 'mass (g)', null]);
  assert.ok(Math.abs(view.font - 28 / 3) < 1e-12);
  assert.equal(sharedName(figure, groups), null);
  assert.equal(sharedName({ ...figure, names: { a: 'b' } }, groups), 'b');
});

test('an edit follows its numbers when paragraphs come and go or are worded anew', () => {
  const edits = { 'results.0': { text: 'mine', base: 'Apart from day 7.1 by 3.' }, 'results.1': { text: 'other', base: 'Nothing here.' } };
  const section = (paragraphs) => ({ sections: [{ key: 'results', paragraphs }] });
  const shown = (paragraphs) => withEdits(section(paragraphs), edits).sections[0].paragraphs;
  assert.deepEqual(shown(['A new one, 4.', 'Apart from day 7.1 by 3.', 'Nothing here.']), ['A new one, 4.', 'mine', 'other']);
  assert.deepEqual(shown(['It comes apart at day 7.1, by 3.', 'Nothing here.']), ['mine', 'other']);
  // Another number, or another text without any: the composed one is shown, and the edit is flagged there.
  assert.deepEqual(shown(['Apart from day 7.2 by 3.', 'Nothing there.']), ['Apart from day 7.2 by 3.', 'Nothing there.']);
  assert.deepEqual(editsIn('results', ['Apart from day 7.2 by 3.', 'Nothing there.'], edits), ['results.0', 'results.1']);
  assert.deepEqual(editsIn('results', [], edits), []);
});
