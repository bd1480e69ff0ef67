/**
 * The time at which a fitted fall of a current reaches a limit: what the exponential and the power law share.
 * Twin of fieldkit/fits/reach.py, which says what is given and refused.
 * @module
 */

import { answer, nulls } from "./answer.js";
import * as columns from "./columns.js";
import { e_to, ln } from "./logs.js";
import * as misfit from "./misfit.js";
import * as squares from "./squares.js";
import * as words from "./words.js";

const { Refused } = columns;

/** @typedef {import("./answer.js").Answer} Answer */
/** @typedef {import("./columns.js").Columns} Columns */
/** @typedef {import("./squares.js").Fit} Fit */
/** @typedef {{fit: string, of_log: boolean, law: string}} Fall */

export const FEWEST = 5;
export const CLEAR_FALL = 3;
export const SPANS = 2;

export const FALLS = Object.freeze({
  exponential: { fit: "exponential-time-to", of_log: false, law: "an exponential fall" },
  power: { fit: "power-time-to", of_log: true, law: "a fall as a power of time" },
});

/**
 * @param {Fall} fall @param {unknown} times @param {unknown} currents @param {unknown} limit @param {unknown} u
 * @param {words.Show} show @returns {Answer}
 */
export function reach(fall, times, currents, limit, u, show) {
  show = words.guarded(show);
  const empty = nulls("value", "u", "limit", "span", "reach", "misfit", "slope_u");
  const level = columns.positive("The limit", limit, "bad-limit");
  const given = columns.read(["times", "currents"], times, currents, u, FEWEST);
  const logged = given instanceof Refused ? given : logs(fall, given);
  const fit = logged instanceof Refused ? logged : squares.fit(logged, 1, "times");
  const none = { ...empty, ...squares.numbers(null, columns.count(currents)) };
  if (level instanceof Refused) return answer(fall.fit, none, level, String);
  if (given instanceof Refused) return answer(fall.fit, none, given, String);
  if (logged instanceof Refused) return answer(fall.fit, none, logged, String);
  if (fit instanceof Refused) return answer(fall.fit, none, fit, String);
  let [first, last] = [given.x[0], given.x[0]];
  for (const t of given.x) [first, last] = [t < first ? t : first, t > last ? t : last];
  /** @type {Answer} */
  const numbers = { ...empty, ...squares.numbers(fit, fit.n) };
  Object.assign(numbers, { limit: level, span: [first, last], misfit: misfit.ratio(logged.x, fit) });
  numbers.slope_u = Math.sqrt(squares.variance(fit, [0, 1]));
  if (fit.local[1] < 0) Object.assign(numbers, met(fall, fit, ln(level), first, last));
  return answer(fall.fit, numbers, refuse(numbers, fit, misfit.above(logged.x, fit), show), () => sentence(fall, numbers, fit, show));
}

/** ln I with its uncertainty u / I, against t or ln t. @param {Fall} fall @param {Columns} given @returns {Columns | columns.Refused} */
function logs(fall, given) {
  let refused = columns.not_positive("currents", given.y);
  if (refused === null && fall.of_log) refused = columns.not_positive("times", given.x);
  if (refused !== null) return refused;
  const u = given.u === null ? null : given.u.map((v, i) => v / given.y[i]);
  return { x: fall.of_log ? given.x.map(ln) : given.x, y: given.y.map(ln), u };
}

/**
 * Where the falling line is at `level`.
 * @param {Fall} fall @param {Fit} fit @param {number} level @param {number} first @param {number} last @returns {Answer}
 */
function met(fall, fit, level, first, last) {
  const slope = fit.local[1];
  const z = (level - fit.local[0]) / slope;
  let deviation = Math.sqrt(squares.variance(fit, [-1 / slope, -z / slope]));
  let time = fit.centre + z;
  if (fall.of_log) {
    time = e_to(time);
    deviation = time * deviation;
  }
  return { value: time, u: deviation, reach: (time - first) / (last - first) };
}

/** @param {Answer} numbers @param {Fit} fit @param {boolean} slower @param {words.Show} show */
function refuse(numbers, fit, slower, show) {
  const [first, last] = numbers.span;
  const time = numbers.value;
  const limit = show("y", numbers.limit, null);
  if (!(-fit.local[1] > CLEAR_FALL * numbers.slope_u)) {
    return new Refused("not-falling", "The current does not clearly fall over these readings. Read on.");
  }
  if (numbers.reach < 0) {
    return new Refused("already-below", `By this fit the current was below ${limit} before the first reading.`);
  }
  const promised = `By this law the current would be at ${limit} at ${show("x", time, null)}`;
  if (numbers.misfit !== null && numbers.misfit > misfit.limit(fit.n)) {
    if (slower) return new Refused("slows-down", `${promised}, but the fall slows down against it: it may never get there.`);
    return new Refused("quickens", `${promised}, but the fall quickens against it: it may be there much sooner.`);
  }
  if (!(numbers.reach <= SPANS)) {
    const until = show("x", first + (time - first) / SPANS, null);
    return new Refused(
      "beyond-span",
      `${promised}: too far beyond the readings from ${show("x", first, null)} to ${show("x", last, null)} to be ` +
        `trusted. Read on until about ${until}.`,
    );
  }
  return null;
}

/** @param {Fall} fall @param {Answer} numbers @param {Fit} fit @param {words.Show} show */
function sentence(fall, numbers, fit, show) {
  const [first, last] = numbers.span;
  const scatter = words.brief(100 * (e_to(fit.s) - 1), 2);
  let text =
    `At ${show("y", numbers.limit, null)} at ${show("x", numbers.value, numbers.u)}, by ${fall.law} through ` +
    `${fit.n} readings from ${show("x", first, null)} to ${show("x", last, null)}; they scatter by ${scatter} % about ` +
    "it.";
  if (numbers.reach > 1) {
    text +=
      " That is beyond the last reading: the uncertainty is that of the scatter, and says nothing about " +
      "whether the current goes on falling so.";
  }
  return text + words.few(fit.freedom);
}
