// @ts-check
/**
 * Pictures: made smaller, encoded afresh as JPEG (which drops place and camera data), kept as bytes in pieces.
 *
 * Never a Blob in the store: some browsers give it back empty. The hash is of the JPEG as kept and as sent.
 */

import { sha256, view } from "./bytes.js";
import { ask, all, get } from "./db.js";
import { Refused } from "./refusal.js";

/** @typedef {import('./db.js').Store} Store */
/** @typedef {{sha256: string, media: 'image/jpeg', width: number, height: number, size: number}} Picture */

const LONGEST_PX = 1600;
const PIECE = 256 * 1024;
const QUALITY = 0.82;

/**
 * @param {Blob} file
 * @returns {Promise<{bytes: ArrayBuffer, width: number, height: number}>}
 */
async function encode(file) {
  let source;
  try {
    source = await createImageBitmap(file, { imageOrientation: "from-image" });
  } catch (bad) {
    throw new Refused("not-a-picture", "This file cannot be read as a picture. Take it again, or choose a JPEG, PNG or WebP file.", { cause: bad });
  }
  const scale = Math.min(1, LONGEST_PX / Math.max(source.width, source.height));
  const width = Math.max(1, Math.round(source.width * scale));
  const height = Math.max(1, Math.round(source.height * scale));
  const canvas = document.createElement("canvas");
  canvas.width = width;
  canvas.height = height;
  const pen = canvas.getContext("2d");
  if (!pen) throw new Refused("not-a-picture", "This browser cannot draw the picture. Close other pages and try again.");
  pen.fillStyle = "#fff";
  pen.fillRect(0, 0, width, height);
  pen.drawImage(source, 0, 0, width, height);
  source.close();
  const made = /** @type {Blob | null} */ (await new Promise((done) => canvas.toBlob(done, "image/jpeg", QUALITY)));
  if (!made || made.type !== "image/jpeg") throw new Refused("not-a-picture", "This browser cannot write the picture as JPEG.");
  return { bytes: await made.arrayBuffer(), width, height };
}

/**
 * Keeps a picture for a run; the same picture twice is kept once. Resolves when it is on disk.
 * @param {Store} store @param {string} run @param {Blob} file
 * @returns {Promise<Picture>}
 */
export async function keep(store, run, file) {
  const { bytes, width, height } = await encode(file);
  const sha = await sha256(bytes);
  /** @type {Picture} */
  const picture = { sha256: sha, media: "image/jpeg", width, height, size: bytes.byteLength };
  await store.write(["pictures", "chunks"], async (tx) => {
    if (await ask(tx.objectStore("pictures").get(sha))) return;
    for (let n = 0; n * PIECE < bytes.byteLength; n += 1) {
      await ask(tx.objectStore("chunks").put({ sha256: sha, n, bytes: bytes.slice(n * PIECE, (n + 1) * PIECE) }));
    }
    await ask(tx.objectStore("pictures").put({ ...picture, run, sent: "" }));
  });
  return picture;
}

/**
 * A picture's bytes, checked against its hash. Throws Refused picture-lost.
 * @param {Store} store @param {string} sha
 */
export async function bytesOf(store, sha) {
  const row = await get(store, "pictures", sha);
  const pieces = await all(store, "chunks", IDBKeyRange.bound([sha, 0], [sha, Infinity]));
  const out = new Uint8Array(row ? row.size : 0);
  let at = 0;
  for (const { bytes } of pieces) {
    if (at + bytes.byteLength > out.length) break;
    out.set(view(bytes), at);
    at += bytes.byteLength;
  }
  if (!row || at !== out.length || (await sha256(out)) !== sha) {
    throw new Refused("picture-lost", "A picture of this run is lost or damaged on this tablet. Take it again beside the step.");
  }
  return out;
}

/**
 * Pictures that the server has not yet given a receipt for.
 * @param {Store} store
 * @returns {Promise<(Picture & {run: string, sent: string})[]>}
 */
export async function unsent(store) {
  return (await all(store, "pictures")).filter((row) => !row.sent);
}
