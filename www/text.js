/**
 * Every word that the page shows, in one place, so that it can be translated.
 * Functions take numbers that are already written out and names as they are.
 */

import { words } from './text/words.js';
import { markers } from './text/markers.js';
import { plan } from './text/plan.js';
import { copyCheck } from './text/copy-check.js';
import { data } from './text/data.js';
import { privacy } from './text/privacy.js';
import { checks } from './text/checks.js';
import { effects } from './text/effects.js';
import { dropout } from './text/dropout.js';
import { report } from './text/report.js';
import { size } from './text/size.js';
import { usual } from './text/usual.js';

/**
 * "1 visit", "3 visits".
 * @param {number} count
 * @param {string} one
 * @param {string} many
 */
export function counted(count, one, many) {
  return `${count}\u00a0${count === 1 ? one : many}`;
}

export const text = {
  name: 'Courseband',
  plan,
  copyCheck,
  data,
  privacy,
  checks,
  dropout,
  effects,
  markers,
  report,
  size,
  usual,
  words,

  rooms: { data: 'Data', courses: 'Time courses', checks: 'Checks', usual: 'Usual analyses', dropout: 'Dropout', size: 'Sample size', report: 'Report' },
  navigation: 'Rooms',
  skip: 'Skip to the room',

  states: {
    empty: 'No table yet. Paste one, or open an invented example.',
    reading: 'Reading the table …',
    fitting: 'Fitting …',
    slow: 'Still fitting. Your table and choices stay as they are.',
    question: 'One question first: findings wait for the answer.',
    problem: 'The table or the plan cannot be used yet.',
    failed: 'No fit was reached, so no findings are shown.',
    boundary: 'Fitted at the edge of what the model allows; see the notes.',
    /** @param {string} subjects @param {string} rows @param {string} milliseconds */
    ready: (subjects, rows, milliseconds) => `Fitted ${subjects}, ${rows}, in ${milliseconds}\u00a0ms.`,
  },
  /** @param {number} done @param {number} total @param {number|null} seconds */
  calibrating: (done, total, seconds) =>
    `Bands being calibrated by refits, ${done} of ${total}${seconds === null ? '' : `, ${seconds}\u00a0s left`}. Days are provisional until then.`,
  notCalibrated: 'Bands were not calibrated; they rest on degrees of freedom.',
  provisional: 'provisional',
  seeTable: 'Go to the table',
  stop: 'Stop',
  retry: 'Fit again',
  stopped: 'Stopped. The last choice was taken back.',
  restarted: 'The computation stopped unexpectedly and was started afresh. Your table and choices are kept. Take back the last choice, or fit again.',
  outOfMemory: 'This needed more memory than the browser gives. Fewer knots, or a straight course, need less.',
  notLoaded: 'The computing part of the page could not be loaded. Load the page again; if that does not help, the folder is not complete.',
  tryInstead: 'What to try: a simpler course (straight), only a level for each subject, independent visits, or one spread for every group.',

  progress: 'Progress',

  demo: {
    label: 'Invented example',
    /** @param {string} title */
    mark: (title) => `Invented example: ${title}`,
    own: 'Use my table',
    strip: 'The numbers were made up by a program. They say nothing about any treatment.',
  },

  strips: {
    label: 'Courses, gaps and number followed, on one time axis',
    /** @param {string} time @param {string} word */
    at: (time, word) => `${word} ${time}`,
    slider: 'Day read',
    hold: 'Click to hold the cursor; click again to let go',
    held: (/** @type {string} */ flag) => `${flag} \u00b7 held`,
    earlier: 'Visit before',
    later: 'Visit after',
    field: 'Read at',
    caption: 'Judge gaps by the gap strips below, not by whether course bands overlap.',
    log: (/** @type {string} */ noun) => `On the log scale each line is the typical ${noun} (geometric mean).`,
    keys: 'With the strips focused: left and right arrows step, page up and page down go from visit to visit, home and end go to the ends.',
    over: (/** @type {string} */ name) => `Over the courses, as thin double lines: ${name}.`,
    overAway: 'Take them away',
    grip: {
      title: 'Drag to say how large a gap does not matter',
      none: 'every gap matters',
      value: (/** @type {string} */ margin, /** @type {boolean} */ ratio) => `\u00b1${margin}${ratio ? '\u00a0%' : ''}`,
    },
    grey: 'These strips belong to the last plan that could be fitted.',
  },

  reading: {
    title: (/** @type {string} */ time, /** @type {string} */ word) => `Read at ${word} ${time}`,
    between: (/** @type {string} */ before, /** @type {string} */ after) => `between the visits at ${before} and ${after}`,
    visit: 'a visit',
    groups: 'Group',
    value: 'Value',
    interval: 'Interval',
    followed: 'Followed',
    pairs: 'Gap',
    state: 'Lane',
    none: 'not followed here',
    onlyOne: (/** @type {string} */ group) => `only ${group} followed`,
    neither: 'neither followed',
    /** @param {string} lower @param {string} upper */
    range: (lower, upper) => `${lower} to ${upper}`,
    /** @param {string} to @param {string} from */
    ratio: (to, from) => `${to} / ${from}`,
    /** @param {string} to @param {string} from */
    difference: (to, from) => `${to} \u2212 ${from}`,
    /**
     * What a difference's numbers are.
     * @param {{kind?: string, to: string, from: string}} gap
     * @param {boolean} ratio
     * @param {string} [link]
     */
    gap: ({ kind, to, from }, ratio, link) => (kind === 'trend' ? `${ratio ? 'Factor' : 'Change'} per step, ${from} to ${to}`
      : link === 'logit' ? `odds of ${to} / odds of ${from}` : ratio ? `${to} / ${from}` : `${to} \u2212 ${from}`),
    states: { beyond: 'beyond', apart: 'apart', inside: 'inside', undecided: 'undecided', outside: 'not compared' },
    openLabel: (/** @type {string} */ pair) => `Show the gap strip of ${pair}`,
  },

  findings: {
    title: 'Findings',
    waiting: 'Findings appear here when the table has been fitted.',
    question: 'Hidden until the question is answered.',
    failed: 'None: the model could not be fitted.',
    more: (/** @type {number} */ count, /** @type {boolean} */ noneApart) => `${count} more${noneApart ? ', none apart' : ''}`,
    depends: 'Depends on',
    notes: 'To know',
    scale: 'scale',
    mayFit: (/** @type {string} */ name) => `They may fit better as: ${name}.`,
    take: 'Use that',
    words: 'What the words mean',
    onlyOne: 'There is one group, so nothing is compared. The strip shows its course.',
  },

  tables: {
    title: 'As tables: visits and stretches',
    visits: (/** @type {string} */ response) => `${response || 'Response'} at the visits, with bands`,
    stretches: 'Stretches of every gap',
    from: (/** @type {string} */ word) => `from ${word}`,
    to: (/** @type {string} */ word) => `to ${word}`,
    first: 'first visit',
    last: 'last visit',
    directions: { above: 'above', below: 'below' },
  },

  change: {
    /** @param {string} label @param {string} pair @param {string|null} before @param {string|null} after @param {string} word */
    line: (label, pair, before, after, word) => {
      if (before === after) return `${label}. ${pair}: apart from ${word} ${after}, as before`;
      if (before === null) return `${label}. ${pair}: was not shown apart, now from ${word} ${after}`;
      if (after === null) return `${label}. ${pair}: was ${word} ${before}, now not shown apart`;
      return `${label}. ${pair}: was ${word} ${before}, now ${after}`;
    },
    undo: 'undo',
    redo: 'redo',
    undone: (/** @type {string} */ label) => `Taken back: ${label}`,
    redone: (/** @type {string} */ label) => `Done again: ${label}`,
    /** @param {number} changed @param {number} all @param {string} headlines */
    announce: (changed, all, headlines) =>
      changed === 0 ? 'Fitted again. No finding changed.' : `${changed} of ${counted(all, 'finding', 'findings')} changed: ${headlines}`,
  },

  footer: 'Not treatment advice; have confirmatory analyses reviewed.',
};
