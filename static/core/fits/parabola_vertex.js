/**
 * Where a sweep has its minimum: the vertex of a parabola, as of body current against magnet current.
 * Twin of fieldkit/fits/parabola_vertex.py, which says what is given and refused.
 * @module
 */

import { answer, nulls } from "./answer.js";
import * as columns from "./columns.js";
import { ratio } from "./logs.js";
import * as runs from "./runs.js";
import * as squares from "./squares.js";
import * as words from "./words.js";

const { Refused } = columns;

/** @typedef {import("./answer.js").Answer} Answer */
/** @typedef {import("./columns.js").Columns} Columns */
/** @typedef {import("./squares.js").Fit} Fit */
/** @typedef {[number | null, number | null]} Window */

export const BESIDE = 5;
export const FEWEST = 2 * BESIDE;
export const PART_OF_STEP = 3;

/**
 * @param {unknown} x @param {unknown} y @param {unknown} [u] @param {unknown} [low] @param {unknown} [high]
 * @param {words.Show} [show]
 */
export function parabola_vertex(x, y, u = null, low = null, high = null, show = words.plain) {
  show = words.guarded(show);
  const numbers = nulls("value", "u", "advised", "clipped", "minimum", "u_minimum", "bottom", "swept", "step", "beside", "runs");
  const window = window_of(low, high);
  const given = columns.read(["settings", "readings"], x, y, u, FEWEST);
  const fit = given instanceof Refused ? given : squares.fit(given, 2);
  numbers.window = window instanceof Refused ? null : [...window];
  if (given instanceof Refused || fit instanceof Refused || window instanceof Refused) {
    const bad = [window, given, fit].find((r) => r instanceof Refused) ?? null;
    const none = squares.numbers(null, columns.count(y));
    return answer("parabola-vertex", { ...numbers, ...none }, bad instanceof Refused ? bad : null, String);
  }
  Object.assign(numbers, squares.numbers(fit, fit.n));
  Object.assign(numbers, { swept: [fit.low, fit.high], step: step_of(given.x, fit) });
  numbers.runs = runs.z(given.x, fit.residuals, fit.floor);
  const bend = fit.local[2];
  if (!(bend > 0)) {
    const flat = new Refused(
      "not-a-minimum",
      "No minimum found: the readings do not bend upward over the sweep. Sweep a wider range, or look for what " +
        "else changed.",
    );
    return answer("parabola-vertex", numbers, flat, String);
  }
  Object.assign(numbers, found(given, fit, -fit.local[1] / (2 * bend), window));
  const refused = refuse(numbers, given, fit, show);
  if (refused !== null) Object.assign(numbers, { advised: null, clipped: null });
  return answer("parabola-vertex", numbers, refused, () => sentence(numbers, fit, show));
}

/** @param {unknown} low @param {unknown} high @returns {Window | columns.Refused} */
function window_of(low, high) {
  const least = low === null || low === undefined ? null : columns.parameter("The lower end of the permitted range", low);
  const most = high === null || high === undefined ? null : columns.parameter("The upper end of the permitted range", high);
  if (least instanceof Refused) return new Refused("bad-window", least.says);
  if (most instanceof Refused) return new Refused("bad-window", most.says);
  if (least !== null && most !== null && least >= most) {
    return new Refused("bad-window", "The lower end of the permitted range is not below its upper end.");
  }
  return [least, most];
}

/** The average step between different settings. @param {number[]} x @param {Fit} fit */
function step_of(x, fit) {
  return (fit.high - fit.low) / (new Set(x).size - 1);
}

/** The vertex at `z` from the centre, and what belongs to it. @param {Columns} given @param {Fit} fit @param {number} z @param {Window} window @returns {Answer} */
function found(given, fit, z, window) {
  const bend = fit.local[2];
  const vertex = fit.centre + z;
  const [low, high] = window;
  /** @type {[number, string | null]} */
  let [advised, clipped] = [vertex, null];
  if (low !== null && vertex < low) [advised, clipped] = [low, "low"];
  else if (high !== null && vertex > high) [advised, clipped] = [high, "high"];
  const half = Math.sqrt(ratio(2 * fit.s, bend));
  const [left, right] = [vertex - half, vertex + half];
  return {
    value: vertex,
    u: Math.sqrt(squares.variance(fit, [0, -1 / (2 * bend), -z / bend])),
    advised,
    clipped,
    minimum: squares.at(fit, z),
    u_minimum: Math.sqrt(squares.variance(fit, [1, z, z * z])),
    bottom: [left > fit.low ? left : fit.low, right < fit.high ? right : fit.high],
    beside: [given.x.filter((v) => v < vertex).length, given.x.filter((v) => v > vertex).length],
  };
}

/** @param {Answer} numbers @param {Columns} given @param {Fit} fit @param {words.Show} show */
function refuse(numbers, given, fit, show) {
  const { value: vertex, step } = numbers;
  const [below, above] = numbers.beside;
  if (vertex <= fit.low || vertex >= fit.high) {
    const side = vertex <= fit.low ? "lower" : "higher";
    return new Refused(
      "vertex-outside",
      `No minimum found: it seems to lie at ${side} settings than the sweep from ${show("x", fit.low, null)} to ` +
        `${show("x", fit.high, null)}. Sweep further that way, inside the permitted range.`,
    );
  }
  if (below < BESIDE || above < BESIDE) {
    return new Refused(
      "few-beside",
      `No minimum found: ${below} readings lie below it and ${above} above; it needs ${BESIDE} on each side.`,
    );
  }
  if (!(numbers.u * PART_OF_STEP < step)) {
    return new Refused(
      "too-uncertain",
      `No minimum found: its standard uncertainty, ${show("x", numbers.u, null)}, is not below a third of the ` +
        `step, ${show("x", step, null)}. The bottom is too flat for the scatter of the readings.`,
    );
  }
  if (runs.run(given.x, fit.residuals, fit.floor)) {
    return new Refused(
      "residuals-run",
      "No minimum found: the readings have another shape than a parabola, for they lie above and below it in " +
        "long runs. Sweep closer around the lowest reading.",
    );
  }
  return null;
}

/** @param {Answer} numbers @param {Fit} fit @param {words.Show} show */
function sentence(numbers, fit, show) {
  const [left, right] = numbers.bottom;
  let text = `The minimum is at ${show("x", numbers.value, numbers.u)}, by a parabola through ${fit.n} readings.`;
  if (numbers.clipped !== null) {
    const end = numbers.clipped === "low" ? "lower" : "upper";
    text += ` That is outside the permitted range: the advice is its ${end} end, ${show("x", numbers.advised, null)}.`;
  }
  return (
    `${text} From ${show("x", left, null)} to ${show("x", right, null)} the fit is within two standard deviations of ` +
    `the scatter (${show("y", fit.s, null)}) above its lowest. The uncertainty holds as far as the curve is a ` +
    `parabola, between ${show("x", fit.low, null)} and ${show("x", fit.high, null)} only.${words.few(fit.freedom)}`
  );
}
