/**
 * The wasm and the native command give the same findings: every demo under its plan, and
 * variants that take other ways through the engine, to 1e-9 relative.
 * `COURSEBAND_NATIVE` is the built command.
 */

import assert from 'node:assert/strict';
import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { test } from 'node:test';

const root = new URL('../../', import.meta.url);
const file = (path) => new URL(path, root);
const native = process.env.COURSEBAND_NATIVE ?? '';

/** The glue is a plain script that leaves one name; a function body keeps that name to itself. */
function wasmSession() {
  const glue = readFileSync(file('www/wasm/courseband.js'), 'utf8');
  const made = new Function(`${glue}\nreturn wasm_bindgen;`)();
  made.initSync({ module: new WebAssembly.Module(readFileSync(file('www/wasm/courseband_bg.wasm'))) });
  return new made.Session();
}

/** The first difference over the tolerance, as a path, or null. */
function difference(a, b, path = '') {
  if (typeof a === 'number' && typeof b === 'number') {
    return Math.abs(a - b) <= 1e-9 * Math.max(Math.abs(a), Math.abs(b), 1e-9) ? null : `${path}: ${a} and ${b}`;
  }
  if (a === null || b === null || typeof a !== 'object' || typeof b !== 'object') {
    return a === b ? null : `${path}: ${JSON.stringify(a)} and ${JSON.stringify(b)}`;
  }
  const keys = new Set([...Object.keys(a), ...Object.keys(b)]);
  for (const key of keys) {
    const found = difference(a[key], b[key], `${path}.${key}`);
    if (found) return found;
  }
  return null;
}

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
