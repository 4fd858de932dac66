import assert from 'node:assert/strict';
import test from 'node:test';
import { firstStop, followedAt, gapState, nearest, readingAt, step, stops } from '../../www/reading.js';
import { placeAmongVisits, spoken, whyNone } from '../../www/spoken.js';
import { findings } from './fixture.mjs';

test('the cursor stands on grid points and visits', () => {
  assert.deepEqual(stops(findings()), [0, 2.5, 3, 5, 7.5, 10]);
  assert.equal(nearest([0, 2.5, 3, 5], 2.8), 3);
  assert.equal(firstStop(findings()), 10);
});

test('steps go to the next entry and stop at the ends', () => {
  const visits = [0, 3, 10];
  assert.equal(step(visits, 3, 1), 10);
  assert.equal(step(visits, 10, 1), 10);
  assert.equal(step(visits, 0, -1), 0);
  assert.equal(step(visits, 5, 1), 10);
  assert.equal(step(visits, 5, -1), 3);
  assert.equal(step(visits, 12, -1), 10);
  assert.equal(step([], 4, 1), 4);
});

test('groups are read in the order in which the curves stand', () => {
  assert.deepEqual(readingAt(findings(), 0).groups.map((row) => row.group), ['A', 'B']);
  assert.deepEqual(readingAt(findings(), 10).groups.map((row) => row.group), ['B', 'A']);
});

test('a visit off the grid is read from the values at visits', () => {
  const reading = readingAt(findings(), 3);
  assert.equal(reading.visit, true);
  assert.equal(reading.groups.find((row) => row.group === 'B').value, 12.6);
  assert.equal(reading.gaps[0].value, 1.4);
});

test('a value that does not exist stays without one and comes last', () => {
  const broken = findings();
  broken.curves[0].response_mean[0] = null;
  const reading = readingAt(broken, 0);
  assert.deepEqual(reading.groups.map((row) => row.group), ['B', 'A']);
  assert.equal(reading.groups[1].value, null);
});

test('followed counts visits at this time or later', () => {
  assert.equal(followedAt(findings(), 0, 3), 5);
  assert.equal(followedAt(findings(), 0, 3.1), 3);
});

test('the lane has its states, and outside support none', () => {
  const [difference] = findings().differences;
  assert.equal(gapState(difference, 8), 'beyond');
  assert.equal(gapState(difference, 5), 'apart');
  assert.equal(gapState(difference, 2), 'inside');
  assert.equal(gapState(difference, 0), 'undecided');
  assert.equal(gapState({ ...difference, support: [2, 8] }, 9), 'outside');
  assert.equal(gapState({ ...difference, support: null }, 5), 'outside');
});

test('beyond and inside need a margin', () => {
  const [difference] = findings().differences;
  assert.equal(gapState({ ...difference, margin: [0, 0] }, 8), 'apart');
  assert.equal(gapState({ ...difference, margin: [0, 0] }, 2), 'undecided');
});

test('the reading is spoken whole', () => {
  const words = spoken(readingAt(findings(), 10), findings());
  assert.match(words, /^day 10\. B 21\.0, 19\.0 to 23\.0; A 12\.0/);
  assert.match(words, /B \u2212 A 9\.0, beyond/);
  assert.equal(placeAmongVisits(readingAt(findings(), 5), findings()), 'between the visits at 3 and 10');
});

test('where a group is no longer followed there is nothing to read, and the other is named', () => {
  const ended = findings();
  ended.curves[0].support = [0, 5];
  ended.differences[0].support = [0, 5];
  const reading = readingAt(ended, 7.5);
  assert.equal(reading.groups.find((row) => row.group === 'A').value, null);
  assert.equal(reading.gaps[0].value, null);
  assert.equal(whyNone(reading.gaps[0]), 'only B followed');
  assert.equal(whyNone({ ...reading.gaps[0], followed: [] }), 'neither followed');
});
