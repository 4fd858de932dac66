/**
 * The one place where the state changes: it turns what views ask for into pure
 * changes of the state, and into work for the engine. The latest wish wins.
 */

import { EngineError, Overtaken } from './engine.js';
import { Calibration } from './calibration.js';
import { checkCopy } from './copy-check.js';
import { Sizing } from './sizing.js';
import { Batch } from './batch.js';
import { Keeping } from './keeping.js';
import { columnsUsed } from './context.js';
import { NotOpened, analysisFrom, analysisText, fingerprintOf } from './analysis-file.js';
import { fileName, save } from './exports.js';
import { planToSend } from './plan.js';
import { reportContext } from './report-context.js';
import { text } from './text.js';
import * as change from './state.js';
import { findingsFrom, previewFrom, describedFrom } from './wire.js';

/** @typedef {import('./types.js').State} State */
/** @typedef {import('./types.js').Acts} Acts */

/** Typing settles for this long before a refit, in milliseconds. */
const TYPING_PAUSE = 260;
/** Nothing was chosen for this long: the bands are calibrated. */
const CALIBRATION_PAUSE = 700;
/** A fit that is still running after this long makes room for a newer one, or can be stopped. */
const SLOW_AFTER = 500;

export class Controller {
  /**
   * @param {import('./engine.js').Engine} engine
   * @param {import('./assets.js').Assets} assets
   * @param {(state: State) => void} show
   */
  constructor(engine, assets, show) {
    this.engine = engine;
    this.assets = assets;
    this.show = show;
    this.state = { ...change.initialState(), demos: assets.demos };
    /** Counts wishes; an answer to an older wish is dropped. */
    this.wish = 0;
    this.typing = 0;
    this.pause = 0;
    this.calibration = new Calibration(assets.module, assets.workerText);
    /** @type {Sizing|null} */
    this.sizing = null;
    this.batch = new Batch(this);
    this.keeping = new Keeping(this);
    this.busySince = 0;
    this.shown = false;
  }

  /** @param {State} next */
  set(next) {
    if (next === this.state) return;
    this.state = next;
    this.#attend();
    this.keeping.attend();
    if (this.shown) return;
    // Several changes in one turn are shown once.
    this.shown = true;
    queueMicrotask(() => {
      this.shown = false;
      this.show(this.state);
    });
  }

  /** Asks for what the room in sight shows beyond the findings, once per plan. */
  #attend() {
    const { room, status } = this.state;
    if ((room !== 'checks' && room !== 'usual' && room !== 'dropout' && room !== 'report') || (status !== 'ready' && status !== 'boundary')) return;
    const plan = this.#planText(this.state.choices);
    const refits = this.state.refits?.plan === plan ? this.state.refits.refits : '';
    const context = room === 'report' ? reportContext(this.state, plan) : '';
    const asked = room === 'report' ? `${plan}${refits.length}${context}` : plan;
    if (this.state.answers[room]?.plan === asked) return;
    this.#ask(room, asked, room === 'report' ? this.engine.report(plan, refits, context) : this.engine.answer(room, plan));
  }

  /**
   * @param {'checks'|'usual'|'dropout'|'candidates'|'report'} what
   * @param {string} asked
   * @param {Promise<string>} answer
   */
  #ask(what, asked, answer) {
    const mine = () => this.state.answers[what]?.plan === asked;
    this.set(change.answered(this.state, what, { plan: asked, status: 'working', message: null }));
    answer.then(
      (json) => { if (mine()) this.set(change.answered(this.state, what, { status: 'done', value: JSON.parse(json) })); },
      (cause) => {
        if (!mine()) return;
        const message = cause instanceof Overtaken ? null : cause instanceof Error ? cause.message : String(cause);
        this.set(change.answered(this.state, what, { plan: message === null ? '' : asked, status: 'done', value: null, message }));
      },
    );
  }

  /** @returns {Acts} */
  acts() {
    return {
      choose: (label, make, typing = false) => this.choose(label, make, typing),
      undo: () => this.travel(change.undone(this.state)),
      redo: () => this.travel(change.redone(this.state)),
      moveCursor: (time) => this.set(change.pointed(this.state, time)),
      openText: (table) => void this.open(new TextEncoder().encode(table), { kind: 'own', name: text.data.pastedName }, null),
      openFile: (file) => void this.openFile(file),
      openDemo: (demo) => void this.openDemo(demo),
      go: (room) => { window.location.hash = `#/${room}`; },
      bringTable: () => {
        window.location.hash = '#/data';
        window.setTimeout(() => document.getElementById('paste-box')?.focus(), 50);
      },
      stop: () => this.stop(),
      checkCopy: (held, tell) => checkCopy(this.assets, held, tell),
      ask: (what) => {
        const plan = this.#planText(this.state.choices);
        this.#ask(what, plan, this.engine.answer(what, plan).then((json) => {
          const names = JSON.parse(json).models.slice(1).map((/** @type {{name: string}} */ model) => model.name);
          this.set({ ...this.state, lookedAt: Array.from(new Set([...this.state.lookedAt, ...names])) });
          return json;
        }));
      },
      planText: () => this.planText(),
      sensitivity: async (asked) => JSON.parse(await this.engine.sensitivity(this.#planText(this.state.choices), JSON.stringify(asked))),
      look: () => this.state,
      saveAnalysis: (whole) => this.saveAnalysis(whole),
      keepWork: () => void this.keeping.turnOn(),
      eraseWork: () => void this.keeping.erase(),
      openKept: () => void this.keeping.open(),
      fixPlan: () => {
        this.set({ ...this.state, fixed: this.state.choices.plan });
        void this.saveAnalysis(false);
      },
      lookForMarkers: () => void this.batch.look(),
      runMarkers: (columns, rate) => void this.batch.run(columns, rate),
      stopMarkers: () => this.batch.stop(),
      sizing: () => (this.sizing ??= new Sizing(this.assets.module, this.assets.workerText)),
      sizeFrom: async (pair) => {
        const json = await this.engine.sizeFrom(this.#planText(this.state.choices), pair);
        return json === '' ? null : JSON.parse(json);
      },
      retry: () => void this.refit(),
      togglePair: (pair) => this.set(change.pairToggled(this.state, pair)),
      layOver: (over) => {
        this.set(change.laidOver(this.state, over));
        if (over !== null) window.location.hash = '#/courses';
      },
      leaveOut: (row, column, reason) =>
        this.choose(text.data.leftOut.label(row), change.leavingOut({ row, column, reason, seen: this.state.seen, masked: this.state.choices.masks !== null }), false),
      takeBack: (row, column) => this.choose(text.data.leftOut.back(row), change.takingBack(row, column), false),
    };
  }

  /** @param {string} label @param {(choices: import('./types.js').Choices) => import('./types.js').Choices} make @param {boolean} typing */
  choose(label, make, typing) {
    const before = this.state.choices;
    this.set(change.chosen(this.state, label, make, typing));
    this.#afterChoice(before, typing);
  }

  /** @param {State} next */
  travel(next) {
    const before = this.state.choices;
    this.set(next);
    this.#afterChoice(before, false);
  }

  /** @param {import('./types.js').Choices} before @param {boolean} typing */
  #afterChoice(before, typing) {
    const now = this.state.choices;
    window.clearTimeout(this.typing);
    if (this.#planText(now) === this.#planText(before)) return;
    if (typing) this.typing = window.setTimeout(() => void this.refit(), TYPING_PAUSE);
    else void this.refit();
  }

  /** The plan as it is sent. */
  planText() {
    return this.#planText(this.state.choices);
  }

  /** @param {import('./types.js').Choices} choices */
  #planText(choices) {
    return JSON.stringify(planToSend(choices, columnsUsed(this.state)));
  }

  /** @param {import('./types.js').Demo} demo */
  async openDemo(demo) {
    const bytes = this.assets.tables.get(demo.file);
    if (bytes) await this.open(bytes, { kind: 'demo', name: demo.title }, demo);
  }

  /** @param {boolean} whole With the table. */
  async saveAnalysis(whole) {
    const { table } = this.engine;
    const { choices, source, fixed, findings } = this.state;
    if (!table || !source) return;
    const fingerprint = await fingerprintOf(table);
    const analysis = { choices, source, table: whole ? table : null, fingerprint, fixed };
    save(`${fileName(source.name)}${whole ? '' : '-plan'}.courseband.json`, analysisText(analysis, findings?.version ?? ''), 'application/json');
  }

  /** A saved analysis takes the place of the table, or joins the open one where it was saved without. @param {File} file */
  async openAnalysis(file) {
    try {
      await this.openAnalysisText(await file.text(), file.name);
    } catch {
      this.set({ ...this.state, notice: text.data.paste.unreadable(file.name) });
    }
  }

  /** @param {string} json @param {string} name */
  async openAnalysisText(json, name) {
    try {
      const analysis = analysisFrom(json);
      const open = this.engine.table;
      const { table, fingerprint } = analysis;
      if (table !== null && fingerprint !== null && ![null, fingerprint].includes(await fingerprintOf(table))) throw new NotOpened(text.report.refused.damaged);
      if (analysis.table === null) {
        if (!open || this.state.source === null) throw new NotOpened(text.report.refused.otherTable(analysis.source.name));
        const same = analysis.fingerprint !== null && analysis.fingerprint === (await fingerprintOf(open));
        if (!same) throw new NotOpened(text.report.refused.wrongTable(analysis.source.name));
        this.choose(text.report.reopened, () => analysis.choices, false);
      } else {
        await this.open(analysis.table, analysis.source, null, analysis.choices);
      }
      const now = this.state.findings?.version;
      if (now !== undefined && analysis.version !== now) this.set({ ...this.state, notice: text.report.otherVersion(analysis.version ?? '', now) });
      if (analysis.fixed !== null) this.set({ ...this.state, fixed: analysis.fixed });
    } catch (cause) {
      this.set({ ...this.state, notice: cause instanceof NotOpened ? cause.message : text.data.paste.unreadable(name) });
    }
  }

  /** @param {File} file */
  async openFile(file) {
    if (/\.json$/i.test(file.name)) {
      await this.openAnalysis(file);
      return;
    }
    try {
      await this.open(new Uint8Array(await file.arrayBuffer()), { kind: 'own', name: file.name }, null);
    } catch {
      this.set(change.refused(this.state, text.data.paste.unreadable(file.name)));
    }
  }

  /**
   * @param {Uint8Array} bytes
   * @param {import('./types.js').Source} source
   * @param {import('./types.js').Demo|null} demo
   * @param {import('./types.js').Choices|null} [choices] Of a saved analysis.
   */
  async open(bytes, source, demo, choices = null) {
    const wish = this.#wished();
    this.batch.stop();
    window.clearTimeout(this.typing);
    this.set(change.opening(this.state, source, demo));
    if (choices) this.set({ ...this.state, choices });
    try {
      await this.engine.open(bytes);
    } catch (cause) {
      this.#troubled(cause, wish);
      return;
    }
    if (wish === this.wish) await this.refit();
  }

  /** Reads the table with the present choices, then fits. */
  async refit() {
    if (!this.engine.table) return;
    const wish = this.#wished();
    if (this.busySince && performance.now() - this.busySince > SLOW_AFTER) this.engine.replace();
    const plan = this.#planText(this.state.choices);
    const started = (this.busySince = performance.now());
    const slow = window.setTimeout(() => {
      if (wish === this.wish) this.set({ ...this.state, slow: true });
    }, SLOW_AFTER);
    try {
      await this.#read(plan, wish);
      if (wish !== this.wish || this.state.status === 'question' || this.state.status === 'problem') return;
      const answer = await this.engine.run(plan);
      if (wish !== this.wish) return;
      const findings = findingsFrom(answer.findings);
      this.set(change.fitted(this.state, findings, answer, performance.now() - started));
      this.#calibrateLater(plan, wish);
    } catch (cause) {
      this.#troubled(cause, wish);
    } finally {
      window.clearTimeout(slow);
      if (wish === this.wish) this.busySince = 0;
    }
  }

  /** @param {string} plan @param {number} wish */
  async #read(plan, wish) {
    const [preview, description] = await Promise.all([this.engine.preview(plan), this.engine.describe(plan)]);
    if (wish === this.wish) this.set(change.understood(this.state, previewFrom(preview), describedFrom(description)));
  }

  /** @param {unknown} cause @param {number} wish */
  #troubled(cause, wish) {
    if (cause instanceof Overtaken || wish !== this.wish) return;
    if (cause instanceof EngineError && cause.dead) {
      const memory = /memory|allocation/i.test(cause.message);
      this.set({ ...change.failed(this.state, memory ? text.outOfMemory : text.restarted), notice: text.restarted });
    } else {
      this.set(change.refused(this.state, cause instanceof Error ? cause.message : String(cause)));
    }
  }

  /** A new wish: work for older ones is given up. */
  #wished() {
    window.clearTimeout(this.pause);
    this.calibration.stop();
    return (this.wish += 1);
  }

  /** @param {string} plan @param {number} wish */
  #calibrateLater(plan, wish) {
    const { comparisons } = this.state.choices.plan;
    const settled = this.state.status === 'ready' || this.state.status === 'boundary';
    if (!settled || comparisons.small_sample !== 'auto' || comparisons.band !== 'simultaneous') return;
    this.pause = window.setTimeout(() => void this.#calibrate(plan, comparisons.refits, wish), CALIBRATION_PAUSE);
  }

  /** @param {string} plan @param {number} total @param {number} wish */
  async #calibrate(plan, total, wish) {
    const { table } = this.engine;
    if (!table || wish !== this.wish) return;
    try {
      this.set({ ...this.state, calibrating: { done: 0, total, secondsLeft: null } });
      const refits = await this.calibration.run(table, plan, total, (calibrating) => {
        if (wish === this.wish) this.set({ ...this.state, calibrating });
      });
      if (wish !== this.wish) return;
      const answer = refits === null ? null : await this.engine.calibrated(plan, refits);
      if (wish !== this.wish) return;
      this.set(answer ? { ...change.calibrated(this.state, findingsFrom(answer.findings), answer), refits: { plan, refits: refits ?? '' } } : { ...this.state, calibrating: null });
    } catch {
      // The findings stand as they were, with bands by degrees of freedom.
      if (wish === this.wish) this.set({ ...this.state, calibrating: null, notice: text.notCalibrated });
    }
  }

  /** Ends the work under way. A fit takes the last choice back; calibration leaves the findings. */
  stop() {
    this.#wished();
    if (this.state.calibrating) {
      this.set({ ...this.state, calibrating: null, notice: text.notCalibrated });
      return;
    }
    this.busySince = 0;
    this.engine.replace();
    const back = change.undone(this.state);
    if (back === this.state) {
      this.set(change.failed(this.state, text.stopped));
    } else {
      this.set({ ...back, notice: text.stopped });
      void this.refit();
    }
  }
}
