// @ts-check
/**
 * Calls to the server: signed by this tablet's key, no cookie, and believed only when it is our server that answers.
 *
 * A reply counts when it carries `X-Fieldkit: 1` and parses; a network's sign-in page is a 200 too. What goes wrong
 * is one of: unreachable, not-our-server, server-trouble, too-large, or the server's own refusal with its code.
 * Not here: when to call (sync.js), what a receipt must say (receipts.js).
 */

import { sha256, utf8 } from "./bytes.js";
import { get } from "./db.js";
import { sign } from "./jws.js";
import { deviceKey } from "./keys.js";
import { Refused } from "./refusal.js";

const PATIENCE_MS = 20_000;

const SAYS = {
  unreachable: "The server cannot be reached. Everything is kept on this tablet and is sent when it can be.",
  late: "The server does not answer in time. Everything is kept on this tablet and is sent when it can be.",
  foreign: "A network is there, but it is not our server that answers (a sign-in page of the network?). Nothing was received.",
  cut: "The reply of the server was cut off. It is asked again later.",
  trouble: "The server has trouble of its own. Everything is kept on this tablet and is sent again later.",
  large: "The server says that this is too large.",
};

/** @typedef {import('./db.js').Store} Store */

/**
 * @param {string} path
 * @param {RequestInit} how
 * @returns {Promise<Response>}
 */
async function reach(path, how) {
  const stop = new AbortController();
  const timer = setTimeout(() => stop.abort(), PATIENCE_MS);
  try {
    const reply = await fetch(path, { ...how, credentials: "omit", cache: "no-store", redirect: "manual", signal: stop.signal });
    // The body is read here, under the same patience: a reply may stall half way.
    const body = reply.type === "opaqueredirect" ? null : await reply.arrayBuffer();
    return new Response([101, 204, 205, 304].includes(reply.status) ? null : body, {
      status: reply.type === "opaqueredirect" ? 599 : reply.status,
      headers: reply.headers,
    });
  } catch (bad) {
    const late = stop.signal.aborted;
    throw new Refused("unreachable", late ? SAYS.late : SAYS.unreachable, { late, cause: bad });
  } finally {
    clearTimeout(timer);
  }
}

/**
 * The reply, once it is known to be our server's and no refusal.
 * @param {Response} reply
 */
async function ours(reply) {
  const says = reply.headers.get("X-Fieldkit") === "1";
  if (reply.status === 413) throw new Refused("too-large", SAYS.large, { status: 413 });
  if (reply.status >= 500 && reply.status !== 511 && reply.status !== 599) throw new Refused("server-trouble", SAYS.trouble, { status: reply.status });
  if (!says) throw new Refused("not-our-server", SAYS.foreign, { status: reply.status });
  if (reply.status >= 200 && reply.status < 300) return reply;
  const answer = await json(reply);
  const told = answer.refused;
  if (!told || typeof told.code !== "string") throw new Refused("not-our-server", SAYS.foreign, { status: reply.status });
  throw new Refused(told.code, String(told.says), { status: reply.status, by: "server", answer, ...("wait_s" in told ? { wait_s: told.wait_s } : {}) });
}

/** @param {Response} reply @returns {Promise<any>} */
async function json(reply) {
  try {
    return await reply.json();
  } catch {
    throw new Refused("cut-reply", SAYS.cut);
  }
}

/** @type {{nonce: string, until: number}} a nonce is good for ten minutes at the server; half of that is used */
let held = { nonce: "", until: 0 };
const NONCE_MS = 5 * 60_000;

/** @returns {Promise<{nonce: string, store: string, time: string}>} */
export async function challenge() {
  const answer = await json(await ours(await reach("/api/challenge", { method: "GET" })));
  held = { nonce: answer.nonce, until: performance.now() + NONCE_MS };
  return answer;
}

/**
 * An unsigned JSON call: enrolment only, where the tablet has no standing yet.
 * @param {string} path @param {unknown} body
 */
export async function post(path, body) {
  const how = { method: "POST", headers: { "Content-Type": "application/json" }, body: JSON.stringify(body) };
  return json(await ours(await reach(path, how)));
}

/**
 * A call signed by the tablet's key, with a nonce of the server; asked again once when the nonce has grown too old.
 * @param {Store} store @param {string} method @param {string} path with its query
 * @param {Uint8Array<ArrayBuffer>} [bytes] @param {string} [media]
 * @returns {Promise<Response>}
 */
export async function signed(store, method, path, bytes, media) {
  try {
    return await signedOnce(store, method, path, bytes, media);
  } catch (bad) {
    if (!(bad instanceof Refused) || bad.code !== "old-nonce") throw bad;
    held.until = 0;
    return signedOnce(store, method, path, bytes, media);
  }
}

/**
 * @param {Store} store @param {string} method @param {string} path
 * @param {Uint8Array<ArrayBuffer>} [bytes] @param {string} [media]
 * @returns {Promise<Response>}
 */
async function signedOnce(store, method, path, bytes, media) {
  const mine = await get(store, "meta", "device");
  if (!mine) throw new Refused("not-enrolled", "This tablet is not enrolled.");
  const nonce = performance.now() < held.until ? held.nonce : (await challenge()).nonce;
  const payload = { method, path, body: await sha256(bytes ?? new Uint8Array(0)), nonce };
  const token = await sign(await deviceKey(store), { typ: "fieldkit-request", kid: mine.device }, payload);
  /** @type {Record<string, string>} */
  const headers = { Authorization: `Fieldkit ${token}` };
  if (bytes) headers["Content-Type"] = media ?? "application/json";
  return ours(await reach(path, { method, headers, body: bytes }));
}

/**
 * A signed call whose answer is JSON.
 * @param {Store} store @param {string} method @param {string} path @param {unknown} [body]
 * @returns {Promise<any>}
 */
export async function call(store, method, path, body) {
  return json(await signed(store, method, path, body === undefined ? undefined : utf8(JSON.stringify(body))));
}
