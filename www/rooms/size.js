/**
 * The room Sample size: what is expected, what must be found, and how many it
 * takes. Needs no table.
 */

import { el, setText, show } from '../dom.js';
import { freshForm, fromRequest, requestOf, schedulesOf } from '../size-form.js';
import { jobOf } from '../sizing.js';
import { text } from '../text.js';
import { drawAnswer } from '../views/size-answer.js';
import { mountSizeForm } from '../views/size-form.js';

const words = text.size;

/** @type {import('../types.js').Room} */
export const sizeRoom = {
  id: 'size',
  title: text.rooms.size,
  mount(root, acts) {
    const room = new SizeRoom(acts);
    root.append(room.node);
    return { update: (state) => room.update(state) };
  },
};

class SizeRoom {
  /** @param {import('../types.js').Acts} acts */
  constructor(acts) {
    this.acts = acts;
    this.form = freshForm();
    /** @type {{best: import('../sizing.js').Job, low: import('../sizing.js').Job|null, high: import('../sizing.js').Job|null, schedules: {name: string, job: import('../sizing.js').Job}[], asked: string}|null} */
    this.jobs = null;
    this.wanted = 0;
    const take = el('button', { type: 'button', class: 'quiet', 'data-act': 'size-from-table', onclick: () => void this.fromTable() }, words.fromTable);
    this.takeHint = el('span', { class: 'hint' }, words.fromTableHint);
    this.fields = mountSizeForm(this.form, (form) => this.changed(form));
    this.runButton = el('button', { type: 'button', 'data-act': 'simulate', onclick: () => void this.run(false) }, words.run);
    this.moreButton = el('button', { type: 'button', hidden: true, onclick: () => void this.run(true) }, words.more);
    this.stopButton = el('button', { type: 'button', hidden: true, onclick: () => acts.sizing().stop() }, words.stop);
    this.status = el('span', { class: 'hint', role: 'status', 'data-region': 'size-state' });
    this.answer = el('section', { class: 'size-answer', 'data-region': 'size-answer', 'aria-label': words.answer.title });
    this.node = el('div', { class: 'size-room' },
      el('div', { class: 'room-head' }, el('h2', {}, words.title), el('p', { class: 'room-lead' }, words.lead), el('p', {}, take, ' ', this.takeHint)),
      el('div', { class: 'size-body' }, this.fields.node,
        el('div', { class: 'size-side' }, el('p', { class: 'size-run' }, this.runButton, ' ', this.moreButton, ' ', this.stopButton, ' ', this.status), this.answer)));
    void this.draw();
  }

  /** @param {import('../types.js').State} state */
  update(state) {
    const { findings } = state;
    this.hasTable = findings !== null && findings.differences.length > 0;
  }

  /** @param {import('../size-form.js').SizeForm} form */
  changed(form) {
    this.form = form;
    if (this.jobs) setText(this.status, this.jobs.asked === this.#asked() ? '' : words.changed);
  }

  async fromTable() {
    const request = this.hasTable ? await this.acts.sizeFrom(0) : null;
    if (!request) {
      setText(this.takeHint, words.fromTableNone);
      return;
    }
    setText(this.takeHint, words.fromTableHint);
    this.form = fromRequest(this.form, request);
    this.fields.fill(this.form);
    this.changed(this.form);
  }

  #asked() {
    const { request, low, high } = requestOf(this.form);
    return JSON.stringify([request, low, high]);
  }

  /** @param {boolean} more Adds to what is there. */
  async run(more) {
    const made = requestOf(this.form);
    this.fields.complain(made.problems);
    if (!made.request) return;
    const asked = this.#asked();
    if (!this.jobs || this.jobs.asked !== asked) {
      const { request } = made;
      const with_ = (/** @type {number|null} */ sd) =>
        (sd === null ? null : jobOf({ ...request, spread: { ...request['spread'], on_a_day: sd } }));
      this.jobs = { best: jobOf(request), low: with_(made.low), high: with_(made.high), schedules: [], asked };
      this.wanted = 0;
    }
    this.wanted = more || this.wanted === 0 ? this.wanted + made.request['studies'] : this.wanted;
    await this.#simulate([this.jobs.best, this.jobs.low, this.jobs.high]);
  }

  /** @param {(import('../sizing.js').Job|null)[]} jobs */
  async #simulate(jobs) {
    this.#busy(true);
    let last = 0;
    let finished = false;
    try {
      const real = /** @type {import('../sizing.js').Job[]} */ (jobs.filter((job) => job !== null));
      finished = await this.acts.sizing().run(real, this.wanted, (done, total, seconds) => {
        setText(this.status, words.progress(done, total, seconds));
        if (performance.now() - last > 400) {
          last = performance.now();
          void this.draw();
        }
      });
      setText(this.status, finished ? '' : words.stopped);
    } catch (cause) {
      setText(this.status, cause instanceof Error ? cause.message : String(cause));
    }
    this.#busy(false);
    await this.draw();
  }

  async schedules() {
    const made = requestOf(this.form);
    const { jobs } = this;
    if (!made.request || !jobs) return;
    const answer = await this.acts.sizing().answer(jobs.best);
    const design = answer.designs[answer.smallest ?? answer.designs.length - 1];
    const { request } = made;
    jobs.schedules = schedulesOf(request['days']).map(({ name, days }) => ({
      name, job: jobOf({ ...request, days, designs: [design.per_group] }),
    }));
    await this.#simulate(jobs.schedules.map((one) => one.job));
  }

  /** @param {boolean} busy */
  #busy(busy) {
    this.runButton.disabled = busy;
    show(this.stopButton, busy);
    show(this.moreButton, !busy && this.jobs !== null);
  }

  async draw() {
    await drawAnswer(this.answer, this.jobs, this.acts, () => void this.schedules());
  }
}
