// @ts-check
/**
 * The offline shell from the page's side: registering the worker, knowing whether every file is aboard, updating.
 *
 * A new version waits until the person takes it and no window has a run open. The page is never reloaded by script
 * except right after the person asked for the update. Not here: the worker itself (sw.js).
 */

import { OPEN_LOCK } from "./journal.js";
import { Refused } from "./refusal.js";

const HOURLY_MS = 3_600_000;
const PATIENCE_MS = 5_000;
const TRIES = 20;

/** @type {ServiceWorkerRegistration | null} */
let registration = null;

/**
 * Registers the worker and looks for a newer one now, hourly, and when the page is shown again.
 * @param {() => void} waiting called when a newer version stands ready
 * @returns {Promise<string>} "" or why there is none
 */
export async function register(waiting) {
  if (!("serviceWorker" in navigator)) return "This browser cannot work offline here: it needs https and a browser with service workers.";
  try {
    registration = await navigator.serviceWorker.register("/sw.js", { scope: "/", updateViaCache: "none" });
  } catch (bad) {
    return `The app files could not be kept for offline work: ${bad instanceof Error ? bad.message : bad}.`;
  }
  const look = () => {
    if (registration?.waiting && navigator.serviceWorker.controller) waiting();
  };
  registration.addEventListener("updatefound", () => {
    registration?.installing?.addEventListener("statechange", look);
  });
  look();
  const update = () => void registration?.update().catch(() => undefined);
  setInterval(update, HOURLY_MS);
  document.addEventListener("visibilitychange", () => {
    if (document.visibilityState === "visible") update();
  });
  return "";
}

/**
 * One question to a worker.
 * @param {ServiceWorker} worker @param {string} ask
 * @returns {Promise<any>} null when it does not answer
 */
function question(worker, ask) {
  return new Promise((resolve) => {
    const { port1, port2 } = new MessageChannel();
    const timer = setTimeout(() => resolve(null), PATIENCE_MS);
    port1.onmessage = ({ data }) => {
      clearTimeout(timer);
      resolve(data);
    };
    worker.postMessage({ ask }, [port2]);
  });
}

/**
 * Whether every file of the app is aboard with the right hash.
 * @returns {Promise<{ready: boolean, missing: string[], build: string}>}
 */
export async function ready() {
  const worker = navigator.serviceWorker?.controller ?? registration?.active;
  const answer = worker ? await question(worker, "ready") : null;
  return answer ?? { ready: false, missing: [], build: "" };
}

/** Whether any window of this tablet has a run open. */
export async function runIsOpen() {
  const { held = [] } = await navigator.locks.query();
  return held.some((lock) => lock.name === OPEN_LOCK);
}

/**
 * Takes the waiting version and reloads this page.
 * Throws Refused run-open while any window has a run open, update-later when the browser does not let go of the old version.
 */
export async function update() {
  if (await runIsOpen()) throw new Refused("run-open", "A run is open on this tablet. Close it in every window, then take the update.");
  const next = registration?.waiting;
  if (!next) return;
  let taken = false;
  navigator.serviceWorker.addEventListener("controllerchange", () => {
    taken = true;
    location.reload();
  });
  next.postMessage({ ask: "take over" });
  // An old worker that has nothing to do may not notice that it is to go; a question wakes it, and then it goes.
  for (let tries = 0; tries < TRIES && !taken; tries += 1) {
    const old = registration?.active;
    if (old && old !== next) await question(old, "ready");
    await new Promise((go) => setTimeout(go, 500));
  }
  if (!taken) throw new Refused("update-later", "The browser has not let go of the old version. Close every window of fieldkit and open it again.");
}
