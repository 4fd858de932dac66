/**
 * What is given away: the single file from a disk, and the folder's size. Attempts to send anything are refused.
 * `COURSEBAND_FILE` and `COURSEBAND_FOLDER` are written by `cargo xtask dist`.
 */

import assert from 'node:assert/strict';
import { readFile, stat } from 'node:fs/promises';
import { createServer } from 'node:http';
import { after, before, test } from 'node:test';
import { pathToFileURL } from 'node:url';
import { gzipSync } from 'node:zlib';
import { launch, rested } from './harness.mjs';

const FILE = process.env.COURSEBAND_FILE;
const FOLDER = process.env.COURSEBAND_FOLDER;
const skip = FILE === undefined ? 'COURSEBAND_FILE is not set' : false;

let browser;
before(async () => { browser = await launch(); });
after(async () => { await browser?.close(); });

async function opened(hash = '') {
  const context = await browser.newContext({ viewport: { width: 1440, height: 900 } });
  const page = await context.newPage();
  page.problems = [];
  page.requests = [];
  page.on('console', (message) => { if (message.type() === 'error') page.problems.push(message.text()); });
  page.on('pageerror', (error) => page.problems.push(error.message));
  page.on('request', (request) => page.requests.push(request.url()));
  await page.goto(pathToFileURL(FILE).href + hash);
  await page.waitForFunction(() => document.querySelector('[data-region="findings"]')?.textContent?.includes('runs below'), null, { polling: 20 });
  return page;
}

test('the single file runs from a disk, through every room, and asks for nothing', { skip }, async (t) => {
  const page = await opened();
  t.diagnostic(`first findings ${await page.evaluate(() => Math.round(performance.now()))} ms after the start, from one file`);
  for (const room of ['data', 'checks', 'usual', 'size', 'courses']) {
    await page.evaluate((name) => { location.hash = `#/${name}`; }, room);
    await rested(page);
  }
  await page.evaluate(() => { location.hash = '#/data'; });
  await page.fill('[data-region="paste"] textarea', 'secretname,day,arm,value\n' + Array.from({ length: 40 }, (_, k) => `s${k % 8},${Math.floor(k / 8)},${k % 2 ? 'b' : 'a'},${20 + (k % 7) + k / 5}`).join('\n'));
  await page.waitForTimeout(500);
  await rested(page);
  await page.waitForTimeout(2500);
  const own = (url) => url.startsWith('file:') || url.startsWith('blob:') || url.startsWith('data:');
  assert.deepEqual(page.requests.filter((url) => !own(url)), []);
  const left = await page.evaluate(() => [location.href, document.title, JSON.stringify({ ...localStorage }), JSON.stringify({ ...sessionStorage }), document.cookie].join(' '));
  assert.doesNotMatch(left, /secretname/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('the check of a copy finds one changed digit, and a changed checksum', { skip }, async () => {
  const page = await opened();
  await page.evaluate(() => {
    const held = document.getElementById('courseband-cases');
    const cases = JSON.parse(held.textContent);
    cases.cases[1].expected.curves[0].at_visits.mean[0] *= 1 + 3e-9;
    cases.wasm = cases.wasm.replace(/^./, (digit) => (digit === '0' ? '1' : '0'));
    held.textContent = JSON.stringify(cases);
  });
  await page.click('[data-act="check-copy"]');
  await page.waitForSelector('dialog.copy-check[data-agrees="false"]');
  const said = await page.innerText('dialog.copy-check');
  assert.match(said, /1 of \d+ cases do not agree/);
  assert.match(said, /no \(curves\.0\.at_visits\.mean\.0\)/);
  assert.match(said, /not the one that this copy was made with/);
  await page.context().close();
});

test('attempts to send are refused by the policy, in the page and in its workers', { skip }, async () => {
  // A server that would hear every attempt.
  const heard = [];
  const server = createServer((request, response) => { heard.push(request.url); response.end(); });
  server.on('upgrade', (request, socket) => { heard.push('upgrade'); socket.destroy(); });
  await new Promise((resolve) => { server.listen(0, '127.0.0.1', resolve); });
  const page = await opened();
  const outcome = await page.evaluate(async (target) => {
    const refused = [];
    document.addEventListener('securitypolicyviolation', (event) => refused.push(event.effectiveDirective));
    const tries = {
      fetch: () => fetch(target), xhr: () => { const x = new XMLHttpRequest(); x.open('GET', target); x.send(); },
      socket: () => new WebSocket(target.replace('http', 'ws')), events: () => new EventSource(target), beacon: () => navigator.sendBeacon(target, 'x'),
      image: () => { new Image().src = target; }, worker: () => new Worker('data:text/javascript,1'),
      frame: () => { const f = document.createElement('iframe'); f.src = target; document.body.append(f); },
      script: () => { const s = document.createElement('script'); s.src = target; document.head.append(s); },
      inline: () => { const s = document.createElement('script'); s.textContent = 'window.broken = true'; document.head.append(s); },
      form: () => { const f = document.createElement('form'); f.action = target; document.body.append(f); f.submit(); },
      style: () => { const l = document.createElement('link'); l.rel = 'stylesheet'; l.href = target; document.head.append(l); },
    };
    for (const attempt of Object.values(tries)) { try { await attempt(); } catch { /* refused at once */ } }
    const worker = await new Promise((resolve) => {
      const blob = new Blob([`fetch('${target}').then(() => postMessage('sent'), () => postMessage('refused'))`]);
      const w = new Worker(URL.createObjectURL(blob));
      w.onmessage = ({ data }) => resolve(data);
      w.onerror = () => resolve('refused');
    });
    await new Promise((resolve) => setTimeout(resolve, 300));
    return { refused: [...new Set(refused)], worker, broken: window.broken === true };
  }, `http://127.0.0.1:${server.address().port}/`);
  for (const directive of ['connect-src', 'img-src', 'frame-src', 'script-src-elem', 'style-src-elem', 'form-action', 'worker-src']) {
    assert.ok(outcome.refused.includes(directive), `${directive} in ${outcome.refused}`);
  }
  assert.equal(outcome.worker, 'refused');
  assert.equal(outcome.broken, false);
  assert.deepEqual(heard, []);
  server.close();
  await page.context().close();
});

test('both are small enough, and hold no call that sends', { skip }, async (t) => {
  const file = (await stat(FILE)).size;
  const wasm = gzipSync(await readFile(`${FOLDER}/wasm/courseband_bg.wasm`), { level: 9 }).length;
  t.diagnostic(`single file ${Math.round(file / 1000)} kB, wasm ${Math.round(wasm / 1000)} kB compressed`);
  assert.ok(file <= 3_000_000 && wasm <= 1_200_000);
  const text = await readFile(FILE, 'utf8');
  const script = text.slice(text.lastIndexOf('<script>'));
  for (const way of ['XMLHttpRequest', 'WebSocket', 'EventSource', 'sendBeacon', 'new RTC', 'importScripts', 'window.open', 'location.href =', 'location.assign', 'location.replace', '.submit(', '_blank', 'http-equiv=\"refresh', 'sessionStorage', 'eval(', 'innerHTML', 'document.write']) {
    assert.ok(!script.includes(way), way);
  }
  // One module touches the browser's storage, and only when asked.
  const kept = await readFile(new URL('../../www/kept.js', import.meta.url), 'utf8');
  for (const store of ['localStorage', 'indexedDB']) assert.equal(script.split(store).length, kept.split(store).length, store);
  // Comments name types by `import(…)`; nothing else may.
  assert.doesNotMatch(script.replace(/\/\*\*[^]*?\*\//g, ''), /\bimport\s*\(/);
  // Addresses are names of drawing vocabularies, or of nothing.
  const addresses = new Set(script.match(/\b(?:https?|wss?):\/\/[^\s'"`)]*/g) ?? []);
  assert.deepEqual([...addresses].filter((address) => address !== 'http://www.w3.org/2000/svg'), []);
  // The folder's own start fetches its files; that is the only place.
  assert.equal(script.split('fetch(').length - 1, 1);
});
