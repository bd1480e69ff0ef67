// @ts-check
/**
 * The kit: what the tablet takes to site, fetched while online, all of it or none of it.
 *
 * The manifest must be signed by the receipt key, which is pinned at the first kit and never changes by itself; every
 * blob must hash to its name. A sheet that a run began with stays, whatever later kits hold. Not here: what a register means.
 */

import * as api from "./api.js";
import { sha256, text } from "./bytes.js";
import { ask, get } from "./db.js";
import { pinAuthority } from "./enrol.js";
import { publicKey, split, verify } from "./jws.js";
import { Refused } from "./refusal.js";
import * as sentinel from "./sentinel.js";

/** @typedef {import('./db.js').Store} Store */
/** @typedef {{name: string, sha256: string, media: string, size: number}} BlobRow */
/** @typedef {{kit: string, made: string, store: string, receipt_jwk: any, authority: string, blobs: BlobRow[], min_app: string, jws: string}} Kit */

/**
 * The manifest's payload, once its signature holds under the pinned key.
 * @param {Store} store @param {string} token
 */
async function believed(store, token) {
  /** @type {any} */
  const pinned = await get(store, "meta", "receipt_jwk");
  const jwk = pinned ?? split(token).payload.receipt_jwk;
  try {
    const { payload } = await verify(token, await publicKey(jwk), "fieldkit-kit");
    if (payload.receipt_jwk.x !== jwk.x || payload.receipt_jwk.y !== jwk.y) throw new Refused("wrong-signature", "");
    await pinAuthority(store, payload.authority);
    return payload;
  } catch (bad) {
    if (bad instanceof Refused && bad.code === "wrong-signature") {
      throw new Refused("other-server", "This kit is signed by another server than the one this tablet knows. It was not taken. Ask at the desk.");
    }
    throw bad;
  }
}

/**
 * Fetches what is missing and puts the new kit in place in one transaction.
 * Throws Refused other-server, damaged-kit, or what api.js throws; the old kit then stays.
 * @param {Store} store @param {(done: number, of: number, name: string) => void} progress
 * @returns {Promise<Kit>}
 */
export async function fetchKit(store, progress) {
  const reply = await (await api.signed(store, "GET", "/api/kit")).text();
  const token = reply.trim().startsWith("{") ? JSON.parse(reply).manifest : reply.trim();
  const payload = await believed(store, token);
  /** @type {{sha256: string, bytes: ArrayBuffer}[]} */
  const fresh = [];
  for (const [n, blob] of /** @type {BlobRow[]} */ (payload.blobs).entries()) {
    progress(n, payload.blobs.length, blob.name);
    if (await get(store, "blobs", blob.sha256)) continue;
    const bytes = await (await api.signed(store, "GET", `/api/blob/${blob.sha256}`)).arrayBuffer();
    if ((await sha256(bytes)) !== blob.sha256) throw new Refused("damaged-kit", `${blob.name} did not arrive as it was sent. The old kit stays; fetch again.`);
    fresh.push({ sha256: blob.sha256, bytes });
  }
  const kit = { ...payload, jws: token };
  await store.write(["meta", "blobs"], async (tx) => {
    for (const blob of fresh) await ask(tx.objectStore("blobs").put(blob));
    await ask(tx.objectStore("meta").put(kit, "kit"));
    await ask(tx.objectStore("meta").put(payload.receipt_jwk, "receipt_jwk"));
  });
  progress(payload.blobs.length, payload.blobs.length, "");
  for (const blob of fresh) await sentinel.keepBlob(blob.sha256, blob.bytes);
  await sentinel.keepKit(kit);
  return kit;
}

/**
 * The text of a blob, checked against its name each time it is used.
 * @param {Store} store @param {string} sha
 */
export async function blob(store, sha) {
  const found = await get(store, "blobs", sha);
  if (!found) throw new Refused("not-aboard", "This part of the kit is not on the tablet. Fetch the kit again.");
  if ((await sha256(found.bytes)) !== sha) throw new Refused("damaged-kit", "A part of the kit is damaged on this tablet. Fetch the kit again.");
  return text(found.bytes);
}

/**
 * A sheet by its hash. Throws Refused unknown-version for a sheet that this page does not understand.
 * @param {Store} store @param {string} sha
 */
export async function sheet(store, sha) {
  const found = JSON.parse(await blob(store, sha));
  if (found.fieldkit !== "sheet/1") {
    throw new Refused("unknown-version", `This sheet is version ${JSON.stringify(found.fieldkit)}; this page knows sheet/1. Connect once and reload.`);
  }
  return found;
}

/**
 * What the person sees of the kit; null when there is none.
 * @param {Store} store
 */
export async function view(store) {
  /** @type {Kit | undefined} */
  const kit = await get(store, "meta", "kit");
  if (!kit) return null;
  const procedures = [];
  for (const row of kit.blobs.filter((b) => b.name.startsWith("sheet/"))) {
    try {
      const found = await sheet(store, row.sha256);
      procedures.push({ procedure: found.procedure, edition: found.edition, title: found.title, sha256: row.sha256, sheet: found, says: "" });
    } catch (bad) {
      const says = bad instanceof Refused ? bad.says : "This sheet cannot be read.";
      procedures.push({ procedure: row.name.slice(6), edition: 0, title: row.name.slice(6), sha256: row.sha256, sheet: null, says });
    }
  }
  const named = async (/** @type {string} */ name) => {
    const row = kit.blobs.find((b) => b.name === name);
    return row ? blob(store, row.sha256) : "";
  };
  return {
    procedures,
    registers: JSON.parse((await named("registers")) || "{}"),
    controls: await named("controls"),
    made: kit.made,
    kit: kit.kit,
    min_app: kit.min_app,
    store: kit.store,
  };
}

/** The sums last read, under their hash: they are large, and asked for again and again. @type {{sha256: string, book: any} | null} */
let read = null;

/**
 * The sums of the kit (fieldkit/formula/sums.py says their form); null where there is no kit, or one from before them.
 * @param {Store} store
 */
export async function sums(store) {
  /** @type {Kit | undefined} */
  const kit = await get(store, "meta", "kit");
  const row = kit?.blobs.find((b) => b.name === "sums");
  if (!row) return null;
  if (read?.sha256 !== row.sha256) {
    const book = JSON.parse(await blob(store, row.sha256));
    if (!["subjects", "formulas", "pairs", "units"].every((key) => key in book)) {
      throw new Refused("unknown-version", "This page does not know these sums. Connect once and reload.");
    }
    read = { sha256: row.sha256, book };
  }
  return read.book;
}
