// @ts-check
/**
 * Bytes and their spellings: UTF-8, hex, base64, base64url, SHA-256. Nothing here knows what the bytes mean.
 */

import { Refused } from "./refusal.js";

const encoder = new TextEncoder();
const decoder = new TextDecoder("utf-8", { fatal: true, ignoreBOM: true });

/** @param {string} text @returns {Uint8Array<ArrayBuffer>} */
export function utf8(text) {
  return /** @type {Uint8Array<ArrayBuffer>} */ (encoder.encode(text));
}

/**
 * The text of UTF-8 bytes; a broken sequence throws instead of becoming a replacement character.
 * @param {BufferSource} bytes
 */
export function text(bytes) {
  return decoder.decode(bytes);
}

/** @param {BufferSource} bytes @returns {Uint8Array<ArrayBuffer>} */
export function view(bytes) {
  if (bytes instanceof ArrayBuffer) return new Uint8Array(bytes);
  return new Uint8Array(/** @type {ArrayBuffer} */ (bytes.buffer), bytes.byteOffset, bytes.byteLength);
}

/** @param {BufferSource} bytes lower-case hex */
export function hex(bytes) {
  return Array.from(view(bytes), (b) => b.toString(16).padStart(2, "0")).join("");
}

/** @param {BufferSource} bytes standard base64 with padding, as x5c and PEM want it */
export function base64(bytes) {
  let raw = "";
  for (const b of view(bytes)) raw += String.fromCharCode(b);
  return btoa(raw);
}

/** @param {string} coded @returns {Uint8Array<ArrayBuffer>} */
export function fromBase64(coded) {
  const raw = atob(coded);
  const out = new Uint8Array(raw.length);
  for (let i = 0; i < raw.length; i += 1) out[i] = raw.charCodeAt(i);
  return out;
}

/** @param {BufferSource} bytes base64url without padding (RFC 7515) */
export function base64url(bytes) {
  return base64(bytes).replaceAll("+", "-").replaceAll("/", "_").replaceAll("=", "");
}

/** @param {string} coded strict: padding or a foreign character throws */
export function fromBase64url(coded) {
  if (!/^[A-Za-z0-9_-]*$/.test(coded)) throw new Refused("damaged-signature", "This is not base64url.");
  return fromBase64(coded.replaceAll("-", "+").replaceAll("_", "/"));
}

/** @param {BufferSource} bytes @returns {Promise<string>} SHA-256, lower-case hex */
export async function sha256(bytes) {
  return hex(await crypto.subtle.digest("SHA-256", bytes));
}

/**
 * A random id of `length` letters and digits that cannot be misread for each other (no I, L, O, U).
 * @param {number} length
 */
export function randomId(length) {
  const alphabet = "0123456789ABCDEFGHJKMNPQRSTVWXYZ";
  return Array.from(crypto.getRandomValues(new Uint8Array(length)), (b) => alphabet[b & 31]).join("");
}

/**
 * `value` with every text in Unicode NFC. A lone surrogate is refused: it has no UTF-8 form, so it could not be hashed.
 * @param {unknown} value
 * @returns {any}
 */
export function tidy(value) {
  if (typeof value === "string") {
    if (/[\uD800-\uDBFF](?![\uDC00-\uDFFF])|(?<![\uD800-\uDBFF])[\uDC00-\uDFFF]/.test(value)) {
      throw new Refused("odd-text", "The text holds half a character, which cannot be stored. Type it again.");
    }
    return value.normalize("NFC");
  }
  if (Array.isArray(value)) return value.map(tidy);
  if (value !== null && typeof value === "object") {
    return Object.fromEntries(Object.entries(value).map(([k, v]) => [k, tidy(v)]));
  }
  if (typeof value === "number" && !Number.isSafeInteger(value)) {
    throw new Refused("odd-number", "A number that is not whole may not stand in an event; it travels as text.");
  }
  return value;
}
