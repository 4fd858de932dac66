import assert from 'node:assert/strict';
import { readFileSync, readdirSync } from 'node:fs';
import { dirname, join, normalize } from 'node:path';
import test from 'node:test';

const WWW = new URL('../../www/', import.meta.url).pathname;
const html = readFileSync(join(WWW, 'index.html'), 'utf8');

/** Every module that the page loads, from its first one on. */
function modules(path, seen = new Set()) {
  if (seen.has(path)) return seen;
  seen.add(path);
  const text = readFileSync(join(WWW, path), 'utf8');
  for (const [, name] of text.matchAll(/from '(\.[^']+)'/g)) {
    modules(normalize(join(dirname(path), name)), seen);
  }
  return seen;
}

test('every module is asked for at once', () => {
  const loaded = Array.from(modules('main.js')).filter((path) => path !== 'main.js').sort();
  const preloaded = Array.from(html.matchAll(/rel="modulepreload" href="\.\/([^"]+)"/g), ([, path]) => path).sort();
  assert.deepEqual(preloaded, loaded);
});

test('every style sheet is linked', () => {
  const pages = readdirSync(WWW).filter((name) => name.endsWith('.html')).map((name) => readFileSync(join(WWW, name), 'utf8'));
  const linked = Array.from(new Set(Array.from(pages.join('').matchAll(/href="\.\/styles\/([^"]+)"/g), ([, name]) => name))).sort();
  assert.deepEqual(linked, readdirSync(join(WWW, 'styles')).sort());
});

test('the page holds no script, style or address of its own', () => {
  assert.doesNotMatch(html, /<script(?![^>]*\ssrc=)[^>]*>/);
  assert.doesNotMatch(html, /<style|\sstyle=|\son\w+=/);
  assert.doesNotMatch(html, /https?:/);
});

test('no module writes markup, stores or logs', () => {
  for (const path of modules('main.js')) {
    const text = readFileSync(join(WWW, path), 'utf8').replace(/\/\*[\s\S]*?\*\//g, '');
    assert.doesNotMatch(text, /innerHTML|outerHTML|insertAdjacentHTML|document\.write|sessionStorage|document\.cookie|console\.\w/, path);
    if (path !== 'kept.js') assert.doesNotMatch(text, /localStorage|indexedDB/, path);
    if (path !== 'assets.js') assert.doesNotMatch(text, /\bfetch\(|XMLHttpRequest|WebSocket|EventSource|sendBeacon|RTCPeerConnection/, path);
  }
});
