/**
 * The run strip: past rows above, coming rows below the open step. A correction stands in the row it corrects, the old
 * value struck through. Touching a past row reads it, never edits.
 */
import { h } from "./dom.js";
import { verdictMark } from "./icons.js";
import { rails } from "./rails.js";
import { CONTROL_WORDS, changeOf, minus, minute, pretty, sourceTitle } from "./words.js";

/** Kinds that stand in the log but are no row of work. */
const QUIET = ["signed", "corrected"];

/** event kind -> what a row without a step says */
const KIND_WORDS = {
  "run-started": "Run started", "states-declared": "Energy states as found", "states-confirmed": "Energy states confirmed after a pause", paused: "Paused",
  resumed: "Taken up again after a gap", "clock-changed": "The tablet’s clock was changed", "trip-recorded": "Trip or something odd", "safe-begun": "Make safe begun",
  "safe-step-done": "Make safe", "safe-ended": "Make safe ended", "person-changed": "Another person records", "storage-found": "Storage restored from its copy",
  ended: "Run ended", voided: "Run voided", reopened: "Taken up again after it was returned", remarked: "Remark", pictured: "Picture", "went-on": "Went on", corrected: "Correction",
};

/** What a past row is called. @param {any} row */
export function rowTitle(row) {
  const title = row.title || /** @type {any} */ (KIND_WORDS)[row.kind] || row.kind;
  if (row.kind === "remarked" && !row.step) return `Remark: ${row.note || row.text || ""}`;
  return row.kind === "safe-step-done" ? `Make safe: ${title}` : title;
}

/** The value end of a past row: old values struck through, the value, its mark. @param {any} row @param {any} sheet @param {Record<string, string>} sets */
export function rowValue(row, sheet, sets = {}) {
  const old = (row.old ?? []).map((/** @type {any} */ o) => [h("s", { class: "num" }, minus(o.text)), " "]);
  const text = row.text || row.value;
  if (text && row.unit !== undefined && row.unit !== null && (row.verdict || row.kind === "read" || row.kind === "worked-out")) {
    return [old, h("span", {}, h("span", { class: "num" }, minus(text)), ` ${pretty(row.unit)}`), row.verdict ? [verdictMark(row.verdict), h("span", { class: "seen-by-reader" }, row.verdict)] : null];
  }
  const change = Object.entries(sets).map(([s, v]) => `${sourceTitle(sheet, s)} ${/** @type {any} */ ({ on: "on", off: "off" })[v] ?? v}`);
  if (row.kind === "chosen") return [old, row.note || row.text];
  if (row.kind === "locked" || row.kind === "unlocked") return [old, change.length ? `${change[0]}, ` : "", `lock ${row.text} ${row.kind === "locked" ? "on" : "off"}`];
  if (change.length) return [old, change.slice(0, 2).join(", ")];
  if (row.verdict) return [old, row.verdict, verdictMark(row.verdict)];
  return [old, row.kind === "waited" ? "waited" : row.manner === "again" ? "taken again" : row.manner === "deviation" ? "deviation" : ""];
}

/** @param {any} row @returns {boolean} */
export const isShown = (row) => !QUIET.includes(row.kind);

/**
 * @param {any} sheet @param {any} row @param {{before: Record<string, string>, after: Record<string, string>} | undefined} states @param {(row: any) => void} read
 * @returns {HTMLElement}
 */
export function pastRow(sheet, row, states, read) {
  const sets = states ? Object.fromEntries(Object.entries(states.after).filter(([k, v]) => states.before[k] !== v)) : {};
  return h("li", { class: "step past", "data-seq": row.seq },
    states ? rails(sheet, states.before, states.after) : h("div", { class: "lanes" }),
    h("button", { type: "button", class: "row", on: { click: () => read(row) } },
      h("span", { class: "t" }, minute(row.wall)), h("span", { class: "n" }, row.number || ""), h("span", { class: "w" }, rowTitle(row)),
      h("span", { class: "v" }, rowValue(row, sheet, sets))));
}

/** What a coming row says at its end. @param {any} sheet @param {any} step @param {Record<string, string>} sets @param {Record<string, string>} before */
function comingWords(sheet, step, sets, before) {
  const change = Object.entries(sets).map(([s, v]) => changeOf(sheet, s, before[s], v));
  if (change.length) return change.slice(0, 2).join(", ");
  return /** @type {any} */ (CONTROL_WORDS)[step.control.control];
}

/** @param {any} sheet @param {{step: any, before: Record<string, string>, after: Record<string, string>, sets: Record<string, string>}} row */
export function comingRow(sheet, { step, before, after, sets }) {
  const signal = step.control.control === "caution" ? h("span", { class: "signal" }, `${step.control.signal} `) : null;
  return h("li", { class: "step next" }, rails(sheet, before, after, { planned: true }),
    h("div", { class: "row" }, h("span", { class: "t" }), h("span", { class: "n" }, step.number),
      h("span", { class: "w" }, signal, title(step.title)), h("span", { class: "v" }, comingWords(sheet, step, sets, before))));
}

/** A title without its signal word, which stands before it, and with its rung where that is not known yet. @param {string} text */
const title = (text) => text.replace(/^(DANGER|WARNING|CAUTION|NOTICE)[:,]?\s*/, "").replaceAll("{level}", "the next level");
