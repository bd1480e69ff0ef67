// @ts-check
/**
 * Enrolment: this tablet and a person on it become known to the server, online, once.
 *
 * The person's key is made and tried here before anything is sent, and the server sees only its public half. A
 * certificate comes when the signing authority is opened at the desk; until then the person can record, not sign.
 */

import * as api from "./api.js";
import { randomId } from "./bytes.js";
import { all, get, put } from "./db.js";
import { sign } from "./jws.js";
import * as keys from "./keys.js";
import { keepDevice } from "./sentinel.js";
import { Refused } from "./refusal.js";

/** @typedef {import('./db.js').Store} Store */

/**
 * This tablet's identity, made once for each database: a database that was reset never goes on under the old epoch.
 * @param {Store} store @param {string} name
 */
export async function identity(store, name) {
  const found = await get(store, "meta", "device");
  if (found) return found;
  const fresh = { device: randomId(16), epoch: randomId(8), name, made: new Date().toISOString() };
  await put(store, "meta", fresh, "device");
  await keepDevice(fresh);
  return fresh;
}

/**
 * Asks the server to enrol a person here. Throws Refused weak-passphrase, no-keys-here, or the server's own.
 * @param {Store} store
 * @param {{login: string, password: string, tabletName: string, passphrase: string}} who
 * @returns {Promise<{enrolment: string, person: string, status: string}>}
 */
export async function enrol(store, { login, password, tabletName, passphrase }) {
  keys.checkPassphrase(passphrase);
  if (passphrase === password) throw new Refused("weak-passphrase", "The signing passphrase must differ from the password of the sign-in.");
  const { nonce } = await api.challenge();
  const mine = await identity(store, tabletName.trim() || "Tablet");
  const device = await keys.device(store);
  const { record, key } = await keys.create(store, `pending:${login}`, passphrase);
  const proof = await sign(key, { typ: "fieldkit-enrol" }, { device: mine.device, nonce });
  const answer = await api.post("/api/enrol", {
    name: login,
    password,
    device: { id: mine.device, name: mine.name, jwk: device.jwk },
    person_jwk: record.jwk,
    proof,
  });
  await keys.assign(store, record, answer.person, answer.enrolment);
  return answer;
}

/**
 * Asks how each waiting enrolment stands and files the certificates that were issued.
 * @param {Store} store
 * @returns {Promise<{person: string, status: 'waiting'|'issued'|'refused'}[]>} everybody enrolled or waiting here
 */
export async function status(store) {
  const everybody = /** @type {keys.PersonKey[]} */ (await all(store, "keys")).filter((k) => k.id.startsWith("person:"));
  const out = [];
  for (const record of everybody) {
    let now = record.status;
    if (now === "waiting") {
      const answer = await api.call(store, "GET", `/api/enrolment/${encodeURIComponent(record.enrolment)}`);
      now = answer.status;
      if (now === "issued") {
        await pinAuthority(store, answer.authority);
        await keys.certify(store, record, answer.certificate, answer.authority);
      } else if (now === "refused") await put(store, "keys", { ...record, status: "refused" });
    }
    out.push({ person: record.person, status: now });
  }
  return out;
}

/**
 * The signing authority is taken as first seen, and afterwards never another.
 * @param {Store} store @param {string} pem
 */
export async function pinAuthority(store, pem) {
  const der = keys.derOf(pem);
  const pinned = await get(store, "meta", "authority");
  if (!pinned) await put(store, "meta", der, "authority");
  else if (pinned !== der) {
    throw new Refused("other-authority", "The server shows another signing authority than the one this tablet knows. Ask at the desk before going on.");
  }
}
