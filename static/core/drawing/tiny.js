// The limit scale without figures, for table rows. Twin of fieldkit/drawing/tiny.py.

import { half, px, ratio } from "./number.js";
import { hatch, path, rect, svg } from "./paint.js";
import * as says from "./says.js";
import { in_band, judged } from "./scale.js";
import { known, least, most, spread } from "./spread.js";

/** @typedef {import("./spread.js").Model} Model @typedef {import("./spread.js").Spread} Spread */

const TOP = 70;

/** @param {Model} model @returns {string} */
export function tiny(model) {
  const ink = model.ink ?? "screen";
  const width = Math.trunc(model.width || 190) * 10;
  const height = Math.trunc(model.height || 26) * 10;
  const s = spread(model, false);
  const high = height - 140;
  const foot = TOP + high;
  /** @param {bigint} value */
  const x = (value) => Math.max(30, Math.min(width - 30, 20 + Number(ratio((value - s.a) * BigInt(width - 40), s.b - s.a))));
  const left = s.low !== null ? x(s.low) : 0;
  const right = s.high !== null ? x(s.high) : width;
  let out = rect(ink, "out", 0, TOP, width, high) + rect(ink, "key", left, TOP, right - left, high);
  const value = judged(s, model);
  const under = value !== null && s.low !== null && value < s.low;
  const over = value !== null && s.high !== null && value > s.high;
  if (under) out += rect(ink, "danger", 0, TOP, left, high);
  if (over) out += rect(ink, "danger", right, TOP, width - right, high);
  /** @type {[bigint | null, bigint | null, bigint | null][]} */
  const ends = [[s.low, s.accept_low, s.caution_low], [s.high, s.accept_high, s.caution_high]];
  for (const [limit, guard, caution] of ends) {
    const edges = known([guard, caution]);
    if (limit === null || !edges.length) continue;
    const inner = limit === s.low ? most(edges) : least(edges);
    const hot = value !== null && in_band(value, limit, inner, limit === s.low);
    const c0 = Math.min(x(limit), x(inner));
    const c1 = Math.max(x(limit), x(inner));
    if (c1 <= c0) continue;
    if (hot) out += rect(ink, "caution", c0, TOP, c1 - c0, high);
    const role = hot ? "on-caution" : "ink-2";
    out += path(ink, hatch(c0, c1, TOP, foot, 40), "", role, "1.1");
    if (guard !== null) out += guarded(ink, x(limit), x(guard), foot, role);
  }
  const dash = model.verdict === "not judged" ? "4 3" : "";
  out += path(ink, `M${px(left)} ${px(TOP)}H${px(right)}M${px(left)} ${px(foot)}H${px(right)}`, "", "ink", "1.2", dash);
  if (s.plate !== null) out += path(ink, `M${px(x(s.plate))} ${px(TOP - 30)}V${px(foot + 30)}`, "", "ink", "1", "5 2 1 2");
  for (const limit of known([s.low, s.high])) out += rect(ink, "ink", x(limit) - 18, TOP - 40, 36, high + 80);
  for (const old of s.olds) out += path(ink, `M${px(x(old))} ${px(TOP)}l-4.5 -7h9z`, "panel", "ink", "1.3");
  if (s.value !== null) {
    const bar = Number(ratio(s.u * BigInt(width - 40), s.b - s.a));
    out += pointer(ink, s, width, high, x(s.value), bar, under || over);
  }
  return svg(ink, "tiny", px(width), px(height), says.scale(model), out);
}

/** Crosses the hatching from the post to the acceptance limit.
 * @param {string} ink @param {number} post @param {number} accept @param {number} foot @param {string} role */
function guarded(ink, post, accept, foot, role) {
  const g0 = Math.min(post, accept);
  const g1 = Math.max(post, accept);
  if (g1 <= g0) return "";
  const edge = path(ink, `M${px(accept)} ${px(TOP)}V${px(foot)}`, "", role, "1.2");
  return path(ink, hatch(g0, g1, TOP, foot, 40, true), "", role, "1.1") + edge;
}

/**
 * @param {string} ink @param {Spread} s @param {number} width @param {number} high @param {number} x @param {number} bar
 * @param {boolean} fail
 */
function pointer(ink, s, width, high, x, bar, fail) {
  const role = fail ? "on-danger" : "ink";
  const middle = TOP + half(high);
  if (s.far) {
    const way = s.far === "low" ? -1 : 1;
    const tip = way < 0 ? 10 : width - 10;
    return path(ink, `M${px(tip)} ${px(middle)}l${-9 * way} -5.5v11z`, role);
  }
  let out = "";
  if (bar > 15) {
    const ends = `M${px(x - bar)} ${px(middle - 35)}v7M${px(x + bar)} ${px(middle - 35)}v7`;
    out = path(ink, `M${px(x - bar)} ${px(middle)}H${px(x + bar)}${ends}`, "", role, "1.6");
  }
  out += path(ink, `M${px(x)} ${px(TOP)}V${px(TOP + high)}`, "", role, "2.2");
  return out + path(ink, `M${px(x)} ${px(TOP + 20)}l-5.5 -9h11z`, "ink");
}
