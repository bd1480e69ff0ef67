// @ts-check
/**
 * The tablet's second copy, in the origin's private file system: appended by a worker, flushed to disk.
 *
 * It saves what a damaged database loses. It does not save anything when the browser clears the whole site: both go
 * together. Failure here is reported and never stands in the way of the database. Not here: what is copied
 * (sentinel.js), the file work itself (opfsworker.js).
 */

/** @typedef {{op: string, path: string, [key: string]: unknown}} Job */

/** @type {Worker | null} */
let worker = null;
let next = 0;
/** @type {Map<number, {resolve: (value: any) => void, reject: (bad: Error) => void}>} */
const waiting = new Map();
/** @type {Promise<unknown>} */
let line = Promise.resolve();

const PATIENCE_MS = 10_000;

function start() {
  if (worker) return worker;
  const fresh = new Worker(new URL("./opfsworker.js", import.meta.url), { type: "module" });
  fresh.onmessage = ({ data }) => {
    const job = waiting.get(data.id);
    waiting.delete(data.id);
    if (data.bad) job?.reject(new Error(data.bad));
    else job?.resolve(data.value);
  };
  fresh.onerror = () => {
    for (const job of waiting.values()) job.reject(new Error("the copying worker did not start"));
    waiting.clear();
    worker = null;
  };
  worker = fresh;
  return fresh;
}

/**
 * @param {Job} job
 * @returns {Promise<any>}
 */
function send(job) {
  return new Promise((resolve, reject) => {
    const to = start();
    const id = (next += 1);
    const timer = setTimeout(() => {
      waiting.delete(id);
      reject(new Error("the copying worker does not answer"));
    }, PATIENCE_MS);
    waiting.set(id, {
      resolve: (value) => {
        clearTimeout(timer);
        resolve(value);
      },
      reject: (bad) => {
        clearTimeout(timer);
        reject(bad);
      },
    });
    to.postMessage({ id, ...job });
  });
}

/**
 * One job after the other, in the order asked.
 * @param {Job} job
 * @returns {Promise<any>}
 */
function inLine(job) {
  const done = line.then(() => send(job));
  line = done.catch(() => undefined);
  return done;
}

/** @param {string} path @param {string} text appended with a line feed; the file's new size must be what was expected */
export const append = (path, text) => inLine({ op: "append", path, text });

/** @param {string} path @param {Uint8Array<ArrayBuffer>} bytes replace the whole file */
export const write = (path, bytes) => inLine({ op: "write", path, bytes });

/** @param {string} path @returns {Promise<ArrayBuffer | null>} null when there is no such file */
export const read = (path) => inLine({ op: "read", path });

/** @param {string} path of a folder @returns {Promise<string[]>} names of the files in it */
export const list = (path) => inLine({ op: "list", path });
