/**
 * Work kept on this device: the only module that touches the browser's
 * storage. Nothing is written, and no store is made, before somebody asks.
 */

const FLAG = 'courseband-keeps';
const BASE = 'courseband';
const STORE = 'work';
const KEY = 'last';

/** @typedef {{name: string, when: number, analysis: string}} Kept */

/** Keeping has been asked for on this device. */
export function isKeeping() {
  try {
    return localStorage.getItem(FLAG) !== null;
  } catch {
    return false;
  }
}

/** @returns {Promise<IDBDatabase>} */
function base() {
  return new Promise((resolve, reject) => {
    const asked = indexedDB.open(BASE, 1);
    asked.onupgradeneeded = () => { asked.result.createObjectStore(STORE); };
    asked.onsuccess = () => resolve(asked.result);
    asked.onerror = () => reject(asked.error);
    asked.onblocked = () => reject(new Error('blocked'));
  });
}

/**
 * @template T
 * @param {'readonly'|'readwrite'} mode
 * @param {(store: IDBObjectStore) => IDBRequest<T>} work
 * @returns {Promise<T>}
 */
async function within(mode, work) {
  const open = await base();
  try {
    return await new Promise((resolve, reject) => {
      const passage = open.transaction(STORE, mode);
      const asked = work(passage.objectStore(STORE));
      passage.oncomplete = () => resolve(asked.result);
      passage.onerror = () => reject(passage.error ?? asked.error);
      passage.onabort = () => reject(passage.error ?? asked.error);
    });
  } finally {
    open.close();
  }
}

/** Begins to keep; rejects where the browser gives no storage. */
export async function keep() {
  localStorage.setItem(FLAG, '1');
  try {
    await within('readonly', (store) => store.count());
  } catch (cause) {
    localStorage.removeItem(FLAG);
    throw cause;
  }
}

/** @param {Kept} kept */
export async function write(kept) {
  await within('readwrite', (store) => store.put(kept, KEY));
}

/** @returns {Promise<Kept|null>} */
export async function read() {
  return (await within('readonly', (store) => store.get(KEY))) ?? null;
}

/** Erases everything and keeps no more. @returns {Promise<void>} */
export async function erase() {
  localStorage.removeItem(FLAG);
  await new Promise((resolve, reject) => {
    const asked = indexedDB.deleteDatabase(BASE);
    asked.onsuccess = () => resolve(undefined);
    asked.onerror = () => reject(asked.error);
    // Another tab holds it; it is deleted when that lets go.
    asked.onblocked = () => resolve(undefined);
  });
}
