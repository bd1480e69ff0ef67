/**
 * exp, log, pow, sin, cos, atan, erf from + - * / and exact scaling: the same numbers on every machine.
 *
 * Twin of fieldkit/formula/elementary.py, line by line; its docstring says what is promised and by which methods.
 * tests/vectors/elementary/ and the differential test hold the two together, bit for bit. No DOM, no IO.
 */

import * as pairs from "./pairs.js";
import * as quick from "./quick.js";
import { Fault } from "./values.js";

/** @typedef {import("./pairs.js").Pair} Pair */

const TWO_OVER_PI = 0.6366197723675814;
const [PIO2_1, PIO2_2, PIO2_3, PIO2_4] = [
  1.5707963267341256, 6.077100506303966e-11, 2.0222662487111665e-21, 8.4784276603689e-32,
];
/** @type {Pair} */
const PIO2 = [1.5707963267948966, 6.123233995736766e-17];
/** @type {Pair} */
const TWO_OVER_SQRT_PI = [1.1283791670955126, 1.533545961316588e-17];
/** @type {Pair[]} */
const ATAN_EIGHTHS = [
  [0.0, 0.0],
  [0.12435499454676144, -3.1253241424539383e-18],
  [0.24497866312686414, 1.0698755618734451e-17],
  [0.35877067027057225, -2.4623815582638635e-17],
  [0.4636476090008061, 2.2698777452961687e-17],
  [0.5585993153435624, -5.4556305485916264e-18],
  [0.6435011087932844, 1.5834785051444286e-17],
  [0.7188299996216245, -2.1478388444456983e-17],
  [0.7853981633974483, 3.061616997868383e-17],
];

export const LARGEST_ANGLE = 1000000;

/** @param {number} x @returns {number | Fault} */
export function exp(x) {
  if (x > -quick.MOST && x < quick.MOST) {
    const near = quick.exp(x);
    if (near === near) return near;
  }
  if (x > 710) return too_large("exp");
  if (x < -746) return 0;
  const [e, k] = pairs.exp([x, 0]);
  const value = pairs.scale(e[0], k);
  return value === Infinity ? too_large("exp") : value;
}

/** The natural logarithm; domain for x <= 0. @param {number} x @returns {number | Fault} */
export function log(x) {
  if (x <= 0) return new Fault("domain", "The logarithm needs a number above zero.");
  const [near, rest] = quick.log(x);
  if (near + (rest - quick.LOG_DOUBT) === near + (rest + quick.LOG_DOUBT)) return near;
  return pairs.log(x)[0];
}

/** x ** y. @param {number} x @param {number} y @returns {number | Fault} */
export function pow(x, y) {
  if (y === 0 || x === 1) return 1;
  if (x === 0) return y > 0 ? 0 : new Fault("divide-by-zero", "Zero to a negative power divides by zero.");
  if (y === 2) {
    const square = x * x;
    return square === Infinity ? too_large("the power") : square;
  }
  let odd = false;
  if (x < 0) {
    if (y !== Math.floor(y)) return new Fault("domain", "A negative number needs a whole power.");
    odd = y * 0.5 !== Math.floor(y * 0.5);
  }
  const near = near_power(Math.abs(x), y);
  if (near === near) return odd ? -near : near;
  const ln = pairs.log(Math.abs(x));
  const rough = y * ln[0];
  if (rough > 710) return too_large("the power");
  if (rough < -746) return odd ? -0 : 0;
  const [e, k] = pairs.exp(pairs.times(ln, y));
  const value = pairs.scale(e[0], k);
  if (value === Infinity) return too_large("the power");
  return odd ? -value : value;
}

/** x ** y the short way, or NaN; x > 0. @param {number} x @param {number} y */
function near_power(x, y) {
  const [ln, rest] = quick.log(x);
  if (Math.abs(y * ln) >= quick.MOST) return NaN;
  const [hi, lo] = pairs.two_prod(ln, y);
  return quick.exp(hi, lo + y * rest, quick.EXP_DOUBT + Math.abs(y) * quick.POWER_DOUBT);
}

/** x less the nearest multiple n of pi/2, and n modulo 4. @param {number} x @returns {[Pair, number]} */
function quadrant(x) {
  const n = Math.floor(x * TWO_OVER_PI + 0.5);
  let r = pairs.two_sum(x, -(n * PIO2_1));
  r = pairs.add(pairs.add(r, [-(n * PIO2_2), 0]), [-(n * PIO2_3), 0]);
  return [pairs.add(r, [-(n * PIO2_4), 0]), n - 4 * Math.floor(n / 4)];
}

/** Taylor's alternating series in r**2 over (first + 2 n)!. @param {Pair} r @param {number} first @returns {Pair} */
function series(r, first) {
  let square = pairs.mul(r, r);
  square = [-square[0], -square[1]];
  let total = pairs.FACTORIAL[first + 24];
  for (let n = first + 22; n >= 0; n -= 2) total = pairs.add(pairs.mul(total, square), pairs.FACTORIAL[n]);
  return total;
}

/** @param {number} x @param {number} ahead @returns {number | Fault} */
function turned(x, ahead) {
  if (Math.abs(x) > LARGEST_ANGLE) return new Fault("out-of-range", "The angle is beyond 1,000,000 rad.");
  const [r, found] = quadrant(x);
  const quarter = (found + ahead) % 4;
  const value = quarter % 2 === 1 ? series(r, 0)[0] : pairs.mul(series(r, 1), r)[0];
  return quarter >= 2 ? -value : value;
}

/** The sine of x in rad. @param {number} x @returns {number | Fault} */
export function sin(x) {
  return x === 0 ? x : turned(x, 0);
}

/** The cosine of x in rad. @param {number} x @returns {number | Fault} */
export function cos(x) {
  return turned(x, 1);
}

/** The angle in rad, between -pi/2 and pi/2, whose tangent is x. @param {number} x @returns {number} */
export function atan(x) {
  const a = Math.abs(x);
  if (a > 1152921504606846976) {
    const value = PIO2[0] + (PIO2[1] - 1 / a);
    return x < 0 ? -value : value;
  }
  /** @type {Pair} */
  const y = a > 1 ? pairs.div([1, 0], [a, 0]) : [a, 0];
  const k = Math.floor(8 * y[0] + 0.5);
  const c = k * 0.125;
  const t = pairs.div(pairs.add(y, [-c, 0]), pairs.add([1, 0], pairs.times(y, c)));
  let square = pairs.mul(t, t);
  square = [-square[0], -square[1]];
  let total = pairs.ODD[11];
  for (let n = 10; n >= 0; n -= 1) total = pairs.add(pairs.mul(total, square), pairs.ODD[n]);
  let angle = pairs.mul(total, t);
  if (k > 0) angle = pairs.add(ATAN_EIGHTHS[k], angle);
  if (a > 1) angle = pairs.add(PIO2, [-angle[0], -angle[1]]);
  return x < 0 ? -angle[0] : angle[0];
}

/** The error function. @param {number} x @returns {number} */
export function erf(x) {
  const a = Math.abs(x);
  if (a >= 6) return x < 0 ? -1 : 1;
  const square = pairs.two_prod(a, a);
  /** @type {Pair} */
  const double = [2 * square[0], 2 * square[1]];
  /** @type {Pair} */
  let term = [1, 0];
  /** @type {Pair} */
  let total = [1, 0];
  let n = 1;
  while (term[0] > total[0] * 1e-22) {
    term = pairs.mul(pairs.mul(term, double), pairs.ODD[n]);
    total = pairs.add(total, term);
    n += 1;
  }
  const [e, k] = pairs.exp([-square[0], -square[1]]);
  const value = pairs.scale(pairs.times(pairs.mul(pairs.mul(total, e), TWO_OVER_SQRT_PI), a)[0], k);
  return x < 0 ? -value : value;
}

/** @param {string} what */
function too_large(what) {
  return new Fault("overflow", `The result of ${what} is too large.`);
}
