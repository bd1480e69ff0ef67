/**
 * A straight line y = a + b x by least squares: its slope, and everything a plot needs.
 * Twin of fieldkit/fits/line.py, which says what is given and refused.
 * @module
 */

import { answer } from "./answer.js";
import * as columns from "./columns.js";
import * as squares from "./squares.js";
import * as words from "./words.js";

export const FEWEST = 4;

/** @param {unknown} x @param {unknown} y @param {unknown} [u] @param {words.Show} [show] */
export function line(x, y, u = null, show = words.plain) {
  show = words.guarded(show);
  const given = columns.read(["settings", "readings"], x, y, u, FEWEST);
  const fit = given instanceof columns.Refused ? given : squares.fit(given, 1);
  if (fit instanceof columns.Refused) {
    return answer("line", { value: null, u: null, ...squares.numbers(null, columns.count(y)) }, fit, String);
  }
  const slope = fit.local[1];
  const deviation = Math.sqrt(squares.variance(fit, [0, 1]));
  const says = () =>
    `The slope is ${show("slope", slope, deviation)}, of a straight line through ${fit.n} readings from ` +
    `${show("x", fit.low, null)} to ${show("x", fit.high, null)}; they scatter by ` +
    `${show("y", fit.s, null)} about it (one standard deviation).${words.few(fit.freedom)}`;
  return answer("line", { value: slope, u: deviation, ...squares.numbers(fit, fit.n) }, null, says);
}
