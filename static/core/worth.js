/**
 * What a number is worth: the uncertainty that a meter gives a reading, and a value as it is shown with its own.
 * Twin of fieldkit/run/worth.py, which says what it means; held by tests/vectors/judge and runs.
 * @module
 */

import { Dec, add, beside, compare, dec, magnitude, mul, round12, to_float } from "./values.js";

/** @typedef {Record<string, any>} Meter */

const HUNDREDTH = new Dec(1n, 2);

/** The half-width of a meter's error at a reading, in its unit; null where its accuracy is not known.
 * @param {string} reading @param {Meter | null} meter @param {string} unit @returns {Dec | null} */
export function half(reading, meter, unit) {
  if (meter === null || meter.unit !== unit) return null;
  let found;
  let of_range;
  try {
    of_range = dec(meter.percent_of_range || "0");
    found = add(mul(mul(dec(meter.percent), HUNDREDTH), magnitude(dec(reading))), mul(dec(meter.digits), dec(meter.resolution)));
  } catch (problem) {
    if (problem instanceof RangeError) return null;
    throw problem;
  }
  if (of_range.digits === 0n) return found;
  const full = full_scale(meter);
  return full === null ? null : add(found, mul(mul(of_range, HUNDREDTH), full));
}

/** The larger of |low| and |high| of a range; null where neither is known. @param {Meter} of @returns {Dec | null} */
export function full_scale(of) {
  const known = [of.low, of.high].filter((end) => end !== null && end !== undefined);
  const ends = known.map((end) => magnitude(dec(end)));
  if (ends.length === 2) return compare(ends[0], ends[1]) > 0 ? ends[0] : ends[1];
  return ends[0] ?? null;
}

/** U (k = 2) at a reading, in its unit, 12 digits; null where the accuracy is not known.
 * @param {string} reading @param {Meter | null} meter @param {string} unit @returns {string | null} */
export function expanded(reading, meter, unit) {
  if (meter !== null && "u" in meter) return meter.u;
  const found = half(reading, meter, unit);
  return found === null ? null : round12((2 * to_float(found)) / Math.sqrt(3));
}

/** u of a reading in SI, 12 digits; null where the accuracy is not known.
 * @param {string} reading @param {Meter | null} meter @param {{symbol: string, factor: string}} unit @returns {string | null} */
export function standard(reading, meter, unit) {
  const found = half(reading, meter, unit.symbol);
  return found === null ? null : round12(to_float(mul(found, dec(unit.factor))) / Math.sqrt(3));
}

/** A value with its U: "41.54 ± 0.83"; the value alone where U is none or not known.
 * @param {string} text @param {string | null} u @param {string | null} resolution @returns {string} */
export function shown(text, u, resolution) {
  return u === null || dec(u).digits === 0n ? text : beside(text, u, resolution).join(" ± ");
}

/** U alone, as `shown` shows it. @param {string} u @param {string | null} resolution */
export function rounded(u, resolution) {
  return beside("0", u, resolution)[1];
}
