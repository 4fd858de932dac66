/**
 * What stands around every room: name, rooms, the mark of an invented example,
 * the one progress line, the footer and the voice for screen readers.
 */

import { el, setText, show, whenChanged } from '../dom.js';
import { rooms } from '../rooms.js';
import { text } from '../text.js';
import { mountCopyCheck } from './copy-check.js';
import { mountFound } from './keeping.js';
import { mountPrivacy } from './privacy.js';
import { mountProgress } from './progress.js';

/** @typedef {import('../types.js').View} View */

/**
 * @param {HTMLElement} body
 * @param {import('../types.js').Acts} acts
 * @returns {View}
 */
export function mountFrame(body, acts) {
  const main = el('main', { id: 'room', tabindex: '-1' });
  const voice = el('div', { class: 'unseen', role: 'status', 'aria-live': 'polite' });
  const navigation = mountNavigation(acts);
  const mark = mountMark(acts);
  const found = mountFound(acts);
  const progress = mountProgress(acts);
  const privacy = mountPrivacy();
  const copyCheck = mountCopyCheck(acts);
  body.append(
    el('a', { class: 'skip', href: '#room', onclick: (/** @type {Event} */ event) => { event.preventDefault(); main.focus(); } }, text.skip),
    el('header', { class: 'head' }, el('h1', { class: 'name' }, text.name), navigation.node, privacy.button),
    found.node,
    mark.node,
    progress.node,
    main,
    el('footer', { class: 'foot' }, el('p', {}, text.footer), copyCheck.button),
    privacy.dialog,
    copyCheck.dialog,
    voice,
  );

  const homes = rooms.map((room) => {
    const home = el('section', { class: `room room-${room.id}`, 'aria-label': room.title, hidden: true });
    main.append(home);
    return { room, home, view: room.mount(home, acts) };
  });

  /** @type {string|null} */
  let shown = null;
  /** A room is entered: the title says so, and the focus goes there. @param {string} id */
  function enter(id) {
    document.title = `${rooms.find((room) => room.id === id)?.title ?? ''} \u00b7 ${text.name}`;
    if (shown !== null && document.activeElement?.closest('main')) main.focus();
    shown = id;
  }

  return {
    update(state) {
      document.documentElement.dataset.state = state.status;
      document.documentElement.dataset.bands = state.calibrating ? 'calibrating' : state.refits ? 'calibrated' : 'quick';
      if (state.room !== shown) enter(state.room);
      for (const { room, home, view } of homes) {
        show(home, room.id === state.room);
        if (room.id === state.room) view.update(state);
      }
      navigation.update(state);
      found.update(state);
      mark.update(state);
      progress.update(state);
      setText(voice, state.announcement);
    },
  };
}

/** @param {import('../types.js').Acts} acts */
function mountNavigation(acts) {
  const links = rooms.map((room) => el('a', { href: `#/${room.id}` }, room.title));
  const options = rooms.map((room) => el('option', { value: room.id }, room.title));
  const menu = el('select', {
    class: 'rooms-menu', 'aria-label': text.navigation,
    onchange: (/** @type {Event} */ event) => acts.go(/** @type {HTMLSelectElement} */ (event.currentTarget).value),
  }, ...options);
  const node = el('nav', { class: 'rooms', 'aria-label': text.navigation }, el('div', { class: 'rooms-links' }, ...links), menu);
  const update = whenChanged((state) => [state.room], (state) => {
    menu.value = state.room;
    rooms.forEach((room, index) => {
      if (room.id === state.room) links[index]?.setAttribute('aria-current', 'page');
      else links[index]?.removeAttribute('aria-current');
    });
  });
  return { node, update };
}

/** @param {import('../types.js').Acts} acts */
function mountMark(acts) {
  const title = el('strong');
  const toOwn = el('button', { type: 'button', 'data-act': 'own-table', onclick: () => acts.bringTable() }, text.demo.own);
  const node = el('section', { class: 'mark', 'data-region': 'invented', 'aria-label': text.demo.label, hidden: true }, title, el('span', {}, text.demo.strip), el('a', { href: '#/size', class: 'mark-size' }, text.size.start), toOwn);
  const update = whenChanged((state) => [state.source, state.room], ({ source, room }) => {
    show(node, source?.kind === 'demo');
    show(toOwn, room !== 'data');
    setText(title, source ? text.demo.mark(source.name) : '');
  });
  return { node, update };
}
