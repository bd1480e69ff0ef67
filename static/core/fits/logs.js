/**
 * exp and log for fits: numbers in, numbers out; what is too large is infinite, and the answer is then refused.
 * Twin of fieldkit/fits/logs.py.
 * @module
 */

import * as elementary from "../elementary.js";

/** The natural logarithm of a number above zero. @param {number} x */
export function ln(x) {
  const value = elementary.log(x);
  return typeof value === "number" ? value : Infinity;
}

/** e ** x; infinite where that is too large, or `x` is. @param {number} x */
export function e_to(x) {
  if (x - x !== 0) return Infinity;
  const value = elementary.exp(x);
  return typeof value === "number" ? value : Infinity;
}

/** a / b, infinite for b = 0. @param {number} a @param {number} b */
export function ratio(a, b) {
  return b !== 0 ? a / b : Infinity;
}
