/**
 * The tablet: opens the host, keeps what it says, and shows one screen at a time. Only this file knows every screen; each
 * screen is a function that is given the app and gives back its element. Which run is open stands in the address, so a
 * reload comes back to it.
 */
import * as host from "./host.js";
import { alertUser } from "./announce.js";
import { h, part, put } from "./dom.js";
import { dress } from "./look.js";
import { homeScreen } from "./screens/home.js";
import { enrolScreen } from "./screens/enrol.js";
import { kitScreen } from "./screens/kit.js";
import { startScreen } from "./screens/start.js";
import { cardScreen } from "./screens/card.js";
import { runScreen } from "./screens/run.js";
import { sumsScreen } from "./screens/sums.js";

/** name in the address -> screen */
const SCREENS = { home: homeScreen, enrol: enrolScreen, kit: kitScreen, start: startScreen, card: cardScreen, sums: sumsScreen, run: runScreen };

/**
 * @typedef {object} App
 * @property {any} host @property {any} held what host.open last said @property {boolean} newer a newer version stands ready @property {any} sync how sending stands
 * @property {(name: string, args?: Record<string, string>) => void} go @property {() => Promise<any>} refresh
 * @property {(says: string) => void} trouble
 * @property {() => DocumentFragment} templates @property {(cb: (sync: any) => void) => () => void} onsync
 */

const root = part(document, "app");
/** @type {{stop?: () => void} | null} */
let screen = null;
/** @type {Set<(sync: any) => void>} */
const listeners = new Set();
let shown = 0;

/** @type {App} */
const app = {
  host, held: null, newer: false, sync: { state: "idle", says: "", oldestUnsynced: null },
  go: (name, args = {}) => {
    const query = new URLSearchParams(args).toString();
    const hash = `#${name}${query ? `?${query}` : ""}`;
    if (location.hash === hash) void show();
    else location.hash = hash;
  },
  refresh: async () => { app.held = await host.open(); return app.held; },
  templates: () => {
    const holder = document.createElement("template");
    holder.innerHTML = app.held?.kit?.controls ?? "";
    return holder.content;
  },
  trouble: (says) => trouble(says),
  onsync: (cb) => { listeners.add(cb); return () => listeners.delete(cb); },
};

/** Which screen the address names. */
function wanted() {
  const [name, query] = location.hash.slice(1).split("?");
  return { name: name in SCREENS ? name : "home", args: Object.fromEntries(new URLSearchParams(query ?? "")) };
}

async function show() {
  const { name, args } = wanted(), mine = ++shown;
  screen?.stop?.();
  screen = null;
  try {
    const next = await /** @type {any} */ (SCREENS)[name](app, args);
    if (mine !== shown) { next.stop?.(); return; }
    screen = next;
    put(root, next.node);
    document.title = next.title ? `${next.title}, fieldkit` : "fieldkit";
    /** @type {HTMLElement | null} */ (next.focus ?? root.querySelector("h1"))?.focus({ preventScroll: true });
  } catch (problem) {
    if (mine === shown) fault(problem);
  }
}

/** A fault of the program or of the machine: said plainly, with the way back. @param {any} problem */
function fault(problem) {
  const says = problem?.says ?? problem?.message ?? String(problem);
  put(root, h("div", { class: "page" }, h("header", { class: "page-head" }, h("div", {}, h("p", { class: "name" }, "fieldkit"))),
    h("main", { class: "page-body" }, h("section", { class: "band front" }, h("h1", { class: "lead", tabindex: "-1" }, "This page could not be shown"),
      h("p", { class: "say" }, says), h("p", { class: "say" }, "What was recorded is kept. If a source is live, make safe by the station’s own list."),
      h("div", { class: "buttons" }, h("button", { type: "button", class: "act", on: { click: () => location.reload() } }, "Open it again"),
        h("button", { type: "button", class: "act first", on: { click: () => app.go("home") } }, "Back to the start"))))));
  alertUser(says);
}

/** Trouble with keeping what is recorded stays on screen until it was read; it pushes the page down and covers nothing. @param {string} says */
function trouble(says) {
  const bar = part(document, "trouble");
  put(bar, h("p", {}, says), h("button", { type: "button", class: "close", on: { click: () => put(bar) } }, "I have read it"));
  alertUser(says);
}

async function begin() {
  dress();
  try {
    await app.refresh();
  } catch (problem) {
    fault(problem);
    return;
  }
  host.onsync?.((/** @type {any} */ sync) => { app.sync = sync; for (const cb of listeners) cb(sync); });
  host.ontrouble?.((/** @type {any} */ what) => { if (what.says) trouble(what.says); });
  host.onupdate?.(() => { app.newer = true; if (wanted().name === "home") void show(); });
  addEventListener("hashchange", () => void show());
  await show();
}

void begin();
