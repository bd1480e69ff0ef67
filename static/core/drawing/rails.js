// The energy rails of one row: each source's lane before and after. Twin of fieldkit/drawing/rails.py.

import { half, px } from "./number.js";
import { figure } from "./marks.js";
import { escape, paint } from "./paint.js";
import * as says from "./says.js";

/**
 * @typedef {object} Lane
 * @property {string} title @property {string} before @property {string | null} [after] @property {boolean} [warming]
 * @property {boolean} [decay] @property {string | null} [mark]
 * @typedef {object} Model
 * @property {Lane[]} lanes @property {number | string} [at] @property {boolean} [planned] @property {boolean} [coming]
 * @property {number} [lane] @property {number} [pad] @property {string} [ink] @property {boolean} [named]
 */

const LOCKED = ["locked", "proved", "earthed"];
export const LIVE = ["on", "standby", "cut-off"];
/** @type {Record<string, string>} */
const MARK = { locked: "lock", proved: "proved", earthed: "earth", unknown: "unknown" };

/** @param {Model} model @returns {string} as wide as its lanes and as high as what holds it */
export function rails(model) {
  const ink = model.ink ?? "screen";
  const lane = Math.trunc(model.lane || 25) * 10;
  const pad = Math.trunc(model.pad || 0) * 10;
  const at = Math.trunc(Number(model.at || 50));
  const width = lane * model.lanes.length + 2 * pad;
  const body = model.lanes.map((one, k) => draw(ink, pad + k * lane + half(lane), at, one, model)).join("");
  const label = model.named ? `role="img" aria-label="${escape(says.rails(model))}"` : 'aria-hidden="true"';
  const name = ink !== "print" ? ' class="rails"' : "";
  return `<svg xmlns="http://www.w3.org/2000/svg"${name} width="${px(width)}" height="100%" ${label}>${body}</svg>`;
}

/** @param {string} ink @param {number} x @param {number} at @param {Lane} lane @param {Model} model */
function draw(ink, x, at, lane, model) {
  const before = lane.before;
  const after = lane.after || before;
  const coming = Boolean(model.coming);
  const later = coming || (Boolean(model.planned) && after !== before);
  let out = part(ink, x, 0, at, before, coming, Boolean(lane.warming), false);
  out += part(ink, x, at, 100 - at, after, later, false, Boolean(lane.decay));
  if (after !== before && LIVE.includes(before) !== LIVE.includes(after)) {
    const edge = `<path${paint(ink, "", "ink", "2.5")} d="M-5 0H5.5"/>`;
    out += `<svg x="${px(x)}" y="${at}%" overflow="visible">${edge}</svg>`;
  }
  const shown = lane.mark || (after !== before ? MARK[after] : undefined);
  if (!shown) return out;
  const planned = (later && after !== before) || coming;
  const name = planned && ["lock", "proved", "earth"].includes(shown) ? `${shown}-planned` : shown;
  const where = after !== before ? at : 50;
  const drawn = `<g transform="translate(0 -12) scale(1.18)">${figure(name, ink)}</g>`;
  return `${out}<svg x="${px(x - 120)}" y="${where}%" overflow="visible">${drawn}</svg>`;
}

/**
 * One half of a lane: from y, high per cent.
 * @param {string} ink @param {number} x @param {number} y @param {number} high @param {string} state
 * @param {boolean} planned @param {boolean} warming @param {boolean} decay
 */
function part(ink, x, y, high, state, planned, warming, decay) {
  if (high <= 0) return "";
  if (warming || decay) {
    const taper = warming ? "M0 0H1.6L6.5 100H0Z" : "M0 0H6.5L1.6 100H0Z";
    const left = warming ? x - 10 : x - 50;
    return `<svg x="${px(left)}" y="${y}%" width="6.5" height="${high}%" viewBox="0 0 6.5 100" preserveAspectRatio="none">`
      + `<path${paint(ink, "ink")} d="${taper}"/></svg>`;
  }
  /** @param {number} at @param {string} width @param {string} role @param {string} [dash] */
  const line = (at, width, role, dash = "") =>
    `<line${paint(ink, "", role, width, dash)} x1="${px(at)}" y1="${y}%" x2="${px(at)}" y2="${y + high}%"/>`;
  if (LIVE.includes(state)) {
    if (planned) return line(x - 1, "1.75", "ink-2") + line(x + 46, "1.75", "ink-2");
    if (state === "standby") return line(x + 22, "3", "ink");
    return (state === "cut-off" ? line(x - 20, "4", "ink", "2 10") : "") + line(x + 22, "6.5", "ink");
  }
  if (LOCKED.includes(state)) return planned ? line(x - 35, "2", "ink-2", "5 6") : line(x - 35, "3", "ink", "5 6");
  if (state === "unknown") return line(x - 40, "2", "ink-2", "2 5") + line(x + 22, "2", "ink-2", "2 5");
  return planned ? line(x - 40, "2", "ink-2", "2 4") : line(x - 40, "2", "ink-2");
}
