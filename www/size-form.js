/**
 * The sample-size form: what is typed, and the request that it makes. Pure functions.
 */

import { parseNumber } from './numbers.js';
import { text } from './text.js';

/**
 * @typedef {Object} SizeForm Everything as typed.
 * @property {string} controlName
 * @property {string} treatedName
 * @property {{day: string, control: string, treated: string}[]} means
 * @property {'identity'|'log'} transform
 * @property {'sd'|'sem'} known
 * @property {string} spread
 * @property {string} spreadLow
 * @property {string} spreadHigh
 * @property {string} n
 * @property {string} alike
 * @property {string} trend
 * @property {number} serial
 * @property {'stretch'|'landmark'|'average'|'slope'|'onset'} find
 * @property {string} margin
 * @property {string} width
 * @property {string} clusterSize
 * @property {string} clusterAlike
 * @property {string} day
 * @property {string} power
 * @property {string} effect
 * @property {string} designs
 * @property {string} days
 * @property {string} losses
 * @property {string} studies
 * @property {string} one
 * @property {string} many
 */

/** @typedef {{request: Record<string, any>|null, low: number|null, high: number|null, problems: Record<string, string>}} Made */

const words = text.size.problem;

/** @returns {SizeForm} An invented start. */
export function freshForm() {
  return {
    controlName: 'control', treatedName: 'treated',
    means: [{ day: '0', control: '100', treated: '100' }, { day: '7', control: '80', treated: '70' }, { day: '14', control: '60', treated: '40' }],
    transform: 'identity', known: 'sd', spread: '18', spreadLow: '', spreadHigh: '', n: '', alike: '0.6', trend: '0', serial: 0,
    find: 'stretch', day: '14', margin: '5', width: '4', clusterSize: '1', clusterAlike: '0.2', power: '80', effect: '100',
    designs: '4, 6, 8, 10, 12, 16', days: '0, 3, 7, 10, 14', losses: '10', studies: '400', one: 'subject', many: 'subjects',
  };
}

/** Numbers in a list such as "0, 3; 7 10". @param {string} typed */
export function numbersIn(typed) {
  // Beside semicolons a comma is a decimal comma.
  const apart = typed.includes(';') ? /[;\s]+/ : /[,\s]+/;
  return typed.split(apart).filter((part) => part !== '').map((part) => parseNumber(part));
}

/** @param {string} typed @returns {number[][]|null} */
export function designsIn(typed) {
  const parts = typed.split(/[,;\s]+/).filter((part) => part !== '');
  const designs = parts.map((part) => {
    const [a, b = a] = part.split(':').map((one) => parseNumber(one));
    return [a, b];
  });
  const good = designs.every((pair) => pair.every((n) => typeof n === 'number' && Number.isInteger(n) && n >= 2 && n <= 2000));
  return good && designs.length > 0 ? /** @type {number[][]} */ (designs) : null;
}

/**
 * The request, or what is wrong, by field.
 * @param {SizeForm} form
 * @returns {Made}
 */
export function requestOf(form) {
  /** @type {Record<string, string>} */
  const problems = {};
  /** @param {string} key @param {string} typed @param {(value: number) => boolean} fits @param {string} complaint */
  const need = (key, typed, fits, complaint) => {
    const value = parseNumber(typed);
    if (value !== null && fits(value)) return value;
    problems[key] = complaint;
    return 0;
  };
  const any = () => true;
  const positive = (/** @type {number} */ x) => x > 0;
  const rows = form.means.map((row, k) => ({
    day: need(`day-${k}`, row.day, any, words.number),
    control: need(`control-${k}`, row.control, any, words.number),
    treated: need(`treated-${k}`, row.treated, any, words.number),
  })).sort((a, b) => a.day - b.day);
  const n = form.known === 'sem' ? need('n', form.n, (value) => value >= 2, words.positive) : 1;
  const toSd = Math.sqrt(n);
  const spread = need('spread', form.spread, positive, words.positive) * toSd;
  const guess = (/** @type {string} */ key, /** @type {string} */ typed) =>
    (typed.trim() === '' ? null : need(key, typed, positive, words.positive) * toSd);
  const [low, high] = [guess('spreadLow', form.spreadLow), guess('spreadHigh', form.spreadHigh)];
  const alike = need('alike', form.alike, (x) => x >= 0 && x < 1, words.share);
  const trend = need('trend', form.trend, (x) => x >= 0, words.number);
  const power = need('power', form.power, (x) => x > 0 && x < 100, words.percent);
  const effect = need('effect', form.effect, (x) => x > 0 && x <= 400, words.percent);
  const losses = need('losses', form.losses, (x) => x >= 0 && x < 90, words.percent);
  const studies = need('studies', form.studies, (x) => x >= 10 && x <= 100000, words.positive);
  const designs = designsIn(form.designs);
  if (designs === null) problems['designs'] = words.designs;
  const days = numbersIn(form.days);
  const ascending = days.length > 1 && days.every((day, k) => day !== null && (k === 0 || day > /** @type {number} */ (days[k - 1])));
  if (!ascending) problems['days'] = words.days;
  const day = form.find === 'landmark' ? need('day', form.day, any, words.number) : null;
  const onset = form.find === 'onset';
  const margin = onset ? need('margin', form.margin, positive, words.positive) : 0;
  const width = onset ? need('width', form.width, positive, words.positive) : 0;
  const clusterSize = need('clusterSize', form.clusterSize, (x) => Number.isInteger(x) && x >= 0 && x <= 200, words.clusterSize);
  const housed = clusterSize > 1;
  const clusterAlike = housed ? need('clusterAlike', form.clusterAlike, (x) => x >= 0 && x <= alike, words.clusterAlike) : 0;
  if (housed && designs !== null && designs.some((pair) => pair.some((count) => count < 2 * clusterSize))) {
    problems['designs'] = words.twoClusters(2 * clusterSize);
  }
  if (Object.keys(problems).length > 0) return { request: null, low, high, problems };
  const course = (/** @type {string} */ name, /** @type {'control'|'treated'} */ key) => ({ name, means: rows.map((row) => [row.day, row[key]]) });
  const request = {
    days, control: course(form.controlName || 'control', 'control'), treated: course(form.treatedName || 'treated', 'treated'),
    transform: form.transform, spread: { on_a_day: spread, alike, trend, serial: form.serial, cluster_alike: clusterAlike }, effect: effect / 100,
    goal: { find: form.find, day, margin, width, level: 0.95 }, designs, cluster_size: housed ? clusterSize : 0, losses: losses / 100, target: power / 100,
    studies: Math.round(studies), seed: 20260, words: [form.one || 'subject', form.many || 'subjects'],
  };
  return { request, low, high, problems };
}

/**
 * The form of a request that came from the fitted table.
 * @param {SizeForm} form
 * @param {any} request
 * @returns {SizeForm}
 */
export function fromRequest(form, request) {
  const treated = new Map(request.treated.means);
  const means = request.control.means.filter((/** @type {number[]} */ m) => treated.has(m[0])).map((/** @type {number[]} */ m) => ({
    day: String(m[0]), control: String(m[1]), treated: String(treated.get(m[0])),
  }));
  return {
    ...form, controlName: request.control.name, treatedName: request.treated.name, means, transform: request.transform,
    known: 'sd', spread: String(request.spread.on_a_day), spreadLow: '', spreadHigh: '', alike: String(request.spread.alike),
    trend: String(request.spread.trend), serial: request.spread.serial, days: request.days.join(', '),
    day: String(request.days[request.days.length - 1]), effect: '70', one: request.words[0], many: request.words[1],
  };
}

/**
 * The same number of visits placed otherwise between the first and the last.
 * @param {number[]} days
 * @returns {{name: 'present'|'even'|'early'|'late', days: number[]}[]}
 */
export function schedulesOf(days) {
  const [first, last] = [days[0] ?? 0, days[days.length - 1] ?? 1];
  const place = (/** @type {(share: number) => number} */ bend) => days.map((_, k) => {
    const share = bend(k / (days.length - 1));
    return Math.round((first + share * (last - first)) * 100) / 100;
  });
  return [
    { name: 'present', days }, { name: 'even', days: place((x) => x) },
    { name: 'early', days: place((x) => x * x) }, { name: 'late', days: place((x) => 1 - (1 - x) * (1 - x)) },
  ];
}
