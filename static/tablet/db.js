// @ts-check
/**
 * The tablet's store: IndexedDB, opened, upgraded and written so that "saved" is never said too early.
 *
 * A write resolves when its transaction is complete (strict durability) and rejects on abort and on error; a
 * request's own success means nothing, because a full disk aborts after it. A handle that died is reopened and
 * the write tried once more. Nothing here deletes a database, and nothing is stored as a Blob.
 * To add a store or an index: one more function at the end of MIGRATIONS, additive; never change an old one.
 */

import { Refused } from "./refusal.js";

export const NAME = "fieldkit";

/** @type {((db: IDBDatabase, tx: IDBTransaction) => void)[]} migration n lifts version n to n + 1 */
export const MIGRATIONS = [
  (db) => {
    db.createObjectStore("meta"); // device, kit, pins: one record a name
    db.createObjectStore("keys", { keyPath: "id" }); // "device", "person:<id>"; a key that reads back as null spoils no neighbour
    db.createObjectStore("blobs", { keyPath: "sha256" }); // kit content by its hash, kept for runs that began with it
    db.createObjectStore("runs", { keyPath: "run" });
    db.createObjectStore("events", { keyPath: ["run", "chain", "seq"] });
    db.createObjectStore("pictures", { keyPath: "sha256" }).createIndex("run", "run");
    db.createObjectStore("chunks", { keyPath: ["sha256", "n"] });
    db.createObjectStore("drafts", { keyPath: ["run", "step"] });
    db.createObjectStore("inbox", { keyPath: "id" });
    db.createObjectStore("incidents", { autoIncrement: true });
  },
];

const SLOW_MS = 5_000;
const DEAD_MS = 20_000;
const BLOCKED_MS = 1_500;

const SAYS = {
  blocked: "Another window of fieldkit is open with an older version. Close it, then try again.",
  older: "What is stored on this tablet was written by a newer fieldkit than this page. Connect to the server once and reload. Nothing was changed.",
  damaged: "The storage of this tablet cannot be opened. Close the browser fully and open it again. If that does not help, do not clear anything: take the tablet to your supervisor.",
  dead: "NOT SAVED. The storage of this tablet does not answer. Note the value on paper, close the browser fully and open it again.",
  quota: "NOT SAVED. The storage of this tablet is full. Free some space on the tablet, then record it again.",
  aborted: "NOT SAVED. The tablet broke off the write. Record it again.",
};

/**
 * @typedef {object} Store
 * @property {<T>(stores: string[], work: (tx: IDBTransaction) => Promise<T> | T) => Promise<T>} read
 * @property {<T>(stores: string[], work: (tx: IDBTransaction) => Promise<T> | T) => Promise<T>} write
 * @property {() => void} close
 * @property {(cb: (what: {code: string, says: string}) => void) => void} ontrouble slow writes, a newer page that wants in
 */

/**
 * The result of one request, for use inside a transaction only (await nothing else there, or it closes).
 * @template T
 * @param {IDBRequest<T>} request
 * @returns {Promise<T>}
 */
export function ask(request) {
  return new Promise((resolve, reject) => {
    request.onsuccess = () => resolve(request.result);
    request.onerror = () => reject(request.error);
  });
}

/**
 * One attempt at opening; upgrades run in order.
 * @param {string} name
 * @param {typeof MIGRATIONS} migrations
 * @returns {Promise<IDBDatabase>}
 */
function openOnce(name, migrations) {
  return new Promise((resolve, reject) => {
    const request = indexedDB.open(name, migrations.length);
    let given = false;
    /** @param {unknown} bad */
    const giveUp = (bad) => {
      given = true;
      reject(bad);
    };
    request.onupgradeneeded = (event) => {
      const tx = /** @type {IDBTransaction} */ (request.transaction);
      for (const lift of migrations.slice(event.oldVersion)) lift(request.result, tx);
    };
    request.onblocked = () => {
      setTimeout(() => giveUp(new Refused("storage-blocked", SAYS.blocked)), BLOCKED_MS);
    };
    request.onerror = () => giveUp(request.error);
    request.onsuccess = () => {
      // An open that was given up must not hold the database against the next one.
      if (given) request.result.close();
      else resolve(request.result);
    };
  });
}

/** @param {unknown} bad */
function isVersionError(bad) {
  return bad instanceof Error && bad.name === "VersionError";
}

/**
 * @param {string} name
 * @param {typeof MIGRATIONS} migrations
 */
async function openPatiently(name, migrations) {
  for (let attempt = 1; ; attempt += 1) {
    try {
      return await openOnce(name, migrations);
    } catch (bad) {
      if (bad instanceof Refused) throw bad;
      if (isVersionError(bad)) throw new Refused("app-too-old", SAYS.older);
      if (attempt === 3) throw new Refused("storage-damaged", SAYS.damaged, { cause: bad });
      await new Promise((go) => setTimeout(go, 250 * attempt));
    }
  }
}

/** @param {unknown} bad a handle that the browser has lost, as opposed to a write that it refused */
function isDead(bad) {
  const name = bad instanceof Error ? bad.name : "";
  return name === "InvalidStateError" || name === "UnknownError" || (bad instanceof Refused && bad.code === "handle-dead");
}

/**
 * Runs `work` in one transaction and settles when the transaction does.
 * @template T
 * @param {IDBDatabase} db
 * @param {string[]} stores
 * @param {IDBTransactionMode} mode
 * @param {(tx: IDBTransaction) => Promise<T> | T} work
 * @param {() => void} slow
 * @returns {Promise<T>}
 */
function transact(db, stores, mode, work, slow) {
  return new Promise((resolve, reject) => {
    const tx = db.transaction(stores, mode, mode === "readwrite" ? { durability: "strict" } : {});
    /** @type {T} */
    let result;
    /** @type {unknown} */
    let why = null;
    const timers = [
      setTimeout(slow, SLOW_MS),
      setTimeout(() => {
        try {
          tx.abort();
        } catch {
          // already finishing, or dead: the next line settles it either way
        }
        reject(new Refused("handle-dead", SAYS.dead));
      }, DEAD_MS),
    ];
    const over = () => timers.forEach((t) => clearTimeout(t));
    tx.oncomplete = () => {
      over();
      resolve(result);
    };
    tx.onerror = () => {
      why = why ?? tx.error;
    };
    tx.onabort = () => {
      over();
      const bad = why ?? tx.error;
      if (bad instanceof Refused || isDead(bad)) reject(bad);
      else if (bad instanceof Error && bad.name === "QuotaExceededError") reject(new Refused("storage-full", SAYS.quota));
      else reject(bad instanceof Error ? bad : new Refused("not-saved", SAYS.aborted));
    };
    Promise.resolve()
      .then(() => work(tx))
      .then(
        (value) => {
          result = value;
        },
        (bad) => {
          why = tx.error ?? bad;
          try {
            tx.abort();
          } catch {
            over();
            reject(bad); // the transaction had ended before its work did
          }
        },
      );
  });
}

/**
 * Opens the store. Throws Refused storage-blocked, app-too-old or storage-damaged.
 * @param {{name?: string, migrations?: typeof MIGRATIONS}} [how]
 * @returns {Promise<Store>}
 */
export async function open({ name = NAME, migrations = MIGRATIONS } = {}) {
  /** @type {IDBDatabase | null} */
  let db = null;
  /** @type {((what: {code: string, says: string}) => void)[]} */
  const listeners = [];
  /** @param {{code: string, says: string}} what */
  const tell = (what) => listeners.forEach((cb) => cb(what));

  async function handle() {
    if (db) return db;
    const fresh = await openPatiently(name, migrations);
    fresh.onclose = () => {
      db = null;
    };
    fresh.onversionchange = () => {
      fresh.close();
      db = null;
      tell({ code: "reload-wanted", says: "A newer fieldkit is open in another window. Finish there, or reload this page." });
    };
    db = fresh;
    return fresh;
  }

  /**
   * @template T
   * @param {string[]} stores
   * @param {IDBTransactionMode} mode
   * @param {(tx: IDBTransaction) => Promise<T> | T} work
   */
  async function run(stores, mode, work) {
    const slow = () => tell({ code: "slow", says: "Not saved yet: the storage of this tablet is slow to answer." });
    for (let attempt = 1; ; attempt += 1) {
      try {
        return await transact(await handle(), stores, mode, work, slow);
      } catch (bad) {
        if (!isDead(bad)) throw bad;
        if (attempt === 2) throw new Refused("storage-dead", SAYS.dead, { cause: bad });
        try {
          db?.close();
        } catch {
          // a dead handle may refuse even this
        }
        db = null;
      }
    }
  }

  await handle();
  return {
    read: (stores, work) => run(stores, "readonly", work),
    write: (stores, work) => run(stores, "readwrite", work),
    close: () => {
      db?.close();
      db = null;
    },
    ontrouble: (cb) => listeners.push(cb),
  };
}

/**
 * One record by key.
 * @param {Store} store @param {string} from @param {IDBValidKey} key
 * @returns {Promise<any>}
 */
export function get(store, from, key) {
  return store.read([from], (tx) => ask(tx.objectStore(from).get(key)));
}

/**
 * Every record of a store, or of a key range.
 * @param {Store} store @param {string} from @param {IDBKeyRange} [range]
 * @returns {Promise<any[]>}
 */
export function all(store, from, range) {
  return store.read([from], (tx) => ask(tx.objectStore(from).getAll(range)));
}

/**
 * Puts one record in its own transaction.
 * @param {Store} store @param {string} into @param {unknown} value @param {IDBValidKey} [key]
 * @returns {Promise<void>}
 */
export function put(store, into, value, key) {
  return store.write([into], async (tx) => {
    await ask(tx.objectStore(into).put(value, key));
  });
}
