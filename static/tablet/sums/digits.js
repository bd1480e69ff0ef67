/**
 * How a worked-out number is shown: the digits that its formula deserves and six at most, digits before the point never
 * rounded off, and a power of ten where too many noughts would stand. As `fieldkit calc` shows it. Pure.
 *
 * Not here: reading what was typed, and values in SI (core/values.js).
 */
import { Dec, beside, compare, dec, number, to_shown, to_text, trim } from "../../core/values.js";
import { minus } from "../words.js";

/** @typedef {{symbol: string, shown: string, factor: string, offset: string}} Unit */

/** No meter that a person reads has more. */
export const MOST = 6;

const RAISED = /** @type {Record<string, string>} */ ({ "-": "⁻", 0: "⁰", 1: "¹", 2: "²", 3: "³", 4: "⁴", 5: "⁵", 6: "⁶", 7: "⁷", 8: "⁸", 9: "⁹" });

/** "10⁻⁹". @param {number} power */
export const tenTo = (power) => `10${[...String(power)].map((c) => RAISED[c]).join("")}`;

/** @param {Dec} value */
const size = (value) => new Dec(value.digits < 0n ? -value.digits : value.digits, value.scale);

/**
 * A plain decimal with at most `most` significant digits, but for those before the point, and without noughts at its end.
 * @param {string} text @param {number} most @param {"near" | "up" | "down"} [way] half to even, or to one side
 */
export function significant(text, most, way = "near") {
  const from = dec(text), over = Math.min(from.scale, size(from).digits.toString().length - most);
  if (over <= 0) return to_text(trim(from));
  const scale = from.scale - over;
  if (way === "near") return to_text(trim(dec(to_text(from, scale))));
  const step = 10n ** BigInt(over), rest = from.digits % step, cut = from.digits / step;
  return to_text(trim(new Dec(way === "up" && rest > 0n ? cut + 1n : way === "down" && rest < 0n ? cut - 1n : cut, scale)));
}

const LEAST_PLAIN = dec("0.0001"), MOST_PLAIN = dec("10000000000");

/** "41.5372", "−0.12", "9.10938 × 10⁻³¹": a plain decimal as it is shown. @param {string} text @param {number} [most] */
export function written(text, most = MOST) {
  const value = dec(text);
  if (value.digits === 0n) return "0";
  if (compare(size(value), LEAST_PLAIN) >= 0 && compare(size(value), MOST_PLAIN) < 0) return minus(significant(text, most));
  const all = size(value).digits.toString(), rounded = significant(`${all[0]}.${all.slice(1) || "0"}`, most);
  const [mantissa, more] = rounded === "10" ? ["1", 1] : [rounded, 0];
  return `${value.digits < 0n ? "−" : ""}${mantissa} × ${tenTo(all.length - 1 - value.scale + more)}`;
}

/** A number in SI as it is shown in a unit. @param {number} si @param {Unit} unit @param {number} [most] */
export const shown = (si, unit, most) => written(to_shown(si, unit), most);

/**
 * A number in SI with its uncertainty, as they are shown in a unit: "41.5", "1.4"; `tail` is a power of ten of both.
 * Two digits of the uncertainty, none finer than `most` digits of the value.
 * @param {number} si @param {number} u in SI @param {Unit} unit @param {number} [most] @returns {{value: string, margin: string, tail: string}}
 */
export function withMargin(si, u, unit, most = MOST) {
  const texts = [to_shown(si, unit), to_shown(u, { factor: unit.factor, offset: "0" })], powers = texts.map(powerOf), power = Math.max(...powers);
  const by = power >= -4 && power < 10 ? 0 : power, places = Math.max(0, most - 1 - (powers[0] === -Infinity ? 0 : powers[0] - by));
  const [value, margin] = beside(lifted(texts[0], -by), lifted(texts[1], -by), to_text(new Dec(0n, places)));
  return { value: minus(value), margin, tail: by ? ` × ${tenTo(by)}` : "" };
}

/** The same in one line: "41.5 ± 1.4", "(4.807 ± 0.048) × 10⁻¹⁹". @param {{value: string, margin: string, tail: string}} of */
export const inLine = ({ value, margin, tail }) => (tail ? `(${value} ± ${margin})${tail}` : `${value} ± ${margin}`);

/** An uncertainty by itself, in the unit of its value: "0.35", "5.8 × 10⁻⁹". @param {number} u in SI @param {Unit} unit */
export function alone(u, unit) {
  const { margin, tail } = withMargin(0, u, { ...unit, offset: "0" }, 12);
  return `${margin}${tail}`;
}

/** The power of ten of the first digit. @param {string} text */
function powerOf(text) {
  const value = size(dec(text));
  return value.digits === 0n ? -Infinity : value.digits.toString().length - 1 - value.scale;
}

/** A decimal text times a power of ten. @param {string} text @param {number} power */
function lifted(text, power) {
  const from = dec(text), scale = from.scale - power;
  return to_text(scale >= 0 ? new Dec(from.digits, scale) : new Dec(from.digits * 10n ** BigInt(-scale), 0));
}

/** A figure and its unit. @param {string} figure @param {{shown: string}} unit */
export const withUnit = (figure, unit) => `${figure}${["", "°"].includes(unit.shown) ? "" : " "}${unit.shown}`;

/**
 * One end of a range in a unit, rounded inwards, so that what is shown is allowed; null where there is none.
 * @param {string | null} si decimal text @param {Unit} unit @param {"low" | "high"} side
 */
export function end(si, unit, side) {
  const value = si === null ? null : number(si);
  return typeof value === "number" ? significant(to_shown(value, unit), MOST, side === "low" ? "up" : "down") : null;
}

/**
 * "0 to 1000 L/min", "at least 0 Ω", "any value".
 * @param {{low: string | null, high: string | null, whole: boolean}} argument @param {Unit} unit
 */
export function rangeWords(argument, unit) {
  const low = end(argument.low, unit, "low"), high = end(argument.high, unit, "high");
  const span = low !== null && high !== null ? `${written(low)} to ${withUnit(written(high), unit)}`
    : low !== null ? `at least ${withUnit(written(low), unit)}` : high !== null ? `at most ${withUnit(written(high), unit)}` : "any value";
  return argument.whole ? `${span}, whole numbers` : span;
}
