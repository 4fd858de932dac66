/** The two doors to the same code: the wasm as the page loads it, and what the native command says. */

import { readFileSync } from 'node:fs';

const root = new URL('../../', import.meta.url);
const file = (path) => new URL(path, root);

/** The glue is a plain script that leaves one name; a function body keeps that name to itself. */
export function wasmSession() {
  const glue = readFileSync(file('www/wasm/courseband.js'), 'utf8');
  const made = new Function(`${glue}\nreturn wasm_bindgen;`)();
  made.initSync({ module: new WebAssembly.Module(readFileSync(file('www/wasm/courseband_bg.wasm'))) });
  return new made.Session();
}

/** The first difference over the tolerance, as a path, or null. */
export function difference(a, b, path = '') {
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
