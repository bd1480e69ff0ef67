// @ts-check
/**
 * Whether what is signed belongs to the file that is shown: the checks that a supervisor's browser makes by itself.
 *
 * What is signed is the DER set of signed attributes (RFC 5652 5.3, 5.4): it must hold, as its message digest, the
 * SHA-256 of the file without the gap that the signature will fill, and the hash of this supervisor's certificate
 * (RFC 5035). Not here: fetching, showing, signing.
 */

import { fromBase64, hex, sha256, view } from "../tablet/bytes.js";
import { Refused } from "../tablet/refusal.js";

/** contentType 1.2.840.113549.1.9.3, messageDigest 1.2.840.113549.1.9.4, signingCertificateV2 1.2.840.113549.1.9.16.2.47 */
const MESSAGE_DIGEST = "06092a864886f70d010904";
const CERTIFICATE = "060b2a864886f70d010910022f";

/**
 * @typedef {object} Ready what the server says it prepared
 * @property {string} to_sign base64
 * @property {number} start @property {number} end the gap
 * @property {string} sealed @property {number} length SHA-256 and length of the sealed file
 * @property {string} pdf_sha256 @property {string} kid
 */

/**
 * Throws Refused when something does not belong together; otherwise gives what was checked, as sentences.
 * @param {Ready} ready @param {Uint8Array<ArrayBuffer>} pdf as fetched @param {string} kid SHA-256 of this browser's certificate
 * @returns {Promise<string[]>}
 */
export async function check(ready, pdf, kid) {
  if ((await sha256(pdf)) !== ready.pdf_sha256) {
    throw new Refused("other-file", "The file that arrived is not the one that was prepared. Make it ready again.");
  }
  if (ready.length <= 0 || ready.length >= pdf.length || (await sha256(pdf.slice(0, ready.length))) !== ready.sealed) {
    throw new Refused("other-file", "The prepared file does not begin with the sealed record. Do not sign it; tell an administrator.");
  }
  checkGap(pdf, ready.start, ready.end, ready.length);
  const signed = fromBase64(ready.to_sign);
  const covered = new Uint8Array(pdf.length - (ready.end - ready.start));
  covered.set(pdf.subarray(0, ready.start));
  covered.set(pdf.subarray(ready.end), ready.start);
  const attributes = read(signed);
  if (attributes.digest !== (await sha256(covered))) {
    throw new Refused("other-digest", "What is to be signed is not this file. Do not sign it; tell an administrator.");
  }
  if (ready.kid !== kid || !attributes.certificate.includes(kid)) {
    throw new Refused("other-key", "What is to be signed names another person's key. Do not sign it; tell an administrator.");
  }
  return [
    `The file begins with the record as the station sealed it (${ready.length} bytes).`,
    "What you sign holds the SHA-256 of the whole file but for the place of your signature, and names your key.",
  ];
}

/**
 * The gap lies behind the sealed part and holds nothing but hexadecimal digits between angle brackets.
 * @param {Uint8Array} pdf @param {number} start @param {number} end @param {number} length
 */
function checkGap(pdf, start, end, length) {
  const inside = start > length && end > start && end <= pdf.length;
  const gap = inside ? pdf.subarray(start, end) : new Uint8Array();
  const hexadecimal = gap.length > 2 && gap[0] === 0x3c && gap[gap.length - 1] === 0x3e && gap.subarray(1, -1).every((b) => b === 0x30);
  if (!hexadecimal) {
    throw new Refused("odd-gap", "The place for the signature holds something else. Do not sign it; tell an administrator.");
  }
}

/**
 * The message digest and the certificate attribute, read strictly: one SET of SEQUENCEs, each attribute once.
 * @param {Uint8Array<ArrayBuffer>} der
 * @returns {{digest: string, certificate: string}} hex
 */
export function read(der) {
  const found = { digest: "", certificate: "" };
  const set = element(der, 0, 0x31);
  if (set.end !== der.length) throw odd();
  for (let at = set.start; at < set.end; ) {
    const one = element(der, at, 0x30);
    const kind = element(der, one.start, 0x06);
    const oid = hex(view(der.slice(one.start, kind.end)));
    const values = element(der, kind.end, 0x31);
    if (values.end !== one.end) throw odd();
    if (oid === MESSAGE_DIGEST) {
      const digest = element(der, values.start, 0x04);
      if (found.digest || digest.end !== values.end || digest.end - digest.start !== 32) throw odd();
      found.digest = hex(der.slice(digest.start, digest.end));
    } else if (oid === CERTIFICATE) {
      if (found.certificate) throw odd();
      found.certificate = hex(der.slice(values.start, values.end));
    }
    at = one.end;
  }
  if (!found.digest || !found.certificate) throw odd();
  return found;
}

/**
 * One DER element of the expected tag: where its contents start and end.
 * @param {Uint8Array} der @param {number} at @param {number} tag
 */
function element(der, at, tag) {
  if (der[at] !== tag) throw odd();
  let start = at + 2;
  let size = der[at + 1];
  if (size > 0x80) {
    const count = size - 0x80;
    if (count > 3) throw odd();
    size = 0;
    for (let k = 0; k < count; k += 1) size = size * 256 + der[start + k];
    start += count;
  } else if (size === 0x80) throw odd();
  const end = start + size;
  if (!(end <= der.length)) throw odd();
  return { start, end };
}

function odd() {
  return new Refused("odd-attributes", "What is to be signed has not the form of a signature over a file. Do not sign it.");
}
