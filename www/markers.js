/**
 * One plan over many response columns, shared out among a few workers of their
 * own, so that the page's own plan never waits for them.
 */

import { Engine, EngineError } from './engine.js';

const MOST_WORKERS = 2;

/** @typedef {{name: string, failed: string, rows: number, p: number|null, time_word: string, ratio: boolean, pairs: any[]}} Marker */

/**
 * The plan with another column as its response, and what that is called.
 * @param {import('./types.js').Plan} plan As sent.
 * @param {string} column
 * @param {Record<string, string>} called
 * @returns {{plan: string, name: string}}
 */
export function planFor(plan, column, called) {
  const name = called[column] || column;
  return { name, plan: JSON.stringify({ ...plan, columns: { ...plan.columns, response: column }, words: { ...plan.words, response: name } }) };
}

export class Markers {
  /** @param {WebAssembly.Module} module @param {string} workerText */
  constructor(module, workerText) {
    this.module = module;
    this.workerText = workerText;
    /** @type {Engine[]} */
    this.engines = [];
    this.turn = 0;
  }

  /** What runs is ended; the answer of the run is `null`. */
  stop() {
    this.turn += 1;
    this.engines.forEach((engine) => engine.end());
    this.engines = [];
  }

  /**
   * What the plan says of each column, all together; `null` when stopped.
   * @param {Uint8Array} table
   * @param {{plan: string, name: string}[]} wanted
   * @param {{rate: number, level: number}} asked
   * @param {(done: number, total: number) => void} report
   * @returns {Promise<any>}
   */
  async run(table, wanted, { rate, level }, report) {
    this.stop();
    const turn = this.turn;
    /** @type {string[]} */
    const answers = [];
    let next = 0;
    let done = 0;
    await Promise.race([this.#stopped(turn), Promise.all(this.#ready(wanted.length).map(async (engine) => {
      await engine.open(table);
      for (;;) {
        const at = next;
        const one = turn === this.turn ? wanted[at] : undefined;
        if (!one) return;
        next += 1;
        const answer = await this.#one(engine, one);
        if (turn !== this.turn) return;
        answers[at] = answer;
        done += 1;
        report(done, wanted.length);
      }
    }))]);
    if (turn !== this.turn) return null;
    const [engine] = this.engines;
    const json = await /** @type {Engine} */ (engine).markersAnswer(`[${answers.join(',')}]`, rate, level);
    this.stop();
    return JSON.parse(json);
  }

  /** One column; a computation that stopped is a column without a result, and the others go on. @param {Engine} engine @param {{plan: string, name: string}} one */
  async #one(engine, one) {
    try {
      return await engine.marker(one.plan, one.name);
    } catch (cause) {
      if (!(cause instanceof EngineError)) throw cause;
      return JSON.stringify({ name: one.name, failed: cause.message, rows: 0, p: null, time_word: '', ratio: false, pairs: [] });
    }
  }

  /** Comes when the run has been stopped. @param {number} turn @returns {Promise<void>} */
  #stopped(turn) {
    return new Promise((resolve) => {
      const look = () => { if (turn !== this.turn) resolve(); else window.setTimeout(look, 50); };
      look();
    });
  }

  /** @param {number} columns */
  #ready(columns) {
    const cores = navigator.hardwareConcurrency || 2;
    const count = Math.max(1, Math.min(MOST_WORKERS, cores - 1, columns));
    while (this.engines.length < count) this.engines.push(new Engine(this.module, this.workerText));
    return this.engines;
  }
}
