/**
 * exp, log, pow, sin, cos, atan, erf from + - * / and exact scaling: the same numbers on every machine.
 *
 * Twin of fieldkit/formula/elementary.py, line by line; its docstring says what is promised and by which methods.
 * tests/vectors/elementary/ and the differential test hold the two together, bit for bit. No DOM, no IO.
 */

import { Fault } from "./values.js";

/** @typedef {[number, number]} Pair a number hi + lo */

const INV_LN2 = 1.4426950408889634;
const [LN2_1, LN2_2, LN2_3] = [0.6931471803691238, 1.9082149288430703e-10, 4.275175589747649e-20];
const TWO_OVER_PI = 0.6366197723675814;
const [PIO2_1, PIO2_2, PIO2_3, PIO2_4] = [
  1.5707963267341256, 6.077100506303966e-11, 2.0222662487111665e-21, 8.4784276603689e-32,
];
/** @type {Pair} */
const PIO2 = [1.5707963267948966, 6.123233995736766e-17];
/** @type {Pair} */
const TWO_OVER_SQRT_PI = [1.1283791670955126, 1.533545961316588e-17];
const SQRT_HALF = 0.7071067811865476;
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

/** @param {number} a @param {number} b @returns {Pair} */
function two_sum(a, b) {
  const s = a + b;
  const t = s - a;
  return [s, a - (s - t) + (b - t)];
}

/** @param {number} a @param {number} b @returns {Pair} */
function fast(a, b) {
  const s = a + b;
  return [s, b - (s - a)];
}

/** @param {number} a @param {number} b @returns {Pair} */
function two_prod(a, b) {
  const p = a * b;
  let t = 134217729 * a;
  const ah = t - (t - a);
  const al = a - ah;
  t = 134217729 * b;
  const bh = t - (t - b);
  const bl = b - bh;
  return [p, ah * bh - p + ah * bl + al * bh + al * bl];
}

/** @param {Pair} a @param {Pair} b @returns {Pair} */
function add(a, b) {
  let [s, e] = two_sum(a[0], b[0]);
  const [t, f] = two_sum(a[1], b[1]);
  [s, e] = fast(s, e + t);
  return fast(s, e + f);
}

/** @param {Pair} a @param {Pair} b @returns {Pair} */
function mul(a, b) {
  const [p, e] = two_prod(a[0], b[0]);
  return fast(p, e + (a[0] * b[1] + a[1] * b[0]));
}

/** @param {Pair} a @param {number} b @returns {Pair} */
function times(a, b) {
  const [p, e] = two_prod(a[0], b);
  return fast(p, e + a[1] * b);
}

/** @param {Pair} a @param {Pair} b @returns {Pair} */
function div(a, b) {
  const q1 = a[0] / b[0];
  let p = times(b, q1);
  let r = add(a, [-p[0], -p[1]]);
  const q2 = r[0] / b[0];
  p = times(b, q2);
  r = add(r, [-p[0], -p[1]]);
  const q3 = r[0] / b[0];
  const s = fast(q1, q2);
  return add(s, [q3, 0]);
}

/** @returns {Pair[]} */
function inverse_factorials() {
  /** @type {Pair[]} */
  const found = [[1, 0]];
  for (let n = 1; n < 27; n += 1) found.push(div(found[n - 1], [n, 0]));
  return found;
}

/** 1 / n! */
const FACTORIAL = inverse_factorials();
/** 1 / (2 n + 1) */
const ODD = Array.from({ length: 140 }, (_, n) => div([1, 0], [2 * n + 1, 0]));

const BITS = new DataView(new ArrayBuffer(8));

/** 2 ** k exactly, for a normal result. @param {number} k */
function power_of_two(k) {
  BITS.setBigUint64(0, BigInt(k + 1023) << 52n);
  return BITS.getFloat64(0);
}

/** x = m * 2 ** e with m from 0.5 to below 1; x > 0. @param {number} x @returns {[number, number]} */
function frexp(x) {
  const lift = x < 2.2250738585072014e-308 ? 54 : 0;
  BITS.setFloat64(0, lift ? x * 18014398509481984 : x);
  const bits = BITS.getBigUint64(0);
  const e = Number((bits >> 52n) & 0x7ffn) - 1022;
  BITS.setBigUint64(0, (bits & 0x800fffffffffffffn) | (1022n << 52n));
  return [BITS.getFloat64(0), e - lift];
}

/** x * 2 ** k in two exact steps and at most one rounding. @param {number} x @param {number} k */
function scale(x, k) {
  const half = Math.floor(k / 2);
  return x * power_of_two(half) * power_of_two(k - half);
}

/** e ** x as a pair near 1 and a power of two; |x| below 800. @param {Pair} x @returns {[Pair, number]} */
function exp_pair(x) {
  const k = Math.floor(x[0] * INV_LN2 + 0.5);
  let r = add(two_sum(x[0], -(k * LN2_1)), [x[1], 0]);
  r = add(add(r, [-(k * LN2_2), 0]), [-(k * LN2_3), 0]);
  r = [r[0] * 0.015625, r[1] * 0.015625];
  let s = FACTORIAL[9];
  for (let n = 8; n > 0; n -= 1) s = add(mul(s, r), FACTORIAL[n]);
  let e = mul(s, r);
  for (let n = 0; n < 6; n += 1) e = add([2 * e[0], 2 * e[1]], mul(e, e));
  return [add([1, 0], e), k];
}

/** ln x as a pair; x > 0. @param {number} x @returns {Pair} */
function log_pair(x) {
  let [m, e] = frexp(x);
  if (m < SQRT_HALF) {
    m *= 2;
    e -= 1;
  }
  const s = div([m - 1, 0], two_sum(m, 1));
  const square = mul(s, s);
  let total = ODD[15];
  for (let n = 14; n >= 0; n -= 1) total = add(mul(total, square), ODD[n]);
  total = mul(total, s);
  total = [2 * total[0], 2 * total[1]];
  if (e === 0) return total;
  const rest = add([e * LN2_2, 0], [e * LN2_3, 0]);
  return add([e * LN2_1, 0], add(rest, total));
}

/** @param {number} x @returns {number | Fault} */
export function exp(x) {
  if (x > 710) return too_large("exp");
  if (x < -746) return 0;
  const [e, k] = exp_pair([x, 0]);
  const value = scale(e[0], k);
  return value === Infinity ? too_large("exp") : value;
}

/** The natural logarithm; domain for x <= 0. @param {number} x @returns {number | Fault} */
export function log(x) {
  if (x <= 0) return new Fault("domain", "The logarithm needs a number above zero.");
  return log_pair(x)[0];
}

/** x ** y. @param {number} x @param {number} y @returns {number | Fault} */
export function pow(x, y) {
  if (y === 0 || x === 1) return 1;
  if (x === 0) return y > 0 ? 0 : new Fault("divide-by-zero", "Zero to a negative power divides by zero.");
  let odd = false;
  if (x < 0) {
    if (y !== Math.floor(y)) return new Fault("domain", "A negative number needs a whole power.");
    odd = y * 0.5 !== Math.floor(y * 0.5);
  }
  const ln = log_pair(Math.abs(x));
  const rough = y * ln[0];
  if (rough > 710) return too_large("the power");
  if (rough < -746) return odd ? -0 : 0;
  const [e, k] = exp_pair(times(ln, y));
  const value = scale(e[0], k);
  if (value === Infinity) return too_large("the power");
  return odd ? -value : value;
}

/** x less the nearest multiple n of pi/2, and n modulo 4. @param {number} x @returns {[Pair, number]} */
function quadrant(x) {
  const n = Math.floor(x * TWO_OVER_PI + 0.5);
  let r = two_sum(x, -(n * PIO2_1));
  r = add(add(r, [-(n * PIO2_2), 0]), [-(n * PIO2_3), 0]);
  return [add(r, [-(n * PIO2_4), 0]), n - 4 * Math.floor(n / 4)];
}

/** Taylor's alternating series in r**2 over (first + 2 n)!. @param {Pair} r @param {number} first @returns {Pair} */
function series(r, first) {
  let square = mul(r, r);
  square = [-square[0], -square[1]];
  let total = FACTORIAL[first + 24];
  for (let n = first + 22; n >= 0; n -= 2) total = add(mul(total, square), FACTORIAL[n]);
  return total;
}

/** @param {number} x @param {number} ahead @returns {number | Fault} */
function turned(x, ahead) {
  if (Math.abs(x) > LARGEST_ANGLE) return new Fault("out-of-range", "The angle is beyond 1,000,000 rad.");
  const [r, found] = quadrant(x);
  const quarter = (found + ahead) % 4;
  const value = quarter % 2 === 1 ? series(r, 0)[0] : mul(series(r, 1), r)[0];
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
  const y = a > 1 ? div([1, 0], [a, 0]) : [a, 0];
  const k = Math.floor(8 * y[0] + 0.5);
  const c = k * 0.125;
  const t = div(add(y, [-c, 0]), add([1, 0], times(y, c)));
  let square = mul(t, t);
  square = [-square[0], -square[1]];
  let total = ODD[11];
  for (let n = 10; n >= 0; n -= 1) total = add(mul(total, square), ODD[n]);
  let angle = mul(total, t);
  if (k > 0) angle = add(ATAN_EIGHTHS[k], angle);
  if (a > 1) angle = add(PIO2, [-angle[0], -angle[1]]);
  return x < 0 ? -angle[0] : angle[0];
}

/** The error function. @param {number} x @returns {number} */
export function erf(x) {
  const a = Math.abs(x);
  if (a >= 6) return x < 0 ? -1 : 1;
  const square = two_prod(a, a);
  /** @type {Pair} */
  const double = [2 * square[0], 2 * square[1]];
  /** @type {Pair} */
  let term = [1, 0];
  /** @type {Pair} */
  let total = [1, 0];
  let n = 1;
  while (term[0] > total[0] * 1e-22) {
    term = mul(mul(term, double), ODD[n]);
    total = add(total, term);
    n += 1;
  }
  const [e, k] = exp_pair([-square[0], -square[1]]);
  const value = scale(times(mul(mul(total, e), TWO_OVER_SQRT_PI), a)[0], k);
  return x < 0 ? -value : value;
}

/** @param {string} what */
function too_large(what) {
  return new Fault("overflow", `The result of ${what} is too large.`);
}
