import assert from 'node:assert/strict';
import test from 'node:test';
import {
  decimalsFor, estimatedTime, fixed, parseNumber, percentLevel, plainTime, significant, withInterval,
} from '../../www/numbers.js';

test('significant digits never turn into powers of ten', () => {
  assert.equal(significant(24.3871), '24.4');
  assert.equal(significant(0.0001234), '0.000123');
  assert.equal(significant(-1.5), '\u22121.50');
  assert.equal(significant(12345.6), '12\u202f346');
  assert.equal(significant(null), '\u2013');
  assert.equal(significant(Number.NaN), '\u2013');
});

test('a rounded zero has no minus', () => {
  assert.equal(fixed(-0.004, 2), '0.00');
});

test('an estimate gets the decimals of its interval', () => {
  assert.deepEqual(withInterval(24.3871, 20.81, 28.63), { value: '24.4', lower: '20.8', upper: '28.6' });
  assert.deepEqual(withInterval(45.2, 35.4, 58.1), { value: '45', lower: '35', upper: '58' });
  assert.equal(withInterval(null, 1, 2), null);
  assert.deepEqual(withInterval(2, null, null), { value: '2.00', lower: '\u2013', upper: '\u2013' });
});

test('times are written to the span of the follow-up', () => {
  assert.equal(estimatedTime(7.04, 21), '7.0');
  assert.equal(estimatedTime(151.6, 2000), '152');
  assert.equal(estimatedTime(0.1234, 0.5), '0.123');
  assert.equal(plainTime(14, 21), '14');
  assert.equal(plainTime(14.7, 21), '14.7');
  assert.equal(plainTime(100, 21), '100');
});

test('what a person types', () => {
  assert.equal(parseNumber(' 10,5 '), 10.5);
  assert.equal(parseNumber('\u22123'), -3);
  assert.equal(parseNumber(''), null);
  assert.equal(parseNumber('ten'), null);
  for (const written of ['1234.5', '1234,5', '1,234.5', '1.234,5', '1 234,5', '1\u202f234.5', '1\u2019234.5']) assert.equal(parseNumber(written), 1234.5, written);
  assert.equal(parseNumber('1.234.567,5'), 1234567.5);
  for (const no of ['1,2,3', '0x10', '1.2.3', '12 34', '1,23.4', 'Infinity']) assert.equal(parseNumber(no), null, no);
  assert.equal(percentLevel(0.95), '95\u00a0%');
  assert.equal(percentLevel(0.999), '99.9\u00a0%');
  assert.equal(decimalsFor(0, 3), 0);
});
