// The sentence of each drawing: what a screen reader gets. Twin of fieldkit/drawing/says.py.

import { parts, ratio, scaled, shown, text } from "./number.js";
import { spread } from "./spread.js";

/** @typedef {import("./spread.js").Model} Model @typedef {import("./spread.js").Spread} Spread */

/** @type {Record<string, string>} */
export const STATES = {
  off: "off",
  on: "on",
  standby: "at standby",
  "cut-off": "at cut-off",
  locked: "locked, not proved",
  proved: "locked and proved dead",
  earthed: "locked, proved dead and earthed",
  unknown: "unknown",
};
const TIMES = ["", "", "twice", "three times", "four times", "five times", "six times", "seven times", "eight times", "nine times"];

/** @param {Spread} s @returns {{limit: bigint, size: string, word: string, distance: bigint} | null} */
export function nearest(s) {
  const { value, low, high } = s;
  if (value === null) return null;
  /** @param {bigint} limit @param {bigint} distance @param {string} word */
  const near = (limit, distance, word) => ({ limit, size: shown(distance, s.places, s.keep), word, distance });
  if (low !== null && value < low) return near(low, low - value, "under by");
  if (high !== null && value > high) return near(high, value - high, "over by");
  if (low === null && high === null) return null;
  if (low === null) return near(/** @type {bigint} */ (high), /** @type {bigint} */ (high) - value, "margin");
  if (high === null || value - low <= high - value) return near(low, value - low, "margin");
  return near(high, high - value, "margin");
}

/** @param {Model} model @returns {string} "6.10 to 6.50 V", "at least 40 L/min", "" without any */
export function limits(model) {
  const [low, high, unit] = [text(model.low), text(model.high), model.unit ?? ""];
  const said = low && high ? `${low} to ${high}` : low ? `at least ${low}` : high ? `at most ${high}` : "";
  return said ? `${said} ${unit}`.trim() : "";
}

/** @param {Model} model */
export function scale(model) {
  if (model.says) return String(model.says);
  const unit = model.unit ?? "";
  const olds = (model.olds || []).map((o) => `${` ${first(o.name)} ${text(o.value)} ${unit}`.trimEnd()}.`).join("");
  return judged(model, unit) + olds;
}

/** @param {string} words */
function first(words) {
  return words.slice(0, 1).toUpperCase() + words.slice(1);
}

/** @param {Model} model @param {string} unit */
function judged(model, unit) {
  const said = limits(model);
  const s = spread(model, true);
  if (s.value === null) return said ? `No reading yet; limits ${said}.` : "No reading yet; no limits.";
  const value = `${text(model.value)} ${unit}`.trim();
  const meter = s.u ? `${text(model.u)} ${unit}`.trim() : "";
  if (model.verdict === "not judged") return `${value}: not judged, ${model.why || "no limits"}.`;
  const near = nearest(s);
  if (near === null) return `${value}, no limits${meter ? `, meter ±${meter}.` : "."}`;
  const size = `${near.size} ${unit}`.trim();
  if (near.word === "margin") {
    const both = s.low !== null && s.high !== null ? "" : "the limit of ";
    return `${value}: inside ${both}${said}, ${inside(size, meter, near.distance < s.u)}`;
  }
  const [word, limit] = near.word === "over by" ? ["above", model.high] : ["below", model.low];
  const out = `${`${value}: ${word} ${text(limit)} ${unit}`.trim()} by ${size}`;
  if (!meter) return `${out}.`;
  if (near.distance < s.u) return `${out}, which is smaller than the meter’s ±${meter}.`;
  const times = Number(ratio(near.distance, s.u));
  return times >= 2 && times < TIMES.length ? `${out}, ${TIMES[times]} the meter’s ±${meter}.` : `${out}, meter ±${meter}.`;
}

/** @param {string} size @param {string} meter @param {boolean} small */
function inside(size, meter, small) {
  if (!meter) return `margin ${size}.`;
  return small ? `but the margin of ${size} is smaller than the meter’s ±${meter}.` : `margin ${size}, meter ±${meter}.`;
}

/** @param {number} n */
const two = (n) => String(n).padStart(2, "0");

/** @param {number} seconds @returns {string} 6:18, or 1 h 05 min from an hour on */
export function clock(seconds) {
  if (seconds >= 3600) return `${Math.floor(seconds / 3600)} h ${two(Math.floor((seconds % 3600) / 60))} min`;
  return `${Math.floor(seconds / 60)}:${two(seconds % 60)}`;
}

/** @param {string | null | undefined} seconds @param {boolean} [up] @returns {number} whole seconds, nothing below 0 */
export function whole(seconds, up = false) {
  const p = parts(seconds);
  if (p === null) return 0;
  const n = /** @type {bigint} */ (scaled(seconds, p[1]));
  const one = 10n ** BigInt(p[1]);
  if (n <= 0n) return 0;
  return Number(up ? (n + one - 1n) / one : n / one);
}

/** @param {{elapsed: string, least: string}} model */
export function wait(model) {
  const [elapsed, least] = [whole(model.elapsed), whole(model.least, true)];
  const passed = `${clock(elapsed)} of at least ${clock(least)} has passed`;
  return elapsed < least ? `${passed}, ${clock(least - elapsed)} left.` : `${passed}.`;
}

/** @param {import("./rails.js").Model} model */
export function rails(model) {
  const will = model.planned || model.coming ? "will be" : "then";
  return `${model.lanes.map((lane) => {
    const after = lane.after || lane.before;
    const extra = lane.warming ? ", warming" : lane.decay ? ", stored charge going" : "";
    const change = after !== lane.before ? `, ${will} ${STATES[after]}` : "";
    return `${lane.title} ${STATES[lane.before]}${extra}${change}`;
  }).join("; ")}.`;
}

/** @param {number} seconds of the day */
export function hour(seconds) {
  return `${two(Math.floor(seconds / 3600) % 24)}:${two(Math.floor(seconds / 60) % 60)}`;
}

/** @param {import("./timeline.js").Model} model */
export function timeline(model) {
  const said = [];
  for (const { title, spans } of model.lanes) {
    if (!spans.length) continue;
    const run = [`${title} ${STATES[spans[0].state]}`];
    spans.slice(1).forEach((x, k) => {
      if (x.state !== spans[k].state) run.push(`${STATES[x.state]} from ${hour(x.at)}`);
    });
    said.push(run.join(", then "));
  }
  return `Energy from ${hour(model.from)} to ${hour(model.to)}. ${said.join(". ")}.`;
}
