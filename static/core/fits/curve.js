/**
 * A formula fitted to readings: the parameters that bring it closest, by least squares, and how sure they are.
 * Twin of fieldkit/fits/curve.py, which says how, and what is given and refused.
 * @module
 */

import { prepare } from "../slopes.js";
import { Fault } from "../values.js";
import { answer, nulls } from "./answer.js";
import * as columns from "./columns.js";
import * as squares from "./squares.js";
import * as triangle from "./triangle.js";
import * as words from "./words.js";

/** @typedef {columns.Columns} Columns @typedef {import("./answer.js").Answer} Answer */
/** @typedef {(at: number[]) => Place | columns.Refused} Look the formula at all readings, for parameters */

export const MOST = 8;
export const TRIES = 1500;
const [CLOSE, ENOUGH] = [1e-8, 1e-4];
const NO_STEP = 1e-15;
const NOT_TOLD = 1e-10;
const [DAMPING, LEAST, NO_MORE] = [1e-2, 1e-15, 1e30];
const NAME = /^[a-z][a-z0-9_]{0,59}$/;

/**
 * The formula at some parameters: what is left of each reading, how that changes, the sum of squares; weighted.
 * @typedef {{at: number[], left: number[], rows: number[][], size: number}} Place
 */
/**
 * Where the search ended: the last place, its triangle (of scaled columns) and scales, and steps taken.
 * @typedef {{place: Place, three: triangle.Triangle, scales: number[], steps: number, refused: columns.Refused | null}} Found
 */

/**
 * @param {unknown} x @param {unknown} y @param {unknown} tree @param {unknown} along @param {unknown} start
 * @param {unknown} [u] @param {unknown} [known] @param {unknown} [formulas] @param {words.Show} [show]
 */
export function curve(x, y, tree, along, start, u = null, known = null, formulas = null, show = words.plain) {
  show = words.guarded(show);
  const named = parameters(along, start);
  const given = columns.read(["settings", "readings"], x, y, u, named instanceof columns.Refused ? 1 : named.size + 2);
  const bad = [named, given].find((one) => one instanceof columns.Refused);
  if (named instanceof columns.Refused || given instanceof columns.Refused) {
    return answer("curve", nothing(columns.count(y)), /** @type {columns.Refused} */ (bad), String);
  }
  const names = [...named.keys()];
  const [weights, u_reading] = squares.weigh(given.u, given.y.length);
  const look = looking(tree, /** @type {string} */ (along), names, known, formulas, given, weights);
  const first = look([...named.values()]);
  if (first instanceof columns.Refused) return answer("curve", { ...nothing(given.y.length), names }, first, String);
  const found = search(look, first, given, weights);
  const numbers = { ...nothing(given.y.length), ...told(found, names, given, weights, u_reading) };
  return answer("curve", numbers, refused(found, names, numbers), () => says(numbers, given, /** @type {words.Show} */ (show)));
}

/** Starting values by name. @param {unknown} along @param {unknown} start @returns {Map<string, number> | columns.Refused} */
function parameters(along, start) {
  if (typeof along !== "string" || !NAME.test(along)) {
    return new columns.Refused("bad-parameter", "The setting has no name that a formula can use.");
  }
  if (!Array.isArray(start) || start.length < 1 || start.length > MOST) {
    return new columns.Refused("bad-parameter", `The parameters are not a list of 1 to ${MOST} names with starting values.`);
  }
  /** @type {Map<string, number>} */
  const found = new Map();
  for (const [k, one] of start.entries()) {
    if (!Array.isArray(one) || one.length !== 2) {
      return new columns.Refused("bad-parameter", `Parameter ${k + 1} is not a name with a starting value.`);
    }
    const name = one[0];
    if (typeof name !== "string" || !NAME.test(name) || name === along || found.has(name)) {
      return new columns.Refused("bad-parameter", `Parameter ${k + 1} has no name of its own that a formula can use.`);
    }
    const value = columns.parameter(`The starting value of ${name}`, one[1]);
    if (value instanceof columns.Refused) return new columns.Refused("bad-parameter", value.says);
    found.set(name, value);
  }
  return found;
}

/** @param {unknown} x @returns {Record<string, any>} */
function block(x) {
  return typeof x === "object" && x !== null && !Array.isArray(x) ? x : {};
}

/**
 * @param {unknown} tree @param {string} along @param {string[]} names @param {unknown} known @param {unknown} formulas
 * @param {Columns} given @param {number[]} weights @returns {Look}
 */
function looking(tree, along, names, known, formulas, given, weights) {
  const ready = prepare(tree, block(formulas));
  const roots = weights.map(Math.sqrt);
  return (at) => {
    const meant = { ...block(known), ...Object.fromEntries(names.map((name, k) => [name, at[k]])) };
    /** @type {number[]} */
    const left = [];
    /** @type {number[][]} */
    const rows = [];
    let size = 0;
    for (const [i, root] of roots.entries()) {
      meant[along] = given.x[i];
      const { value, of } = ready.gradient(meant);
      if (of instanceof Fault) return no_answer(i, of.says);
      if (typeof value !== "number") return no_answer(i, "It gives no number.");
      left.push(root * (given.y[i] - value));
      rows.push(names.map((name) => root * (of.get(name) ?? 0)));
      size += left[i] * left[i];
    }
    let spread = size;
    for (const row of rows) for (const d of row) spread += d * d;
    if (spread - spread !== 0) {
      return new columns.Refused("overflow", "With these starting values a number in this fit is too large to compute with.");
    }
    return { at, left, rows, size };
  };
}

/** @param {number} i @param {string} says */
function no_answer(i, says) {
  const said = `With these starting values the formula has no answer at reading ${i + 1}: ${says}`;
  return new columns.Refused("formula-fault", said, [i]);
}

/** @param {Look} look @param {Place} place @param {Columns} given @param {number[]} weights @returns {Found} */
function search(look, place, given, weights) {
  const [n, m] = [place.at.length, given.y.length];
  const floor = squares.ROUNDING * squares.max_size(given.y);
  const reach = Math.sqrt(squares.total(given.y.map((v, i) => weights[i] * v * v)));
  let [scales, damping, steps, tries] = [/** @type {number[]} */ (Array(n).fill(0)), DAMPING, 0, 0];
  for (;;) {
    const { at, rows: plain, left } = place;
    scales = scales.map((scale, j) => longer(scale, plain, j));
    const rows = plain.map((row) => row.map((d, j) => (scales[j] > 0 ? d / scales[j] : 0)));
    const three = triangle.reduced(rows, left);
    const part = triangle.fresh(three);
    const square = squares.total(three.right.map((q) => q * q).filter((_, k) => part[k] >= NOT_TOLD)) * (m - n);
    const size = place.size > m * floor * floor ? place.size : 0;
    const end = (/** @type {columns.Refused | null} */ why) => ({ place, three, scales, steps, refused: why });
    if (size === 0 || square <= CLOSE * CLOSE * n * size) return end(null);
    for (;;) {
      if (tries === TRIES) return end(astray(`after ${tries} tries it is not at its end`));
      const [change, foreseen] = triangle.damped(three, damping);
      if (squares.max_size(change) <= NO_STEP * reach || damping > NO_MORE) {
        return end(square <= ENOUGH * ENOUGH * n * size ? null : astray("no step comes closer"));
      }
      tries += 1;
      const next = look(at.map((p, j) => (scales[j] > 0 ? p + change[j] / scales[j] : p)));
      if (!(next instanceof columns.Refused) && next.size < place.size) {
        damping = eased(damping, place.size - next.size, foreseen);
        place = next;
        steps += 1;
        break;
      }
      damping *= 4;
    }
  }
}

/** The greatest length that a column has had. @param {number} scale @param {number[][]} rows @param {number} j */
function longer(scale, rows, j) {
  const length = Math.sqrt(squares.total(rows.map((row) => row[j] * row[j])));
  return length > scale ? length : scale;
}

/** @param {number} damping @param {number} gained @param {number} foreseen */
function eased(damping, gained, foreseen) {
  if (gained > 0.75 * foreseen) return damping / 10 > LEAST ? damping / 10 : LEAST;
  return gained < 0.25 * foreseen ? damping * 2 : damping;
}

/** @param {string} why */
function astray(why) {
  return new columns.Refused(
    "no-convergence",
    `No parameters were found that fit: ${why}. Start nearer, or take a formula with fewer parameters.`,
  );
}

/** What the end of the search says. @param {Found} found @param {string[]} names @param {Columns} given @param {number[]} weights @param {number | null} u_reading @returns {Answer} */
function told(found, names, given, weights, u_reading) {
  const { place } = found;
  const [n, m] = [names.length, given.y.length];
  const floor = squares.ROUNDING * squares.max_size(given.y);
  let s_squared = place.size / (m - n);
  s_squared = s_squared > floor * floor ? s_squared : 0;
  const numbers = {
    value: place.at[0],
    freedom: m - n,
    few: m - n < words.FEW,
    names,
    coefficients: place.at,
    s: Math.sqrt(s_squared),
    u_reading,
    residuals: place.left.map((r, i) => r / Math.sqrt(weights[i])),
    iterations: found.steps,
  };
  if (found.refused !== null || Math.min(...triangle.fresh(found.three)) < NOT_TOLD) return numbers;
  let variance = s_squared;
  if (u_reading !== null && u_reading * u_reading > variance) variance = u_reading * u_reading;
  const covariance = triangle.covariance(found.three, found.scales).map((row) => row.map((c) => variance * c));
  const deviations = names.map((_, i) => Math.sqrt(covariance[i][i]));
  return { ...numbers, u: deviations[0], deviations, covariance };
}

/** @param {Found} found @param {string[]} names @param {Answer} numbers */
function refused(found, names, numbers) {
  if (found.refused !== null || numbers.covariance !== null) return found.refused;
  const part = triangle.fresh(found.three);
  const name = names[found.three.order[part.indexOf(Math.min(...part))]];
  const beside = names.length === 1 ? "" : " that the other parameters do not";
  return new columns.Refused(
    "singular",
    `At these readings ${name} makes no difference${beside}. Start nearer, or read at more, and other, settings.`,
  );
}

/** @param {number} n @returns {Answer} */
function nothing(n) {
  const keys = ["value", "u", "freedom", "few", "names", "coefficients", "deviations", "covariance"];
  return { n, ...nulls(...keys, "s", "u_reading", "residuals", "iterations") };
}

/** @param {Answer} numbers @param {Columns} given @param {words.Show} show */
function says(numbers, given, show) {
  let [low, high] = [given.x[0], given.x[0]];
  for (const t of given.x) {
    low = t < low ? t : low;
    high = t > high ? t : high;
  }
  const each = numbers.names.map((/** @type {string} */ name, /** @type {number} */ k) =>
    `${name} is ${show(`parameter ${name}`, numbers.coefficients[k], numbers.deviations[k])}`);
  return (
    `${each.join(", ")}: of a formula through ${numbers.n} readings from ${show("x", low, null)} to ` +
    `${show("x", high, null)}; they scatter by ${show("y", numbers.s, null)} about it (one standard deviation).` +
    words.few(numbers.freedom)
  );
}
