/**
 * The worker as promises. Replies of a worker that has been replaced are
 * dropped; a new worker gets the table again before anything else.
 */

/** @typedef {{op: string, resolve: (value: any) => void, reject: (cause: unknown) => void}} Waiting */

/** An error that came from the computation. */
export class EngineError extends Error {
  /**
   * @param {string} message
   * @param {boolean} dead The worker stopped and was replaced.
   */
  constructor(message, dead) {
    super(message);
    this.dead = dead;
  }
}

/** The answer was overtaken by a later request. */
export class Overtaken extends Error {}

export class Engine {
  /**
   * @param {WebAssembly.Module} module
   * @param {string} workerText
   */
  constructor(module, workerText) {
    this.module = module;
    this.address = URL.createObjectURL(new Blob([workerText], { type: 'text/javascript' }));
    /** @type {Uint8Array|null} */
    this.table = null;
    /** @type {Map<number, Waiting>} */
    this.waiting = new Map();
    this.lastId = 0;
    this.worker = this.#started();
  }

  #started() {
    const worker = new Worker(this.address);
    worker.onmessage = ({ data }) => {
      if (worker === this.worker) this.#settle(data);
    };
    worker.onerror = (event) => {
      event.preventDefault();
      if (worker === this.worker) this.#died(event.message ?? '');
    };
    this.worker = worker;
    // A worker that cannot start says so at the first real request.
    this.#ask('start', { module: this.module }).catch(() => {});
    return worker;
  }

  /** @param {{id: number, ok?: any, error?: {message: string, dead: boolean}}} reply */
  #settle({ id, ok, error }) {
    const waiting = this.waiting.get(id);
    this.waiting.delete(id);
    if (!error) waiting?.resolve(ok);
    else {
      waiting?.reject(new EngineError(error.message, error.dead));
      if (error.dead) this.#died(error.message);
    }
  }

  /** @param {string} message */
  #died(message) {
    this.replace((waiting) => waiting.reject(new EngineError(message, true)));
  }

  /**
   * Ends the worker and starts another that holds the same table.
   * @param {(waiting: Waiting) => void} [tell]
   */
  replace(tell = (waiting) => waiting.reject(new Overtaken())) {
    this.worker.terminate();
    const orphans = Array.from(this.waiting.values());
    this.waiting.clear();
    this.#started();
    if (this.table) this.#ask('open', { bytes: this.table }).catch(() => {});
    orphans.forEach(tell);
  }

  /**
   * @param {string} op
   * @param {Record<string, unknown>} args
   * @returns {Promise<any>}
   */
  #ask(op, args) {
    const id = (this.lastId += 1);
    return new Promise((resolve, reject) => {
      this.waiting.set(id, { op, resolve, reject });
      this.worker.postMessage({ id, op, args });
    });
  }

  /** Nothing more is asked. */
  end() {
    this.worker.terminate();
    URL.revokeObjectURL(this.address);
  }

  /**
   * Gives the worker a table.
   * @param {Uint8Array} bytes
   */
  open(bytes) {
    if (Array.from(this.waiting.values()).some((waiting) => waiting.op !== 'start')) this.replace();
    this.table = bytes;
    return this.#ask('open', { bytes });
  }

  /** @param {string} plan @returns {Promise<string>} */
  preview(plan) {
    return this.#ask('preview', { plan });
  }

  /** @param {string} plan @returns {Promise<string>} */
  describe(plan) {
    return this.#ask('describe', { plan });
  }

  /** @param {string} plan @returns {Promise<{findings: string, traces: string}>} */
  run(plan) {
    return this.#ask('run', { plan });
  }

  /** What a room asks beyond the findings. @param {'checks'|'usual'|'dropout'|'candidates'} room @param {string} plan @returns {Promise<string>} */
  answer(room, plan) {
    return this.#ask(room, { plan });
  }

  /** @param {string} plan @param {string} refits @param {string} context @returns {Promise<string>} */
  report(plan, refits, context) {
    return this.#ask('report', { plan, refits, context });
  }

  /** @param {string} plan @param {string} asked @returns {Promise<string>} */
  sensitivity(plan, asked) {
    return this.#ask('sensitivity', { plan, asked });
  }

  /** Columns that could be the response. @param {string} plan @returns {Promise<string>} */
  markerColumns(plan) {
    return this.#ask('markerColumns', { plan });
  }

  /** What a plan says of its response, as one of many. @param {string} plan @param {string} name @returns {Promise<string>} */
  marker(plan, name) {
    return this.#ask('marker', { plan, name });
  }

  /** @param {string} markers @param {number} rate @param {number} level @returns {Promise<string>} */
  markersAnswer(markers, rate, level) {
    return this.#ask('markersAnswer', { markers, rate, level });
  }

  /** A sample-size request from the fitted table. @param {string} plan @param {number} pair @returns {Promise<string>} */
  sizeFrom(plan, pair) {
    return this.#ask('sizeFrom', { plan, pair });
  }

  /** @param {string} request @param {number} design @param {number} first @param {number} count @returns {Promise<string>} */
  sizeRun(request, design, first, count) {
    return this.#ask('sizeRun', { request, design, first, count });
  }

  /** @param {string} request @param {string} counts @returns {Promise<string>} */
  sizeAnswer(request, counts) {
    return this.#ask('sizeAnswer', { request, counts });
  }

  /** @param {string} plan @param {number} first @param {number} count @returns {Promise<string>} */
  refits(plan, first, count) {
    return this.#ask('refits', { plan, first, count });
  }

  /** @param {string} plan @param {string} refits @returns {Promise<{findings: string, traces: string}>} */
  calibrated(plan, refits) {
    return this.#ask('calibrated', { plan, refits });
  }
}
