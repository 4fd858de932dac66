import assert from 'node:assert/strict';
import test from 'node:test';
import { withSection, withTransform } from '../../www/plan.js';
import * as change from '../../www/state.js';
import { findings } from './fixture.mjs';

const drawing = { findings: '', traces: '' };
const toLog = (choices) => ({ ...choices, plan: withTransform(choices.plan, 'log') });
const fitted = () => change.fitted(change.opening(change.initialState(), { kind: 'own', name: 'x' }, null), findings(), drawing, 20);
const preview = (questions) => ({ columns: [], rows: [], layout: 'long', nearSpellings: [], refusal: null, totalRows: 0, format: '', problems: [], questions, notes: [] });

test('a table that opens leaves nothing of the one before', () => {
  const state = change.opening({ ...fitted(), cursor: 3 }, { kind: 'own', name: 'y' }, null);
  assert.equal(state.status, 'reading');
  assert.equal(state.findings, null);
  assert.equal(state.cursor, null);
  assert.equal(state.seen, false);
});

test('a demo brings its plan, its words and its exclusions', () => {
  const demo = { file: 'a.csv', title: 'A', blurb: '', plan: { response: { transform: 'log' }, exclusions: [{ row: 3, reason: 'x' }], words: { subject: 'mouse', subjects: 'mice' } } };
  const { choices } = change.opening(change.initialState(), { kind: 'demo', name: 'A' }, demo);
  assert.equal(choices.plan.response.transform, 'log');
  assert.deepEqual(choices.noun, { one: 'mouse', many: 'mice' });
  assert.deepEqual(choices.leftOut, [{ row: 3, column: null, reason: 'x', seen: false }]);
});

test('findings stay hidden while a question is open', () => {
  const asked = change.understood(fitted(), preview([{ id: 'q', text: '?', blocking: true, answers: [] }]), null);
  assert.equal(asked.status, 'question');
  assert.equal(asked.findings, null);
  const answered = change.chosen(asked, 'answer', (choices) => ({ ...choices, plan: withSection(choices.plan, 'reading', { shared_ids: 'different' }) }), false);
  assert.equal(change.understood(answered, preview([]), null).status, 'fitting');
});

test('a cell that stops the reading leaves the table on the page', () => {
  const stopped = change.understood(fitted(), { ...preview([]), refusal: 'Row 4: soon is no time.' }, null);
  assert.equal(stopped.status, 'problem');
  assert.equal(stopped.message, 'Row 4: soon is no time.');
  assert.notEqual(stopped.preview, null);
});

test('a choice, its undoing and its redoing', () => {
  const log = change.chosen(fitted(), 'log', toLog, false);
  assert.equal(log.choices.plan.response.transform, 'log');
  const back = change.undone(log);
  assert.equal(back.choices.plan.response.transform, 'identity');
  assert.equal(back.change.back, true);
  assert.equal(change.redone(back).choices.plan.response.transform, 'log');
  assert.equal(change.undone(change.undone(log)).choices, back.choices);
});

test('a new choice forgets what had been undone', () => {
  const back = change.undone(change.chosen(fitted(), 'log', toLog, false));
  assert.equal(change.chosen(back, 'log', toLog, false).history.future.length, 0);
});

test('typing in one field is one step, and undoing goes back before it', () => {
  const type = (state, name) => change.chosen(state, 'called', (choices) => ({ ...choices, called: { area: name } }), true);
  const typed = type(type(type(fitted(), 'w'), 'wo'), 'wound');
  assert.equal(typed.history.past.length, 1);
  assert.deepEqual(change.undone(typed).choices.called, {});
});

test('a choice that changes nothing is no step', () => {
  const state = fitted();
  assert.equal(change.chosen(state, 'same', (choices) => choices, false), state);
});

test('a refit says which day was and which is', () => {
  const chosen = change.chosen(fitted(), 'log', toLog, false);
  const after = change.fitted(chosen, findings({ start: 5.1, headline: 'B is above A.' }), drawing, 20);
  assert.deepEqual(after.change, { label: 'log', back: false, pair: { from: 'A', to: 'B' }, before: '4.2', after: '5.1' });
  assert.match(after.announcement, /^1 of 1\u00a0finding changed: B is above A\./);
});

test('a refit without change is announced as such', () => {
  assert.match(change.fitted(fitted(), findings(), drawing, 20).announcement, /No finding changed/);
});

test('a failed fit keeps the strips to grey them and says what happened', () => {
  const failed = change.fitted(fitted(), findings({ status: 'failed' }), drawing, 20);
  assert.equal(failed.status, 'failed');
  assert.notEqual(failed.findings, null);
  assert.equal(failed.message, 'No optimum was found.');
});

test('a fit at a boundary is one with findings', () => {
  const state = change.fitted(fitted(), findings({ status: 'boundary' }), drawing, 20);
  assert.equal(state.status, 'boundary');
  assert.notEqual(state.findings, null);
});

test('the cursor snaps and survives a refit', () => {
  const state = change.pointed(fitted(), 2.9);
  assert.equal(state.cursor, 3);
  assert.equal(change.fitted(state, findings(), drawing, 20).cursor, 3);
  assert.equal(change.pointed(state, 3.1), state);
});

test('at most three gap strips are open', () => {
  let state = fitted();
  for (const pair of [0, 1, 2, 3]) state = change.pairToggled(state, pair);
  assert.deepEqual(state.openPairs, [1, 2, 3]);
  assert.deepEqual(change.pairToggled(state, 2).openPairs, [1, 3]);
});

test('a row left out after findings were seen is marked so', () => {
  const state = fitted();
  const { leftOut } = change.leavingOut({ row: 9, column: null, reason: 'Wrong animal', seen: state.seen })(state.choices);
  assert.deepEqual(leftOut, [{ row: 9, column: null, reason: 'Wrong animal', seen: true }]);
  assert.deepEqual(change.takingBack(9, null)({ ...state.choices, leftOut }).leftOut, []);
});

test('a pair that was not there before is not said to have been hidden', async () => {
  const { onsetChange } = await import('../../www/changes.js');
  const after = findings();
  after.differences = [{ ...after.differences[0], from: 'Group A', to: 'Group B' }];
  assert.equal(onsetChange(findings(), after), null);
  assert.equal(onsetChange(findings(), findings({ start: 5 })).after, '5.0');
});
