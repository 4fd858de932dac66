import assert from 'node:assert/strict';
import test from 'node:test';
import { compared, exampleOf } from '../../www/copy-check.js';

const expected = {
  fit: { status: 'converged', serial_correlation: null },
  curves: [{ group: 'a', at_visits: { mean: [1, null, 3] } }],
  differences: [{ from: 'a', to: 'b', at_visits: { time: [0, 7, 14], estimate: [0.5, 2, null] } }],
};
const changed = (make) => { const copy = structuredClone(expected); make(copy); return copy; };

test('what agrees to the last bits agrees, and more than expected does no harm', () => {
  const got = changed((copy) => { copy.curves[0].at_visits.mean[0] = 1 + 1e-12; copy.curves[0].at_visits.se = [9]; copy.extra = 1; });
  const found = compared(expected, got);
  assert.deepEqual([found.numbers, found.first], [7, null]);
  assert.ok(found.worst > 0 && found.worst < 1e-11);
});

test('every kind of difference is found, and where', () => {
  const cases = {
    'curves.0.at_visits.mean.0': (copy) => { copy.curves[0].at_visits.mean[0] = 1 + 2e-9; },
    'curves.0.at_visits.mean.1': (copy) => { copy.curves[0].at_visits.mean[1] = 0; },
    'curves.0.at_visits.mean.2': (copy) => { copy.curves[0].at_visits.mean[2] = NaN; },
    'fit.status': (copy) => { copy.fit.status = 'boundary'; },
    'differences.0.to': (copy) => { copy.differences = []; },
    'curves.0.group': (copy) => { delete copy.curves[0].group; },
    'curves.0.at_visits.mean': (copy) => { copy.curves[0].at_visits.mean.push(4); },
  };
  for (const [where, make] of Object.entries(cases)) {
    const { first } = compared(expected, changed(make));
    assert.ok(first === where || (where === 'differences.0.to' && first !== null), `${where}: ${first}`);
  }
});

test('the example is the last gap there is', () => {
  assert.deepEqual(exampleOf(expected, expected), { what: ['b', 'a'], time: 7, expected: 2, got: 2 });
  assert.deepEqual(exampleOf(expected, null), { what: ['b', 'a'], time: 7, expected: 2, got: null });
  assert.equal(exampleOf({ differences: [] }, {}), null);
});
