// @ts-check
/**
 * Compact JWS with ES256 (RFC 7515, RFC 7518 3.4), and nothing else: one algorithm, raw 64-byte signatures.
 *
 * The header's `alg` is checked before use and the key is always the caller's own, never one from the header.
 * Not here: who may sign what (keys.js), certificates (checked by the server and by `fieldkit verify`).
 */

import { base64url, fromBase64url, text, utf8 } from "./bytes.js";
import { Refused } from "./refusal.js";

const ECDSA = { name: "ECDSA", hash: "SHA-256" };
export const CURVE = { name: "ECDSA", namedCurve: "P-256" };

/** @typedef {{kty: string, crv: string, x: string, y: string}} PublicJwk */

/**
 * @param {CryptoKey} key private P-256
 * @param {Record<string, unknown>} header without alg
 * @param {unknown} payload
 */
export async function sign(key, header, payload) {
  const input = `${base64url(utf8(JSON.stringify({ alg: 'ES256', ...header })))}.${base64url(utf8(JSON.stringify(payload)))}`;
  const raw = await crypto.subtle.sign(ECDSA, key, utf8(input));
  if (raw.byteLength !== 64) throw new Refused("odd-signature", "This browser signs in a form that is not 64 bytes long; it cannot be used here.");
  return `${input}.${base64url(raw)}`;
}

/**
 * The header and payload of a JWS whose signature holds. Throws Refused damaged-signature or wrong-signature.
 * @param {string} token
 * @param {CryptoKey} key public P-256
 * @param {string} typ the type it must say it is
 * @returns {Promise<{header: any, payload: any}>}
 */
export async function verify(token, key, typ) {
  const { header, payload, input, signature } = split(token);
  if (header.alg !== "ES256" || header.typ !== typ) {
    throw new Refused("damaged-signature", `This is signed as ${JSON.stringify(header.typ)}, not as ${typ}.`);
  }
  if (signature.byteLength !== 64 || !(await crypto.subtle.verify(ECDSA, key, signature, utf8(input)))) {
    throw new Refused("wrong-signature", "The signature does not match the key that it should be from.");
  }
  return { header, payload };
}

/**
 * The parts of a JWS, nothing verified.
 * @param {string} token
 */
export function split(token) {
  const parts = typeof token === "string" ? token.split(".") : [];
  if (parts.length !== 3) throw new Refused("damaged-signature", "This is not a signed message.");
  try {
    return {
      header: JSON.parse(text(fromBase64url(parts[0]))),
      payload: JSON.parse(text(fromBase64url(parts[1]))),
      input: `${parts[0]}.${parts[1]}`,
      signature: fromBase64url(parts[2]),
    };
  } catch (bad) {
    if (bad instanceof Refused) throw bad;
    throw new Refused("damaged-signature", "This is not a signed message.");
  }
}

/**
 * @param {PublicJwk} jwk
 * @returns {Promise<CryptoKey>}
 */
export function publicKey(jwk) {
  const { kty, crv, x, y } = jwk;
  return crypto.subtle.importKey("jwk", { kty, crv, x, y, ext: true }, CURVE, true, ["verify"]);
}

/**
 * @param {CryptoKey} key public
 * @returns {Promise<PublicJwk>}
 */
export async function publicJwk(key) {
  const { x, y } = await crypto.subtle.exportKey("jwk", key);
  return { kty: "EC", crv: "P-256", x: /** @type {string} */ (x), y: /** @type {string} */ (y) };
}
