/**
 * The picture of a sum: its results along one argument, round the value that was typed. Pure: numbers in, SVG text out.
 *
 * In the grammar of the other drawings: a thin line is the result, a solid point is this value, grey beyond a post is
 * where the formula does not hold. Not here: what is computed (reckon.js), the element that it stands in (sum.js).
 */
import { escape, paint } from "../../core/drawing/paint.js";
import { round12 } from "../../core/values.js";
import { minus } from "../words.js";
import { tenTo, written } from "./digits.js";

const STEPS = 120, HIGH = 250, LEFT = 74, RIGHT = 18, TOP = 30, BOTTOM = 52;

/**
 * From where to where a picture runs: from the low end or 0 to twice the value, within the range; all in one unit.
 * @param {number} at @param {number | null} low @param {number | null} high
 * @returns {{from: number, to: number, cutLow: boolean, cutHigh: boolean}} cut: the formula ends there
 */
export function span(at, low, high) {
  let from = at < 0 ? 2 * at : low !== null && low > 0 ? low : 0, to = at > 0 ? 2 * at : at < 0 ? 0 : high ?? 1;
  if (low !== null) from = Math.max(from, low);
  if (high !== null) to = Math.min(to, high);
  if (to <= from) [from, to] = [low ?? from - 1, high ?? from + 1];
  return { from, to, cutLow: low !== null && low !== 0 && from === low, cutHigh: high !== null && high !== 0 && to === high };
}

/** Where to ask, in the argument's unit: evenly, and at the value itself. @param {{from: number, to: number}} over @param {number} at */
export function stops({ from, to }, at) {
  const all = Array.from({ length: STEPS + 1 }, (_, k) => from + ((to - from) * k) / STEPS);
  return [...new Set([...all, at])].sort((a, b) => a - b);
}

/** Steps of 1, 2 or 5 that put at most `most` of them between two values. @param {number} from @param {number} to @param {number} most */
export function ticks(from, to, most) {
  const rough = (to - from) / most, power = Math.floor(Math.log10(rough)), step = [1, 2, 5, 10].map((s) => s * 10 ** power).find((s) => s >= rough * (1 - 1e-9)) ?? 10 ** (power + 1);
  const first = Math.ceil(from / step - 1e-9), last = Math.floor(to / step + 1e-9);
  return { step, values: Array.from({ length: Math.max(0, last - first + 1) }, (_, k) => (first + k) * step) };
}

/** The power of ten that an axis is written in, so that its figures stay short. @param {number} size */
export function scaleOf(size) {
  if (size === 0 || (size >= 0.01 && size < 100000)) return 0;
  return Math.floor(Math.log10(size) / 3) * 3;
}

/** A figure of an axis. @param {number} value @param {number} step @param {number} power */
function figure(value, step, power) {
  const places = Math.max(0, -Math.floor(Math.log10(step / 10 ** power) + 1e-9));
  const text = (value / 10 ** power).toFixed(Math.min(places, 12));
  return minus(/^-0(\.0+)?$/.test(text) ? text.slice(1) : text);
}

/** From this on, from the least to the greatest, a line is drawn by powers of ten: its small end would lie on the axis. */
const FAR = 200, BELOW = 1000;

/**
 * The vertical axis: all of the line, and 0 where that is not far; or by powers of ten, three below the value at most.
 * `part` is how far up a value stands, from 0 to 1; null where it is not on the axis.
 * @param {number[]} ys @param {number} at the least of the values now
 */
export function upright(ys, at) {
  const least = Math.min(...ys), most = Math.max(...ys);
  if (least > 0 && most > FAR * least) {
    const low = Math.max(least, at / BELOW), from = Math.log10(low), to = Math.log10(most), first = Math.ceil(from - 1e-9), last = Math.floor(to + 1e-9);
    if (most > FAR * low) {
      const each = Math.max(1, Math.ceil((last - first) / 6)), values = Array.from({ length: Math.floor((last - first) / each) + 1 }, (_, k) => 10 ** (first + k * each));
      return { byTens: true, power: 0, part: (/** @type {number} */ y) => (y < low ? null : (Math.log10(y) - from) / (to - from)), marks: values.map((v) => ({ value: v, text: tens(v) })) };
    }
  }
  const { low, high } = reach(ys), up = ticks(low, high, 5), power = scaleOf(Math.max(Math.abs(low), Math.abs(high)));
  return { byTens: false, power, part: (/** @type {number} */ y) => /** @type {number | null} */ ((y - low) / (high - low)), marks: up.values.map((v) => ({ value: v, text: figure(v, up.step, power) })) };
}

/** A power of ten on an axis. @param {number} value */
function tens(value) {
  const power = Math.round(Math.log10(value));
  return power >= -4 && power <= 5 ? String(Number(value.toPrecision(1))) : tenTo(power);
}

/** What of an even axis is shown. @param {number[]} ys */
function reach(ys) {
  let low = Math.min(...ys), high = Math.max(...ys);
  if (low > 0 && low < high * 0.6) low = 0;
  if (high < 0 && high > low * 0.6) high = 0;
  if (low === high) { const more = Math.abs(low) * 0.1 || 1; return { low: low - more, high: high + more }; }
  const more = (high - low) * 0.06;
  return { low: low === 0 ? 0 : low - more, high: high === 0 ? 0 : high + more };
}

/** @typedef {{title: string, points: [number, number | null][], at: number, shown: string}} Line */
/**
 * @typedef {object} Picture
 * @property {number} width @property {{title: string, unit: string, at: number, shown: string, from: number, to: number, cutLow: boolean, cutHigh: boolean}} along
 * @property {{unit: string}} result @property {Line[]} lines
 */

/** Tenths of a pixel are enough. @param {number} n */
const px = (n) => String(Math.round(n * 10) / 10);

/** @param {number} x @param {number} y @param {string} text @param {string} [anchor] @param {string} [weight] @param {string} [role] */
const label = (x, y, text, anchor = "middle", weight = "", role = "ink") => `<text${paint("screen", role)} x="${px(x)}" y="${px(y)}" text-anchor="${anchor}"${weight ? ` font-weight="${weight}"` : ""}>${escape(text)}</text>`;
/** @param {number} x1 @param {number} y1 @param {number} x2 @param {number} y2 @param {string} role @param {string} width @param {string} [dash] */
const stroke = (x1, y1, x2, y2, role, width, dash = "") => `<path${paint("screen", "", role, width, dash)} d="M${px(x1)} ${px(y1)}L${px(x2)} ${px(y2)}"/>`;

/** The name of an axis: "kW", "10⁻⁶ A", "" for a plain number. @param {string} unit @param {number} power */
const axisUnit = (unit, power) => (power ? `${tenTo(power)}${unit ? ` ${unit}` : ""}` : unit);

/** The line of one result: broken where the formula does not hold. @param {Line} line @param {(x: number) => number} X @param {(y: number) => number | null} Y */
function trace(line, X, Y) {
  let d = "", pen = false;
  for (const [x, y] of line.points) {
    const up = y === null ? null : Y(y);
    if (up === null) pen = false;
    else { d += `${pen ? "L" : "M"}${px(X(x))} ${px(up)}`; pen = true; }
  }
  return d;
}

/** Grey beyond the formula's own end, and its post. @param {number} x @param {number} edge @param {number} bottom */
const beyond = (x, edge, bottom) => `<rect${paint("screen", "out")} x="${px(Math.min(x, edge))}" y="${TOP}" width="${px(Math.abs(edge - x))}" height="${px(bottom - TOP)}"/>${stroke(x, TOP - 4, x, bottom + 4, "ink", "5")}`;

/** @param {Picture} picture @returns {string} SVG text; "" where there is no line */
export function svg(picture) {
  const { along, lines, width } = picture, ys = lines.flatMap((l) => l.points.map(([, y]) => y)).filter((y) => y !== null);
  if (!ys.length) return "";
  const bottom = HIGH - BOTTOM, left = LEFT, right = width - RIGHT - (along.cutHigh ? 14 : 0), first = left + (along.cutLow ? 14 : 0), axis = upright(/** @type {number[]} */ (ys), Math.min(...lines.map((l) => l.at)));
  const X = (/** @type {number} */ v) => first + ((v - along.from) / (along.to - along.from)) * (right - first), Y = (/** @type {number} */ v) => { const part = axis.part(v); return part === null ? null : bottom - part * (bottom - TOP); };
  const across = ticks(along.from, along.to, width < 420 ? 4 : 6), powerX = scaleOf(Math.max(Math.abs(along.from), Math.abs(along.to)));
  const x = X(along.at), near = (/** @type {number} */ v) => Math.abs(X(v) - x) < 18 + 5 * along.shown.length;
  let body = "";
  for (const { value, text } of axis.marks) {
    const y = Y(value);
    if (y !== null) body += stroke(left, y, right, y, "hair", "1") + label(left - 8, y + 5, text, "end", "", "ink-2");
  }
  for (const v of across.values) body += stroke(X(v), TOP, X(v), bottom, "hair", "1") + (near(v) ? "" : label(X(v), bottom + 20, figure(v, across.step, powerX), "middle", "", "ink-2"));
  if (along.cutLow) body += beyond(first, left, bottom);
  if (along.cutHigh) body += beyond(right, width - RIGHT, bottom);
  body += stroke(left, TOP, left, bottom, "ink", "1.5") + stroke(left, bottom, width - RIGHT, bottom, "ink", "1.5");
  body += stroke(x, TOP, x, bottom + 6, "ink", "1");
  for (const [k, line] of lines.entries()) {
    body += `<path${paint("screen", "", "ink", "2.5", k ? "9 5" : "")} stroke-linejoin="round" d="${trace(line, X, Y)}"/>`;
    body += `<circle${paint("screen", "ink", "panel", "2.5")} cx="${px(x)}" cy="${px(Y(line.at) ?? bottom)}" r="7"/>`;
  }
  body += label(Math.min(Math.max(x, left + 10), width - 30), bottom + 20, along.shown, "middle", "600");
  body += label(left, TOP - 12, [axisUnit(picture.result.unit, axis.power), axis.byTens ? "steps of ten" : ""].filter(Boolean).join(", "), "start", "", "ink-2") + label(width - RIGHT, bottom + 42, `${along.title}${axisUnit(along.unit, powerX) ? `, ${axisUnit(along.unit, powerX)}` : ""}`, "end", "", "ink-2");
  return `<svg xmlns="http://www.w3.org/2000/svg" class="plot" viewBox="0 0 ${Math.round(width)} ${HIGH}" width="${Math.round(width)}" height="${HIGH}" role="img" aria-label="${escape(says(picture))}">${body}</svg>`;
}

/** How a line goes, in a word. @param {Line} line */
function course(line) {
  const ys = /** @type {number[]} */ (line.points.map(([, y]) => y).filter((y) => y !== null)), up = ys.some((y, k) => k > 0 && y > ys[k - 1]), down = ys.some((y, k) => k > 0 && y < ys[k - 1]);
  return up && down ? "goes both up and down," : up ? "rises" : down ? "falls" : "stays the same,";
}

/** The picture in a sentence. @param {Picture} picture */
export function says(picture) {
  const { along, lines, result } = picture, round = (/** @type {number} */ n) => written(round12(n), 4), unit = (/** @type {string} */ u) => `${["", "°"].includes(u) ? "" : "\u00a0"}${u}`;
  const each = lines.map((line) => {
    const held = line.points.filter(([, y]) => y !== null), first = held[0], last = held[held.length - 1];
    return `${line.title} ${course(line)} from ${round(/** @type {number} */ (first[1]))} to ${round(/** @type {number} */ (last[1]))}${unit(result.unit)}; at ${along.shown}${unit(along.unit)} it is ${line.shown}${unit(result.unit)}`;
  });
  return `Along ${along.title}, from ${round(along.from)} to ${round(along.to)}${unit(along.unit)}: ${each.join(". ")}.${along.cutHigh ? ` The formula ends at ${round(along.to)}${unit(along.unit)}.` : ""}`;
}
