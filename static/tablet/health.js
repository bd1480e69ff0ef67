// @ts-check
/**
 * The tablet's health: whether what is written here will stay, measured and not guessed.
 *
 * The browser's own estimate of free space is not used (it is made up on purpose); bytes are written and read back.
 */

import { ask } from "./db.js";
import { told } from "./refusal.js";

const PROBE_BYTES = 8 * 1024 * 1024;
const PIECE = 65_536;

/** Random, because a run of zeros is compressed and slips under a quota. */
function noise() {
  const bytes = new Uint8Array(PROBE_BYTES);
  for (let at = 0; at < PROBE_BYTES; at += PIECE) crypto.getRandomValues(bytes.subarray(at, at + PIECE));
  return bytes.buffer;
}

/**
 * Writes 8 MB, reads them back, takes them away again.
 * @param {import("./db.js").Store} store
 * @returns {Promise<string>} "8 MB written and read back in 0.2 s", or "failed: ..."
 */
export async function probe(store) {
  const began = performance.now();
  try {
    const bytes = noise();
    await store.write(["meta"], async (tx) => {
      await ask(tx.objectStore("meta").put(bytes, "probe"));
    });
    const back = await store.read(["meta"], (tx) => ask(tx.objectStore("meta").get("probe")));
    if (back?.byteLength !== PROBE_BYTES) return "failed: what was written was not read back";
    return `8 MB written and read back in ${((performance.now() - began) / 1000).toFixed(1)} s`;
  } catch (bad) {
    return `failed: ${told(bad).code}`;
  } finally {
    await store
      .write(["meta"], async (tx) => {
        await ask(tx.objectStore("meta").delete("probe"));
      })
      .catch(() => undefined);
  }
}

/** Whether this page runs as an installed app. */
export function installed() {
  return matchMedia("(display-mode: standalone)").matches || /** @type {any} */ (navigator).standalone === true;
}

/** A browser that deletes a site's storage after days without use, unless it is installed, says so by this property. */
export function mustBeInstalled() {
  return "standalone" in navigator && !installed();
}

/** Asks the browser to keep this site's storage. @returns {Promise<boolean>} */
export async function persist() {
  try {
    return (await navigator.storage.persisted()) || (await navigator.storage.persist());
  } catch {
    return false;
  }
}
