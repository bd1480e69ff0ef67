// @ts-check
/**
 * The desk's JSON calls: the session's cookie, the page's CSRF token, and an answer that must be JSON.
 *
 * A page that was open for too long gets a form page back; that is said plainly instead of failing on its first letter.
 */

import { Refused } from "../tablet/refusal.js";

const OLD = "This page was open for too long, or you were signed out. Load it again; your key and what was recorded are untouched.";
const AWAY = "The server does not answer. Try again when it is reachable; nothing was signed.";

/**
 * @param {string} url @param {RequestInit} [how]
 * @returns {Promise<any>} the answer's JSON. Throws Refused with the server's own code and sentence.
 */
async function call(url, how = {}) {
  const answer = await fetch(url, { credentials: "same-origin", redirect: "error", ...how }).catch(() => {
    throw new Refused("unreachable", AWAY);
  });
  const body = await answer.json().catch(() => {
    throw new Refused("page-too-old", OLD);
  });
  if (!answer.ok) throw new Refused(body?.refused?.code ?? "unreadable", body?.refused?.says ?? OLD);
  return body;
}

/** @param {string} url */
export function get(url) {
  return call(url);
}

/** @param {string} url @param {string} token CSRF @param {unknown} body */
export function post(url, token, body) {
  const headers = { "Content-Type": "application/json", "X-CSRFToken": token };
  return call(url, { method: "POST", headers, body: JSON.stringify(body) });
}

/** @param {string} url @returns {Promise<Uint8Array<ArrayBuffer>>} a file's bytes */
export async function bytes(url) {
  const answer = await fetch(url, { credentials: "same-origin", redirect: "error" }).catch(() => {
    throw new Refused("unreachable", AWAY);
  });
  const found = await answer.arrayBuffer();
  if (!answer.ok) throw new Refused("not-found", "The prepared file is no longer there. Make it ready again.");
  return new Uint8Array(found);
}
