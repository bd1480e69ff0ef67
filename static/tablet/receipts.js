// @ts-check
/**
 * Receipts: what the server signed when it had stored something, checked against what lies here.
 *
 * Only after this may anyone say "received by the server". The key is the one pinned with the kit.
 */

import { publicKey, verify } from "./jws.js";
import { Refused } from "./refusal.js";

/**
 * The payload of a receipt for events. Throws Refused bad-receipt or what jws.verify throws.
 * @param {string} token
 * @param {import("./jws.js").PublicJwk} pinned
 * @param {{store: string, run: string, chain: string}} expected
 * @param {(seq: number) => Promise<string | null>} hashOf the SHA-256 of the local event with that seq
 * @returns {Promise<{store: string, run: string, chain: string, seq: number, head: string, time: string}>}
 */
export async function check(token, pinned, expected, hashOf) {
  const { payload } = await verify(token, await publicKey(pinned), "fieldkit-receipt");
  for (const name of /** @type {const} */ (["store", "run", "chain"])) {
    if (payload[name] !== expected[name]) throw new Refused("bad-receipt", `The receipt is for another ${name} than the one that was sent.`);
  }
  if (!Number.isSafeInteger(payload.seq) || (await hashOf(payload.seq)) !== payload.head) {
    throw new Refused("bad-receipt", "The receipt names another event than the one on this tablet.");
  }
  return payload;
}

/**
 * The payload of a receipt for a picture.
 * @param {string} token @param {import("./jws.js").PublicJwk} pinned @param {string} sha
 */
export async function checkPicture(token, pinned, sha) {
  const { payload } = await verify(token, await publicKey(pinned), "fieldkit-receipt");
  if (payload.sha256 !== sha) throw new Refused("bad-receipt", "The receipt is for another picture than the one that was sent.");
  return payload;
}
