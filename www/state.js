/**
 * The page's state and every way it can change. Pure functions: each takes a
 * state and gives the next one.
 */

import { changedSentences, onset, onsetChange } from './changes.js';
import { freshFigure } from './figure-choices.js';
import { completePlan, defaultPlan } from './plan.js';
import { firstStop, nearest, stops } from './reading.js';
import { text } from './text.js';

/** @typedef {import('./types.js').State} State */
/** @typedef {import('./types.js').Choices} Choices */
/** @typedef {import('./types.js').Findings} Findings */

/** @returns {Choices} */
export function freshChoices() {
  return {
    plan: defaultPlan(), called: {}, noun: { ...text.plan.choices.noun.default }, leftOut: [], edits: {}, figure: freshFigure(), masks: null, markers: { columns: null, rate: 0.05 },
  };
}

/** @returns {State['markers']} */
export function noMarkers() {
  return { offered: null, progress: null, of: null, answer: null, message: null };
}

/** @returns {State} */
export function initialState() {
  return {
    room: 'courses', status: 'empty', source: null, preview: null, description: null,
    choices: freshChoices(), history: { past: [], future: [] },
    findings: null, drawing: null, change: null, message: null, notice: null,
    cursor: null, seen: false, slow: false, calibrating: null, took: null, openPairs: [], over: null, demos: [], announcement: '',
    answers: { checks: null, usual: null, dropout: null, candidates: null, report: null }, refits: null, fixed: null, lookedAt: [],
    markers: noMarkers(), keeping: { on: false, found: null, message: null },
  };
}

/** @param {State} state @param {string} room @returns {State} */
export function entered(state, room) {
  return state.room === room ? state : { ...state, room };
}

/**
 * Another table is being read: nothing of the one before stays.
 * @param {State} state
 * @param {import('./types.js').Source} source
 * @param {import('./types.js').Demo|null} demo
 * @returns {State}
 */
export function opening(state, source, demo) {
  const choices = freshChoices();
  return {
    ...initialState(), room: state.room, demos: state.demos, keeping: state.keeping, source, status: 'reading',
    choices: demo ? demoChoices(choices, demo) : choices,
  };
}

/** @param {Choices} choices @param {import('./types.js').Demo} demo @returns {Choices} */
function demoChoices(choices, demo) {
  const plan = completePlan(/** @type {Record<string, any>} */ (demo.plan));
  const leftOut = plan.exclusions.map(({ row, column = null, reason }) => ({ row, column, reason, seen: false }));
  return {
    ...choices, plan: { ...plan, exclusions: [] }, leftOut,
    noun: { one: plan.words.subject, many: plan.words.subjects }, called: demo.called ?? choices.called,
  };
}

/**
 * Questions that still wait for an answer.
 * @param {State} state
 */
export function openQuestions(state) {
  return (state.preview?.questions ?? []).filter((question) => question.blocking);
}

/**
 * The reader's understanding of the table has arrived.
 * @param {State} state
 * @param {import('./types.js').Preview} preview
 * @param {import('./types.js').Description|null} description
 * @returns {State}
 */
export function understood(state, preview, description) {
  const next = { ...state, preview, description };
  if (preview.refusal !== null) return refused(next, preview.refusal);
  return openQuestions(next).length > 0 ? withoutFindings(next, 'question', null) : { ...next, status: 'fitting' };
}

/** @param {State} state @param {'question'|'problem'|'failed'} status @param {string|null} message @returns {State} */
function withoutFindings(state, status, message) {
  return { ...state, status, message, findings: status === 'failed' ? state.findings : null, slow: false, announcement: message ?? text.states[status] };
}

/** @param {State} state @param {string} message @returns {State} */
export function refused(state, message) {
  return withoutFindings(state, 'problem', message);
}

/** @param {State} state @param {string} message @returns {State} */
export function failed(state, message) {
  return withoutFindings(state, 'failed', message);
}

/**
 * A choice. The one before goes into the history; what had been undone is gone.
 * Choices made while typing one field join into one step.
 * @param {State} state
 * @param {string} label
 * @param {(choices: Choices) => Choices} change
 * @param {boolean} typing
 * @returns {State}
 */
export function chosen(state, label, change, typing) {
  const choices = change(state.choices);
  if (choices === state.choices) return state;
  const { past } = state.history;
  const last = past[past.length - 1];
  const joined = typing && last !== undefined && last.label === `${label}\u200b`;
  const step = { label: typing ? `${label}\u200b` : label, choices: state.choices };
  return {
    ...state, choices, notice: null, calibrating: null,
    history: { past: joined ? past : [...past, step], future: [] },
    change: { label, back: false, before: null, after: null, pair: null },
  };
}

/** @param {State} state @returns {State} */
export function undone(state) {
  const past = state.history.past.slice();
  const step = past.pop();
  if (!step) return state;
  const future = [{ label: step.label, choices: state.choices }, ...state.history.future];
  return {
    ...state, choices: step.choices, notice: null, calibrating: null, history: { past, future },
    change: { label: text.change.undone(step.label.replace('\u200b', '')), back: true, before: null, after: null, pair: null },
  };
}

/** @param {State} state @returns {State} */
export function redone(state) {
  const [step, ...future] = state.history.future;
  if (!step) return state;
  const past = [...state.history.past, { label: step.label, choices: state.choices }];
  return {
    ...state, choices: step.choices, notice: null, calibrating: null, history: { past, future },
    change: { label: text.change.redone(step.label.replace('\u200b', '')), back: false, before: null, after: null, pair: null },
  };
}

/**
 * Findings have arrived. A failed fit keeps the last strips to grey them, and
 * shows no findings.
 * @param {State} state
 * @param {Findings} findings
 * @param {{findings: string, traces: string}} drawing
 * @param {number} took
 * @returns {State}
 */
export function fitted(state, findings, drawing, took) {
  if (findings.fit.status === 'failed') {
    return { ...failed(state, findings.fit.remarks.join(' ')), took, refits: null };
  }
  const days = state.change ? onsetChange(state.findings, findings) : null;
  const status = findings.fit.status === 'boundary' ? 'boundary' : 'ready';
  return {
    ...state, status, findings, drawing, took, refits: null, message: null, slow: false, seen: true,
    change: state.change ? { ...state.change, ...(days ?? {}) } : null,
    cursor: keptCursor(state.cursor, findings),
    over: null,
    openPairs: state.openPairs.filter((pair) => pair < findings.differences.length),
    announcement: announcementOf(state.findings, findings),
  };
}

/**
 * The same findings with calibrated bands: the choice before them now leads
 * to these days.
 * @param {State} state
 * @param {Findings} findings
 * @param {{findings: string, traces: string}} drawing
 * @returns {State}
 */
export function calibrated(state, findings, drawing) {
  const { change } = state;
  return {
    ...state, findings, drawing, calibrating: null,
    change: change?.pair ? { ...change, after: onset(findings, change.pair) } : change,
    announcement: announcementOf(state.findings, findings),
  };
}

/** @param {number|null} cursor @param {Findings} findings */
function keptCursor(cursor, findings) {
  return cursor === null ? firstStop(findings) : nearest(stops(findings), cursor);
}

/** @param {Findings|null} before @param {Findings} after */
function announcementOf(before, after) {
  const changed = changedSentences(before, after);
  const headlines = changed.slice(0, 2).map((row) => row.headline).join(' ');
  return text.change.announce(changed.length, after.sentences.length, headlines);
}

/**
 * What a room asked for is under way, has come, or has failed. While a newer one is under way the last stays in sight.
 * @param {State} state
 * @param {'checks'|'usual'|'dropout'|'candidates'|'report'} room
 * @param {Partial<import('./types.js').Answer>} answer
 * @returns {State}
 */
export function answered(state, room, answer) {
  const before = state.answers[room] ?? { plan: '', status: 'working', value: null, message: null };
  return { ...state, answers: { ...state.answers, [room]: { ...before, ...answer } } };
}

/** @param {State} state @param {number} time @returns {State} */
export function pointed(state, time) {
  if (!state.findings) return state;
  const cursor = nearest(stops(state.findings), time);
  return cursor === state.cursor ? state : { ...state, cursor };
}

/**
 * Opens or closes a pair's gap strip; at most three are open, the oldest makes room.
 * @param {State} state
 * @param {number} pair
 * @returns {State}
 */
export function pairToggled(state, pair) {
  const without = state.openPairs.filter((one) => one !== pair);
  const openPairs = without.length < state.openPairs.length ? without : [...without, pair].slice(-3);
  return { ...state, openPairs };
}

/**
 * Leaves a row (or one cell of a wide table) out, with its reason, and whether
 * findings had been seen.
 * @param {import('./types.js').LeftOut} left
 * @returns {(choices: Choices) => Choices}
 */
export function leavingOut(left) {
  return (choices) => {
    const others = takingBack(left.row, left.column)(choices).leftOut;
    return { ...choices, leftOut: [...others, left].sort((a, b) => a.row - b.row) };
  };
}

/** @param {number} row @param {string|null} column @returns {(choices: Choices) => Choices} */
export function takingBack(row, column) {
  return (choices) => ({ ...choices, leftOut: choices.leftOut.filter((one) => one.row !== row || one.column !== column) });
}

/**
 * Lines of another model laid over the courses, or taken away; they go with the next fit.
 * @param {State} state
 * @param {import('./types.js').LaidOver|null} over
 * @returns {State}
 */
export function laidOver(state, over) {
  return { ...state, over };
}
