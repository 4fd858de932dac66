/**
 * The rooms, in the order of the navigation. A room is one module that exports
 * `{id, title, mount}`; adding it here is all it takes.
 */

import { checksRoom } from './rooms/checks.js';
import { coursesRoom } from './rooms/courses.js';
import { dataRoom } from './rooms/data.js';
import { dropoutRoom } from './rooms/dropout.js';
import { reportRoom } from './rooms/report.js';
import { sizeRoom } from './rooms/size.js';
import { usualRoom } from './rooms/usual.js';

/** @type {readonly import('./types.js').Room[]} */
export const rooms = [dataRoom, coursesRoom, checksRoom, usualRoom, dropoutRoom, sizeRoom, reportRoom];

/** The room for an address that names none. */
export const FIRST_ROOM = coursesRoom.id;

/**
 * The room that an address asks for.
 * @param {string} hash
 */
export function roomOf(hash) {
  const name = hash.replace(/^#\/?/, '');
  return rooms.find((room) => room.id === name)?.id ?? FIRST_ROOM;
}
