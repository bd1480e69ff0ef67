// @ts-check
/** The page of this browser's key: make it, wait for its certificate, say that it is ready. */

import { Refused, told } from "../tablet/refusal.js";
import * as holder from "./holder.js";

const page = /** @type {HTMLElement} */ (document.querySelector("[data-key]"));
const { person = "", ask = "", csrf = "", nonce = "" } = page.dataset;
const says = /** @type {HTMLElement} */ (page.querySelector("[data-says]"));

const SAYS = {
  none: "This browser holds no key of yours.",
  waiting: "The key is made. Its certificate waits for an administrator, who opens the signing authority.",
  refused: "The administrator refused the certificate. Make a new key when that is settled.",
  issued: "This browser holds your key and its certificate. You can countersign here.",
};

/** @param {string} name which part is shown */
function show(name) {
  for (const part of page.querySelectorAll("[data-part]")) {
    /** @type {HTMLElement} */ (part).hidden = /** @type {HTMLElement} */ (part).dataset.part !== name;
  }
}

/** @param {import("../tablet/db.js").Store} store @param {boolean} [asked] */
async function present(store, asked = false) {
  const { record, note } = await holder.current(store, person, ask);
  const status = record?.status ?? "none";
  says.textContent = SAYS[status] + (status === "refused" && note ? ` “${note}”` : "") + (asked && status === "waiting" ? " Nothing new yet." : "");
  show(status === "none" || status === "refused" ? "make" : status);
  if (status === "issued" && record) /** @type {HTMLElement} */ (page.querySelector("[data-kid]")).textContent = record.kid;
}

/** @param {() => Promise<void>} work */
async function doing(work) {
  for (const button of page.querySelectorAll("button")) button.disabled = true;
  try {
    await work();
  } catch (bad) {
    says.textContent = told(bad).says;
  } finally {
    for (const button of page.querySelectorAll("button")) button.disabled = false;
  }
}

async function begin() {
  if (!crypto.subtle) throw new Refused("no-secure-context", "Keys work only over a trusted connection (https). Open this page by the server's https address.");
  const store = await holder.store();
  await present(store);
  page.querySelector('form[data-part="make"]')?.addEventListener("submit", (event) => {
    event.preventDefault();
    const [first, again] = ["passphrase", "again"].map((id) => /** @type {HTMLInputElement} */ (document.getElementById(id)));
    void doing(async () => {
      if (first.value !== again.value) throw new Refused("not-the-same", "The two passphrases are not the same. Type them again.");
      await holder.make(store, person, first.value, { ask, csrf, nonce });
      first.value = again.value = "";
      await present(store);
    });
  });
  page.querySelector('[data-do="look"]')?.addEventListener("click", () => void doing(() => present(store, true)));
}

void doing(begin);
