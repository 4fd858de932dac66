/**
 * Calibration of the bands: many refits of simulated tables, shared out in
 * small chunks among a few workers of their own, so that a new choice never
 * waits for them.
 */

import { Engine } from './engine.js';

/** Most workers, whatever the machine says it has. */
const MOST_WORKERS = 2;
/** A chunk should take about this long, in milliseconds. */
const CHUNK_TIME = 200;

/** @typedef {(progress: {done: number, total: number, secondsLeft: number|null}) => void} Report */

export class Calibration {
  /**
   * @param {WebAssembly.Module} module
   * @param {string} workerText
   */
  constructor(module, workerText) {
    this.module = module;
    this.workerText = workerText;
    /** @type {Engine[]} */
    this.engines = [];
    /** Counts calibrations; chunks of an older one are dropped. */
    this.turn = 0;
  }

  /** Ends the calibration under way; a chunk that runs is let run out. */
  stop() {
    this.turn += 1;
  }

  /**
   * The chunks of all refits, as the engine takes them; `null` when stopped, or
   * where nothing can be calibrated.
   * @param {Uint8Array} table
   * @param {string} plan
   * @param {number} total
   * @param {Report} report
   * @returns {Promise<string|null>}
   */
  async run(table, plan, total, report) {
    const turn = (this.turn += 1);
    const started = performance.now();
    /** @type {{next: number, done: number, size: number, chunks: string[]}} */
    const work = { next: 0, done: 0, size: 4, chunks: [] };
    const isOver = () => turn !== this.turn || work.next >= total;
    const said = () => {
      const each = (performance.now() - started) / Math.max(1, work.done);
      report({ done: work.done, total, secondsLeft: work.done < 20 ? null : Math.ceil(((total - work.done) * each) / 1000) });
    };
    await Promise.all(this.#ready(table).map(async (ready) => {
      const engine = await ready;
      while (!isOver()) {
        const first = work.next;
        const count = Math.min(work.size, total - first);
        work.next += count;
        const began = performance.now();
        const chunk = await engine.refits(plan, first, count);
        if (turn !== this.turn) return;
        if (chunk === '') return this.stop();
        work.chunks.push(chunk);
        work.done += count;
        work.size = Math.max(1, Math.min(50, Math.round((count * CHUNK_TIME) / Math.max(1, performance.now() - began))));
        said();
      }
    }));
    return turn === this.turn ? `[${work.chunks.join(',')}]` : null;
  }

  /**
   * The workers, each holding this table.
   * @param {Uint8Array} table
   * @returns {Promise<Engine>[]}
   */
  #ready(table) {
    const cores = navigator.hardwareConcurrency || 2;
    const count = Math.max(1, Math.min(MOST_WORKERS, cores - 1));
    while (this.engines.length < count) this.engines.push(new Engine(this.module, this.workerText));
    return this.engines.map(async (engine) => {
      if (engine.table !== table) await engine.open(table);
      return engine;
    });
  }
}
