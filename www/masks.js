/**
 * Group names masked, so that rows are judged without knowing whose they are.
 * The names stand for themselves in the table; they are replaced on the way to
 * the computing module and wherever the page shows cells. Pure functions.
 */

/** @typedef {import('./types.js').Choices} Choices */
/** @typedef {Record<string, string>} Masks Real name to mask. */

/**
 * Masks in an order drawn anew each time.
 * @param {readonly string[]} groups
 * @param {(letter: string) => string} named
 * @param {() => number} [random] From 0 to below 1.
 * @returns {Masks}
 */
export function masksFor(groups, named, random = drawn) {
  const order = groups.map((_, k) => k);
  for (let k = order.length - 1; k > 0; k -= 1) {
    const other = Math.floor(random() * (k + 1));
    [order[k], order[other]] = [/** @type {number} */ (order[other]), /** @type {number} */ (order[k])];
  }
  return Object.fromEntries(groups.map((group, k) => [group, named(letter(/** @type {number} */ (order[k])))]));
}

function drawn() {
  return /** @type {number} */ (crypto.getRandomValues(new Uint32Array(1))[0]) / 2 ** 32;
}

/** A, B ... Z, AA ... @param {number} k @returns {string} */
function letter(k) {
  const last = String.fromCharCode(65 + (k % 26));
  return k < 26 ? last : `${letter(Math.floor(k / 26) - 1)}${last}`;
}

/**
 * The plan with its groups masked.
 * @template {import('./types.js').Plan} P
 * @param {P} plan
 * @param {Masks|null} masks
 * @returns {P}
 */
export function maskedPlan(plan, masks) {
  if (masks === null) return plan;
  const { control } = plan.comparisons;
  return {
    ...plan,
    reading: { ...plan.reading, group_order: plan.reading.group_order.map((name) => masks[name] ?? name), merges: [...plan.reading.merges, ...Object.entries(masks).map(([from, into]) => ({ from, into }))] },
    comparisons: { ...plan.comparisons, control: control === null ? null : masks[control] ?? control },
  };
}

/**
 * A cell of the group column, masked.
 * @param {string} cell
 * @param {Masks|null} masks
 */
export function maskedCell(cell, masks) {
  if (masks === null) return cell;
  const folded = (/** @type {string} */ text) => text.trim().replace(/\s+/g, ' ').toLowerCase();
  const name = Object.keys(masks).find((one) => folded(one) === folded(cell));
  return name === undefined ? maskedText(cell, masks) : /** @type {string} */ (masks[name]);
}

/**
 * A text with every name of a group in it masked, longer names first. Numbers and single letters are left: in a text they
 * are rarely a group's name.
 * @param {string} text
 * @param {Masks|null} masks
 */
export function maskedText(text, masks) {
  if (masks === null) return text;
  const names = Object.keys(masks).filter((name) => name.length > 1 && !/^[\d.,\s-]*$/.test(name)).sort((a, b) => b.length - a.length);
  if (names.length === 0) return text;
  const pattern = names.map((name) => name.replace(/[.*+?^${}()|[\]\\]/g, '\\$&')).join('|');
  return text.replace(new RegExp(`(?<![\\p{L}\\p{N}])(?:${pattern})(?![\\p{L}\\p{N}])`, 'giu'), (found) => {
    const name = names.find((one) => one.toLowerCase() === found.toLowerCase());
    return name === undefined ? found : /** @type {string} */ (masks[name]);
  });
}

/**
 * The choices with the names shown again: what was chosen by a mask is that group's.
 * @param {Choices} choices
 * @returns {Choices}
 */
export function unmasked(choices) {
  if (choices.masks === null) return choices;
  const real = Object.fromEntries(Object.entries(choices.masks).map(([name, mask]) => [mask, name]));
  const { control } = choices.plan.comparisons;
  return {
    ...choices, masks: null,
    plan: { ...choices.plan, reading: { ...choices.plan.reading, group_order: choices.plan.reading.group_order.map((name) => real[name] ?? name) }, comparisons: { ...choices.plan.comparisons, control: control === null ? null : real[control] ?? control } },
  };
}
