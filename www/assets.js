/**
 * Everything the page fetches, fetched once at the start. Then the door is
 * shut: a second policy forbids every connection from here on.
 */

/** @typedef {{module: WebAssembly.Module, workerText: string, demos: import('./types.js').Demo[], tables: Map<string, Uint8Array>, bytes: Promise<ArrayBuffer>}} Assets `bytes`: the wasm, for its checksum. */

const GLUE = './wasm/courseband.js';
const WASM = './wasm/courseband_bg.wasm';
const WORKER = './worker.js';
const DEMOS = './demo-data/';

/** @param {string} url */
async function fetched(url) {
  const response = await fetch(url);
  if (!response.ok) throw new Error(`${url}: ${response.status}`);
  return response;
}

/**
 * Compiled while it comes in, where the server names its type.
 * @param {Response} response
 */
async function compiled(response) {
  if (response.headers.get('content-type') === 'application/wasm') return WebAssembly.compileStreaming(response);
  return WebAssembly.compile(await response.arrayBuffer());
}

/**
 * The invented examples; a page without them still works.
 * @returns {Promise<Pick<Assets, 'demos'|'tables'>>}
 */
async function loadDemos() {
  const tables = new Map();
  try {
    const demos = /** @type {import('./types.js').Demo[]} */ (await (await fetched(`${DEMOS}demos.json`)).json());
    await Promise.all(demos.map(async (demo) => {
      tables.set(demo.file, new Uint8Array(await (await fetched(DEMOS + demo.file)).arrayBuffer()));
    }));
    return { demos, tables };
  } catch {
    return { demos: [], tables: new Map() };
  }
}

/** @param {string} id */
const held = (id) => document.getElementById(id)?.textContent ?? '';

/**
 * What a page that is one file holds in itself: no connection is ever needed.
 * @param {string} packed The wasm, packed and written as text.
 * @returns {Promise<Assets>}
 */
async function ownAssets(packed) {
  const bytes = Uint8Array.from(atob(packed), (letter) => letter.charCodeAt(0));
  const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream('gzip'));
  const wasm = await new Response(stream).arrayBuffer();
  const module = await WebAssembly.compile(wasm);
  const { demos, tables } = JSON.parse(held('courseband-demos'));
  const encoder = new TextEncoder();
  return {
    module, demos, bytes: Promise.resolve(wasm), workerText: `${held('courseband-glue')}\n${held('courseband-worker')}`,
    tables: new Map(Object.entries(tables).map(([file, table]) => [file, encoder.encode(/** @type {string} */ (table))])),
  };
}

/** @returns {Promise<Assets>} */
export async function loadAssets() {
  withoutPeers();
  const packed = held('courseband-wasm');
  if (packed !== '') return ownAssets(packed);
  const wasm = fetched(WASM);
  const bytes = wasm.then((response) => response.clone().arrayBuffer());
  bytes.catch(() => {});
  const [module, glue, worker, demos] = await Promise.all([
    wasm.then(compiled),
    fetched(GLUE).then((response) => response.text()),
    fetched(WORKER).then((response) => response.text()),
    loadDemos(),
  ]);
  shutTheDoor();
  return { module, bytes, workerText: `${glue}\n${worker}`, ...demos };
}

/**
 * What the page needs from here on: its module, workers made of its own text, pictures that it draws itself, and
 * the style attribute with which text is measured. Nothing from any address, not even its own.
 */
const SHUT = "default-src 'none'; script-src 'wasm-unsafe-eval'; worker-src blob:; style-src-attr 'unsafe-inline'; img-src data: blob:; connect-src 'none'; form-action 'none'";

/**
 * Adds that policy. Policies only ever add up, so no later code can open this again, and workers started from
 * here on inherit it.
 */
function shutTheDoor() {
  const meta = document.createElement('meta');
  meta.httpEquiv = 'Content-Security-Policy';
  meta.content = SHUT;
  document.head.append(meta);
}

/** No policy covers the packets with which peers look for each other, so the way to them is taken out of the page. */
function withoutPeers() {
  for (const name of ['RTCPeerConnection', 'webkitRTCPeerConnection', 'mozRTCPeerConnection', 'RTCDataChannel', 'WebTransport']) {
    Reflect.deleteProperty(window, name);
  }
}
