/**
 * A sample of the hostile tables through the wasm: the same findings as natively, or the same message.
 * The tables are those that the test of the native command has left in the target folder.
 */

import assert from 'node:assert/strict';
import { spawnSync } from 'node:child_process';
import { existsSync, readFileSync, readdirSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { test } from 'node:test';
import { difference, wasmSession } from './doors.mjs';

const native = process.env.COURSEBAND_NATIVE ?? '';
const folder = join(dirname(native), '../tmp/hostile');
const EVERY = 4;
/** A message in one line, as the command prints it. */
const oneLine = (words) => words.split(/\s+/).filter(Boolean).join(' ');

/** What the wasm does with a table: findings, or the message of its refusal. */
function throughWasm(table, plan) {
  const session = wasmSession();
  try {
    session.open(new Uint8Array(table));
    JSON.parse(session.preview(plan));
    JSON.parse(session.describe(plan));
    return { findings: JSON.parse(session.run(plan)) };
  } catch (cause) {
    assert.ok(!(cause instanceof WebAssembly.RuntimeError), `the wasm stopped: ${cause.message}`);
    return { said: oneLine(cause.message) };
  }
}

test('hostile tables end alike through the wasm and natively', (t) => {
  assert.ok(existsSync(folder), 'no hostile tables: run cargo test --package courseband-cli first');
  const tables = readdirSync(folder).filter((name) => name.endsWith('.table')).sort();
  assert.ok(tables.length >= 150, `${tables.length} tables`);
  const counts = { findings: 0, refused: 0 };
  const sample = tables.filter((_, at) => at % EVERY === 0);
  for (const name of sample) {
    const path = join(folder, name);
    const plan = readFileSync(path.replace(/table$/, 'plan.json'), 'utf8');
    const here = throughWasm(readFileSync(path), plan);
    const there = spawnSync(native, [path, '--plan', '-'], { input: plan, maxBuffer: 1 << 28, encoding: 'utf8' });
    if (here.findings) {
      assert.equal(there.status, 0, `${name}: only the command refuses: ${there.stderr}`);
      assert.equal(difference(here.findings, JSON.parse(there.stdout)), null, name);
      counts.findings += 1;
    } else {
      assert.equal(there.status, 2, `${name}: only the wasm refuses: ${here.said}`);
      assert.equal(here.said, there.stderr.trim(), name);
      counts.refused += 1;
    }
  }
  t.diagnostic(`${sample.length} of ${tables.length} tables: ${counts.findings} with the same findings, ${counts.refused} with the same message`);
});
