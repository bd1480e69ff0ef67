// @ts-check
/**
 * The host: everything that the screens may ask of the tablet, in one place. Screens import this file and no other of
 * the plumbing.
 *
 * open, enrol, enrolStatus, fetchKit, sums, startRun, openRun, unlockPerson, inbox, sync, onsync, ontrouble, onupdate, update.
 * A call throws Refused {code, says}; a command to a run answers {ok, state} or {refused: {code, says}} and does so
 * only when what it recorded is on disk. Not here: how any of it is done; each file beside this one does one thing.
 */

import { decide } from "../core/decide.js";
import * as folding from "../core/state.js";
import * as begin from "./begin.js";
import { randomId } from "./bytes.js";
import * as clockwatch from "./clockwatch.js";
import { all, ask, get, open as openStore, put } from "./db.js";
import * as enrolment from "./enrol.js";
import * as health from "./health.js";
import * as journal from "./journal.js";
import * as keys from "./keys.js";
import * as kits from "./kit.js";
import * as pictures from "./pictures.js";
import { Refused, told } from "./refusal.js";
import * as runs from "./run.js";
import * as sentinel from "./sentinel.js";
import * as shell from "./shell.js";
import * as syncing from "./sync.js";

/** @typedef {import("./db.js").Store} Store */
/** @typedef {import("./sentinel.js").RunRow} RunRow */

/** @type {Store | null} */
let store = null;
/** @type {Promise<void> | null} the one start of this page; a second call waits for the first */
let starting = null;
/** @type {ReturnType<typeof syncing.loop> | null} */
let loop = null;
/** @type {Map<string, Promise<any>>} runs that this window has open, or is opening */
const opened = new Map();
/** @type {Map<string, Promise<void>>} runs that this window is letting go of */
const closing = new Map();
/** @type {{sync: ((s: syncing.SyncState) => void)[], trouble: ((t: {code: string, says: string}) => void)[], update: (() => void)[]}} */
const listeners = { sync: [], trouble: [], update: [] };
/** @type {{storage: "ok"|"lost"|"damaged", says: string[]}} */
let found = { storage: "ok", says: [] };
let updateWaits = false;

/** The version of this page, as the server wrote it there. */
export const app = document.documentElement.dataset.version ?? "0.0.0";

function ready() {
  if (!store) throw new Refused("not-open", "The storage of this tablet is not open. Reload the page.");
  return store;
}

/** @param {{code: string, says: string}} what */
const trouble = (what) => listeners.trouble.forEach((cb) => cb(what));

/**
 * Opens everything and says how the tablet stands. Does not throw when storage cannot be opened: `health.storage` is
 * then "damaged" and `health.says` tells what to do. May be called again for a fresh picture.
 */
export async function open() {
  try {
    starting ??= start();
    await starting;
  } catch (bad) {
    starting = null;
    return { device: null, enrolled: false, people: [], kit: null, runs: [], health: await healthOf("damaged", [told(bad).says]) };
  }
  const here = ready();
  const device = (await get(here, "meta", "device")) ?? null;
  const kit = await kits.view(here);
  const mine = /** @type {keys.PersonKey[]} */ (await all(here, "keys")).filter((k) => k.id.startsWith("person:"));
  const registered = Object.entries(kit?.registers.people ?? {});
  const people = registered.map(([id, person]) => {
    const key = mine.find((k) => k.person === id);
    return { id, name: person.name, roles: person.roles, enrolledHere: key?.status === "issued", enrolment: key?.status ?? "none" };
  });
  const rows = /** @type {RunRow[]} */ (await all(here, "runs")).sort((a, b) => Date.parse(b.updated) - Date.parse(a.updated));
  const says = [...found.says];
  if (!device && found.storage === "ok" && rows.length === 0) {
    says.push("Nothing is stored on this tablet: it has never been enrolled, or the browser has removed everything. If runs were recorded here, ask at the desk what the server has received of them before you go on.");
  }
  return {
    device,
    enrolled: device !== null && mine.length > 0,
    people,
    kit,
    runs: rows.map(summary),
    health: await healthOf(found.storage, says),
  };
}

async function start() {
  const fresh = await openStore();
  store = fresh;
  fresh.ontrouble(trouble);
  sentinel.onfailure((says) => trouble({ code: "no-second-copy", says }));
  found = await sentinel.compare(fresh, async () => !(await shell.runIsOpen()));
  loop = syncing.loop(fresh, (state) => listeners.sync.forEach((cb) => cb(state)));
  loop.begin();
  const says = await shell.register(() => {
    updateWaits = true;
    listeners.update.forEach((cb) => cb());
  });
  if (says) trouble({ code: "no-offline", says });
}

/** @param {"ok"|"lost"|"damaged"} storage @param {string[]} says */
async function healthOf(storage, says) {
  const { ready: offline_ready, missing } = await shell.ready();
  const persisted = (await navigator.storage?.persisted?.().catch(() => false)) ?? false;
  const probe = store ? ((await get(store, "meta", "last_probe")) ?? "") : "";
  if (missing.length) says = [...says, `${missing.length} app file(s) are missing on this tablet. Connect once and reload before you go to site.`];
  return { persisted, probe, installed: health.installed(), storage, offline_ready, says };
}

/** @param {RunRow} row */
function summary(row) {
  const acked = row.acked?.seq ?? -1;
  return { ...row, acked, synced: acked === row.seq, received: row.acked?.time ?? null };
}

/** @param {{login: string, password: string, tabletName: string, passphrase: string}} who */
export const enrol = (who) => enrolment.enrol(ready(), who);

/** Asks how the waiting enrolments stand; files certificates that were issued. */
export const enrolStatus = () => enrolment.status(ready());

/**
 * @param {(done: number, of: number, name: string) => void} [progress]
 */
export async function fetchKit(progress = () => undefined) {
  await kits.fetchKit(ready(), progress);
  loop?.soon();
  return kits.view(ready());
}

/** The sums of the kit that is aboard; null where it has none. Throws Refused damaged-kit, unknown-version. */
export const sums = () => kits.sums(ready());

/**
 * Begins a run and returns its name. Throws Refused: what begin.js or core/decide.js say.
 * @param {{procedure: string, cabinet: string, tube: string, present: string[], recorder: string}} asked
 * @returns {Promise<{run: string}>}
 */
export async function startRun({ procedure, cabinet, tube, present, recorder }) {
  const here = ready();
  const kit = await kits.view(here);
  if (!kit) throw new Refused("no-kit", "There is no kit on this tablet. Fetch it while you are connected.");
  const chosen = kit.procedures.find((p) => p.procedure === procedure);
  if (!chosen?.sheet) throw new Refused("no-sheet", chosen?.says || `The kit holds no procedure ${procedure}.`);
  const rows = /** @type {RunRow[]} */ (await all(here, "runs"));
  begin.mayBegin(kit, rows, cabinet, app);
  const body = await begin.body(here, kit, chosen.sheet, chosen.sha256, { cabinet, tube, present });
  await put(here, "meta", body.tablet.probe, "last_probe");
  const at = clockwatch.now();
  const device = await get(here, "meta", "device");
  const day = `${at.wall.slice(2, 4)}${at.wall.slice(5, 7)}${at.wall.slice(8, 10)}-${cabinet}-`;
  const run = `${day}${rows.filter((row) => row.run.startsWith(day)).length + 1}${randomId(4)}`;
  const chain = `${device.device}.${device.epoch}`;
  const { confirmed } = kit.registers.tubes[tube];
  const command = { do: "run-started", by: recorder, facts: { confirmed }, ...body };
  const answer = decide(chosen.sheet, folding.make(chosen.sheet, run, chain, chosen.sha256), command, at);
  if ("refused" in answer) throw new Refused(answer.refused.code, answer.refused.says);
  /** @type {RunRow} */
  const row = {
    run, chain, sheet: chosen.sha256, procedure, title: chosen.title, cabinet, tube, started: at.wall, updated: at.wall,
    phase: "new", seq: -1, head: chosen.sha256, acked: null, kept: [], trouble: null, found: null, broken: "",
  };
  const pen = journal.writer(here, row);
  for (const { kind, body: first } of answer.events) {
    await pen.append(kind, first, recorder, clockwatch.now(), app, (event) => folding.fold(chosen.sheet, [event]).phase);
  }
  loop?.soon();
  return { run };
}

/**
 * Opens a run that lies on this tablet; the same object again while it is open in this window.
 * @param {string} run
 */
export function openRun(run) {
  let held = opened.get(run);
  if (!held) {
    held = openFresh(run);
    opened.set(run, held);
    held.catch(() => opened.delete(run));
  }
  return held;
}

/** @param {string} run */
async function openFresh(run) {
  await closing.get(run);
  const here = ready();
  const row = /** @type {RunRow | undefined} */ (await get(here, "runs", run));
  if (!row) throw new Refused("no-such-run", `Run ${run} is not on this tablet.`);
  const sheet = await kits.sheet(here, row.sheet);
  const open_ = await runs.open(here, row, sheet, app, { saved: () => loop?.soon() });
  /** @type {string} */
  let screenSays = "";
  const letSleep = clockwatch.keepAwake((says) => {
    screenSays = says;
  });
  const more = {
    screenSays: () => screenSays,
    /** @param {Blob} file */
    picture: (file) => pictures.keep(here, run, file),
    /** @param {string} sha */
    pictureBytes: (sha) => pictures.bytesOf(here, sha),
    /** @param {string} step */
    draft: async (step) => (await get(here, "drafts", [run, step]))?.draft ?? null,
    /** @param {string} step @param {unknown} draft null takes it away */
    saveDraft: (step, draft) =>
      here.write(["drafts"], async (tx) => {
        const drafts = tx.objectStore("drafts");
        await ask(/** @type {IDBRequest<any>} */ (draft === null ? drafts.delete([run, step]) : drafts.put({ run, step, draft })));
      }),
    close: () => {
      opened.delete(run);
      letSleep();
      const done = open_.close().finally(() => closing.delete(run));
      closing.set(run, done);
      return done;
    },
  };
  return Object.create(Object.prototype, { ...Object.getOwnPropertyDescriptors(open_), ...Object.getOwnPropertyDescriptors(more) });
}

/**
 * Opens a person's key for signing. Throws Refused wrong-passphrase or too-soon, with wait_s.
 * @param {string} person @param {string} passphrase
 */
export const unlockPerson = (person, passphrase) => keys.unlock(ready(), person, passphrase);

/** Forgets every key that is open in memory. */
export const lockAll = () => keys.forget();

/** Runs that the desk returned, newest first, with reason and name; kept here once fetched. */
export async function inbox() {
  const rows = await all(ready(), "inbox");
  return rows.filter((row) => row.kind === "returned").sort((a, b) => Date.parse(b.time) - Date.parse(a.time));
}

/** One pass now. @returns {Promise<syncing.SyncState>} */
export function sync() {
  if (!loop) throw new Refused("not-open", "The storage of this tablet is not open. Reload the page.");
  return loop.sync();
}

/** @param {(state: syncing.SyncState) => void} cb called at once with the latest, then at each change */
export function onsync(cb) {
  listeners.sync.push(cb);
  if (loop) cb(loop.last());
}

/** @param {(what: {code: string, says: string}) => void} cb slow writes, a failing second copy, no offline work */
export const ontrouble = (cb) => listeners.trouble.push(cb);

/** @param {() => void} cb a newer version of the page stands ready */
export function onupdate(cb) {
  listeners.update.push(cb);
  if (updateWaits) cb();
}

/** Takes the newer version and reloads. Throws Refused run-open. */
export const update = () => shell.update();
