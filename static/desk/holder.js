// @ts-check
/**
 * This browser's key of the supervisor who is signed in: found, made, certified. The same keys as on a tablet
 * (static/tablet/keys.js), in a store of the desk's own. The private half never leaves this browser.
 */

import * as keys from "../tablet/keys.js";
import { get, open, put } from "../tablet/db.js";
import { sign } from "../tablet/jws.js";
import * as calls from "./calls.js";

export const STORE = "fieldkit-desk";

/** @typedef {import('../tablet/keys.js').PersonKey} PersonKey @typedef {import('../tablet/db.js').Store} Store */

/** @returns {Promise<Store>} */
export function store() {
  return open({ name: STORE });
}

/** @param {Store} at @param {string} person @returns {Promise<PersonKey | undefined>} */
export function find(at, person) {
  return get(at, "keys", `person:${person}`);
}

/**
 * A new key under the passphrase, and the question for its certificate. Asking again with the same passphrase goes on.
 * @param {Store} at @param {string} person @param {string} passphrase @param {{ask: string, csrf: string, nonce: string}} where
 */
export async function make(at, person, passphrase, where) {
  const { record, key } = await keys.create(at, `pending:${person}`, passphrase);
  const proof = await sign(key, { typ: "fieldkit-enrol" }, { device: "desk", nonce: where.nonce });
  const answer = await calls.post(where.ask, where.csrf, { person_jwk: record.jwk, proof });
  await keys.assign(at, record, person, answer.enrolment);
}

/**
 * Asks what became of the enrolment, and files the certificate when there is one.
 * @param {Store} at @param {PersonKey} record @param {string} ask
 * @returns {Promise<{status: string, note: string}>}
 */
export async function look(at, record, ask) {
  const answer = await calls.get(`${ask}/${encodeURIComponent(record.enrolment)}`);
  if (answer.status === "issued") await keys.certify(at, record, answer.certificate, answer.authority);
  else if (answer.status === "refused") await put(at, "keys", { ...record, status: "refused" });
  return answer;
}

/**
 * The key as it stands now: where its certificate is still waited for, the desk is asked first.
 * @param {Store} at @param {string} person @param {string} ask
 * @returns {Promise<{record: PersonKey | undefined, note: string}>}
 */
export async function current(at, person, ask) {
  const record = await find(at, person);
  if (record?.status !== "waiting" || !record.enrolment) return { record, note: "" };
  const { note } = await look(at, record, ask);
  return { record: await find(at, person), note };
}

/**
 * A raw 64-byte signature over `data` by the person's key, opened for this one signature. Throws Refused as keys.unlock.
 * @param {Store} at @param {string} person @param {string} passphrase @param {BufferSource} data
 */
export async function signRaw(at, person, passphrase, data) {
  await keys.maySign(at, person);
  await keys.unlock(at, person, passphrase);
  const key = /** @type {CryptoKey} */ (keys.opened(person));
  try {
    return await crypto.subtle.sign({ name: "ECDSA", hash: "SHA-256" }, key, data);
  } finally {
    keys.forget();
  }
}

