/**
 * "Check this copy": the reference cases that a copy carries, computed again here, and held to what the native
 * command found when the copy was made.
 */

import { fingerprintOf } from './analysis-file.js';
import { Engine } from './engine.js';

/** Relative difference up to which two numbers agree. */
export const TOLERANCE = 1e-9;

/** @typedef {{name: string, file: string, title: string, plan: Object, expected: any}} ReferenceCase */
/** @typedef {{version: string, wasm: string, cases: ReferenceCase[]}} Reference */
/** @typedef {{what: string[], time: number, expected: number, got: number|null}} Example */
/** @typedef {{numbers: number, worst: number, first: string|null}} Comparison `first`: where the first difference over the tolerance is. */
/** @typedef {Comparison & {name: string, title: string, example: Example|null, message: string|null}} CaseResult */
/** @typedef {{version: string, made: string, expectedDigest: string, digest: string|null, results: CaseResult[]}} CopyReport */

/**
 * The cases of this copy, or null where it carries none.
 * @returns {Reference|null}
 */
export function reference() {
  const held = document.getElementById('courseband-cases')?.textContent ?? '';
  return held === '' ? null : JSON.parse(held);
}

/**
 * Holds every leaf of `expected` to the same place of `got`.
 * @param {any} expected
 * @param {any} got
 * @returns {Comparison}
 */
export function compared(expected, got) {
  /** @type {Comparison} */
  const found = { numbers: 0, worst: 0, first: null };
  /** @param {any} one @param {any} other @param {string} path */
  const walk = (one, other, path) => {
    if (typeof one === 'number' && typeof other === 'number') {
      const apart = Math.abs(one - other) / Math.max(Math.abs(one), Math.abs(other), TOLERANCE);
      found.numbers += 1;
      found.worst = Math.max(found.worst, apart);
      if (!(apart <= TOLERANCE)) found.first ??= path;
    } else if (one === null || typeof one !== 'object') {
      if (one !== other) found.first ??= path;
    } else {
      if (Array.isArray(one) && one.length !== other?.length) found.first ??= path;
      for (const key of Object.keys(one)) walk(one[key], other?.[key], path === '' ? key : `${path}.${key}`);
    }
  };
  walk(expected, got, '');
  return found;
}

/**
 * One number to look at: the gap of the first pair at its last visit.
 * @param {any} expected
 * @param {any} got
 * @returns {Example|null}
 */
export function exampleOf(expected, got) {
  const gap = expected.differences[0];
  const { time = [], estimate = [] } = gap?.at_visits ?? {};
  const last = estimate.findLastIndex((/** @type {number|null} */ value) => value !== null);
  if (last < 0) return null;
  const here = got?.differences?.[0]?.at_visits?.estimate?.[last];
  return { what: [gap.to, gap.from], time: time[last], expected: estimate[last], got: typeof here === 'number' ? here : null };
}

/**
 * Computes all cases, one after another, in a worker of its own.
 * @param {import('./assets.js').Assets} assets
 * @param {Reference} held
 * @param {(done: number, total: number) => void} tell
 * @returns {Promise<CopyReport>}
 */
export async function checkCopy(assets, held, tell) {
  const engine = new Engine(assets.module, assets.workerText);
  const results = [];
  let version = '';
  try {
    for (const one of held.cases) {
      tell(results.length, held.cases.length);
      const { name, title } = one;
      try {
        const table = assets.tables.get(one.file);
        if (!table) throw new Error(one.file);
        await engine.open(table);
        const got = JSON.parse((await engine.run(JSON.stringify(one.plan))).findings);
        version = got.version;
        results.push({ name, title, ...compared(one.expected, got), example: exampleOf(one.expected, got), message: null });
      } catch (cause) {
        const message = cause instanceof Error ? cause.message : String(cause);
        results.push({ name, title, numbers: 0, worst: 0, first: '', example: exampleOf(one.expected, null), message });
      }
    }
  } finally {
    engine.end();
  }
  const digest = await fingerprintOf(new Uint8Array(await assets.bytes));
  return { version, made: held.version, expectedDigest: held.wasm, digest, results };
}
