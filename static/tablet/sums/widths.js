/**
 * How uncertain each value of a sum is: what was typed after its ±, or what it was measured with. Pure.
 *
 * Every ± is the expanded uncertainty with k = 2, as in `fieldkit calc`. Percent is of the value; what has no natural
 * zero (a temperature in °C, a level in dB) has none. Not here: what is made of it (carry.js).
 */
import { Refusal, to_si, to_text, typed } from "../../core/values.js";
import { called, differenceOf } from "./book.js";
import { measured } from "./meters.js";
import { lower, sentence } from "../words.js";

/** @typedef {import("./book.js").Book} Book */
/** @typedef {import("./book.js").Argument} Argument */
/** @typedef {import("./digits.js").Unit} Unit */
/** @typedef {import("./meters.js").Meter} Meter */
/** @typedef {{state: "none" | "unfinished" | "wrong" | "good", says: string, u: number, note: string, late: string}} Width U in SI; what its meter makes of it */
/** @typedef {{text: string, percent: boolean, meter: Meter | null}} Given what stands in the row of an argument */

const NONE = /** @type {Width} */ ({ state: "none", says: "", u: 0, note: "", late: "" });
/** What the next key may still make a number of. */
const BEGUN = /^[0-9]+[.,]$/;

/** Whether a percent of a value means something. @param {Unit} unit */
export const scaled = (unit) => Number(unit.offset) === 0 && !["dB", "dBm"].includes(unit.symbol);

/**
 * @param {Book} book @param {Argument} argument @param {{state: string, si: number}} value as it was read
 * @param {Unit} unit of the value @param {Given} given @param {string} today @returns {Width}
 */
export function widthOf(book, argument, value, unit, given, today) {
  if (given.meter) {
    if (value.state !== "good") return NONE;
    const { unit: symbol } = given.meter, { shown, factor, offset } = book.units[symbol];
    const { u, says, late } = measured(given.meter, value.si, { of: { symbol, shown, factor, offset }, apart: differenceOf(book, symbol) }, today);
    return u === null ? { ...NONE, state: "wrong", says, late } : { ...NONE, state: "good", u, note: says, late };
  }
  const text = given.text.trim();
  if (!text) return NONE;
  const name = `± of ${called(argument)}`, found = typed(text);
  if (found instanceof Refusal) return { ...NONE, state: BEGUN.test(text) ? "unfinished" : "wrong", says: `${name}: ${lower(found.sentence)}` };
  if (/^[-−+]/.test(text)) return { ...NONE, state: "wrong", says: `${sentence(name)} is to both sides: no sign.` };
  const apart = differenceOf(book, unit.symbol), wide = { factor: apart.factor, offset: "0" };
  if (!given.percent) return { ...NONE, state: "good", u: to_si(to_text(found), wide) };
  if (value.state !== "good") return NONE;
  if (value.si === 0) return { ...NONE, state: "wrong", says: `${sentence(name)}: a percent of 0 is nothing. Give it in ${apart.shown || "the unit of the value"}.` };
  return { ...NONE, state: "good", u: to_si(to_text(found), { factor: "0.01", offset: "0" }) * Math.abs(value.si) };
}
