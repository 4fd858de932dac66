/**
 * Numbers as the page writes them: by significant digits, with a true minus.
 */

const THIN_SPACE = '\u202f';

/**
 * A number with a fixed count of decimals.
 * @param {number} value
 * @param {number} decimals
 */
export function fixed(value, decimals) {
  const rounded = Number(value.toFixed(decimals));
  const text = Math.abs(rounded).toFixed(decimals);
  const [whole = '', fraction] = text.split('.');
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, THIN_SPACE) : whole;
  return (rounded < 0 ? '\u2212' : '') + grouped + (fraction ? `.${fraction}` : '');
}

/**
 * Decimals that show a quantity of this size with so many significant digits.
 * @param {number} size
 * @param {number} digits
 */
export function decimalsFor(size, digits) {
  const magnitude = Math.abs(size);
  if (!(magnitude > 0) || !Number.isFinite(magnitude)) return 0;
  return Math.min(12, Math.max(0, digits - 1 - Math.floor(Math.log10(magnitude))));
}

/**
 * A number with so many significant digits, never in powers of ten.
 * @param {number|null|undefined} value
 * @param {number} [digits]
 */
export function significant(value, digits = 3) {
  if (value === null || value === undefined || !Number.isFinite(value)) return '\u2013';
  return fixed(value, decimalsFor(value, digits));
}

/**
 * An estimate and its interval, all with the decimals that the interval's
 * width deserves.
 * @param {number|null} value
 * @param {number|null} lower
 * @param {number|null} upper
 * @returns {{value: string, lower: string, upper: string}|null}
 */
export function withInterval(value, lower, upper) {
  if (value === null || !Number.isFinite(value)) return null;
  const half = lower === null || upper === null ? 0 : (upper - lower) / 2;
  const decimals = half > 0 ? decimalsFor(half, 2) : decimalsFor(value, 3);
  /** @param {number|null} number */
  const write = (number) => (number === null ? '\u2013' : fixed(number, decimals));
  return { value: write(value), lower: write(lower), upper: write(upper) };
}

/**
 * How times are written when the follow-up spans so much: estimates get a
 * fixed count of decimals.
 * @param {number} span
 */
export function timeDecimals(span) {
  return decimalsFor(span / 10, 2);
}

/**
 * A time as estimated, with the decimals of its span.
 * @param {number} time
 * @param {number} span
 */
export function estimatedTime(time, span) {
  return fixed(time, timeDecimals(span));
}

/**
 * A time as observed or pointed at: no decimals where it has none.
 * @param {number} time
 * @param {number} span
 */
export function plainTime(time, span) {
  const text = fixed(time, Math.max(1, timeDecimals(span)));
  return text.includes('.') ? text.replace(/\.?0+$/, '') : text;
}

/**
 * A probability level in percent.
 * @param {number} level
 */
export function percentLevel(level) {
  return `${Number((level * 100).toFixed(3))}\u00a0%`;
}

/**
 * What a person typed as a number, as it is written anywhere: decimal point or comma, thousands set apart by spaces,
 * apostrophes or the other mark; `null` if it is none. One mark alone is the decimal one.
 * @param {string} text
 */
export function parseNumber(text) {
  const bare = text.trim().replace('\u2212', '-').replace(/(?<=\d)[\s\u2019'](?=\d{3}(?!\d))/g, '');
  const [point, comma] = [bare.lastIndexOf('.'), bare.lastIndexOf(',')];
  const both = point >= 0 && comma >= 0;
  const thousands = both && point > comma ? /,(?=\d{3}(?!\d))/g : /\.(?=\d{3}(?!\d))/g;
  const plain = (both ? bare.replace(thousands, '') : bare).replace(',', '.');
  if (plain === '' || !/^[-+]?(\d+\.?\d*|\.\d+)(e[-+]?\d+)?$/i.test(plain)) return null;
  const value = Number(plain);
  return Number.isFinite(value) ? value : null;
}
