/**
 * The few helpers through which the page touches the document. Text goes in as
 * text: nothing that comes from a table is ever read as markup.
 */

/** @typedef {string|number|boolean|null|undefined|((event: any) => void)} Attribute */

const SVG = 'http://www.w3.org/2000/svg';

/**
 * An element. A function attribute listens (`onclick`), `class` and the rest
 * are attributes, `false` and `null` leave an attribute out.
 * @template {keyof HTMLElementTagNameMap} T
 * @param {T} tag
 * @param {Record<string, Attribute>} [attributes]
 * @param {...(Node|string|null)} children
 * @returns {HTMLElementTagNameMap[T]}
 */
export function el(tag, attributes = {}, ...children) {
  const node = document.createElement(tag);
  setAttributes(node, attributes);
  append(node, children);
  return node;
}

/**
 * An element of a small drawing.
 * @param {string} tag
 * @param {Record<string, Attribute>} [attributes]
 * @param {...Node} children
 * @returns {SVGElement}
 */
export function svg(tag, attributes = {}, ...children) {
  const node = /** @type {SVGElement} */ (document.createElementNS(SVG, tag));
  setAttributes(node, attributes);
  append(node, children);
  return node;
}

/**
 * @param {Element} node
 * @param {Record<string, Attribute>} attributes
 */
function setAttributes(node, attributes) {
  for (const [name, value] of Object.entries(attributes)) {
    if (typeof value === 'function') node.addEventListener(name.replace(/^on/, ''), value);
    else if (value === true) node.setAttribute(name, '');
    else if (value !== false && value !== null && value !== undefined) node.setAttribute(name, String(value));
  }
}

/**
 * @param {Element} node
 * @param {(Node|string|null)[]} children
 */
function append(node, children) {
  for (const child of children) if (child !== null) node.append(child);
}

/**
 * Sets text only where it differs, so that nothing is announced or laid out
 * for no reason.
 * @param {Node} node
 * @param {string} text
 */
export function setText(node, text) {
  if (node.textContent !== text) node.textContent = text;
}

/**
 * Shows or hides.
 * @param {HTMLElement} node
 * @param {boolean} shown
 */
export function show(node, shown) {
  if (node.hidden === shown) node.hidden = !shown;
}

/**
 * Makes the container hold one node per item, in order, keeping the node of an
 * item whose key was there before.
 * @template Item
 * @param {Element} container
 * @param {readonly Item[]} items
 * @param {(item: Item, index: number) => string} key
 * @param {(item: Item, index: number) => Element} mount
 * @param {(node: any, item: Item, index: number) => void} [update]
 */
export function reconcile(container, items, key, mount, update) {
  /** @type {Map<string, Element>} */
  const before = new Map();
  for (const child of Array.from(container.children)) {
    before.set(child.getAttribute('data-key') ?? '', child);
  }
  /** @type {Element|null} */
  let last = null;
  items.forEach((item, index) => {
    const name = key(item, index);
    const node = before.get(name) ?? mount(item, index);
    before.delete(name);
    node.setAttribute('data-key', name);
    update?.(node, item, index);
    const place = last ? last.nextElementSibling : container.firstElementChild;
    if (place !== node) container.insertBefore(node, place);
    last = node;
  });
  for (const gone of before.values()) gone.remove();
}

/**
 * Calls back only when the looked-at values changed since the last call.
 * @param {(state: import('./types.js').State) => readonly unknown[]} look
 * @param {(state: import('./types.js').State) => void} then
 * @returns {(state: import('./types.js').State) => void}
 */
export function whenChanged(look, then) {
  /** @type {readonly unknown[]|null} */
  let seen = null;
  return (state) => {
    const now = look(state);
    if (seen && now.length === seen.length && now.every((value, index) => value === seen?.[index])) return;
    seen = now;
    then(state);
  };
}

/**
 * Fills a list with what `make` gives for each item, one item a frame, so that the page stays
 * responsive; a later call takes over from an earlier one.
 * @template T
 * @param {HTMLElement} list
 * @param {readonly T[]} items
 * @param {(item: T, index: number) => Node} make
 */
export function fillByFrames(list, items, make) {
  const turn = Symbol('turn');
  turns.set(list, turn);
  list.replaceChildren();
  /** @param {number} k */
  const next = (k) => {
    const item = items[k];
    if (turns.get(list) !== turn || item === undefined) return;
    list.append(make(item, k));
    if (k + 1 < items.length) requestAnimationFrame(() => next(k + 1));
  };
  next(0);
}

/** @type {WeakMap<HTMLElement, symbol>} */
const turns = new WeakMap();
