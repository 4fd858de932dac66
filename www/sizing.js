/**
 * Simulated studies, shared out in small chunks among a few workers of their
 * own. What is done is kept: stopping and going on add up to the same counts.
 */

import { Pool } from './pool.js';

/** @typedef {{studies: number, met: number, failed: number}} Counts */
/** @typedef {{request: string, designs: number, counts: Counts[]}} Job One request with what is counted so far. */

/** @param {Record<string, any>} request @returns {Job} */
export function jobOf(request) {
  return {
    request: JSON.stringify(request), designs: request['designs'].length,
    counts: request['designs'].map(() => ({ studies: 0, met: 0, failed: 0 })),
  };
}

export class Sizing extends Pool {
  /** @param {WebAssembly.Module} module @param {string} workerText */
  constructor(module, workerText) {
    super(module, workerText, { most: 8, spare: 0, most_at_once: 100, chunk: 150 });
  }

  /**
   * Simulates until every design of every job has so many studies; false when stopped.
   * @param {Job[]} jobs
   * @param {number} studies
   * @param {(done: number, total: number, secondsLeft: number|null) => void} report
   */
  async run(jobs, studies, report) {
    const turn = (this.turn += 1);
    const began = performance.now();
    /** Next study of each job and design; the studies before it are counted or under way. */
    const next = jobs.map((job) => job.counts.map((count) => count.studies));
    const total = jobs.reduce((sum, job) => sum + job.designs * studies, 0);
    const before = jobs.reduce((sum, job) => sum + job.counts.reduce((s, c) => s + Math.min(c.studies, studies), 0), 0);
    let done = before;
    let size = 4;
    /** The design that is furthest behind, so that all fill together. */
    const take = () => {
      /** @type {{job: number, design: number, at: number}|null} */
      let best = null;
      for (const [job, row] of next.entries()) {
        for (const [design, at] of row.entries()) {
          if (at < studies && (best === null || at < best.at)) best = { job, design, at };
        }
      }
      return best;
    };
    await Promise.all(this.ready().map(async (engine) => {
      for (;;) {
        const chunk = turn === this.turn ? take() : null;
        if (!chunk) return;
        const job = /** @type {Job} */ (jobs[chunk.job]);
        const count = Math.min(size, studies - chunk.at);
        /** @type {number[]} */ (next[chunk.job])[chunk.design] = chunk.at + count;
        const started = performance.now();
        const counts = JSON.parse(await engine.sizeRun(job.request, chunk.design, chunk.at, count));
        const sum = /** @type {Counts} */ (job.counts[chunk.design]);
        sum.studies += counts.studies;
        sum.met += counts.met;
        sum.failed += counts.failed;
        done += count;
        size = this.nextSize(count, started);
        const each = (performance.now() - began) / Math.max(1, done - before);
        report(done, total, done - before < 40 ? null : Math.ceil(((total - done) * each) / 1000));
      }
    }));
    return turn === this.turn;
  }

  /** @param {Job} job @returns {Promise<any>} */
  async answer(job) {
    const [engine] = this.ready();
    return JSON.parse(await /** @type {import('./engine.js').Engine} */ (engine).sizeAnswer(job.request, JSON.stringify(job.counts)));
  }
}
