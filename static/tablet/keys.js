// @ts-check
/**
 * Keys: one for this tablet (it signs requests) and one per enrolled person (it signs what that person did).
 *
 * The tablet's key cannot be exported. A person's key lies here only wrapped under that person's passphrase
 * (PBKDF2-SHA256, then AES-256-GCM over PKCS #8); unlocked it lives in memory, and is forgotten after ten idle
 * minutes and when another person takes over. A wrong passphrase slows the next try and locks nobody out.
 * Not here: asking the server for a certificate (enrol.js), the form of a signature (jws.js).
 */

import { base64, fromBase64, fromBase64url, hex, sha256, utf8 } from "./bytes.js";
import { ask, get, put } from "./db.js";
import { CURVE, publicJwk, publicKey, sign, verify } from "./jws.js";
import { Refused } from "./refusal.js";

export const ITERATIONS = 600_000;
const IDLE_MS = 10 * 60_000;
const LONGEST_WAIT_S = 300;

/** @typedef {import('./db.js').Store} Store */
/** @typedef {import('./jws.js').PublicJwk} PublicJwk */
/** @typedef {{bytes: ArrayBuffer, salt: ArrayBuffer, iv: ArrayBuffer, iterations: number}} Wrapped */
/**
 * @typedef {object} PersonKey
 * @property {string} id "person:<id>", or "pending:<login>" until the server has said who it is
 * @property {string} person
 * @property {string} enrolment
 * @property {'waiting'|'issued'|'refused'} status
 * @property {PublicJwk} jwk
 * @property {Wrapped} wrapped
 * @property {string[]} x5c base64 DER, leaf first; empty until issued
 * @property {string} kid SHA-256 of the leaf
 * @property {number} tries wrong passphrases since the last right one
 * @property {number} until wall time in ms before which no try is taken
 */
/** @typedef {{id: 'device', private: CryptoKey | null, bytes: ArrayBuffer | null, jwk: PublicJwk}} DeviceKey */

/** @type {Map<string, {key: CryptoKey, entered: number, wall: number, mono: number}>} */
const unlocked = new Map();

/**
 * Refuses a passphrase that could be guessed on a stolen tablet. A short number is not enough: there is no server in between.
 * @param {string} passphrase
 */
export function checkPassphrase(passphrase) {
  const letters = Array.from(passphrase.normalize("NFKC"));
  if (letters.length < 10 || new Set(letters).size < 4) {
    throw new Refused("weak-passphrase", "The passphrase needs at least 10 characters, at least 4 of them different. Four words do well.");
  }
  if (letters.length > 1000) throw new Refused("weak-passphrase", "The passphrase is longer than 1000 characters.");
}

/**
 * @param {string} passphrase @param {BufferSource} salt @param {number} iterations
 */
async function wrappingKey(passphrase, salt, iterations) {
  const typed = await crypto.subtle.importKey("raw", utf8(passphrase.normalize("NFKC")), "PBKDF2", false, ["deriveKey"]);
  const how = { name: "PBKDF2", hash: "SHA-256", salt, iterations };
  return crypto.subtle.deriveKey(how, typed, { name: "AES-GCM", length: 256 }, false, ["wrapKey", "unwrapKey"]);
}

/**
 * @param {CryptoKey} key extractable private @param {string} passphrase @param {number} iterations
 * @returns {Promise<Wrapped>}
 */
async function wrap(key, passphrase, iterations) {
  const salt = crypto.getRandomValues(new Uint8Array(16));
  const iv = crypto.getRandomValues(new Uint8Array(12));
  const under = await wrappingKey(passphrase, salt, iterations);
  const bytes = await crypto.subtle.wrapKey("pkcs8", key, under, { name: "AES-GCM", iv });
  return { bytes, salt: salt.buffer, iv: iv.buffer, iterations };
}

/**
 * The private key, or null when the passphrase is wrong.
 * @param {Wrapped} wrapped @param {string} passphrase @param {boolean} extractable
 * @returns {Promise<CryptoKey | null>}
 */
async function unwrap(wrapped, passphrase, extractable = false) {
  const under = await wrappingKey(passphrase, wrapped.salt, wrapped.iterations);
  try {
    return await crypto.subtle.unwrapKey("pkcs8", wrapped.bytes, under, { name: "AES-GCM", iv: new Uint8Array(wrapped.iv) }, CURVE, extractable, ["sign"]);
  } catch (bad) {
    if (bad instanceof Error && bad.name === "OperationError") return null;
    throw bad;
  }
}

/**
 * A signature by the private half must hold under the public half, as loaded from the store.
 * @param {CryptoKey} key @param {PublicJwk} jwk
 */
async function selfTest(key, jwk) {
  const token = await sign(key, { typ: "fieldkit-self-test" }, { is: "a test" });
  await verify(token, await publicKey(jwk), "fieldkit-self-test");
}

/**
 * The tablet's key record, made at the first call: generated, stored, the store reopened, loaded, tried.
 * Throws Refused no-keys-here when the browser cannot keep it.
 * @param {Store} store
 * @returns {Promise<DeviceKey>}
 */
export async function device(store) {
  const found = await get(store, "keys", "device");
  if (found) return found;
  const pair = await crypto.subtle.generateKey(CURVE, true, ["sign", "verify"]);
  const jwk = await publicJwk(pair.publicKey);
  const bytes = await crypto.subtle.exportKey("pkcs8", pair.privateKey);
  const sealed = await crypto.subtle.importKey("pkcs8", bytes, CURVE, false, ["sign"]);
  try {
    await put(store, "keys", { id: "device", private: sealed, bytes: null, jwk });
    store.close();
    await selfTest(await deviceKey(store), jwk);
  } catch (bad) {
    if (bad instanceof Refused && !["wrong-signature", "no-keys-here"].includes(bad.code)) throw bad;
    // Some browsers cannot store a key object. The tablet's key then lies here as bytes; people's keys always do, wrapped.
    await put(store, "keys", { id: "device", private: null, bytes, jwk });
    store.close();
    await selfTest(await deviceKey(store), jwk);
  }
  return get(store, "keys", "device");
}

/**
 * The tablet's private key. Throws Refused not-enrolled or no-keys-here.
 * @param {Store} store
 * @returns {Promise<CryptoKey>}
 */
export async function deviceKey(store) {
  /** @type {DeviceKey | undefined} */
  const kept = await get(store, "keys", "device");
  if (!kept) throw new Refused("not-enrolled", "This tablet is not enrolled.");
  if (kept.private) return kept.private;
  if (kept.bytes) return crypto.subtle.importKey("pkcs8", kept.bytes, CURVE, false, ["sign"]);
  throw new Refused("no-keys-here", "This browser cannot keep keys. Use another browser, or leave private mode.");
}

/**
 * A new person's key under `id`, wrapped, stored, read back through a reopened store, unwrapped and tried.
 * The key of an earlier attempt that never got an answer is used again, when the passphrase opens it.
 * @param {Store} store @param {string} id "pending:<login>" @param {string} passphrase
 * @returns {Promise<{record: PersonKey, key: CryptoKey}>}
 */
export async function create(store, id, passphrase) {
  checkPassphrase(passphrase);
  const earlier = await get(store, "keys", id);
  const again = earlier ? await unwrap(earlier.wrapped, passphrase) : null;
  if (again) return { record: earlier, key: again };
  const pair = await crypto.subtle.generateKey(CURVE, true, ["sign", "verify"]);
  const jwk = await publicJwk(pair.publicKey);
  const wrapped = await wrap(pair.privateKey, passphrase, ITERATIONS);
  await put(store, "keys", { id, person: "", enrolment: "", status: "waiting", jwk, wrapped, x5c: [], kid: "", tries: 0, until: 0 });
  store.close();
  const record = await get(store, "keys", id);
  const key = await unwrap(record.wrapped, passphrase);
  if (!key) throw new Refused("no-keys-here", "This browser did not give back the key that it was given. Use another browser.");
  await selfTest(key, record.jwk);
  return { record, key };
}

/**
 * Files a pending key under the person that the server named, in one transaction.
 * An older key of the same person on this tablet stays beside it as "old:<kid>", locked: old signatures name it.
 * @param {Store} store @param {PersonKey} record @param {string} person @param {string} enrolment
 */
export async function assign(store, record, person, enrolment) {
  await store.write(["keys"], async (tx) => {
    const keys = tx.objectStore("keys");
    const older = await ask(keys.get(`person:${person}`));
    if (older && older.status === "issued") await ask(keys.put({ ...older, id: `old:${older.kid}` }));
    await ask(keys.put({ ...record, id: `person:${person}`, person, enrolment }));
    await ask(keys.delete(record.id));
  });
  unlocked.delete(person);
}

/** @param {string} pem @returns {string} base64 DER */
export function derOf(pem) {
  const found = /-----BEGIN CERTIFICATE-----([A-Za-z0-9+/=\s]+)-----END CERTIFICATE-----/.exec(pem);
  if (!found) throw new Refused("damaged-certificate", "The server sent something that is not a certificate.");
  return base64(fromBase64(found[1].replace(/\s/g, "")));
}

/**
 * Files the certificate of a person's key. Throws Refused wrong-certificate when it is for another key.
 * @param {Store} store @param {PersonKey} record @param {string} certificate PEM @param {string} authority PEM
 */
export async function certify(store, record, certificate, authority) {
  const x5c = [derOf(certificate), derOf(authority)];
  const point = `04${hex(fromBase64url(record.jwk.x))}${hex(fromBase64url(record.jwk.y))}`;
  if (!hex(fromBase64(x5c[0])).includes(point)) {
    throw new Refused("wrong-certificate", "The certificate that the server sent is for another key. Enrol again.");
  }
  await put(store, "keys", { ...record, status: "issued", x5c, kid: await sha256(fromBase64(x5c[0])) });
}

/** @param {number} tries seconds to wait after that many wrong ones */
function waitAfter(tries) {
  return Math.min(2 ** (tries - 1), LONGEST_WAIT_S);
}

/**
 * Opens a person's key into memory. Throws Refused not-enrolled-here, too-soon or wrong-passphrase (with wait_s).
 * @param {Store} store @param {string} person @param {string} passphrase @param {number} [now] wall ms
 * @returns {Promise<true>}
 */
export async function unlock(store, person, passphrase, now = Date.now()) {
  /** @type {PersonKey | undefined} */
  const record = await get(store, "keys", `person:${person}`);
  if (!record) throw new Refused("not-enrolled-here", "This person is not enrolled on this tablet and cannot sign on it.");
  // A clock that was set back must not turn seconds into hours, so the rest is capped by what was set.
  const rest = record.tries ? Math.min(Math.ceil((record.until - now) / 1000), waitAfter(record.tries)) : 0;
  if (rest > 0) throw new Refused("too-soon", `Wait ${rest} s before the next try.`, { wait_s: rest });
  const weaker = record.wrapped.iterations < ITERATIONS;
  const key = await unwrap(record.wrapped, passphrase, weaker);
  if (!key) {
    const tries = record.tries + 1;
    const wait_s = waitAfter(tries);
    await put(store, "keys", { ...record, tries, until: now + wait_s * 1000 });
    throw new Refused("wrong-passphrase", `The passphrase is wrong. The key is not blocked: try again in ${wait_s} s.`, { wait_s });
  }
  const wrapped = weaker ? await wrap(key, passphrase, ITERATIONS) : record.wrapped;
  if (weaker || record.tries) await put(store, "keys", { ...record, wrapped, tries: 0, until: 0 });
  const kept = weaker ? /** @type {CryptoKey} */ (await unwrap(wrapped, passphrase)) : key;
  unlocked.set(person, { key: kept, entered: performance.now(), wall: Date.now(), mono: performance.now() });
  return true;
}

/**
 * The person's key if it is open and not idle too long; using it starts the ten minutes again.
 * @param {string} person
 * @returns {CryptoKey | null}
 */
export function opened(person) {
  const held = unlocked.get(person);
  if (!held) return null;
  // The greater of both clocks: the monotonic one may have slept.
  if (Math.max(Date.now() - held.wall, performance.now() - held.mono) > IDLE_MS) {
    unlocked.delete(person);
    return null;
  }
  held.wall = Date.now();
  held.mono = performance.now();
  return held.key;
}

/**
 * Whether the person's passphrase was entered in the last `seconds`.
 * @param {string} person @param {number} seconds
 */
export function isFresh(person, seconds) {
  const held = unlocked.get(person);
  return opened(person) !== null && held !== undefined && performance.now() - held.entered <= seconds * 1000;
}

/**
 * Forgets every open key but one person's.
 * @param {string} [except]
 */
export function forget(except = "") {
  for (const person of unlocked.keys()) if (person !== except) unlocked.delete(person);
}

/**
 * The person's JWS over `payload`, with their certificate chain. Throws Refused locked-key, or as maySign.
 * @param {Store} store @param {string} person @param {unknown} payload
 */
export async function signAs(store, person, payload) {
  const record = await maySign(store, person);
  const key = opened(person);
  if (!key) throw new Refused("locked-key", "Enter the passphrase to sign.");
  return sign(key, { typ: "fieldkit-signature", kid: record.kid, x5c: record.x5c }, payload);
}

/**
 * The person's key record, if a signature with it would be worth anything. Throws Refused not-enrolled-here, no-certificate-yet.
 * @param {Store} store @param {string} person
 * @returns {Promise<PersonKey>}
 */
export async function maySign(store, person) {
  /** @type {PersonKey | undefined} */
  const record = await get(store, "keys", `person:${person}`);
  if (!record) throw new Refused("not-enrolled-here", "This person is not enrolled on this tablet and cannot sign on it.");
  if (record.status !== "issued") throw new Refused("no-certificate-yet", "The signing authority has not issued this person’s certificate yet. Connect once more, then sign.");
  return record;
}
