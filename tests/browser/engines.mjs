/**
 * Three engines behind one small door, with as few words as they share: open an address, run a function in the
 * page, press a key, take a picture. Chromium through playwright; Firefox by WebDriver BiDi over its own socket;
 * WebKit by WebDriver over HTTP. An engine that is not on this machine says so in `missing`.
 */

import { execFileSync, spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { launch } from './harness.mjs';

/**
 * @typedef {Object} Opened
 * @property {string} version
 * @property {(fn: Function, ...args: unknown[]) => Promise<any>} run In the page's own world; may return a promise.
 * @property {(key: string) => Promise<void>} press A real key, by its WebDriver code point or its letter.
 * @property {(path: string) => Promise<void>} shot
 * @property {string[]} problems Errors of the page, as far as this engine tells of them.
 * @property {string[]|null} requests Every address asked for, or null where the engine does not tell.
 * @property {() => Promise<void>} close
 */

const WIDTH = 1440;
const HEIGHT = 900;
const pause = (ms) => new Promise((resolve) => { setTimeout(resolve, ms); });

/** Named keys: what WebDriver calls them. */
const KEYS = { Home: '\uE011', End: '\uE010', ArrowRight: '\uE014', ArrowLeft: '\uE012', Enter: '\uE007', Tab: '\uE004', Escape: '\uE00C' };
const presses = (key) => [{ type: 'key', id: 'keys', actions: [{ type: 'keyDown', value: KEYS[key] ?? key }, { type: 'keyUp', value: KEYS[key] ?? key }] }];

/** @returns {Promise<Opened>} */
async function chromium(url) {
  const browser = await launch();
  const context = await browser.newContext({ viewport: { width: WIDTH, height: HEIGHT } });
  const page = await context.newPage();
  const problems = [];
  const requests = [];
  page.on('console', (message) => { if (message.type() !== 'debug') problems.push(`${message.type()}: ${message.text()}`); });
  page.on('pageerror', (error) => problems.push(error.message));
  page.on('request', (request) => requests.push(request.url()));
  await page.goto(url);
  return {
    version: `Chromium ${browser.version()}`, problems, requests,
    run: (fn, ...args) => page.evaluate(`(${fn}).apply(null, ${JSON.stringify(args)})`),
    press: (key) => page.keyboard.press(key),
    shot: async (path) => { await page.screenshot({ path }); },
    close: () => browser.close(),
  };
}

const FIREFOX = [process.env.FIREFOX, '/usr/bin/firefox-esr', '/usr/bin/firefox'].find((path) => path && existsSync(path));
const QUIET = {
  'app.update.enabled': false, 'app.normandy.enabled': false, 'browser.shell.checkDefaultBrowser': false, 'datareporting.policy.dataSubmissionEnabled': false,
  'network.captive-portal-service.enabled': false, 'network.connectivity-service.enabled': false, 'remote.active-protocols': 1,
};

/** A socket of WebDriver BiDi: numbered commands, and events by name. */
async function bidi(address, heard) {
  const socket = new WebSocket(address);
  const waiting = new Map();
  socket.onmessage = ({ data }) => {
    const message = JSON.parse(data);
    if (message.type === 'event') { heard(message.method, message.params); return; }
    const { resolve, reject } = waiting.get(message.id);
    if (message.type === 'error') reject(new Error(`${message.error}: ${message.message}`));
    else resolve(message.result);
  };
  await new Promise((resolve, reject) => { socket.onopen = resolve; socket.onerror = reject; });
  let id = 0;
  return {
    send: (method, params) => new Promise((resolve, reject) => {
      waiting.set(id += 1, { resolve, reject });
      socket.send(JSON.stringify({ id, method, params }));
    }),
    close: () => socket.close(),
  };
}

/** @returns {Promise<Opened>} */
async function firefox(url) {
  const profile = mkdtempSync(join(tmpdir(), 'courseband-'));
  writeFileSync(join(profile, 'user.js'), Object.entries(QUIET).map(([key, value]) => `user_pref(${JSON.stringify(key)}, ${value});\n`).join(''));
  const child = spawn(FIREFOX, ['--headless', '--no-remote', '--profile', profile, '--remote-debugging-port', '0'], { stdio: ['ignore', 'ignore', 'pipe'] });
  const ended = new Promise((resolve) => { child.on('exit', resolve); });
  const address = await new Promise((resolve, reject) => {
    let said = '';
    child.stderr.on('data', (part) => {
      said += part;
      const found = /listening on (ws:\S+)/.exec(said);
      if (found) resolve(found[1]);
    });
    child.on('exit', () => reject(new Error(`Firefox ended: ${said}`)));
  });
  const problems = [];
  const requests = [];
  const door = await bidi(`${address}/session`, (method, params) => {
    if (method === 'log.entryAdded') problems.push(`${params.level}: ${params.text}`);
    if (method === 'network.beforeRequestSent') requests.push(params.request.url);
  });
  const { capabilities } = await door.send('session.new', { capabilities: { alwaysMatch: { webSocketUrl: true } } });
  const { contexts: [{ context }] } = await door.send('browsingContext.getTree', {});
  await door.send('session.subscribe', { events: ['log.entryAdded', 'network.beforeRequestSent'] });
  await door.send('browsingContext.setViewport', { context, viewport: { width: WIDTH, height: HEIGHT } });
  await door.send('browsingContext.navigate', { context, url, wait: 'complete' });
  return {
    version: `Firefox ${capabilities.browserVersion}`, problems, requests,
    run: async (fn, ...args) => {
      const expression = `Promise.resolve((${fn}).apply(null, ${JSON.stringify(args)})).then((value) => JSON.stringify(value))`;
      const { type, result, exceptionDetails } = await door.send('script.evaluate', { expression, target: { context }, awaitPromise: true });
      if (type === 'exception') throw new Error(exceptionDetails.text);
      return result.value === undefined ? undefined : JSON.parse(result.value);
    },
    press: async (key) => { await door.send('input.performActions', { context, actions: presses(key) }); },
    shot: async (path) => { writeFileSync(path, Buffer.from((await door.send('browsingContext.captureScreenshot', { context })).data, 'base64')); },
    close: async () => {
      await door.send('browser.close', {}).catch(() => {});
      door.close();
      await Promise.race([ended, pause(5000).then(() => child.kill())]);
      rmSync(profile, { recursive: true, force: true, maxRetries: 5 });
    },
  };
}

const LIBRARIES = '/usr/lib';
/** The small browser that WebKit brings along for tests. */
function webkitBrowser() {
  for (const folder of existsSync(LIBRARIES) ? readdirSync(LIBRARIES) : []) {
    for (const version of ['4.1', '4.0']) {
      const path = join(LIBRARIES, folder, `webkit2gtk-${version}`, 'MiniBrowser');
      if (existsSync(path)) return path;
    }
  }
  return null;
}
const hasCommand = (name) => { try { execFileSync('which', [name], { stdio: 'ignore' }); return true; } catch { return false; } };

let port = 9500 + (process.pid % 400);

/** @returns {Promise<Opened>} */
async function webkit(url) {
  port += 1;
  // A group of its own, so that the display, the driver and the browser end together.
  const driver = spawn('xvfb-run', ['-a', '-s', `-screen 0 ${WIDTH + 60}x${HEIGHT + 300}x24`, 'WebKitWebDriver', `--port=${port}`], { stdio: 'ignore', detached: true });
  const call = async (method, path, body) => {
    const response = await fetch(`http://127.0.0.1:${port}${path}`, { method, body: body && JSON.stringify(body) });
    const { value } = await response.json();
    if (value?.error) throw new Error(`${value.error}: ${value.message}`);
    return value;
  };
  const end = () => { try { process.kill(-driver.pid); } catch { /* it has ended */ } };
  process.once('exit', end);
  for (let k = 0; ; k += 1) {
    try { await call('GET', '/status'); break; } catch (cause) { if (k > 60) throw cause; await pause(200); }
  }
  const made = await call('POST', '/session', { capabilities: { alwaysMatch: { 'webkitgtk:browserOptions': { binary: webkitBrowser(), args: ['--automation'] } } } });
  const session = `/session/${made.sessionId}`;
  await call('POST', `${session}/timeouts`, { script: 120000 });
  await call('POST', `${session}/window/rect`, { x: 0, y: 0, width: WIDTH, height: HEIGHT }).catch(() => {});
  await call('POST', `${session}/url`, { url });
  return {
    version: `WebKit ${made.capabilities.browserVersion}`, problems: [], requests: null,
    run: async (fn, ...args) => {
      const script = `const done = arguments[arguments.length - 1];
        Promise.resolve().then(() => (${fn}).apply(null, ${JSON.stringify(args)})).then((value) => done(JSON.stringify({ value })), (cause) => done(JSON.stringify({ cause: String(cause) })));`;
      const { value, cause } = JSON.parse(await call('POST', `${session}/execute/async`, { script, args: [] }));
      if (cause) throw new Error(cause);
      return value;
    },
    press: async (key) => { await call('POST', `${session}/actions`, { actions: presses(key) }); },
    shot: async (path) => { writeFileSync(path, Buffer.from(await call('GET', `${session}/screenshot`), 'base64')); },
    close: async () => { await call('DELETE', session).catch(() => {}); end(); },
  };
}

/** @type {{name: string, open: (url: string) => Promise<Opened>, missing: string|false}[]} */
export const engines = [
  { name: 'Chromium', open: chromium, missing: false },
  {
    name: 'Firefox', open: firefox,
    missing: FIREFOX === undefined ? 'no Firefox on this machine (Debian: firefox-esr)'
      : typeof WebSocket === 'undefined' ? 'Firefox is driven over a WebSocket: needs Node.js 22, or 20 with --experimental-websocket' : false,
  },
  {
    name: 'WebKit', open: webkit,
    missing: webkitBrowser() !== null && hasCommand('WebKitWebDriver') && hasCommand('xvfb-run') ? false : 'no WebKit on this machine (Debian: webkit2gtk-driver, xvfb)',
  },
];
