/**
 * Numbers inside the sentences of fits, and what every sentence says of few readings.
 * Twin of fieldkit/fits/words.py, which says what `show` is asked for.
 * @module
 */

import * as values from "../values.js";

/** @typedef {(axis: string, value: number, u: number | null) => string} Show */

export const LARGEST = 1e30;
export const NOTHING = 1e-12;
export const K = 2;
export const FEW = 10;

/** `x` with `count` significant digits, and at least those before the point. @param {number} x @param {number} count */
export function significant(x, count) {
  const text = values.round12(x);
  const [whole, part = ""] = text.replace(/^-/, "").split(".");
  let keep = 0;
  if (text === "0") keep = 0;
  else if (whole === "0") keep = part.length - part.replace(/^0+/, "").length + count;
  else keep = count > whole.length ? count - whole.length : 0;
  return values.to_text(values.dec(text), keep);
}

/** The same without trailing zeros. @param {number} x @param {number} [count] */
export function brief(x, count = 4) {
  if (!(Math.abs(x) <= LARGEST)) return "a number too large to tell";
  return values.to_text(values.trim(values.dec(significant(x, count))));
}

/** A number without a unit, ± its expanded uncertainty. @type {Show} */
export function plain(axis, value, u) {
  if (axis === "setting") return brief(value, 12);
  if (u === null || K * u <= NOTHING * Math.abs(value)) return brief(value);
  const wide = significant(K * u, 2);
  return `${values.fixed(value, values.decimals(wide))} ± ${wide} (k = ${K})`;
}

/** `show` that is never asked for a number that is none. @param {Show} show @returns {Show} */
export function guarded(show) {
  return (axis, value, u) => {
    if (value - value !== 0) return "a number too large to tell";
    return show(axis, value, u !== null && u - u === 0 ? u : null);
  };
}

/** What is added where the readings are few. @param {number} freedom */
export function few(freedom) {
  if (freedom >= FEW) return "";
  return ` Few readings: ${freedom} more than the fit has coefficients, so k = ${K} covers less than 95 %.`;
}
