// @ts-check
/**
 * Sync: what lies here reaches the server, as often as it takes, and is called received only on a verified receipt.
 *
 * A foreground loop: at the start, when the network or the page comes back, every 60 s, after events, and on the button.
 * Nothing is deleted on upload. The server's head says where to go on, so a lost reply or a restored server mends itself.
 * Batches are cut by bytes and halved when they are too much, down to one event; runs do not wait for each other.
 * Not here: making requests (api.js), judging receipts (receipts.js).
 */

import * as api from "./api.js";
import { text } from "./bytes.js";
import { all, ask, get } from "./db.js";
import * as pictures from "./pictures.js";
import * as receipts from "./receipts.js";
import { Refused, told } from "./refusal.js";

/** @typedef {import("./db.js").Store} Store */
/** @typedef {import("./sentinel.js").RunRow} RunRow */
/** @typedef {import("./journal.js").Kept} Kept */
/** @typedef {{state: "idle"|"sending"|"received"|"unreachable"|"refused", says: string, oldestUnsynced: string | null}} SyncState */

const BATCH_BYTES = 256 * 1024;
const EVERY_MS = 60_000;
const SOON_MS = 2_000;
export const LOCK = "fieldkit-sync";

/** codes after which the same pass need not try anything else */
const DOWN = [
  "unreachable", "not-our-server", "cut-reply", "server-trouble", "not-enrolled", "no-keys-here", "storage-dead",
  "unknown-device", "waiting-device", "revoked-device",
];
/** a batch that did not arrive in time is tried smaller in the next pass */
let fits = BATCH_BYTES;
const LEAST_BYTES = 4 * 1024;

/** @param {string} run @param {string} chain */
const rangeOf = (run, chain, from = 0) => IDBKeyRange.bound([run, chain, from], [run, chain, Infinity]);

/**
 * Changes the sync's part of a run's record in one transaction; the journal's part is left as it is on disk.
 * @param {Store} store @param {string} run @param {(row: RunRow) => Partial<RunRow>} change
 */
async function note(store, run, change) {
  await store.write(["runs"], async (tx) => {
    const row = await ask(tx.objectStore("runs").get(run));
    await ask(tx.objectStore("runs").put({ ...row, ...change(row) }));
  });
}

/**
 * The longest run of events from the front that fits, at least one.
 * @param {Kept[]} events @param {number} limit bytes
 */
export function batch(events, limit) {
  let size = 0;
  let n = 0;
  while (n < events.length && (n === 0 || size + events[n].bytes.byteLength <= limit)) {
    size += events[n].bytes.byteLength;
    n += 1;
  }
  return events.slice(0, n);
}

/**
 * Sends one run from where the server stands. Throws Refused; what was acknowledged until then stays acknowledged.
 * @param {Store} store @param {RunRow} row @param {{storeId: string, receipt_jwk: any}} server
 */
async function sendRun(store, row, server) {
  const path = `/api/runs/${encodeURIComponent(row.run)}`;
  const kept = /** @type {Kept[]} */ (await all(store, "events", rangeOf(row.run, row.chain)));
  const hashOf = async (/** @type {number} */ seq) => kept.find((k) => k.seq === seq)?.sha256 ?? null;
  const head = await api.call(store, "GET", `${path}/head?chain=${encodeURIComponent(row.chain)}`);
  if (head.seq > row.seq) {
    throw new Refused("server-ahead", `The server has ${head.seq - row.seq} event(s) of run ${row.run} that this tablet has lost. Compare with the desk before going on.`);
  }
  if (head.seq >= 0 && (await hashOf(head.seq)) !== head.head) {
    throw new Refused("fork", `The server holds another event ${head.seq} of run ${row.run} than this tablet. Both are kept. Show this at the desk.`);
  }
  // Where the server has all but the receipt never came, the last event is sent once more: it costs nothing there.
  let from = Math.min(head.seq + 1, row.seq);
  let limit = fits;
  while (from <= row.seq) {
    const part = batch(kept.filter((k) => k.seq >= from), limit);
    if (part.length === 0) throw new Refused("run-broken", `Event ${from} of run ${row.run} is missing on this tablet.`);
    let answer;
    try {
      answer = await api.call(store, "POST", `${path}/events`, { chain: row.chain, events: part.map((k) => text(k.bytes)) });
    } catch (bad) {
      if (/** @type {any} */ (bad).late) fits = Math.max(LEAST_BYTES, Math.floor(fits / 2));
      const keptThere = /** @type {any} */ (bad).answer?.kept;
      if (keptThere?.length) await note(store, row.run, (r) => ({ kept: merged(r.kept, keptThere) }));
      if (part.length === 1 || keptThere || !smallerMayHelp(bad)) throw withSeq(bad, part[0].seq);
      limit = Math.max(1, Math.floor(part.reduce((sum, k) => sum + k.bytes.byteLength, 0) / 2));
      continue;
    }
    if (Array.isArray(answer.kept) && answer.kept.length) await note(store, row.run, (r) => ({ kept: merged(r.kept, answer.kept) }));
    if (answer.receipt) await acknowledge(store, row, server, answer.receipt, hashOf);
    const have = Number(answer.have);
    const first = answer.kept?.[0];
    if (!Number.isSafeInteger(have) || have < from) {
      throw new Refused(first?.code ?? "not-accepted", `The server did not take event ${from} of run ${row.run}. It stays on this tablet. ${first?.says ?? ""}`.trim(), { seq: from });
    }
    from = have + 1;
    fits = Math.min(BATCH_BYTES, Math.max(fits, limit * 2));
  }
}

/** @param {unknown} bad */
function smallerMayHelp(bad) {
  if (!(bad instanceof Refused)) return false;
  return bad.code === "server-trouble" || [400, 409, 413, 422].includes(/** @type {any} */ (bad).status);
}

/** @param {unknown} bad @param {number} seq */
function withSeq(bad, seq) {
  if (bad instanceof Refused && "by" in bad) bad.says = `Event ${seq}: ${bad.says}`;
  return bad;
}

/** @param {RunRow["kept"]} before @param {RunRow["kept"]} more */
function merged(before, more) {
  const seen = new Map([...before, ...more].map((k) => [`${k.seq} ${k.code}`, k]));
  return [...seen.values()].sort((a, b) => (a.seq ?? -1) - (b.seq ?? -1));
}

/**
 * Moves the acknowledged pointer, once the receipt holds.
 * @param {Store} store @param {RunRow} row @param {{storeId: string, receipt_jwk: any}} server @param {string} receipt
 * @param {(seq: number) => Promise<string | null>} hashOf
 */
async function acknowledge(store, row, server, receipt, hashOf) {
  const { seq, head, time } = await receipts.check(receipt, server.receipt_jwk, { store: server.storeId, run: row.run, chain: row.chain }, hashOf);
  await note(store, row.run, () => ({ acked: { seq, head, time, store: server.storeId, receipt }, trouble: null }));
}

/** @param {Store} store @param {any} receipt_jwk */
async function sendPictures(store, receipt_jwk) {
  for (const picture of await pictures.unsent(store)) {
    const bytes = await pictures.bytesOf(store, picture.sha256);
    const answer = await (await api.signed(store, "PUT", `/api/pictures/${picture.sha256}`, bytes, picture.media)).json();
    const { time } = await receipts.checkPicture(answer.receipt, receipt_jwk, picture.sha256);
    await store.write(["pictures"], async (tx) => {
      await ask(tx.objectStore("pictures").put({ ...picture, sent: time ?? new Date().toISOString() }));
    });
  }
}

/** @param {Store} store */
async function fetchInbox(store) {
  const inbox = await api.call(store, "GET", "/api/inbox");
  await store.write(["inbox"], async (tx) => {
    for (const kind of ["returned", "received", "countersigned"]) {
      for (const row of inbox[kind] ?? []) {
        const id = `${kind}:${row.run}:${row.time ?? ""}`;
        await ask(tx.objectStore("inbox").put({ id, kind, ...row }));
      }
    }
  });
}

/** @param {RunRow} row @param {string} storeId */
const isAcked = (row, storeId) => row.acked !== null && row.acked.seq === row.seq && row.acked.head === row.head && row.acked.store === storeId;

/**
 * When the oldest event was made that no receipt covers; null when all are covered.
 * @param {Store} store
 * @returns {Promise<string | null>}
 */
export async function oldestUnsynced(store) {
  let oldest = null;
  for (const row of /** @type {RunRow[]} */ (await all(store, "runs"))) {
    const first = (row.acked?.seq ?? -1) + 1;
    if (first > row.seq) continue;
    const kept = await get(store, "events", [row.run, row.chain, first]);
    const wall = kept ? JSON.parse(text(kept.bytes)).at.wall : row.updated;
    if (!oldest || Date.parse(wall) < Date.parse(oldest)) oldest = wall;
  }
  return oldest;
}

/**
 * One pass over everything. Throws only what ends the pass as a whole.
 * @param {Store} store
 * @returns {Promise<{code: string, says: string}[]>} what went wrong with single runs or pictures
 */
async function pass(store) {
  const receipt_jwk = await get(store, "meta", "receipt_jwk");
  if (!receipt_jwk) throw new Refused("no-kit", "Fetch the kit first: it brings the key that receipts are checked with.");
  const { store: storeId } = await api.challenge();
  const troubles = [];
  for (const row of /** @type {RunRow[]} */ (await all(store, "runs"))) {
    if (row.seq < 0 || isAcked(row, storeId)) continue;
    try {
      await sendRun(store, row, { storeId, receipt_jwk });
    } catch (bad) {
      const trouble = told(bad);
      await note(store, row.run, () => ({ trouble }));
      if (DOWN.includes(trouble.code)) throw bad;
      troubles.push(trouble);
    }
  }
  try {
    await sendPictures(store, receipt_jwk);
  } catch (bad) {
    if (DOWN.includes(told(bad).code)) throw bad;
    troubles.push(told(bad));
  }
  await fetchInbox(store);
  return troubles;
}

/**
 * The loop over a store. `sync` asks for a pass now and resolves when it is over; `soon` asks for one shortly.
 * @param {Store} store @param {(state: SyncState) => void} tell
 */
export function loop(store, tell) {
  /** @type {SyncState} */
  let last = { state: "idle", says: "", oldestUnsynced: null };
  /** @type {Promise<SyncState> | null} */
  let running = null;
  let again = false;
  /** @type {ReturnType<typeof setTimeout> | undefined} */
  let timer;

  /** @param {SyncState["state"]} state @param {string} says */
  async function say(state, says) {
    last = { state, says, oldestUnsynced: await oldestUnsynced(store) };
    tell(last);
    return last;
  }

  async function once() {
    if (!(await get(store, "meta", "device"))) return say("idle", "This tablet is not enrolled.");
    const oldest = await oldestUnsynced(store);
    await say("sending", oldest ? "Sending to the server." : "Asking the server.");
    try {
      const troubles = await pass(store);
      if (troubles.length) return await say("refused", troubles.map((t) => t.says).join(" "));
      const left = await oldestUnsynced(store);
      if (left) return await say("idle", "Some events are not received yet; they are sent in the next pass.");
      return await say("received", "Everything on this tablet is received by the server.");
    } catch (bad) {
      const { code, says } = told(bad);
      return say(["unreachable", "not-our-server", "cut-reply", "server-trouble"].includes(code) ? "unreachable" : "refused", says);
    }
  }

  /** @returns {Promise<SyncState>} */
  async function locked() {
    const done = await navigator.locks.request(LOCK, { ifAvailable: true }, (lock) => (lock ? once() : null));
    return done ?? say("idle", "Another window of this tablet is sending.");
  }

  /** @returns {Promise<SyncState>} */
  async function sync() {
    if (running) {
      again = true;
      return running;
    }
    running = locked();
    try {
      return await running;
    } finally {
      running = null;
      if (again) {
        again = false;
        soon();
      }
    }
  }

  function soon(ms = SOON_MS) {
    clearTimeout(timer);
    timer = setTimeout(() => void sync(), ms);
  }

  function begin() {
    window.addEventListener("online", () => soon(0));
    document.addEventListener("visibilitychange", () => {
      if (document.visibilityState === "visible") soon(0);
    });
    setInterval(() => void sync(), EVERY_MS);
    soon(0);
  }

  return { sync, soon, begin, last: () => last };
}

