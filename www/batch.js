/** What the page does to take one plan over many response columns. */

import { Markers, planFor } from './markers.js';
import { text } from './text.js';

export class Batch {
  /** @param {import('./controller.js').Controller} controller */
  constructor(controller) {
    this.controller = controller;
    /** @type {Markers|null} */
    this.markers = null;
    /** Of which table and roles the columns are known or being asked for. @type {{table: Uint8Array|null, roles: string}} */
    this.asked = { table: null, roles: '' };
  }

  /** @param {Partial<import('./types.js').State['markers']>} part */
  #set(part) {
    const { controller } = this;
    controller.set({ ...controller.state, markers: { ...controller.state.markers, ...part } });
  }

  /** Asks which columns could be the response, once per table, roles and reading. */
  async look() {
    const { engine } = this.controller;
    const plan = this.controller.planText();
    const { columns, reading } = JSON.parse(plan);
    const roles = JSON.stringify([columns, reading]);
    if (!engine.table || (engine.table === this.asked.table && roles === this.asked.roles)) return;
    const asked = (this.asked = { table: engine.table, roles });
    try {
      const offered = JSON.parse(await engine.markerColumns(plan));
      if (asked === this.asked) this.#set({ offered });
    } catch {
      // Overtaken, or a table that cannot be used, which is said elsewhere: asked again with the next change.
      if (asked === this.asked) this.asked = { table: null, roles: '' };
    }
  }

  /** @param {string[]} columns @param {number} rate */
  async run(columns, rate) {
    const { controller } = this;
    const { table } = controller.engine;
    if (!table) return;
    const of = controller.planText();
    const plan = JSON.parse(of);
    const wanted = columns.map((column) => planFor(plan, column, controller.state.choices.called));
    this.markers ??= new Markers(controller.assets.module, controller.assets.workerText);
    this.#set({ progress: { done: 0, total: wanted.length }, of: null, answer: null, message: null });
    try {
      const answer = await this.markers.run(table, wanted, { rate, level: plan.comparisons.level }, (done, total) => {
        if (controller.engine.table === table) this.#set({ progress: { done, total } });
      });
      // When stopped, that has been said already.
      if (answer !== null && controller.engine.table === table) this.#set({ progress: null, answer, of });
    } catch (cause) {
      if (controller.engine.table === table) this.#set({ progress: null, message: cause instanceof Error ? cause.message : String(cause) });
    }
  }

  stop() {
    if (this.controller.state.markers.progress === null) return;
    this.markers?.stop();
    this.#set({ progress: null, message: text.markers.stopped });
  }
}
