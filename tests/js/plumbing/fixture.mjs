// What the plumbing's tests share: a fresh database each, a run with a real first event, and a server key.
import "fake-indexeddb/auto";
import { IDBFactory } from "fake-indexeddb";
import * as db from "../../../static/tablet/db.js";
import * as events from "../../../static/core/events.js";
import { sha256, text, utf8 } from "../../../static/tablet/bytes.js";

let made = 0;

export async function freshStore(how = {}) {
  globalThis.indexedDB = new IDBFactory();
  return db.open({ name: `test-${(made += 1)}`, ...how });
}

/** The name of the last store opened by freshStore. */
export const lastName = () => `test-${made}`;

export const SHEET = "a".repeat(64);
export const AT = { wall: "2026-07-31T14:31:07.123+01:00", mono: "81234.5", boot: "B00T" };

export const STARTED = {
  sheet: SHEET, procedure: "warm-up", edition: 1, site: "s", site_name: "S", cabinet: "B2", tube: "T-1", givens: {}, meters: {},
  instruments: [], places: {}, people: [{ id: "p1", name: "A. One", roles: ["technician"] }], present: ["p1"],
  tablet: { device: "D", name: "t", installed: true, persisted: true, probe: "" }, kit: "k",
};

export const newRow = (over = {}) => ({
  run: "260731-B2-1ABCD", chain: "D.E", sheet: SHEET, procedure: "warm-up", title: "W", cabinet: "B2", tube: "T-1", started: AT.wall,
  updated: AT.wall, phase: "new", seq: -1, head: SHEET, acked: null, kept: [], trouble: null, found: null, broken: "", ...over,
});

/** What is stored of a run, as texts in order of seq. */
export async function texts(store, row) {
  const kept = await db.all(store, "events", IDBKeyRange.bound([row.run, row.chain, 0], [row.run, row.chain, Infinity]));
  return kept.map((k) => text(k.bytes));
}

export { AT as at, db, events, sha256, text, utf8 };
