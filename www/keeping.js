/** When work is kept on this device, and what becomes of what was kept. */

import { analysisText, fingerprintOf } from './analysis-file.js';
import { erase, isKeeping, keep, read, write } from './kept.js';
import { text } from './text.js';

const words = text.data.keeping;
/** Nothing was chosen for this long: the work is written, in milliseconds. */
const PAUSE = 800;

export class Keeping {
  /** @param {import('./controller.js').Controller} controller */
  constructor(controller) {
    this.controller = controller;
    this.pause = 0;
    /** What was written last, or is about to be. @type {unknown[]} */
    this.last = [];
    /** Writes are made one after the other, and none after erasing. */
    this.queue = Promise.resolve();
    this.turn = 0;
  }

  /** @param {Partial<import('./types.js').State['keeping']>} part */
  #set(part) {
    const { controller } = this;
    controller.set({ ...controller.state, keeping: { ...controller.state.keeping, ...part } });
  }

  /** Looks for work kept by an earlier visit, where keeping was asked for. */
  async start() {
    if (!isKeeping()) return;
    this.#set({ on: true });
    try {
      const kept = await read();
      if (kept) this.#set({ found: kept });
    } catch {
      this.#set({ message: words.broken });
    }
  }

  async turnOn() {
    try {
      await keep();
      this.#set({ on: true, message: words.on });
      this.attend();
    } catch {
      this.#set({ on: false, message: words.denied });
    }
  }

  async erase() {
    this.turn += 1;
    window.clearTimeout(this.pause);
    this.last = [];
    await this.queue.catch(() => {});
    try {
      await erase();
      this.#set({ on: false, found: null, message: words.erased });
    } catch {
      this.#set({ on: false, found: null, message: words.denied });
    }
  }

  /** Opens what was kept. */
  async open() {
    const { found } = this.controller.state.keeping;
    if (found === null) return;
    this.#set({ found: null });
    await this.controller.openAnalysisText(found.analysis, found.name);
  }

  /** Writes the work a while after its last change; called whenever the state changes. */
  attend() {
    const { state, engine } = this.controller;
    if (!state.keeping.on || state.source?.kind !== 'own' || !engine.table || state.status === 'reading') return;
    const now = [engine.table, state.choices, state.source, state.fixed];
    if (now.every((one, k) => one === this.last[k])) return;
    this.last = now;
    window.clearTimeout(this.pause);
    const turn = this.turn;
    this.pause = window.setTimeout(() => { this.queue = this.queue.then(() => (turn === this.turn ? this.#write(turn) : undefined)); }, PAUSE);
  }

  /** @param {number} turn */
  async #write(turn) {
    const { state, engine } = this.controller;
    const { choices, source, fixed, findings } = state;
    if (source?.kind !== 'own' || !engine.table) return;
    const { table } = engine;
    try {
      const fingerprint = await fingerprintOf(table);
      const analysis = analysisText({ choices, source, table, fingerprint, fixed }, findings?.version ?? '');
      if (turn !== this.turn) return;
      const when = Date.now();
      await write({ name: source.name, when, analysis });
      this.#set({ found: null, message: words.saved(new Date(when).toLocaleTimeString()) });
    } catch (cause) {
      const full = cause instanceof DOMException && cause.name === 'QuotaExceededError';
      this.#set({ message: full ? words.full : words.denied });
    }
  }
}
