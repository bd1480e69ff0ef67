/** The frame of a run: head over rails and work. It holds the places; what stands in them is given by screens/run.js. */
import { h, put } from "./dom.js";
import { icon } from "./icons.js";
import { lanesOf, railHeads, setLanes } from "./rails.js";
import { personName, time } from "./words.js";

/** Height of a past or coming row in px, as tokens.css has it: larger in glove mode. */
const rowHeight = () => Number.parseInt(getComputedStyle(document.documentElement).getPropertyValue("--minor"), 10) || 48;

/** How far out of sight rows are still drawn in full: two rows, px. */
const NEAR = 96;

/** MAKE SAFE, wherever it stands. @param {() => void} open */
export const makeSafeMark = (open) => h("button", { type: "button", class: "makesafe", "data-make-safe": true, "aria-label": "MAKE SAFE: open the list", on: { click: open } }, icon("make-safe"), h("span", {}, "MAKE", h("br"), "SAFE"));

/** @param {any} sheet @param {{makeSafe: () => void, thisRun: () => void}} acts */
export function frame(sheet, acts) {
  const safe = makeSafeMark(acts.makeSafe);
  const title = h("b"), under = h("span"), who = h("b", { "data-recorder": true }), saved = h("span", { "data-saved": true });
  const dl = h("div", { "data-live": true }), mini = h("div", { class: "mini", "aria-hidden": "true" });
  const more = h("button", { type: "button", class: "thisrun", "data-this-run": true, on: { click: acts.thisRun } }, "This run");
  const past = h("ol", { class: "rows", "aria-label": "Done so far", "data-past": true }), ahead = h("ol", { class: "rows", "aria-label": "Coming", "data-coming": true });
  const now = h("section", { class: "step now", "data-open": true });
  const strip = h("main", { class: "strip", "data-strip": true, tabindex: "-1" }, past, now, ahead);
  const node = h("div", { class: "tab", "data-frame": true },
    h("header", { class: "head" }, safe, h("div", { class: "title" }, h("div", {}, title, under), h("div", {}, who, saved))),
    railHeads(sheet), h("section", { class: "live", "aria-label": "Energy sources in words" }, dl, more), mini, strip);
  setLanes(node, lanesOf(sheet).length);
  let isOver = false, standing = "", scrolled = false;

  /** The open step fills what two past and two coming rows leave free. */
  function settle() {
    const phone = matchMedia("(max-width: 640px)").matches;
    const ROW = rowHeight(), most = strip.clientHeight < 700 || ROW > 48 ? 1 : 2;
    const above = isOver || phone ? 0 : Math.min(most, past.children.length), below = isOver || phone ? 0 : Math.min(ROW > 48 ? 1 : 2, ahead.children.length);
    strip.style.setProperty("--seen", `${strip.clientHeight}px`);
    now.style.setProperty("--open-height", `${Math.max(0, strip.clientHeight - (above + below) * ROW)}px`);
    // Where the step needs more than that, rows give way first: the button at its foot stays in sight.
    const room = Math.floor(Math.max(0, strip.clientHeight - now.offsetHeight) / ROW);
    strip.scrollTop = isOver ? 0 : Math.max(0, now.offsetTop - strip.offsetTop - Math.min(above, room) * ROW);
  }
  const watch = new ResizeObserver(() => settle());
  watch.observe(strip);
  strip.addEventListener("scroll", () => {
    if (!scrolled) requestAnimationFrame(() => { scrolled = false; near(); });
    scrolled = true;
  }, { passive: true });

  /** A long run has hundreds of rows: rails far out of sight are not kept drawn, or every key would pay for them. */
  function near() {
    const top = strip.scrollTop + strip.offsetTop - NEAR, bottom = top + strip.clientHeight + 2 * NEAR;
    const rows = [...past.children, ...ahead.children].map((row) => /** @type {HTMLElement} */ (row));
    const away = rows.map((row) => row.offsetTop + row.offsetHeight < top || row.offsetTop > bottom);
    rows.forEach((row, k) => { if (row.classList.contains("away") !== away[k]) row.classList.toggle("away", away[k]); });
  }

  return {
    node, settle,
    /** @param {any} state @param {{called: boolean, readonly: string}} how */
    head: (state, how) => {
      const { started } = state, key = JSON.stringify([started?.cabinet, started?.tube, started?.present.length, state.recorder, how]);
      if (key === standing) return;
      standing = key;
      put(title, sheet.title);
      put(under, started ? [h("span", { class: "roomy" }, `edition ${sheet.edition}, cabinet `), started.cabinet, ", ", h("span", { class: "roomy" }, "tube "), h("span", { class: "id" }, started.tube)] : "");
      put(who, `${personName(state, state.recorder)} records${started?.present.length === 1 ? ", alone" : ""}`);
      safe.toggleAttribute("data-called", how.called);
      if (how.readonly) put(who, how.readonly);
    },
    /** @param {string} words @param {string} [wall] */
    saved: (words, wall) => { const text = wall ? `${words} ${time(wall)}` : words; if (saved.textContent !== text) put(saved, text); },
    /** @param {HTMLElement} words @param {any} short */
    live: (words, short) => { put(dl, words); put(mini, short); },
    /** @param {HTMLElement} lanes @param {HTMLElement} page @param {boolean} over */
    open: (lanes, page, over) => { isOver = over; past.hidden = ahead.hidden = over; now.classList.toggle("over", over); put(now, lanes, page); },
    /** @param {HTMLElement} lanes */
    lanes: (lanes) => now.firstElementChild?.replaceWith(lanes),
    /** @param {HTMLElement[]} rows @param {HTMLElement[]} coming */
    rows: (rows, coming) => {
      const at = strip.scrollTop, before = past.offsetHeight;
      put(past, rows);
      put(ahead, coming);
      if (!isOver) strip.scrollTop = at + past.offsetHeight - before;
      near();
    },
  };
}
