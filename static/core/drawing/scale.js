// The limit scale: one reading on its limits, with figures. Twin of fieldkit/drawing/scale.py, which lists the model.

import { floor, half, parts, px, ratio, shown, text, wide } from "./number.js";
import { hatch, path, rect, svg, words } from "./paint.js";
import * as says from "./says.js";
import { known, least, most, spread } from "./spread.js";
import { ticks } from "./ticks.js";

/** @typedef {import("./spread.js").Model} Model @typedef {import("./spread.js").Spread} Spread */

const [PAD, TOP, HIGH] = [60, 500, 320];
const FOOT = TOP + HIGH;

/** @param {Model} model @returns {string} one horizontal limit scale as SVG text, its sentence as its name */
export function scale(model) {
  const ink = model.ink ?? "screen";
  const width = Math.trunc(model.width || 572) * 10;
  const s = spread(model, true);
  let body = channel(ink, s, width, model) + axis(ink, s, width);
  const [lines, height] = figures(ink, s, width, model);
  body += lines + olds(ink, s, width, model) + reading(ink, s, width, model);
  return svg(ink, "scale", px(width), px(height), says.scale(model), body);
}

/** @param {Spread} s @param {number} width @param {bigint} value @returns {number} where it lies, kept on the drawing */
function x(s, width, value) {
  const at = PAD + Number(ratio((value - s.a) * BigInt(width - 2 * PAD), s.b - s.a));
  return Math.max(PAD, Math.min(width - PAD, at));
}

/** @param {Spread} s @param {number} width @returns {number} where the reading's pointer stands */
function pointer(s, width) {
  if (s.far) return s.far === "low" ? PAD + 140 : width - PAD - 140;
  return x(s, width, s.value ?? 0n);
}

/** @param {string} ink @param {Spread} s @param {number} width @param {Model} model */
function channel(ink, s, width, model) {
  const left = s.low !== null ? x(s, width, s.low) : PAD;
  const right = s.high !== null ? x(s, width, s.high) : width - PAD;
  let out = rect(ink, "key", left, TOP, right - left, HIGH);
  const value = judged(s, model);
  if (s.low !== null) out += outside(ink, PAD, left, value !== null && value < s.low);
  if (s.high !== null) out += outside(ink, right, width - PAD, value !== null && value > s.high);
  if (s.low !== null) out += bands(ink, s, width, s.low, s.accept_low, s.caution_low, value);
  if (s.high !== null) out += bands(ink, s, width, s.high, s.accept_high, s.caution_high, value);
  const dash = model.verdict === "not judged" ? "6 4" : "";
  const edge = `M${px(left)} ${px(TOP)}H${px(right)}M${px(left)} ${px(FOOT)}H${px(right)}`;
  return out + path(ink, edge, "", "ink", "2", dash);
}

/** @param {string} ink @param {number} x0 @param {number} x1 @param {boolean} hit */
function outside(ink, x0, x1, hit) {
  let out = rect(ink, hit ? "danger" : "out", x0, TOP, x1 - x0, HIGH);
  if (hit && x1 > x0) out += path(ink, hatch(x0, x1, TOP, FOOT, 90), "", "on-danger", "0.8");
  return out;
}

/**
 * @param {string} ink @param {Spread} s @param {number} width @param {bigint} limit @param {bigint | null} guard
 * @param {bigint | null} caution @param {bigint | null} value
 */
function bands(ink, s, width, limit, guard, caution, value) {
  const edges = known([guard, caution]);
  if (!edges.length) return "";
  const low = limit === s.low;
  const inner = low ? most(edges) : least(edges);
  const hot = value !== null && in_band(value, limit, inner, low);
  const [x0, x1] = ordered(x(s, width, limit), x(s, width, inner));
  const role = hot ? "on-caution" : "ink-2";
  let out = hot ? rect(ink, "caution", x0, TOP, x1 - x0, HIGH) : "";
  if (x1 > x0) out += path(ink, hatch(x0, x1, TOP, FOOT, 90), "", role, "1.6");
  if (guard !== null) {
    const [g0, g1] = ordered(x(s, width, limit), x(s, width, guard));
    if (g1 > g0) {
      out += path(ink, hatch(g0, g1, TOP, FOOT, 90, true), "", role, "1.6");
      out += path(ink, `M${px(low ? g1 : g0)} ${px(TOP)}V${px(FOOT)}`, "", role, "2");
    }
  }
  return out;
}

/** The reading where it is judged: colour says a verdict, so what is not judged gets none.
 * @param {Spread} s @param {Model} model */
export function judged(s, model) {
  return model.verdict === "not judged" ? null : s.value;
}

/** Whether a reading lies in the band beside a limit, whose inner edge does not belong to it.
 * @param {bigint} value @param {bigint} limit @param {bigint} inner @param {boolean} low */
export function in_band(value, limit, inner, low) {
  return low ? limit <= value && value < inner : inner < value && value <= limit;
}

/** @param {number} a @param {number} b @returns {[number, number]} */
function ordered(a, b) {
  return a < b ? [a, b] : [b, a];
}

/** @param {string} ink @param {Spread} s @param {number} width */
function axis(ink, s, width) {
  const t = ticks(s.a, s.b, s.places, Math.max(3, half(width, 800)));
  const taken = known([s.low, s.high, s.plate]).map((v) => [x(s, width, v), wide(shown(v, s.places, s.keep), 19)]);
  let [minor, major, out] = ["", "", ""];
  for (let v = -floor(-s.a, t.minor) * t.minor; v <= s.b; v += t.minor) {
    const at = x(s, width, v);
    if (v % t.major !== 0n) {
      minor += `M${px(at)} ${px(FOOT)}v6`;
      continue;
    }
    major += `M${px(at)} ${px(FOOT)}v11`;
    const figure = shown(v, s.places, t.keep);
    const reach = half(wide(figure, 16));
    const clear = taken.every(([other, size]) => Math.abs(at - other) > reach + half(size) + 60);
    if (clear && reach + 10 < at && at < width - reach - 10) {
      out += words(ink, at, FOOT + 300, 16, figure, "middle", "", "ink-2");
    }
  }
  return path(ink, minor, "", "line", "1") + path(ink, major, "", "ink-2", "1.5") + out;
}

/** @param {number} at @param {number} width @param {number} size @returns {[number, string]} */
function place(at, width, size) {
  if (at - half(size) < 0) return [0, "start"];
  return at + half(size) > width ? [width, "end"] : [at, "middle"];
}

/** @param {string} ink @param {Spread} s @param {number} width @param {Model} model @returns {[string, number]} */
function figures(ink, s, width, model) {
  let out = "";
  let rows = FOOT + 560;
  const size = width >= 4500 ? 19 : 17;
  /** @type {[number, number][]} */
  const names = [];
  if (s.plate !== null) {
    const chain = `M${px(x(s, width, s.plate))} ${px(TOP - 80)}V${px(FOOT + 120)}`;
    out += path(ink, chain, "", "ink", "1.8", "11 3 2.5 3");
  }
  /** @type {[bigint | null, string, string][]} */
  const ends = [
    [s.low, text(model.low), model.low_name || "lower limit"],
    [s.high, text(model.high), model.high_name || "upper limit"],
  ];
  const one_name = s.low !== null && s.high !== null && model.low_name && model.low_name === model.high_name;
  for (const [k, [value, figure, name]] of ends.entries()) {
    if (value === null) continue;
    let here = x(s, width, value);
    out += rect(ink, "ink", here - 30, TOP - 100, 60, HIGH + 220);
    const [under, side] = place(here, width, wide(figure, size));
    out += words(ink, under, FOOT + 310, size, figure, side, "600");
    if (one_name) {
      // both limits have one name: it stands once, between them
      if (k === 0) continue;
      here = half(x(s, width, s.low ?? 0n) + here);
    }
    const reach = wide(name, 16);
    const [at, anchor] = place(here, width, reach);
    const start = anchor === "start" ? at : anchor === "end" ? at - reach : at - half(reach);
    let y = FOOT + 520;
    if (names.some(([begin, end]) => start < end + 60 && begin - 60 < start + reach)) [y, rows] = [FOOT + 720, FOOT + 760];
    names.push([start, start + reach]);
    out += words(ink, at, y, 16, name, anchor, "", "ink-2");
  }
  if (s.plate === null) return [out, rows];
  const [figure, name] = [text(model.plate), model.plate_name || "nameplate"];
  const here = x(s, width, s.plate);
  const reach = Math.max(wide(figure, 18), wide(name, 16));
  const [begin, end] = [here - half(reach), here + half(reach)];
  const near = known([s.low, s.high]).some((v) => Math.abs(x(s, width, v) - here) < wide(figure, 18) + 60);
  if (!near && !names.some(([b, e]) => begin < e + 60 && b - 60 < end)) {
    const [under, side] = place(here, width, wide(figure, 18));
    out += words(ink, under, FOOT + 310, 18, figure, side, "500");
    const [at, anchor] = place(here, width, wide(name, 16));
    return [out + words(ink, at, FOOT + 520, 16, name, anchor, "", "ink-2"), rows];
  }
  const both = `${name} ${figure}`;
  const [at, anchor] = place(here, width, wide(both, 16));
  return [out + words(ink, at, rows + 160, 16, both, anchor, "", "ink-2"), rows + 200];
}

/** @param {string} ink @param {Spread} s @param {number} width @param {Model} model */
function olds(ink, s, width, model) {
  const names = (model.olds || []).filter((o) => parts(o.value) !== null).map((o) => `${o.name} ${text(o.value)}`);
  const order = s.olds.map((_, k) => k).sort((i, j) => (s.olds[i] < s.olds[j] ? -1 : s.olds[i] > s.olds[j] ? 1 : i - j));
  /** @type {[number, number][]} */
  const taken = known([s.low, s.high]).map((v) => [x(s, width, v) - 60, x(s, width, v) + 60]);
  for (const v of s.olds) taken.push([x(s, width, v) - 140, x(s, width, v) + 140]);
  if (s.value !== null) taken.push([pointer(s, width) - 150, pointer(s, width) + 150]);
  /** @type {[number, number][]} */
  const chain = s.plate !== null ? [[x(s, width, s.plate) - 20, x(s, width, s.plate) + 20]] : [];
  let [out, labels] = ["", ""];
  for (const k of order) {
    const here = x(s, width, s.olds[k]);
    const reach = wide(names[k], 16);
    out += path(ink, `M${px(here)} ${px(TOP + 10)}l-9 -17h18z`, "panel", "ink", "2.2");
    for (const also of [chain, []]) {
      /** @type {[number, string, number][]} */
      const sides = [[here - 140 - reach, "end", here - 140], [here + 140, "start", here + 140]];
      const side = sides.find(([begin]) => begin >= 0 && begin + reach <= width
        && [...taken, ...also].every(([left, right]) => begin + reach <= left || begin >= right));
      if (!side) continue;
      labels += words(ink, side[2], TOP - 50, 16, names[k], side[1]);
      taken.push([side[0], side[0] + reach]);
      break;
    }
  }
  return out + labels;
}

/** @param {string} ink @param {Spread} s @param {number} width @param {Model} model */
function reading(ink, s, width, model) {
  if (s.value === null) return "";
  const at = pointer(s, width);
  const middle = TOP + HIGH / 2;
  let out = path(ink, `M${px(at)} ${px(TOP + 30)}V${px(FOOT - 30)}`, "", "panel", "9");
  if (s.far) out += broken(ink, at, s.far);
  else if (s.u) {
    const r = Number(ratio(s.u * BigInt(width - 2 * PAD), s.b - s.a));
    const bar = `M${px(at - r)} ${px(middle)}H${px(at + r)}`;
    out += path(ink, bar, "", "panel", "9");
    out += path(ink, `${bar}M${px(at - r)} ${px(middle - 90)}v18M${px(at + r)} ${px(middle - 90)}v18`, "", "ink", "3");
  }
  out += path(ink, `M${px(at)} ${px(TOP - 40)}V${px(FOOT)}`, "", "ink", "3.5");
  out += path(ink, `M${px(at)} ${px(TOP + 30)}l-11 -22h22z`, "ink");
  return out + dimension(ink, s, width, at, model);
}

/** @param {string} ink @param {number} here @param {string} far */
function broken(ink, here, far) {
  const at = far === "low" ? here + 200 : here - 200;
  const d = [-40, 40].map((k) => `M${px(at + k - 25)} ${px(FOOT + 60)}L${px(at + k + 25)} ${px(TOP - 60)}`).join("");
  const gap = `M${px(at - 65)} ${px(FOOT + 60)}L${px(at - 15)} ${px(TOP - 60)}H${px(at + 65)}L${px(at + 15)} ${px(FOOT + 60)}z`;
  return path(ink, gap, "panel") + path(ink, d, "", "ink", "2");
}

/** @param {string} ink @param {Spread} s @param {number} width @param {number} here @param {Model} model */
function dimension(ink, s, width, here, model) {
  const near = says.nearest(s);
  if (near === null) return "";
  const short = `${near.size} ${model.unit ?? ""}`.trim();
  const word = `${near.word} ${short}`;
  const at = x(s, width, near.limit);
  const y = 180;
  const [p, q] = ordered(here, at);
  let out = path(ink, `M${px(here)} ${px(TOP - 220)}V${px(y - 60)}M${px(at)} ${px(TOP - 130)}V${px(y - 60)}`, "", "ink-2", "1");
  const inside = `M${px(p)} ${px(y)}l12 -4v8zM${px(q)} ${px(y)}l-12 -4v8z`;
  for (const label of near.word === "margin" ? [word, short] : [word]) {
    const reach = wide(label, 18);
    if (q - p <= reach + 440) continue;
    const m = half(p + q);
    const line = `M${px(p + 80)} ${px(y)}H${px(m - half(reach) - 60)}M${px(m + half(reach) + 60)} ${px(y)}H${px(q - 80)}`;
    out += path(ink, line, "", "ink", "1.5") + path(ink, inside, "ink");
    return out + words(ink, m, y + 55, 18, label, "middle", "500");
  }
  const reach = wide(word, 18);
  const between = q - p > 400;
  if (between) {
    out += path(ink, `M${px(p + 80)} ${px(y)}H${px(q - 80)}`, "", "ink", "1.5") + path(ink, inside, "ink");
  } else {
    const line = `M${px(p - 300)} ${px(y)}H${px(p - 80)}M${px(q + 80)} ${px(y)}H${px(q + 300)}`;
    const heads = `M${px(p)} ${px(y)}l-12 -4v8zM${px(q)} ${px(y)}l12 -4v8z`;
    out += path(ink, line, "", "ink", "1.5") + path(ink, heads, "ink");
  }
  const left = p - (between ? 120 : 380);
  const right = q + (between ? 120 : 380);
  if (left - reach >= 0) return out + words(ink, left, y + 55, 18, word, "end", "600");
  if (right + reach <= width) return out + words(ink, right, y + 55, 18, word, "start", "600");
  return left >= wide(short, 18) ? out + words(ink, left, y + 55, 18, short, "end", "600") : out;
}
