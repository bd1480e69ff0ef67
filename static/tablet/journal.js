// @ts-check
/**
 * The journal: one run's chain of events on this tablet, read, held by one tab, appended to, never changed.
 *
 * An event is made, hashed and stored as its exact UTF-8 bytes; each names the hash of the one before, the first
 * that of the sheet. It counts as saved when its own transaction is complete, and only then does memory move. Before
 * each write the chain on disk must be what memory thinks it is; otherwise nothing is written any more. One Web Lock a
 * run: a second tab reads along and takes over when the first lets go. Not here: what may happen next (run.js).
 */

import * as events from "../core/events.js";
import { sha256, text, tidy, utf8 } from "./bytes.js";
import { ask, all, get } from "./db.js";
import { Refused } from "./refusal.js";
import * as sentinel from "./sentinel.js";

/** @typedef {import('./db.js').Store} Store */
/** @typedef {import('./sentinel.js').RunRow} RunRow */
/** @typedef {import('../core/events.js').Event} Event */
/** @typedef {{run: string, chain: string, seq: number, sha256: string, bytes: ArrayBuffer}} Kept */

export const lockOf = (/** @type {string} */ run) => `fieldkit-run:${run}`;
/** held shared by every tab with a run open, so that an update of the page can wait for it */
export const OPEN_LOCK = "fieldkit-run-open";

/**
 * An event from its bytes, or null where they are no text. A newer version than this page knows is told apart from damage.
 * @param {ArrayBuffer} bytes
 */
async function readKept(bytes) {
  const name = await sha256(bytes);
  try {
    const line = text(bytes);
    const event = events.read(line, name);
    if (!("refused" in event)) return event;
    if (event.refused.code !== "unknown-version") return null;
    const { seq, prev } = JSON.parse(line);
    return { seq, prev, sha256: name, refused: event.refused };
  } catch {
    return null;
  }
}

/**
 * Every event of a run as stored, each checked: bytes against hash, hash against the next one's `prev`, and the last
 * against the run's own record. `broken` says what does not hold; the sound part is given all the same.
 * @param {Store} store @param {RunRow} row
 * @returns {Promise<{events: Event[], broken: string}>}
 */
export async function load(store, row) {
  /** @type {Kept[]} */
  const kept = await all(store, "events", IDBKeyRange.bound([row.run, row.chain, 0], [row.run, row.chain, Infinity]));
  /** @type {Event[]} */
  const found = [];
  let prev = row.sheet;
  for (const { seq, sha256: name, bytes } of kept) {
    const event = await readKept(bytes);
    if (!event || event.sha256 !== name || seq !== found.length || event.seq !== seq || event.prev !== prev) {
      return { events: found, broken: `The record of this run is damaged on this tablet at event ${seq}. Nothing more can be added to it; what is sound can be read and sent.` };
    }
    if ("refused" in event) return { events: found, broken: event.refused.says };
    prev = event.sha256;
    found.push(event);
  }
  if (found.length - 1 !== row.seq || prev !== row.head) {
    return { events: found, broken: "Events of this run are missing on this tablet. Nothing more can be added to it; what is left can be read and sent." };
  }
  return { events: found, broken: row.broken };
}

/**
 * A journal's place at the end of its chain, and the one way to lengthen it.
 * @param {Store} store @param {RunRow} start
 */
export function writer(store, start) {
  let row = { ...start };
  let broken = start.broken;
  /** @type {Promise<unknown>} */
  let line = Promise.resolve();

  /**
   * @param {string} kind @param {any} body @param {string} by @param {import('./clockwatch.js').At} at @param {string} app
   * @param {(event: Event) => string} phaseAfter the run's phase once this event is folded, for the list of runs
   */
  async function one(kind, body, by, at, app, phaseAfter) {
    if (broken) throw new Refused("run-broken", broken);
    const line_ = events.to_text(events.next_event(row, kind, tidy(body), by, at, app));
    const bytes = utf8(line_);
    const name = await sha256(bytes);
    const event = events.read(line_, name);
    if ("refused" in event) throw new Refused(event.refused.code, event.refused.says);
    const after = { ...row, seq: row.seq + 1, head: name, updated: at.wall, phase: phaseAfter(event) };
    try {
      await store.write(["runs", "events"], async (tx) => {
        const runs = tx.objectStore("runs");
        const disk = /** @type {RunRow | undefined} */ (await ask(runs.get(row.run)));
        // A write that was tried again after its handle died may have gone through the first time.
        if (disk && disk.chain === row.chain && disk.seq === after.seq && disk.head === after.head) return;
        if (row.seq >= 0 ? !disk || disk.chain !== row.chain || disk.seq !== row.seq || disk.head !== row.head : disk) {
          throw new Refused("chain-moved", "What lies on this tablet is not what this page last wrote. Nothing was saved. Reload the page.");
        }
        await ask(tx.objectStore("events").add({ run: row.run, chain: row.chain, seq: after.seq, sha256: name, bytes: bytes.buffer }));
        // acked, kept and trouble belong to the sync and may have moved meanwhile
        await ask(runs.put({ ...after, ...(disk ? { acked: disk.acked, kept: disk.kept, trouble: disk.trouble, found: kind === "storage-found" ? null : disk.found } : {}) }));
      });
    } catch (bad) {
      if (bad instanceof Refused && bad.code === "chain-moved") broken = bad.says;
      throw bad;
    }
    row = after;
    void sentinel.keepEvent(after, line_);
    return event;
  }

  return {
    get row() {
      return row;
    },
    get broken() {
      return broken;
    },
    /** Takes the chain's end as it is on disk now; for a tab that takes over. */
    async refresh() {
      row = (await get(store, "runs", row.run)) ?? row;
      broken = row.broken;
    },
    /**
     * Appends one event; resolves with it once it is on disk. Throws Refused run-broken, chain-moved, storage-full,
     * storage-dead, not-saved, odd-text; the chain is then as it was.
     * @param {string} kind @param {any} body @param {string} by @param {import('./clockwatch.js').At} at @param {string} app
     * @param {(event: Event) => string} phaseAfter
     * @returns {Promise<Event>}
     */
    append(kind, body, by, at, app, phaseAfter) {
      const done = line.then(() => one(kind, body, by, at, app, phaseAfter));
      line = done.catch(() => undefined);
      return done;
    },
  };
}

/**
 * Holds the run for this tab, or waits for it. The returned function lets go and resolves once it has.
 * @param {string} run
 * @param {(taken: boolean) => void} first whether it was free at once
 * @param {() => void} mine called later, when another tab let go
 * @returns {() => Promise<void>}
 */
export function hold(run, first, mine) {
  /** @type {() => void} */
  let letGo = () => undefined;
  const until = new Promise((resolve) => {
    letGo = () => resolve(undefined);
  });
  const stop = new AbortController();
  const open = navigator.locks.request(OPEN_LOCK, { mode: "shared" }, () => until);
  /** @type {Promise<unknown>} */
  let later = Promise.resolve();
  const now = navigator.locks.request(lockOf(run), { ifAvailable: true }, (lock) => {
    first(lock !== null);
    if (lock) return until;
    const wait = navigator.locks.request(lockOf(run), { signal: stop.signal }, () => {
      mine();
      return until;
    });
    later = wait.catch(() => undefined); // aborted: let go before it was this tab's turn
    return undefined;
  });
  return async () => {
    stop.abort();
    letGo();
    await Promise.all([open, now]);
    await later;
  };
}
