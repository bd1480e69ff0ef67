import assert from "node:assert/strict";
import { test } from "node:test";
import * as journal from "../../../static/tablet/journal.js";
import { tidy } from "../../../static/tablet/bytes.js";
import { soundChain } from "../../../static/tablet/sentinel.js";
import { AT, SHEET, STARTED, db, freshStore, newRow, sha256, texts, utf8 } from "./fixture.mjs";

const phase = () => "going";

async function withThree() {
  const store = await freshStore();
  const pen = journal.writer(store, newRow());
  await pen.append("run-started", STARTED, "p1", AT, "0.1.0", phase);
  await pen.append("remarked", { step: "a", move: null, text: "Zähler 6.30 µA 𝛑" }, "p1", AT, "0.1.0", phase);
  await pen.append("paused", { reason: "" }, "p1", AT, "0.1.0", phase);
  return { store, pen };
}

test("each event names the hash of the bytes before it, the first that of the sheet", async () => {
  const { store, pen } = await withThree();
  let prev = SHEET;
  for (const [seq, line] of (await texts(store, pen.row)).entries()) {
    const event = JSON.parse(line);
    assert.deepEqual([event.v, event.seq, event.prev, event.run, event.chain], [1, seq, prev, pen.row.run, "D.E"]);
    prev = await sha256(utf8(line));
  }
  assert.deepEqual([pen.row.seq, pen.row.head], [2, prev]);
  assert.deepEqual((await db.get(store, "runs", pen.row.run)).head, prev);
});

test("appends that are asked for at once come one after the other", async () => {
  const { store, pen } = await withThree();
  await Promise.all(Array.from({ length: 20 }, (_, n) => pen.append("paused", { reason: String(n) }, "p1", AT, "0.1.0", phase)));
  const loaded = await journal.load(store, pen.row);
  assert.equal(loaded.broken, "");
  assert.deepEqual(loaded.events.slice(3).map((e) => e.body.reason), Array.from({ length: 20 }, (_, n) => String(n)));
});

test("a page whose chain is not the one on disk writes nothing, then or later", async () => {
  const { store, pen } = await withThree();
  const other = journal.writer(store, { ...pen.row });
  await other.append("paused", { reason: "first" }, "p1", AT, "0.1.0", phase);
  await assert.rejects(pen.append("paused", { reason: "second" }, "p1", AT, "0.1.0", phase), (bad) => bad.code === "chain-moved");
  await assert.rejects(pen.append("paused", { reason: "third" }, "p1", AT, "0.1.0", phase), (bad) => bad.code === "run-broken");
  assert.deepEqual((await texts(store, pen.row)).map((t) => JSON.parse(t).body.reason).filter(Boolean), ["first"]);
});

test("a write whose handle died after it went through is not made twice", async () => {
  const { store, pen } = await withThree();
  const real = IDBDatabase.prototype.transaction;
  let writes = 0;
  IDBDatabase.prototype.transaction = function (stores, mode, how) {
    const tx = real.call(this, stores, mode, how);
    if (mode === "readwrite" && (writes += 1) === 1) {
      // the commit happens, the news of it does not arrive: the page sees an abort by a dead handle
      let heard;
      Object.defineProperty(tx, "oncomplete", { set: () => undefined, get: () => null });
      Object.defineProperty(tx, "onabort", { set: (cb) => (heard = cb), get: () => null });
      tx.addEventListener("complete", () => {
        Object.defineProperty(tx, "error", { value: new DOMException("lost", "UnknownError") });
        heard();
      });
    }
    return tx;
  };
  try {
    await pen.append("paused", { reason: "once" }, "p1", AT, "0.1.0", phase);
  } finally {
    IDBDatabase.prototype.transaction = real;
  }
  assert.equal(writes, 2);
  assert.equal((await texts(store, pen.row)).filter((t) => t.includes("once")).length, 1);
  assert.equal((await journal.load(store, pen.row)).broken, "");
});

test("a failed write leaves memory where it was, and the same seq is used again", async () => {
  const { store, pen } = await withThree();
  const real = IDBObjectStore.prototype.add;
  IDBObjectStore.prototype.add = function () {
    throw new DOMException("full", "QuotaExceededError");
  };
  try {
    await assert.rejects(pen.append("paused", { reason: "no" }, "p1", AT, "0.1.0", phase), (bad) => bad.code === "storage-full");
  } finally {
    IDBObjectStore.prototype.add = real;
  }
  assert.equal(pen.row.seq, 2);
  await pen.append("paused", { reason: "yes" }, "p1", AT, "0.1.0", phase);
  assert.deepEqual((await texts(store, pen.row)).length, 4);
});

for (const [what, spoil, kept] of [
  ["a changed byte", (e) => ({ ...e, bytes: utf8(new TextDecoder().decode(e.bytes).replace("6.30", "6.80")).buffer }), 1],
  ["a changed byte with its hash renewed", async (e) => {
    const bytes = utf8(new TextDecoder().decode(e.bytes).replace("6.30", "6.80")).buffer;
    return { ...e, bytes, sha256: await sha256(bytes) };
  }, 2],
]) {
  test(`${what} is found when the run is opened, and the sound part is still given`, async () => {
    const { store, pen } = await withThree();
    const [event] = await db.all(store, "events", IDBKeyRange.only([pen.row.run, "D.E", 1]));
    await db.put(store, "events", await spoil(event));
    const loaded = await journal.load(store, pen.row);
    assert.match(loaded.broken, /damaged on this tablet at event/);
    assert.equal(loaded.events.length, kept);
  });
}

test("bytes that are no text at all are found too", async () => {
  const { store, pen } = await withThree();
  const [event] = await db.all(store, "events", IDBKeyRange.only([pen.row.run, "D.E", 2]));
  await db.put(store, "events", { ...event, bytes: new Uint8Array([0xff, 0xfe, 0x00]).buffer });
  const loaded = await journal.load(store, pen.row);
  assert.match(loaded.broken, /damaged on this tablet at event 2/);
  assert.equal(loaded.events.length, 2);
});

test("a chain that ends too early is found when the run is opened", async () => {
  const { store, pen } = await withThree();
  await store.write(["events"], (tx) => void tx.objectStore("events").delete([pen.row.run, "D.E", 2]));
  assert.match((await journal.load(store, pen.row)).broken, /missing on this tablet/);
});

test("an event that nobody could read back is refused before it is stored", async () => {
  const { store, pen } = await withThree();
  await assert.rejects(pen.append("read", { step: "a", text: 6.3, unit: "V" }, "p1", AT, "0.1.0", phase), (bad) => bad.code === "odd-number");
  await assert.rejects(pen.append("dreamt", { step: "a" }, "p1", AT, "0.1.0", phase), (bad) => bad.code === "unknown-version");
  await assert.rejects(pen.append("read", { step: "a", text: "6", unit: "V", extra: "x" }, "p1", AT, "0.1.0", phase), (bad) => bad.code === "damaged-event");
  assert.equal((await texts(store, pen.row)).length, 3);
});

test("text is kept in one Unicode form and half a character is refused", () => {
  assert.equal(tidy("A\u030A"), "\u00C5");
  assert.deepEqual(tidy({ a: ["e\u0301", 3, true, null] }), { a: ["\u00E9", 3, true, null] });
  assert.equal(tidy("𝛑"), "𝛑");
  for (const bad of ["\uD800", "a\uDC00", "\uD800x"]) assert.throws(() => tidy(bad), (e) => e.code === "odd-text");
});

test("the sync's part of a run's record survives an append", async () => {
  const { store, pen } = await withThree();
  const row = await db.get(store, "runs", pen.row.run);
  await db.put(store, "runs", { ...row, acked: { seq: 1 }, kept: [{ seq: 0 }], trouble: { code: "x" } });
  await pen.append("paused", { reason: "" }, "p1", AT, "0.1.0", phase);
  const after = await db.get(store, "runs", pen.row.run);
  assert.deepEqual([after.seq, after.acked, after.kept, after.trouble], [3, { seq: 1 }, [{ seq: 0 }], { code: "x" }]);
});

test("a mirror's lines give back the chain as far as it is sound", async () => {
  const { store, pen } = await withThree();
  const lines = await texts(store, pen.row);
  const seqs = async (some) => (await soundChain(some, SHEET)).map((e) => e.seq);
  assert.deepEqual(await seqs(lines), [0, 1, 2]);
  assert.deepEqual(await seqs([lines[0], lines[0], lines[1].slice(0, 40), lines[1], "", lines[2]]), [0, 1, 2]);
  assert.deepEqual(await seqs([lines[0], lines[2]]), [0]);
  assert.deepEqual(await seqs([lines[0], lines[1].replace("6.30", "6.80"), lines[2]]), [0, 1]);
  assert.deepEqual(await seqs(lines.slice(1)), []);
  assert.deepEqual((await soundChain(lines, SHEET)).at(-1).sha256, pen.row.head);
});
