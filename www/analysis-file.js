/**
 * An analysis as one file: choices, source, and the table or only its
 * fingerprint. Reading one refuses what it cannot keep to the last digit.
 */

import { freshFigure } from './figure-choices.js';
import { completePlan } from './plan.js';
import { text } from './text.js';

/** @typedef {import('./types.js').Choices} Choices */
/** @typedef {import('./types.js').Source} Source */
/** @typedef {{version?: string, choices: Choices, source: Source, table: Uint8Array|null, fingerprint: string|null, fixed: import('./types.js').Plan|null}} Analysis `fixed`: the plan as it was fixed. */

/** Raise it when the file changes in a way that an older page cannot read. */
const FORMAT = 1;
const words = text.report.refused;

/** A message for the person, not a fault of the page. */
export class NotOpened extends Error {}

/**
 * SHA-256 of a table; `null` where the browser computes none.
 * @param {Uint8Array} bytes
 */
export async function fingerprintOf(bytes) {
  if (!globalThis.crypto?.subtle) return null;
  const digest = new Uint8Array(await crypto.subtle.digest('SHA-256', /** @type {any} */ (bytes)));
  return Array.from(digest, (byte) => byte.toString(16).padStart(2, '0')).join('');
}

/** @param {Uint8Array} bytes */
function toText(bytes) {
  let letters = '';
  for (let k = 0; k < bytes.length; k += 0x8000) letters += String.fromCharCode(...bytes.subarray(k, k + 0x8000));
  return btoa(letters);
}

/**
 * @param {Analysis} analysis
 * @param {string} version
 */
export function analysisText({ choices, source, table, fingerprint, fixed }, version) {
  const whole = {
    courseband: version, format: FORMAT, source: { kind: source.kind, name: source.name }, fixed,
    table: { sha256: fingerprint, base64: table === null ? null : toText(table) }, choices,
  };
  return `${JSON.stringify(whole, null, 2)}\n`;
}

/**
 * @param {string} json
 * @returns {Analysis}
 */
export function analysisFrom(json) {
  /** @type {any} */
  let read;
  try {
    read = JSON.parse(json);
  } catch {
    throw new NotOpened(words.notOurs);
  }
  const { courseband, format, choices, source, table } = read ?? {};
  if (typeof courseband !== 'string' || typeof choices?.plan !== 'object' || typeof format !== 'number') throw new NotOpened(words.notOurs);
  if (format > FORMAT) throw new NotOpened(words.newer(courseband));
  const base64 = table?.base64 ?? null;
  return {
    version: courseband,
    source: { kind: source?.kind === 'demo' ? 'demo' : 'own', name: String(source?.name ?? '') },
    table: base64 === null ? null : Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0)),
    fingerprint: table?.sha256 ?? null,
    fixed: read.fixed === true ? completePlan(choices.plan) : read.fixed ? completePlan(read.fixed) : null,
    choices: {
      plan: completePlan(choices.plan), called: choices.called ?? {}, noun: choices.noun ?? { ...text.plan.choices.noun.default },
      leftOut: choices.leftOut ?? [], edits: choices.edits ?? {}, masks: choices.masks ?? null, figure: { ...freshFigure(), ...choices.figure },
      markers: choices.markers ?? { columns: null, rate: 0.05 },
    },
  };
}

/**
 * Where a plan departs from another, as `key: was, now`.
 * @param {any} before
 * @param {any} now
 * @param {string} [path]
 * @returns {string[]}
 */
export function departures(before, now, path = '') {
  if (JSON.stringify(before) === JSON.stringify(now)) return [];
  const nested = (/** @type {any} */ value) => value !== null && typeof value === 'object' && !Array.isArray(value);
  if (!nested(before) || !nested(now)) return [`${path}: ${JSON.stringify(before)} \u2192 ${JSON.stringify(now)}`];
  const keys = Array.from(new Set([...Object.keys(before), ...Object.keys(now)]));
  return keys.flatMap((key) => departures(before[key], now[key], path === '' ? key : `${path}.${key}`));
}
