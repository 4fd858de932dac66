/** Group names masked. */

import assert from 'node:assert/strict';
import { test } from 'node:test';
import { maskedCell, maskedPlan, maskedText, masksFor, unmasked } from '../../www/masks.js';
import { defaultPlan, planToSend } from '../../www/plan.js';
import { freshChoices } from '../../www/state.js';

const named = (letter) => `Group ${letter}`;

test('every group gets a letter of its own, and the draw decides which', () => {
  const groups = ['Saline', 'Gel', 'Foam (5%)'];
  assert.deepEqual(masksFor(groups, named, () => 0.999), { Saline: 'Group A', Gel: 'Group B', 'Foam (5%)': 'Group C' });
  assert.notDeepEqual(masksFor(groups, named, () => 0), masksFor(groups, named, () => 0.999));
  for (let k = 0; k < 20; k += 1) assert.deepEqual(Object.values(masksFor(groups, named)).sort(), ['Group A', 'Group B', 'Group C']);
});

test('what is sent names no group, and the control is still the same group', () => {
  const masks = { Saline: 'Group B', Gel: 'Group A' };
  const plan = { ...defaultPlan(), comparisons: { ...defaultPlan().comparisons, control: 'Saline' } };
  plan.reading = { ...plan.reading, group_order: ['Gel', 'Saline'] };
  const sent = planToSend({ ...freshChoices(), plan, masks }, { time: null, response: null });
  assert.equal(sent.comparisons.control, 'Group B');
  assert.deepEqual(sent.reading.group_order, ['Group A', 'Group B']);
  assert.deepEqual(sent.reading.merges, [{ from: 'Saline', into: 'Group B' }, { from: 'Gel', into: 'Group A' }]);
  assert.equal(maskedPlan(plan, null), plan);
});

test('a control chosen by its mask is the real group when names are shown again', () => {
  const plan = { ...defaultPlan(), comparisons: { ...defaultPlan().comparisons, control: 'Group A' } };
  const shown = unmasked({ ...freshChoices(), plan, masks: { Saline: 'Group B', Gel: 'Group A' } });
  assert.equal(shown.plan.comparisons.control, 'Gel');
  assert.deepEqual(unmasked({ ...freshChoices(), plan: { ...plan, reading: { ...plan.reading, group_order: ['Group A'] } }, masks: { Gel: 'Group A' } }).plan.reading.group_order, ['Gel']);
  assert.equal(shown.masks, null);
});

test('names are masked in texts, whole words only', () => {
  const masks = { Gel: 'Group A', 'Gel film': 'Group B', 'x.y': 'Group C' };
  assert.equal(maskedText('gel film and Gel, gels, Angel; x.y xzy', masks), 'Group B and Group A, gels, Angel; Group C xzy');
  assert.equal(maskedText('Gel', null), 'Gel');
});

test('groups called by numbers are masked in their own column only', () => {
  const masks = { 1: 'Group B', 2: 'Group A' };
  assert.equal(maskedText('Line 1, day 2', masks), 'Line 1, day 2');
  assert.equal(maskedCell(' 1', masks), 'Group B');
  assert.equal(maskedCell('plain  GAUZE', { 'Plain gauze': 'Group C' }), 'Group C');
  assert.equal(maskedCell('1', null), '1');
});
