// @ts-check
/**
 * The countersigning page: make the file ready, check that what is signed is that file, sign it here, send the signature.
 * The passphrase is asked at each signature and the key is forgotten after it.
 */

import { base64, fromBase64, sha256 } from "../tablet/bytes.js";
import { told } from "../tablet/refusal.js";
import * as calls from "./calls.js";
import { check } from "./checks.js";
import * as holder from "./holder.js";

const page = /** @type {HTMLElement} */ (document.querySelector("[data-countersign]"));
const { person = "", prepare = "", ask = "", csrf = "" } = page.dataset;

/** @param {string} name @returns {HTMLElement} */
function part(name) {
  return /** @type {HTMLElement} */ (page.querySelector(`[data-part="${name}"]`));
}

/** @param {string} name @param {string} selector @returns {HTMLElement} */
function inside(name, selector) {
  return /** @type {HTMLElement} */ (part(name).querySelector(selector));
}

/** @param {string} name @param {string} words */
function say(name, words) {
  inside(name, "[data-says]").textContent = words;
}

/** @param {string} name @param {() => Promise<void>} work */
async function doing(name, work) {
  const buttons = part(name).querySelectorAll("button");
  for (const button of buttons) button.disabled = true;
  try {
    await work();
  } catch (bad) {
    say(name, told(bad).says);
  } finally {
    for (const button of buttons) button.disabled = false;
  }
}

/** @type {(import("./checks.js").Ready & {id: string, file: string, finish: string}) | null} */
let ready = null;

/** @param {import("../tablet/db.js").Store} store @param {string} kid */
async function makeReady(store, kid) {
  const paper = /** @type {HTMLInputElement} */ (part("prepare").querySelector("input[name=paper]:checked")).value;
  part("sign").hidden = true;
  say("prepare", "Making the pages and sealing them. This takes a few seconds.");
  const answer = await calls.post(prepare, csrf, { kid, paper });
  const pdf = await calls.bytes(answer.file);
  const checked = await check(answer, pdf, kid);
  ready = answer;
  // What is opened is the very bytes that were checked, not the address asked once more.
  const link = /** @type {HTMLAnchorElement} */ (inside("sign", "[data-file]"));
  if (link.href.startsWith("blob:")) URL.revokeObjectURL(link.href);
  link.href = URL.createObjectURL(new Blob([pdf], { type: "application/pdf" }));
  inside("sign", "[data-file-hash]").textContent = await sha256(pdf);
  inside("sign", "[data-checked]").textContent = checked.join(" ");
  say("prepare", "The file is ready.");
  part("sign").hidden = false;
}

/** @param {import("../tablet/db.js").Store} store */
async function signIt(store) {
  if (!ready) return;
  const typed = /** @type {HTMLInputElement} */ (document.getElementById("passphrase"));
  const raw = await holder.signRaw(store, person, typed.value, fromBase64(ready.to_sign));
  typed.value = "";
  say("sign", "Signed here. Sending the signature.");
  const done = await calls.post(ready.finish, csrf, { signature: base64(raw) });
  /** @type {HTMLAnchorElement} */ (inside("done", "[data-record]")).href = done.record;
  /** @type {HTMLAnchorElement} */ (inside("done", "[data-download]")).href = done.file;
  part("prepare").hidden = part("sign").hidden = true;
  part("done").hidden = false;
}

async function begin() {
  const store = await holder.store();
  const { record } = await holder.current(store, person, ask);
  if (record?.status !== "issued") {
    const waits = record?.status === "waiting";
    say("key", waits ? "Your key is made; its certificate waits for an administrator, who opens the signing authority. Load this page again after that." : "Your key is made in this browser and never leaves it.");
    inside("key", "[data-key-link]").textContent = waits ? "Look at this browser’s key" : "Make this browser’s key";
    part("key").hidden = false;
    return;
  }
  part("prepare").hidden = false;
  inside("prepare", '[data-do="prepare"]').addEventListener("click", () => void doing("prepare", () => makeReady(store, record.kid)));
  inside("sign", '[data-form="sign"]').addEventListener("submit", (event) => {
    event.preventDefault();
    void doing("sign", () => signIt(store));
  });
}

void begin().catch((bad) => {
  part("key").hidden = false;
  say("key", told(bad).says);
});
