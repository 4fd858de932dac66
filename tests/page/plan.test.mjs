import assert from 'node:assert/strict';
import test from 'node:test';
import { alternativesOf } from '../../www/alternatives.js';
import {
  completePlan, controlLike, defaultPlan, pairCount, planToSend, withRole, withSection, withTransform,
} from '../../www/plan.js';
import { lineText, planLines } from '../../www/plan-lines.js';
import { freshChoices } from '../../www/state.js';

const context = {
  columns: { subject: 'id', time: 'day', group: 'dressing', response: 'area', cluster: null },
  groups: ['Saline', 'Hydrogel', 'Foam'],
  timeWord: 'day',
  candidates: ['id', 'day', 'dressing', 'area'].map((name) => ({ name, reason: '' })),
  nonPositive: [],
};

const choicesWith = (plan) => ({ ...freshChoices(), plan });
const linesOf = (plan, open = false) => planLines(choicesWith(plan), context, open).map(lineText);

test('a short plan is filled in, section by section', () => {
  const plan = completePlan({ curves: { shape: 'straight' }, subjects: 'slope' });
  assert.equal(plan.curves.shape, 'straight');
  assert.equal(plan.curves.dimension, 'auto');
  assert.equal(plan.subjects, 'slope');
});

test('rows left out and words travel with the plan', () => {
  const choices = { ...freshChoices(), leftOut: [{ row: 14, column: null, reason: 'Died', seen: true }, { row: 15, column: 'day 3', reason: 'Slip', seen: true }], noun: { one: 'mouse', many: 'mice' }, called: { area: 'Wound' } };
  const sent = planToSend(choices, { time: 'day', response: 'area' });
  assert.deepEqual(sent.exclusions, [{ row: 14, reason: 'Died' }, { row: 15, column: 'day 3', reason: 'Slip' }]);
  assert.deepEqual(sent.words, { subject: 'mouse', subjects: 'mice', time: null, response: 'Wound' });
});

test('a margin loses its meaning with its scale', () => {
  const percent = withSection(withTransform(defaultPlan(), 'log'), 'comparisons', { margin: 10, margin_unit: 'percent' });
  assert.equal(withTransform(percent, 'identity').comparisons.margin, 0);
  assert.equal(withTransform(percent, 'identity').comparisons.margin_unit, 'response');
  assert.equal(withTransform(percent, 'log').comparisons.margin, 10);
});

test('a role moves to another column', () => {
  const plan = withRole(defaultPlan(), context.columns, 'area', 'group');
  assert.equal(plan.columns.group, 'area');
  assert.equal(plan.columns.response, null);
  const unused = withRole(defaultPlan(), context.columns, 'dressing', 'unused');
  assert.equal(unused.columns.group, false);
  assert.equal(unused.columns.subject, 'id');
});

test('control-like names and the count of pairs', () => {
  assert.equal(controlLike(['Drug', 'Vehicle']), 'Vehicle');
  assert.equal(controlLike(['saline ', 'Gel']), 'saline ');
  assert.equal(controlLike(['Controller A', 'Gel']), null);
  assert.equal(pairCount(defaultPlan(), 6), 15);
  assert.equal(pairCount(withSection(defaultPlan(), 'comparisons', { pairs: 'against-control', control: 'A' }), 6), 5);
});

test('the default plan reads aloud, with its negative forms', () => {
  assert.deepEqual(linesOf(defaultPlan()), [
    'Followed: area by day, a curved course per dressing, on the measured scale.',
    'Subjects vary: each subject has its own level; visits otherwise independent; spread the same in every group.',
    'Compared: every pair of groups; a gap of any size matters; 95\u00a0% bands that hold over the whole course and all 3 pairs at once.',
  ]);
});

test('a margin in percent names its group and its ratios', () => {
  const plan = completePlan({
    response: { transform: 'log' },
    comparisons: { pairs: 'against-control', control: 'Saline', margin: 10, margin_unit: 'percent' },
  });
  assert.match(linesOf(plan)[2], /each with Saline; a gap under 10\u00a0% of Saline \(ratio 0\.90 to 1\.11\) does not matter; .* both pairs at once/);
});

test('a margin in the unit of the response is written whole', () => {
  const size = (margin) => linesOf(completePlan({ comparisons: { margin } }))[2].match(/under (.*) does not/)[1];
  assert.equal(size(0.5), '0.5');
  assert.equal(size(100), '100');
  assert.equal(size(12.25), '12.25');
});

test('a choice off its default is never folded', () => {
  const plan = completePlan({ curves: { dimension: 12, smoothness: 'shared' }, comparisons: { small_sample: 'none' }, subjects_spread: 'by-group' });
  const lines = linesOf(plan);
  assert.match(lines[0], /bends 12 knots; smoothness shared by the groups/);
  assert.match(lines[1], /courses vary by their own amount in each group/);
  assert.match(lines[2], /small samples not allowed for/);
  assert.match(linesOf(defaultPlan(), true)[0], /bends as the data ask/);
});

test('every choice has exactly one chosen alternative by default', () => {
  for (const id of ['response', 'time', 'group', 'shape', 'dimension', 'smoothness', 'scale', 'subjects', 'serial', 'spread', 'subjects_spread', 'pairs', 'level', 'band', 'small_sample']) {
    const rows = alternativesOf(id, defaultPlan(), context);
    assert.equal(rows.filter((row) => row.chosen).length, 1, id);
    for (const row of rows) assert.notEqual(row.name, '', `${id} ${row.id}`);
  }
});

test('every alternative, once taken, is the chosen one', () => {
  for (const id of ['shape', 'dimension', 'smoothness', 'scale', 'subjects', 'serial', 'spread', 'subjects_spread', 'pairs', 'level', 'band', 'small_sample']) {
    for (const row of alternativesOf(id, defaultPlan(), context)) {
      const chosen = alternativesOf(id, row.plan, context).find((one) => one.chosen);
      assert.equal(chosen?.id, row.id, id);
    }
  }
});

test('log is greyed with the rows that forbid it', () => {
  const rows = alternativesOf('scale', defaultPlan(), { ...context, nonPositive: [14, 52] });
  assert.match(rows.find((row) => row.id === 'log').greyed, /lines 14, 52 hold zero or less/);
});

test('what shared ids mean is asked again when the group is another column', () => {
  const now = { subject: 'id', time: 'day', group: 'arm', response: 'y', cluster: null };
  const plan = withSection(defaultPlan(), 'reading', { shared_ids: 'different' });
  assert.equal(withRole(plan, now, 'sex', 'group').reading.shared_ids, null);
  assert.equal(withRole(plan, now, 'z', 'response').reading.shared_ids, 'different');
  assert.equal(withRole(plan, { ...now, group: null }, 'z', 'response').reading.shared_ids, 'different');
});
