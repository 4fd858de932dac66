/**
 * The wasm and the native command give the same findings: every demo under its plan, and
 * variants that take other ways through the engine, to 1e-9 relative.
 * `COURSEBAND_NATIVE` is the built command.
 */

import assert from 'node:assert/strict';
import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { test } from 'node:test';
import { difference, wasmSession } from './doors.mjs';

const root = new URL('../../', import.meta.url);
const file = (path) => new URL(path, root);
const native = process.env.COURSEBAND_NATIVE ?? '';

const VARIANTS = [
  {},
  { subjects: 'none', curves: { shape: 'straight' }, comparisons: { small_sample: 'none' } },
  { subjects: 'intercept', curves: { shape: 'by-time' }, response: { transform: 'identity' }, comparisons: {} },
  { subjects: 'slope', subjects_spread: 'by-group', errors: { spread: 'by-group' } },
  { subjects: 'intercept', errors: { serial: 'ar1', nugget: true } },
  { subjects: 'intercept', comparisons: { small_sample: 'calibrated', refits: 99 } },
];

for (const demo of JSON.parse(readFileSync(file('demo-data/demos.json'), 'utf8'))) {
  VARIANTS.forEach((variant, k) => {
    // Dates never quite on the day have no mean per time.
    if (demo.file === 'ferritin.csv' && variant.curves?.shape === 'by-time') return;
    // Beside a distribution with a link errors are independent and of one kind.
    if ((demo.plan.response?.distribution ?? 'normal') !== 'normal' && variant.errors) return;
    test(`${demo.file}, variant ${k}`, () => {
      const plan = JSON.stringify({ ...demo.plan, ...variant });
      const session = wasmSession();
      const table = readFileSync(file(`demo-data/${demo.file}`));
      session.open(new Uint8Array(table));
      const page = JSON.parse(session.run(plan));
      const path = new URL(`demo-data/${demo.file}`, root).pathname;
      const command = JSON.parse(execFileSync(native, [path, '--plan', '-'], { input: plan, maxBuffer: 1 << 28 }));
      assert.equal(difference(page, command), null);
      assert.ok(command.curves.length > 0, command.fit.remarks.join(' '));
    });
  });
}
