// @ts-check
/**
 * The sentinel and the mirror: what the second copy holds, and what is done when it and the database disagree.
 *
 * In the private file system (opfs.js): device.json {device, epoch}; heads/<run> (where the chain had got to);
 * runs/<run>.<chain>.ndjson (every event as made, one a line); blobs/<sha256> and kit.json (the kit). A browser may
 * silently hand out an empty database where a full one was; only this shows it. Nothing is kept in localStorage or cookies.
 */

import { sha256, text, utf8 } from "./bytes.js";
import { all, ask, get, put } from "./db.js";
import * as opfs from "./opfs.js";

/** @typedef {import('./db.js').Store} Store */
/** @typedef {{device: string, epoch: string, name: string, made: string}} Device */
/**
 * @typedef {object} RunRow what the store's "runs" holds of a run
 * @property {string} run
 * @property {string} chain
 * @property {string} sheet SHA-256
 * @property {string} procedure
 * @property {string} title
 * @property {string} cabinet
 * @property {string} tube
 * @property {string} started ISO time
 * @property {string} updated ISO time
 * @property {string} phase
 * @property {number} seq of the last event
 * @property {string} head SHA-256 of its bytes
 * @property {{seq: number, head: string, time: string, store: string, receipt: string} | null} acked
 * @property {{seq: number, code: string, says: string}[]} kept events that the server keeps but cannot accept
 * @property {{code: string, says: string} | null} trouble why the last upload did not go through
 * @property {{lost: number, restored: number} | null} found restored from the mirror, not yet said in the chain
 * @property {string} broken why nothing may be written to this run any more; empty when it may
 */

const HEAD_BYTES = 1024;

/** @type {(says: string) => void} */
let complain = () => undefined;

/**
 * Who is told when the second copy fails; the database goes on without it.
 * @param {(says: string) => void} cb
 */
export function onfailure(cb) {
  complain = cb;
}

/**
 * @param {Promise<unknown>} work
 * @returns {Promise<boolean>} whether the copy was made
 */
async function tried(work) {
  try {
    await work;
    return true;
  } catch (bad) {
    complain(`The second copy on this tablet is not being written (${bad instanceof Error ? bad.message : bad}). The first one is; send to the server when you can.`);
    return false;
  }
}

/** @param {string} path */
async function readJson(path) {
  const bytes = await opfs.read(path);
  if (!bytes) return null;
  try {
    return JSON.parse(text(bytes));
  } catch {
    return null;
  }
}

/** @param {string} run @param {string} chain */
const pathOf = (run, chain) => `runs/${run}.${chain}.ndjson`;

/** @param {RunRow} row a record of fixed length, so that overwriting it cannot leave a mixture behind */
function headBytes(row) {
  const { run, chain, seq, head, sheet, procedure, title, cabinet, tube, started } = row;
  const short = { run, chain, seq, head, sheet, procedure, title: title.slice(0, 80), cabinet, tube, started };
  const bytes = utf8(JSON.stringify(short));
  const padded = new Uint8Array(Math.max(HEAD_BYTES, bytes.length)).fill(32);
  padded.set(bytes);
  return padded;
}

/** @param {Device} device */
export const keepDevice = (device) => tried(opfs.write("device.json", utf8(JSON.stringify(device))));

/** @param {Record<string, unknown>} kit */
export const keepKit = (kit) => tried(opfs.write("kit.json", utf8(JSON.stringify(kit))));

/** @param {string} sha @param {ArrayBuffer} bytes */
export const keepBlob = (sha, bytes) => tried(opfs.write(`blobs/${sha}`, new Uint8Array(bytes)));

/**
 * Copies one event that the database has already confirmed, then the head.
 * @param {RunRow} row as it stands after the event @param {string} line the event's exact text
 */
export function keepEvent(row, line) {
  return tried(opfs.append(pathOf(row.run, row.chain), line).then(() => opfs.write(`heads/${row.run}`, headBytes(row))));
}

/**
 * The longest sound chain in the lines of a mirror file: each line hashes to the next one's `prev`, seq counts up from 0.
 * A line that stands twice is taken once; one that was cut off is passed over.
 * @param {string[]} lines @param {string} sheet what seq 0 must name as `prev`
 */
export async function soundChain(lines, sheet) {
  const chain = [];
  let prev = sheet;
  for (const line of lines) {
    let event;
    try {
      event = JSON.parse(line);
    } catch {
      continue;
    }
    if (event.seq !== chain.length || event.prev !== prev) continue;
    const bytes = utf8(line);
    prev = await sha256(bytes);
    chain.push({ run: event.run, chain: event.chain, seq: event.seq, sha256: prev, bytes: bytes.buffer, kind: event.kind, wall: event.at.wall });
  }
  return chain;
}

/** @param {Store} store @param {RunRow} row */
async function copyOut(store, row) {
  const have = await opfs.read(pathOf(row.run, row.chain));
  const mirrored = await soundChain(have ? text(have).split("\n") : [], row.sheet);
  const events = await all(store, "events", IDBKeyRange.bound([row.run, row.chain, mirrored.length], [row.run, row.chain, Infinity]));
  for (const event of events) await opfs.append(pathOf(row.run, row.chain), text(event.bytes));
  await opfs.write(`heads/${row.run}`, headBytes(row));
  return events.length;
}

/**
 * Brings one run back from the mirror, as far as its chain is sound.
 * @param {Store} store @param {any} head the sentinel's record @param {RunRow | undefined} row
 * @returns {Promise<{lost: number, restored: number}>}
 */
async function copyIn(store, head, row) {
  const bytes = await opfs.read(pathOf(head.run, head.chain));
  const chain = await soundChain(bytes ? new TextDecoder().decode(bytes).split("\n") : [], head.sheet);
  const from = row ? row.seq + 1 : 0;
  const fresh = chain.slice(from).map(({ kind, wall, ...kept }) => kept);
  const last = chain.at(-1);
  const meets = !row || row.seq < 0 || chain[row.seq]?.sha256 === row.head;
  const lost = head.seq + 1 - Math.max(chain.length, from);
  const found = { lost: Math.max(lost, 0), restored: meets ? fresh.length : 0 };
  const broken = lost > 0 || !meets ? "Events of this run are lost on this tablet, so nothing more may be added to it here. What is left can be read and sent. Begin a new run." : "";
  /** @type {RunRow} */
  const base = row ?? { ...head, updated: head.started, phase: "", seq: -1, head: head.sheet, acked: null, kept: [], trouble: null, found: null, broken: "" };
  const moved = meets && last && fresh.length ? { seq: last.seq, head: last.sha256, updated: last.wall } : {};
  await store.write(["runs", "events"], async (tx) => {
    if (meets) for (const event of fresh) tx.objectStore("events").put(event);
    await ask(tx.objectStore("runs").put({ ...base, ...moved, found, broken }));
  });
  return found;
}

/** @param {Store} store kit and blobs, each checked against its name */
async function kitIn(store) {
  const kit = await readJson("kit.json");
  for (const sha of await opfs.list("blobs")) {
    const bytes = await opfs.read(`blobs/${sha}`);
    if (bytes && (await sha256(bytes)) === sha) {
      await store.write(["blobs"], async (tx) => {
        await ask(tx.objectStore("blobs").put({ sha256: sha, bytes }));
      });
    }
  }
  if (!kit) return;
  await store.write(["meta", "blobs"], async (tx) => {
    for (const blob of kit.blobs) if (!(await ask(tx.objectStore("blobs").get(blob.sha256)))) return;
    await ask(tx.objectStore("meta").put(kit, "kit"));
  });
}

/** @param {Store} store @param {string} says */
async function incident(store, says) {
  await store.write(["incidents"], async (tx) => {
    await ask(tx.objectStore("incidents").add({ at: new Date().toISOString(), says }));
  });
}

/**
 * Compares the database with the second copy and mends what can be mended, once a start.
 * `damaged`: the database was short and was restored. `lost`: something is gone for good.
 * @param {Store} store
 * @param {() => Promise<boolean>} alone whether no other tab of this site is at work (then only is anything mended)
 * @returns {Promise<{storage: 'ok'|'lost'|'damaged', says: string[]}>}
 */
export async function compare(store, alone) {
  /** @type {Device | undefined} */
  const mine = await get(store, "meta", "device");
  let theirs;
  let heads;
  try {
    theirs = await readJson("device.json");
    heads = await Promise.all((await opfs.list("heads")).map((run) => readJson(`heads/${run}`)));
  } catch (bad) {
    return { storage: "ok", says: [`This browser keeps no second copy (${bad instanceof Error ? bad.message : bad}). Send to the server as often as you can.`] };
  }
  const rows = new Map((/** @type {RunRow[]} */ (await all(store, "runs"))).map((row) => [row.run, row]));
  if (!mine && !theirs && rows.size === 0 && heads.length === 0) return { storage: "ok", says: [] };
  if (!(await alone())) return { storage: "ok", says: [] };
  return mend(store, mine, theirs, heads.filter(Boolean), rows);
}

/**
 * @param {Store} store @param {Device | undefined} mine @param {Device | null} theirs @param {any[]} heads
 * @param {Map<string, RunRow>} rows
 * @returns {Promise<{storage: 'ok'|'lost'|'damaged', says: string[]}>}
 */
async function mend(store, mine, theirs, heads, rows) {
  const says = [];
  let restored = 0;
  let lost = 0;
  // Until the tablet is enrolled again this is found at every start; the kit is brought back, and the loss noted, once.
  const before = await get(store, "meta", "restored");
  const first = before !== theirs?.epoch;
  if (!mine && theirs && first) {
    await kitIn(store);
    await put(store, "meta", theirs.epoch, "restored");
  }
  for (const head of heads) {
    const row = rows.get(head.run);
    if (row && (row.chain !== head.chain || row.seq >= head.seq)) continue;
    const found = await copyIn(store, head, row);
    restored += found.restored;
    lost += found.lost;
    if (found.lost) says.push(`Run ${head.run}: the last ${found.lost} event(s) are lost on this tablet. Compare with the paper and with the server.`);
  }
  let copied = 0;
  for (const row of rows.values()) {
    const head = heads.find((h) => h.run === row.run && h.chain === row.chain);
    if (!head || head.seq < row.seq) await tried(copyOut(store, row).then((n) => (copied += n)));
  }
  if (mine && theirs?.epoch !== mine.epoch) await keepDevice(mine);
  if (copied) says.push(`The second copy was ${copied} event(s) behind and has been made good.`);
  if (!mine && theirs) says.unshift("The storage of this tablet was emptied by the browser or damaged. What the second copy held has been restored; this tablet must be enrolled again before anyone can sign on it.");
  else if (restored || lost) says.unshift("The storage of this tablet was short of events.");
  if (restored) says.push(`${restored} event(s) were restored from the second copy.`);
  const storage = lost ? "lost" : restored || (!mine && theirs) ? "damaged" : "ok";
  if (lost || restored || (storage !== "ok" && first)) await incident(store, says.join(" "));
  return { storage, says };
}
