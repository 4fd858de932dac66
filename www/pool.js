/**
 * A few workers of their own for long simulations, and the size of the chunks
 * that they are given.
 */

import { Engine } from './engine.js';

export class Pool {
  /**
   * @param {WebAssembly.Module} module
   * @param {string} workerText
   * @param {{most: number, spare: number, most_at_once: number, chunk: number}} limits Workers at most, cores that
   *   are left to others, pieces in one chunk at most, milliseconds that a chunk should take.
   */
  constructor(module, workerText, limits) {
    this.module = module;
    this.workerText = workerText;
    this.limits = limits;
    /** @type {Engine[]} */
    this.engines = [];
    /** Counts runs; chunks of an older one are dropped. */
    this.turn = 0;
  }

  /** Ends the run under way; a chunk that runs is let run out. */
  stop() {
    this.turn += 1;
  }

  /** The workers, started when first asked for. */
  ready() {
    const cores = navigator.hardwareConcurrency || 2;
    const count = Math.max(1, Math.min(this.limits.most, cores - this.limits.spare));
    while (this.engines.length < count) this.engines.push(new Engine(this.module, this.workerText));
    return this.engines;
  }

  /**
   * Size of the next chunk after one of `count` pieces that began at `began`.
   * @param {number} count
   * @param {number} began
   */
  nextSize(count, began) {
    const { chunk, most_at_once: most } = this.limits;
    return Math.max(1, Math.min(most, Math.round((count * chunk) / Math.max(1, performance.now() - began))));
  }
}
