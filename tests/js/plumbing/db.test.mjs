import assert from "node:assert/strict";
import { test } from "node:test";
import { IDBFactory } from "fake-indexeddb";
import { db, freshStore, lastName } from "./fixture.mjs";

const { ask } = db;

test("every write asks for strict durability", async () => {
  const seen = [];
  const real = IDBDatabase.prototype.transaction;
  IDBDatabase.prototype.transaction = function (stores, mode, how) {
    if (mode === "readwrite") seen.push(how?.durability);
    return real.call(this, stores, mode, how);
  };
  try {
    const store = await freshStore();
    await db.put(store, "meta", 1, "a");
    await store.write(["meta", "runs"], (tx) => ask(tx.objectStore("runs").put({ run: "r" })));
  } finally {
    IDBDatabase.prototype.transaction = real;
  }
  assert.deepEqual(seen, ["strict", "strict"]);
});

test("a request that succeeds inside a transaction that aborts is not saved", async () => {
  const store = await freshStore();
  let succeeded = false;
  await assert.rejects(
    store.write(["meta"], async (tx) => {
      await ask(tx.objectStore("meta").put(1, "a"));
      succeeded = true;
      tx.abort();
    }),
    (bad) => bad.code === "not-saved",
  );
  assert.equal(succeeded, true);
  assert.equal(await db.get(store, "meta", "a"), undefined);
});

test("work that throws undoes the whole transaction and its error arrives", async () => {
  const store = await freshStore();
  const mine = new Error("mine");
  await assert.rejects(
    store.write(["meta"], async (tx) => {
      await ask(tx.objectStore("meta").put(1, "a"));
      throw mine;
    }),
    mine,
  );
  assert.equal(await db.get(store, "meta", "a"), undefined);
});

test("a handle that died is reopened and the write goes through once", async () => {
  const store = await freshStore();
  const real = IDBDatabase.prototype.transaction;
  let left = 1;
  IDBDatabase.prototype.transaction = function (...how) {
    if (left-- > 0) throw new DOMException("gone", "InvalidStateError");
    return real.apply(this, how);
  };
  try {
    await db.put(store, "meta", 7, "a");
  } finally {
    IDBDatabase.prototype.transaction = real;
  }
  assert.equal(await db.get(store, "meta", "a"), 7);
});

test("a handle that stays dead is said so, not retried for ever", async () => {
  const store = await freshStore();
  const real = IDBDatabase.prototype.transaction;
  let calls = 0;
  IDBDatabase.prototype.transaction = function () {
    calls += 1;
    throw new DOMException("gone", "InvalidStateError");
  };
  try {
    await assert.rejects(db.put(store, "meta", 7, "a"), (bad) => bad.code === "storage-dead" && bad.says.startsWith("NOT SAVED"));
  } finally {
    IDBDatabase.prototype.transaction = real;
  }
  assert.equal(calls, 2);
});

test("an old page meets a newer database: it says so and leaves it alone", async () => {
  const store = await freshStore({ migrations: [...db.MIGRATIONS, () => undefined] });
  await db.put(store, "meta", 1, "a");
  store.close();
  await assert.rejects(db.open({ name: lastName() }), (bad) => bad.code === "app-too-old");
  const again = await db.open({ name: lastName(), migrations: [...db.MIGRATIONS, () => undefined] });
  assert.equal(await db.get(again, "meta", "a"), 1);
});

test("a migration adds to what is there", async () => {
  const store = await freshStore();
  await db.put(store, "meta", 1, "a");
  store.close();
  const second = (/** @type {IDBDatabase} */ idb) => idb.createObjectStore("later");
  const again = await db.open({ name: lastName(), migrations: [...db.MIGRATIONS, second] });
  assert.equal(await db.get(again, "meta", "a"), 1);
  await db.put(again, "later", 2, "b");
  assert.equal(await db.get(again, "later", "b"), 2);
});

test("an upgrade that another window blocks is reported, and works once that window lets go", async () => {
  await freshStore();
  const stubborn = await new Promise((go) => {
    const request = indexedDB.open(lastName(), db.MIGRATIONS.length);
    request.onsuccess = () => go(request.result); // ignores versionchange
  });
  const more = [...db.MIGRATIONS, () => undefined];
  await assert.rejects(db.open({ name: lastName(), migrations: more }), (bad) => bad.code === "storage-blocked");
  stubborn.close();
  const again = await db.open({ name: lastName(), migrations: more });
  await db.put(again, "meta", 1, "a");
});

test("a window that is asked to make way closes and tells its person", async () => {
  const store = await freshStore();
  const told = [];
  store.ontrouble((what) => told.push(what.code));
  await db.open({ name: lastName(), migrations: [...db.MIGRATIONS, () => undefined] });
  assert.deepEqual(told, ["reload-wanted"]);
});

test("storage that cannot be opened is tried three times and never deleted", async () => {
  let opens = 0;
  let deletes = 0;
  globalThis.indexedDB = new (class extends IDBFactory {
    open() {
      opens += 1;
      const request = { error: new DOMException("Internal error opening backing store", "UnknownError") };
      queueMicrotask(() => request.onerror());
      return request;
    }
    deleteDatabase() {
      deletes += 1;
    }
  })();
  await assert.rejects(db.open({ name: "x" }), (bad) => bad.code === "storage-damaged");
  assert.equal(opens, 3);
  assert.equal(deletes, 0);
});
