/**
 * Energy rails: one lane a source, always in the sheet's order, drawn by each row for itself so that nothing needs
 * measuring and a lane stretches with its row. Solid is so, hollow is planned; state is shown by weight and by side.
 * Screen readers get the same in words (live.js). The drawing with time to scale is core/drawing, for desk and PDF.
 */
import { h, mark } from "./dom.js";

/** state -> class of the lane */
const LANE = { on: "on", "cut-off": "on", standby: "standby", off: "off", locked: "lock", proved: "lock", earthed: "earth", unknown: "unknown" };
/** state -> mark that stands on the lane, [so, planned] */
const MARKS = { locked: ["lock", "lplan"], proved: ["proved", "pplan"], earthed: ["earthed", "eplan"], unknown: ["unknown", "unknown"] };
const IS_LIVE = ["on", "standby", "cut-off"];

/**
 * One lane of one row.
 * @param {{before: string, after: string, planned?: boolean, coming?: boolean, flow?: "" | "warm" | "decay" | "going", standing?: boolean}} cell
 *   planned: the change has not happened yet; coming: the whole row is still to come; standing: draw the mark mid-row.
 */
function lane(cell) {
  const { before, after, planned = false, coming = false, flow = "", standing = false } = cell;
  const name = (/** @type {string} */ state) => /** @type {any} */ (LANE)[state] ?? "unknown";
  const changes = before !== after;
  const node = h("i", { class: `b-${coming ? "p" : ""}${name(before)} a-${coming || (planned && changes) ? "p" : ""}${name(after)} ${flow}` });
  if (changes && IS_LIVE.includes(before) !== IS_LIVE.includes(after)) node.append(h("b"));
  const found = /** @type {any} */ (MARKS)[after];
  if (changes && found) node.append(mark(found[planned || coming ? 1 : 0]));
  else if (standing && found) node.append(mark(found[coming ? 1 : 0], "mid"));
  return node;
}

/**
 * The rails of one row.
 * @param {any} sheet @param {Record<string, string>} before source -> state @param {Record<string, string>} [after]
 * @param {{planned?: boolean, coming?: boolean, standing?: boolean, at?: string, flow?: Record<string, "" | "warm" | "decay" | "going">}} [how]
 * @returns {HTMLElement}
 */
export function rails(sheet, before, after = before, how = {}) {
  const state = (/** @type {Record<string, string>} */ from, /** @type {string} */ name) => from[name] ?? "off";
  const node = h("div", { class: "rails", "aria-hidden": "true" }, sheet.sources.map((/** @type {any} */ s) => lane({
    before: state(before, s.name), after: state(after, s.name), planned: how.planned, coming: how.coming,
    standing: how.standing, flow: how.flow?.[s.name],
  })));
  if (how.at) for (const cell of node.children) /** @type {HTMLElement} */ (cell).style.setProperty("--at", how.at);
  return node;
}

/** The heads of the lanes, names upright. @param {any} sheet */
export const railHeads = (sheet) => h("div", { class: "railhead", "aria-hidden": "true" }, sheet.sources.map((/** @type {any} */ s) => h("span", {}, s.short || s.title)));

/** How wide the lanes are for this many sources: 25 px up to seven, then as narrow as the names allow. @param {HTMLElement} frame @param {number} count */
export function setLanes(frame, count) {
  frame.style.setProperty("--lanes", String(count));
  frame.style.setProperty("--lane", `${count <= 7 ? 25 : Math.max(18, Math.floor(188 / count))}px`);
}

/** The phone's strip of short lanes: upper two thirds now, lower third after the next change. @param {any} sheet @param {Record<string, string>} now @param {Record<string, string>} next */
export function shortRails(sheet, now, next) {
  return h("div", { class: "mini", "aria-hidden": "true" }, sheet.sources.map((/** @type {any} */ s) => {
    const [b, a] = [now[s.name] ?? "off", next[s.name] ?? now[s.name] ?? "off"];
    return h("div", {}, h("div", { class: "rails" }, lane({ before: b, after: a, planned: true, standing: b === a })),
      h("span", { class: IS_LIVE.includes(b) ? "is-live" : null }, s.short.split(" ")[0].slice(0, sheet.sources.length > 7 ? 4 : 5)));
  }));
}
