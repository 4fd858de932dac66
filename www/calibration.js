/**
 * Calibration of the bands: many refits of simulated tables, shared out in
 * small chunks among a few workers of their own, so that a new choice never
 * waits for them.
 */

import { Pool } from './pool.js';

/** @typedef {(progress: {done: number, total: number, secondsLeft: number|null}) => void} Report */

export class Calibration extends Pool {
  /** @param {WebAssembly.Module} module @param {string} workerText */
  constructor(module, workerText) {
    super(module, workerText, { most: 8, spare: 1, most_at_once: 50, chunk: 200 });
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
    await Promise.all(this.#holding(table).map(async (ready) => {
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
        work.size = this.nextSize(count, began);
        said();
      }
    }));
    return turn === this.turn ? `[${work.chunks.join(',')}]` : null;
  }

  /**
   * The workers, each holding this table.
   * @param {Uint8Array} table
   */
  #holding(table) {
    return this.ready().map(async (engine) => {
      if (engine.table !== table) await engine.open(table);
      return engine;
    });
  }
}
