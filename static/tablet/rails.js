/**
 * Energy rails on the tablet: thin callers of core/drawing, one drawing a row, always in the sheet's order, so that nothing
 * needs measuring and a lane stretches with its row. Screen readers get the same in words (live.js).
 */
import * as drawing from "../core/drawing.js";
import { drawn, h } from "./dom.js";
import { sentence } from "./words.js";

/** States whose mark is shown in the middle of the open step. */
const MARK = { locked: "lock", proved: "proved", earthed: "earth", unknown: "unknown" };
const PAD = 13;

/** The lanes of a sheet: what can be switched and locked. What follows from those (stored charge, X-rays, heat) has no state of its own. @param {any} sheet */
export const lanesOf = (sheet) => sheet.sources.filter((/** @type {any} */ s) => s.isolable !== false);

/** Width of a lane for this many sources: 25 px up to seven, then as narrow as the names allow. @param {number} count */
export const laneWidth = (count) => (count <= 7 ? 25 : Math.max(19, Math.floor(188 / count)));

/**
 * The rails of one row.
 * @param {any} sheet @param {Record<string, string>} before source -> state @param {Record<string, string>} [after]
 * @param {{planned?: boolean, coming?: boolean, standing?: boolean, at?: number, warming?: string[], decay?: string[]}} [how]
 *   planned: the change is still to come; standing: marks also where nothing changes
 * @returns {HTMLElement}
 */
export function rails(sheet, before, after = before, how = {}) {
  const lanes = lanesOf(sheet).map((/** @type {any} */ s) => {
    const [b, a] = [before[s.name] ?? "off", after[s.name] ?? before[s.name] ?? "off"];
    return { title: s.title, before: b, after: a, mark: how.standing && b === a ? /** @type {any} */ (MARK)[b] : null,
      warming: how.warming?.includes(s.name), decay: how.decay?.includes(s.name) };
  });
  return h("div", { class: "lanes", "aria-hidden": "true" },
    drawn(drawing.rails({ lanes, lane: laneWidth(lanes.length), pad: PAD, planned: how.planned, coming: how.coming, at: how.at ?? 50 })));
}

/** The heads of the lanes, names upright. @param {any} sheet */
export const railHeads = (sheet) => h("div", { class: "railhead", "aria-hidden": "true" }, lanesOf(sheet).map((/** @type {any} */ s) => h("span", {}, sentence(s.short || s.title))));

/** Tells the frame how many lanes there are and how wide. @param {HTMLElement} frame @param {number} count */
export function setLanes(frame, count) {
  frame.style.setProperty("--lanes", String(count));
  frame.style.setProperty("--lane", `${laneWidth(count)}px`);
}

/** The phone's strip of short lanes: upper two thirds now, lower third after the next change. @param {any} sheet @param {Record<string, string>} now @param {Record<string, string>} next */
export function shortRails(sheet, now, next) {
  const lanes = lanesOf(sheet);
  return lanes.map((/** @type {any} */ s) => {
    const [b, a] = [now[s.name] ?? "off", next[s.name] ?? now[s.name] ?? "off"];
    const lane = { title: s.title, before: b, after: a, mark: b === a ? /** @type {any} */ (MARK)[b] : null };
    return h("div", {}, h("div", { class: "lanes" }, drawn(drawing.rails({ lanes: [lane], lane: 25, planned: true, at: 64 }))),
      h("span", { class: ["on", "standby", "cut-off"].includes(b) ? "is-live" : null }, sentence(s.short).split(" ")[0].slice(0, lanes.length > 7 ? 4 : 5)));
  });
}
