/**
 * The instruments that a value of a sum may have been measured with, and what one of them makes it uncertain by. Pure.
 *
 * A meter here is the flat view of one range (core/readings.js). Not here: accuracy and U (core/worth.js).
 */
import * as readings from "../../core/readings.js";
import * as worth from "../../core/worth.js";
import { compare, dec, to_shown, to_text, trim } from "../../core/values.js";
import { day, minus, pretty } from "../words.js";
import { sameKind, unitsFor } from "./book.js";
import { withUnit } from "./digits.js";

/** @typedef {import("./book.js").Book} Book */
/** @typedef {import("./book.js").Argument} Argument */
/** @typedef {import("./digits.js").Unit} Unit */
/** @typedef {Record<string, any> & {id: string, reads: string, range: string, unit: string}} Meter */

/** Every range whose accuracy is known. @param {any[]} instruments as a kit or the start of a run holds them @returns {Meter[]} */
export function metersOf(instruments) {
  return instruments.flatMap((one) => {
    const whole = { calibrated_on: null, interval_months: null, calibrated_to: null, temperature: null, ...one, ranges: one.ranges ?? [{ percent_of_range: "0", ...one, name: "" }] };
    return readings.by_size(whole.ranges).map((range) => readings.flat(whole, range));
  }).filter((meter) => {
    const accuracy = worth.half("0", { ...meter, percent: "0" }, meter.unit);
    return accuracy !== null && meter.percent !== null && (accuracy.digits !== 0n || dec(meter.percent).digits !== 0n);
  });
}

/** What tells one range from all others. @param {Meter} meter */
export const keyOf = (meter) => `${meter.id}/${meter.range}`;

/** "FM-2 coolant flow, 80 L/min". @param {Meter} meter */
export const nameOf = (meter) => `${meter.id} ${meter.reads}${meter.range ? `, ${pretty(meter.range)}` : ""}`;

/** Words that say nothing of what is read. */
const PLAIN = ["the", "of", "at", "and", "in", "with", "its", "to", "a", "on"];

/** @param {string} text */
const wordsOf = (text) => text.toLowerCase().split(/[^a-z]+/).filter((word) => word && !PLAIN.includes(word));

/**
 * The ranges that read what an argument is, those first whose name says so, by the argument and then by what the sum is
 * about; none for what is counted or a difference.
 * @param {Book} book @param {Argument} argument @param {{any: string, about: string}} sum the unit of values that take any; words @param {Meter[]} meters @returns {Meter[]}
 */
export function metersFor(book, argument, { any, about }, meters) {
  if (argument.whole || argument.any === "difference") return [];
  const symbol = argument.any === "any" ? any : unitsFor(book, argument, any)[0].symbol;
  if (!Object.hasOwn(book.units, symbol)) return [];
  const kind = sameKind(book, symbol).map((unit) => unit.symbol), asked = wordsOf(`${argument.name} ${argument.meaning}`), near = wordsOf(about);
  const likely = (/** @type {Meter} */ meter) => wordsOf(meter.reads).reduce((sum, word) => sum + (asked.includes(word) ? 2 : near.includes(word) ? 1 : 0), 0);
  return meters.filter((meter) => kind.includes(meter.unit)).map((meter) => ({ meter, score: likely(meter) })).sort((a, b) => b.score - a.score).map(({ meter }) => meter);
}

/**
 * What a meter makes of a value: U (k = 2) in SI, or why there is none; words on its accuracy, and on its calibration
 * where that has run out or is not known.
 * @param {Meter} meter @param {number} si @param {{of: Unit, apart: Unit}} units of the range, and of a difference on it @param {string} today
 * @returns {{u: number | null, says: string, late: string}}
 */
export function measured(meter, si, { of, apart }, today) {
  const text = to_shown(si, of), span = beyond(meter, text), due = meter.calibrated_to;
  const late = !due ? "Its calibration is not known." : due < today.slice(0, 10) ? `Its calibration ran out on ${day(due)}.` : "";
  if (span) return { u: null, says: `${meter.id} cannot show ${withUnit(minus(text), of)}: its range is ${withUnit(span, of)}.`, late };
  const u = /** @type {string} */ (worth.expanded(text, meter, meter.unit)), half = /** @type {any} */ (worth.half(text, meter, meter.unit));
  const wide = (/** @type {string} */ size) => withUnit(worth.rounded(size, null), apart);
  return { u: Number(u) * Number(of.factor), says: `${meter.id}: accuracy ±${wide(to_text(trim(half)))}, which is ±${wide(u)} with k\u00a0=\u00a02.`, late };
}

/** The range in words where a value does not lie on it; "" where it does. @param {Meter} meter @param {string} text */
function beyond(meter, text) {
  const value = dec(text), low = meter.low ?? null, high = meter.high ?? null;
  if ((low === null || compare(value, dec(low)) >= 0) && (high === null || compare(value, dec(high)) <= 0)) return "";
  return low !== null && high !== null ? `${minus(low)} to ${minus(high)}` : low !== null ? `from ${minus(low)}` : `up to ${minus(high)}`;
}
