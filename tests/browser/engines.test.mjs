/**
 * The main path in three engines, from the single file and from the folder on a sub-path of a web server, and the
 * ways out of it. `COURSEBAND_FILE` and `COURSEBAND_FOLDER` are written by `cargo xtask dist`.
 */

import assert from 'node:assert/strict';
import { createReadStream, existsSync, statSync } from 'node:fs';
import { createServer } from 'node:http';
import { after, before, test } from 'node:test';
import { extname, join, normalize } from 'node:path';
import { pathToFileURL } from 'node:url';
import { engines } from './engines.mjs';

const FILE = process.env.COURSEBAND_FILE;
const FOLDER = process.env.COURSEBAND_FOLDER;
const TYPES = { '.html': 'text/html', '.js': 'text/javascript', '.css': 'text/css', '.json': 'application/json', '.wasm': 'application/wasm', '.csv': 'text/csv' };
const SUB = '/some/place/';

/** Gives the folder out below a sub-path, and remembers everything that it is asked for. */
let server;
let heard = [];
let unknown = [];
before(async () => {
  server = createServer((request, response) => {
    const path = new URL(request.url, 'http://localhost').pathname;
    heard.push(path);
    const wanted = path.startsWith(SUB) ? join(FOLDER, normalize(path.slice(SUB.length) || 'index.html')) : '';
    if (wanted === '' || !existsSync(wanted) || !statSync(wanted).isFile()) {
      unknown.push(path);
      response.writeHead(404).end();
      return;
    }
    response.writeHead(200, { 'content-type': TYPES[extname(wanted)] ?? 'application/octet-stream' });
    createReadStream(wanted).pipe(response);
  });
  server.on('upgrade', (request, socket) => { unknown.push('upgrade'); socket.destroy(); });
  await new Promise((resolve) => { server.listen(0, '127.0.0.1', resolve); });
});
after(() => { server.close(); server.closeAllConnections(); });

/** Waits in the page until a condition, given as a function without arguments, holds. */
async function until(page, condition, seconds = 30) {
  for (let k = 0; k < seconds * 20; k += 1) {
    if (await page.run(condition)) return;
    await new Promise((resolve) => { setTimeout(resolve, 50); });
  }
  assert.fail(`waited ${seconds} s for ${condition}; the page shows: ${await page.run(() => document.body.innerText.slice(0, 600))}`);
}
const rested = () => ['ready', 'boundary'].includes(document.documentElement.dataset.state ?? '');
const findings = () => document.querySelector('[data-region="findings"]')?.textContent ?? '';
const go = (page, room) => page.run((name) => { location.hash = `#/${name}`; }, room);

const ROWS = Array.from({ length: 60 }, (_, k) => `secret${k % 12},${Math.floor(k / 12)},${k % 2 ? 'hiddenarm' : 'otherarm'},${(20 + (k % 2) * Math.floor(k / 12) * 2 + ((k * 7) % 5) / 5).toFixed(1)}`);
const TABLE = ['secretid,day,arm,secretvalue', ...ROWS].join('\n');

/** Every way out, tried from the page and from a worker; gives what the browser said to each. */
const tries = async (target) => {
  // Out of the turn in which a test driver may be allowed more than the page is.
  await new Promise((resolve) => { setTimeout(resolve, 0); });
  const directives = new Set();
  document.addEventListener('securitypolicyviolation', (event) => directives.add(event.effectiveDirective));
  const attempts = {
    fetch: () => fetch(target), xhr: () => { const x = new XMLHttpRequest(); x.open('GET', target); x.send(); },
    socket: () => new WebSocket(target.replace('http', 'ws')), events: () => new EventSource(target), beacon: () => navigator.sendBeacon(target, 'x'),
    image: () => { new Image().src = target; }, worker: () => new Worker(target), shared: () => new SharedWorker(target),
    frame: () => { const f = document.createElement('iframe'); f.src = target; document.body.append(f); },
    script: () => { const s = document.createElement('script'); s.src = target; document.head.append(s); },
    inline: () => { const s = document.createElement('script'); s.textContent = 'window.broken = true'; document.head.append(s); },
    evaluated: () => { window.broken = new Function('return true')(); },
    form: () => { const f = document.createElement('form'); f.action = target; document.body.append(f); f.submit(); },
    style: () => { const l = document.createElement('link'); l.rel = 'stylesheet'; l.href = target; document.head.append(l); },
    font: () => new FontFace('x', `url(${target})`).load(),
    object: () => { const o = document.createElement('object'); o.data = target; document.body.append(o); },
    media: () => { const v = document.createElement('video'); v.src = target; document.body.append(v); },
    manifest: () => { const l = document.createElement('link'); l.rel = 'manifest'; l.href = target; document.head.append(l); },
    ping: () => { const a = document.createElement('a'); a.href = '#/courses'; a.ping = target; document.body.append(a); a.click(); },
    service: () => navigator.serviceWorker?.register(target),
  };
  for (const attempt of Object.values(attempts)) {
    try { await Promise.race([attempt(), new Promise((resolve) => { setTimeout(resolve, 300); })]); } catch { /* refused at once */ }
  }
  const inWorker = await new Promise((resolve) => {
    const text = `(async () => {
      const sent = [];
      await fetch('${target}').then(() => sent.push('fetch'), () => {});
      try { importScripts('${target}'); sent.push('importScripts'); } catch {}
      try { const x = new XMLHttpRequest(); x.open('GET', '${target}', false); x.send(); sent.push('xhr'); } catch {}
      await new Promise((done) => { try { const s = new WebSocket('${target.replace('http', 'ws')}'); s.onopen = () => { sent.push('socket'); done(); }; s.onerror = done; } catch { done(); } });
      postMessage(sent);
    })()`;
    const worker = new Worker(URL.createObjectURL(new Blob([text])));
    worker.onmessage = ({ data }) => resolve(data);
    worker.onerror = () => resolve(['the worker did not run']);
  });
  await new Promise((resolve) => { setTimeout(resolve, 400); });
  return { directives: [...directives], inWorker, broken: window.broken === true, peer: typeof window.RTCPeerConnection, address: location.href };
};

for (const { name, open, missing } of engines) {
  for (const form of ['single file', 'folder']) {
    const skip = FILE === undefined ? 'COURSEBAND_FILE is not set' : missing;
    test(`${name}, ${form}: from a pasted table to findings, and no way out`, { skip, timeout: 240000 }, async (t) => {
      const origin = `http://127.0.0.1:${server.address().port}`;
      heard = [];
      unknown = [];
      const page = await open(form === 'folder' ? origin + SUB : pathToFileURL(FILE).href);
      try {
        await until(page, () => document.querySelector('[data-region="findings"]')?.textContent?.includes('runs below'));
        t.diagnostic(`${page.version}: first findings ${Math.round(await page.run(() => performance.now()))} ms after the start, or a little before`);
        const loaded = heard.length;

        // The strips are drawn: the canvas holds several colours.
        await until(page, () => {
          const canvas = document.querySelector('.strips-frame canvas, canvas');
          const { data } = canvas.getContext('2d').getImageData(0, 0, canvas.width, canvas.height);
          const seen = new Set();
          for (let k = 0; k < data.length; k += 4 * 37) seen.add(`${data[k]},${data[k + 1]},${data[k + 2]}`);
          return seen.size > 20;
        });
        // A real key moves the cursor.
        await page.run(() => document.querySelector('[role="slider"]').focus());
        const before = await page.run(() => document.querySelector('[role="slider"]').getAttribute('aria-valuetext'));
        await page.press('Home');
        await until(page, `() => document.querySelector('[role="slider"]').getAttribute('aria-valuetext') !== ${JSON.stringify(before)}`);
        if (process.env.COURSEBAND_SHOTS) await page.shot(`${process.env.COURSEBAND_SHOTS}/${name}-${form.replace(' ', '-')}.png`);

        // An own table, pasted; it is fitted, calibrated, and every room stands without sideways scrolling.
        await go(page, 'data');
        await page.run((table) => {
          const box = document.querySelector('[data-region="paste"] textarea');
          box.value = table;
          box.dispatchEvent(new Event('input', { bubbles: true }));
        }, TABLE);
        await until(page, () => document.querySelector('[data-region="invented"]').hidden);
        await until(page, rested);
        await go(page, 'courses');
        await until(page, () => document.querySelector('[data-region="findings"]')?.textContent?.includes('hiddenarm'));
        for (const room of await page.run(() => Array.from(document.querySelectorAll('.rooms-links a'), (link) => link.getAttribute('href').slice(2)))) {
          await go(page, room);
          await until(page, rested);
          await page.run(() => new Promise((resolve) => { setTimeout(resolve, 150); }));
          assert.ok(await page.run(() => document.documentElement.scrollWidth <= document.documentElement.clientWidth), `${room} scrolls sideways`);
        }
        await go(page, 'courses');
        const first = await page.run(findings);
        await page.run(() => document.querySelector('[data-choice="shape"]').click());
        await until(page, () => document.querySelector('[data-alternative="straight"]') !== null);
        await page.run(() => document.querySelector('[data-alternative="straight"]').click());
        await until(page, `() => document.querySelector('[data-region="findings"]').textContent !== ${JSON.stringify(first)}`);
        await until(page, rested);
        // Calibration begins a while after the last choice, and ends.
        await until(page, () => /Calibrated: on \d/.test(document.body.innerText) && !/being calibrated/.test(document.body.innerText), 90);

        // The copy checks itself: this engine computes what the native command computed.
        await page.run(() => document.querySelector('[data-act="check-copy"]').click());
        await until(page, () => document.querySelector('dialog.copy-check').dataset.agrees !== undefined, 60);
        const check = await page.run(() => document.querySelector('dialog.copy-check').innerText);
        assert.equal(await page.run(() => document.querySelector('dialog.copy-check').dataset.agrees), 'true', check);
        assert.match(check, /as it was made/);
        t.diagnostic(check.split('\n').find((line) => line.includes('numbers of')));
        if (process.env.COURSEBAND_SHOTS) await page.shot(`${process.env.COURSEBAND_SHOTS}/${name}-${form.replace(' ', '-')}-check.png`);
        await page.run(() => document.querySelector('dialog.copy-check').close());

        // Nothing was asked for since the start, and nothing of the data lies about.
        const own = (url) => /^(file|blob|data|about):/.test(url) || (form === 'folder' && url.startsWith(origin + SUB));
        assert.deepEqual(heard.slice(loaded), []);
        assert.deepEqual(unknown, []);
        assert.deepEqual((page.requests ?? []).filter((url) => !own(url)), []);
        const later = await page.run(() => performance.getEntriesByType('resource').map((entry) => entry.name));
        assert.deepEqual(later.filter((url) => !own(url)), []);
        const left = await page.run(async () => {
          const stored = (which) => { try { return JSON.stringify({ ...window[which] }); } catch { return ''; } };
          const bases = await Promise.resolve(indexedDB.databases?.()).catch(() => []);
          return [location.href, document.title, stored('localStorage'), stored('sessionStorage'), document.cookie, JSON.stringify(bases ?? []), JSON.stringify(history.state)].join(' ');
        });
        assert.doesNotMatch(left, /secret|hiddenarm/);
        assert.doesNotMatch(page.problems.join('\n'), /secret|hiddenarm/);
        assert.deepEqual(page.problems, []);

        // And now on purpose.
        const outcome = await page.run(tries, `${origin}/out`);
        assert.deepEqual(outcome.inWorker, []);
        assert.equal(outcome.broken, false);
        assert.deepEqual(unknown, []);
        for (const directive of ['connect-src', 'img-src', 'frame-src', 'script-src-elem', 'style-src-elem', 'form-action', 'font-src', 'media-src', 'object-src']) {
          assert.ok(outcome.directives.includes(directive), `${directive} in ${outcome.directives}`);
        }
        assert.equal(outcome.peer, 'undefined');
        assert.doesNotMatch(outcome.address, /out/);
      } finally {
        await page.close();
      }
    });
  }
}
