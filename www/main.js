/**
 * Starts the page: fetch what it is made of, shut the door, open the first
 * invented example.
 */

import { loadAssets } from './assets.js';
import { Controller } from './controller.js';
import { startDrawing } from './drawing.js';
import { Engine } from './engine.js';
import { listenForUndo } from './undo-keys.js';
import { roomOf } from './rooms.js';
import { entered } from './state.js';
import { text } from './text.js';
import { mountFrame } from './views/frame.js';
import { acceptDrops } from './views/drop.js';
import { el } from './dom.js';

async function start() {
  const assets = await loadAssets();
  // The worker first: it computes while this thread sets up the page.
  const engine = new Engine(assets.module, assets.workerText);
  /** @type {import('./types.js').View|null} */
  let frame = null;
  const controller = new Controller(engine, assets, (state) => frame?.update(state));
  const acts = controller.acts();
  const [first] = assets.demos;
  const opened = first ? controller.openDemo(first) : null;
  startDrawing(assets.module);
  frame = mountFrame(document.body, acts);
  acceptDrops(document.body, acts);
  listenForUndo(acts);
  void controller.keeping.start();

  const enter = () => controller.set(entered(controller.state, roomOf(window.location.hash)));
  window.addEventListener('hashchange', enter);
  enter();
  frame.update(controller.state);
  await opened;
}

start().catch((cause) => {
  document.documentElement.dataset.state = 'failed';
  const detail = cause instanceof Error ? cause.message : '';
  document.body.append(el('p', { class: 'stranded', role: 'alert' }, `${text.notLoaded} ${detail}`));
});
