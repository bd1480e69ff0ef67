// The scale of a wait: elapsed time against a limit of at least so much. Twin of fieldkit/drawing/wait.py.

import { half, px, ratio, wide } from "./number.js";
import { path, rect, svg, words } from "./paint.js";
import * as says from "./says.js";

/** @typedef {{elapsed: string, least: string, width?: number | null, ink?: string}} Model */

const [PAD, TOP, HIGH] = [60, 500, 320];
const FOOT = TOP + HIGH;
const STEPS = [
  [1, 5], [2, 10], [10, 30], [10, 60], [30, 120], [60, 300],
  [120, 600], [300, 1800], [600, 3600], [1800, 7200], [3600, 21600], [21600, 86400],
];

/** @param {Model} model @returns {string} */
export function wait(model) {
  const ink = model.ink ?? "screen";
  const width = Math.trunc(model.width || 572) * 10;
  const elapsed = says.whole(model.elapsed);
  const least = Math.max(1, says.whole(model.least, true));
  const end = Math.max(least + half(least, 5) + 1, elapsed + half(elapsed, 10));
  /** @param {number} seconds */
  const x = (seconds) => PAD + Number(ratio(BigInt(seconds * (width - 2 * PAD)), BigInt(end)));
  const post = x(least);
  const now = x(elapsed);
  const edge = `M${px(post)} ${px(TOP)}H${px(width - PAD)}M${px(post)} ${px(FOOT)}H${px(width - PAD)}`;
  let out = rect(ink, "key", post, TOP, width - PAD - post, HIGH) + path(ink, edge, "", "ink", "2");
  out += rect(ink, "out", PAD, TOP, post - PAD, HIGH) + rect(ink, "ink-2", PAD, TOP, Math.min(now, post) - PAD, HIGH);
  out += ticks(ink, width, end, least, post, x);
  out += rect(ink, "ink", post - 30, TOP - 100, 60, HIGH + 220);
  const label = span(least);
  const at = Math.min(post, width - half(wide(label, 18)));
  out += words(ink, at, FOOT + 310, 18, label, "middle", "600");
  out += words(ink, at, FOOT + 520, 16, "at least", "middle", "", "ink-2");
  out += path(ink, `M${px(now)} ${px(TOP - 40)}V${px(FOOT)}`, "", "ink", "3.5");
  out += path(ink, `M${px(now)} ${px(TOP + 30)}l-11 -22h22z`, "ink");
  if (elapsed < least) out += remaining(ink, now, post, `${says.clock(least - elapsed)} left`);
  return svg(ink, "wait", px(width), px(FOOT + 560), says.wait(model), out);
}

/** @param {number} seconds @returns {string} a round time as words */
function span(seconds) {
  if (seconds % 60 && seconds < 3600) return seconds < 60 ? `${seconds} s` : `${half(seconds, 60)} min ${seconds % 60} s`;
  const minutes = half(seconds, 60);
  if (minutes < 60) return `${minutes} min`;
  return minutes % 60 ? `${half(minutes, 60)} h ${minutes % 60} min` : `${half(minutes, 60)} h`;
}

/**
 * @param {string} ink @param {number} width @param {number} end @param {number} least @param {number} post
 * @param {(seconds: number) => number} x
 */
function ticks(ink, width, end, least, post, x) {
  const [minor, major] = STEPS.find((s) => half(end, s[1]) <= 5) ?? STEPS[STEPS.length - 1];
  let [fine, coarse, out] = ["", "", ""];
  for (let t = 0; t <= end; t += minor) {
    if (t % major) {
      fine += `M${px(x(t))} ${px(FOOT)}v6`;
      continue;
    }
    coarse += `M${px(x(t))} ${px(FOOT)}v11`;
    const label = t ? span(t) : major >= 60 ? "0 min" : "0 s";
    const reach = half(wide(label, 16));
    const at = Math.max(x(t), reach);
    if (Math.abs(at - post) > reach + half(wide(span(least), 18)) + 60 && at + reach < width) {
      out += words(ink, at, FOOT + 300, 16, label, "middle", "", "ink-2");
    }
  }
  return path(ink, fine, "", "line", "1") + path(ink, coarse, "", "ink-2", "1.5") + out;
}

/** @param {string} ink @param {number} now @param {number} post @param {string} label */
function remaining(ink, now, post, label) {
  const y = 180;
  const reach = wide(label, 18);
  let out = path(ink, `M${px(now)} ${px(TOP - 220)}V${px(y - 60)}M${px(post)} ${px(TOP - 130)}V${px(y - 60)}`, "", "ink-2", "1");
  if (post - now > reach + 440) {
    const m = half(now + post);
    const line = `M${px(now + 80)} ${px(y)}H${px(m - half(reach) - 60)}M${px(m + half(reach) + 60)} ${px(y)}H${px(post - 80)}`;
    const heads = `M${px(now)} ${px(y)}l12 -4v8zM${px(post)} ${px(y)}l-12 -4v8z`;
    out += path(ink, line, "", "ink", "1.5") + path(ink, heads, "ink");
    return out + words(ink, m, y + 55, 18, label, "middle", "500");
  }
  const line = `M${px(now - 300)} ${px(y)}H${px(now - 80)}M${px(post + 80)} ${px(y)}H${px(post + 300)}`;
  const heads = `M${px(now)} ${px(y)}l-12 -4v8zM${px(post)} ${px(y)}l12 -4v8z`;
  out += path(ink, line, "", "ink", "1.5") + path(ink, heads, "ink");
  if (now - 380 >= reach) return out + words(ink, now - 380, y + 55, 18, label, "end", "500");
  return out + words(ink, post + 380, y + 55, 18, label, "start", "500");
}
