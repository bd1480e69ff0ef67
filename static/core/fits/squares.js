/**
 * Least squares for a straight line or a parabola, by orthogonal polynomials, with everything that follows from it.
 * Twin of fieldkit/fits/squares.py, which says how, and what the uncertainty is.
 * @module
 */

import { nulls } from "./answer.js";
import { Refused, spread } from "./columns.js";
import * as words from "./words.js";

export const NO_LENGTH = 1e-24;
export const ROUNDING = 1e-13;

/** @typedef {import("./columns.js").Columns} Columns */
/** @typedef {[number[], number, number[]]} Member values, squared length, coefficients in t */

/**
 * A fitted polynomial in z = x - centre; all coefficients constant first.
 * @typedef {object} Fit
 * @property {number} n @property {number} freedom @property {number} low @property {number} high
 * @property {number} centre @property {number[]} local
 * @property {[number, number[]][]} parts of each orthogonal polynomial: the variance of its coefficient, itself in z
 * @property {number} s @property {number | null} u_reading @property {number[]} residuals
 * @property {number[]} weights
 * @property {number} floor a residual below this is rounding
 */

/** Of a quantity with this gradient by the coefficients in z. @param {Fit} found @param {number[]} gradient */
export function variance(found, gradient) {
  let total = 0;
  for (const [of_part, part] of found.parts) {
    let slope = 0;
    for (const [i, c] of part.entries()) slope += gradient[i] * c;
    total += of_part * (slope * slope);
  }
  return total;
}

/** @param {Fit} found @param {number} z */
export function at(found, z) {
  let value = 0;
  for (const c of [...found.local].reverse()) value = value * z + c;
  return value;
}

/**
 * The polynomial of degree 1 or 2 through `columns`; refused where the settings do not determine it.
 * @param {Columns} columns @param {number} degree @param {string} [names] @returns {Fit | Refused}
 */
export function fit(columns, degree, names = "settings") {
  const { x } = columns;
  const n = x.length;
  const ends = spread(names, x);
  if (ends instanceof Refused) return ends;
  const [weights, u_reading] = weigh(columns.u, n);
  const centre = total(x) / n;
  const reach = max_size(x.map((v) => v - centre));
  const basis = members(x.map((v) => (v - centre) / reach), weights, degree, NO_LENGTH * n);
  if (basis === null) {
    return new Refused("no-spread", `There are too few different ${names} for this fit: it needs ${degree + 1}.`);
  }
  let left = [...columns.y];
  /** @type {number[]} */
  const found = [];
  for (const [values, length] of basis) {
    const size = total(left.map((r, i) => weights[i] * r * values[i])) / length;
    left = left.map((r, i) => r - size * values[i]);
    found.push(size);
  }
  const freedom = n - degree - 1;
  const floor = ROUNDING * max_size(columns.y);
  let s_squared = total(left.map((r, i) => weights[i] * r * r)) / freedom;
  s_squared = s_squared > floor * floor ? s_squared : 0;
  let spread_squared = s_squared;
  if (u_reading !== null && u_reading * u_reading > spread_squared) spread_squared = u_reading * u_reading;
  const in_z = basis.map(([, , polynomial]) => by_reach(polynomial, reach));
  let local = Array(degree + 1).fill(0);
  for (const [k, part] of in_z.entries()) local = local.map((a, i) => a + found[k] * part[i]);
  /** @type {[number, number[]][]} */
  const parts = basis.map(([, length], k) => [spread_squared / length, in_z[k]]);
  const [low, high] = ends;
  return { n, freedom, low, high, centre, local, parts, s: Math.sqrt(s_squared), u_reading, residuals: left, weights, floor };
}

/** What every least-squares fit tells; nulls where there is none. @param {Fit | null} found @param {number} n */
export function numbers(found, n) {
  if (found === null) {
    return { n, ...nulls("freedom", "few", "coefficients", "covariance", "s", "u_reading", "residuals") };
  }
  const moved = found.parts.map(([of_part, part]) => /** @type {const} */ ([of_part, shifted(part, found.centre)]));
  const covariance = moved.map((_, i) => moved.map((__, j) => total(moved.map(([v, p]) => v * p[i] * p[j]))));
  return {
    n,
    freedom: found.freedom,
    few: found.freedom < words.FEW,
    coefficients: shifted(found.local, found.centre),
    covariance,
    s: found.s,
    u_reading: found.u_reading,
    residuals: found.residuals,
  };
}

/** The greatest magnitude. @param {number[]} x */
export function max_size(x) {
  let found = 0;
  for (const value of x) found = Math.abs(value) > found ? Math.abs(value) : found;
  return found;
}

/** The sum from left to right. @param {number[]} x */
export function total(x) {
  let found = 0;
  for (const value of x) found += value;
  return found;
}

/** Weights of average 1, and the uncertainty of a reading of weight 1. @param {number[] | null} u @param {number} n @returns {[number[], number | null]} */
export function weigh(u, n) {
  if (u === null) return [Array(n).fill(1), null];
  const shared = n / total(u.map((v) => 1 / (v * v)));
  return [u.map((v) => shared / (v * v)), Math.sqrt(shared)];
}

/**
 * Orthogonal polynomials at `t`.
 * @param {number[]} t @param {number[]} weights @param {number} degree @param {number} least @returns {Member[] | null}
 */
function members(t, weights, degree, least) {
  const length = total(weights);
  const first = total(t.map((v, i) => weights[i] * v)) / length;
  const line = t.map((v) => v - first);
  const squared = total(line.map((v, i) => weights[i] * v * v));
  if (squared <= least) return null;
  const rest = Array(degree - 1).fill(0);
  /** @type {Member[]} */
  const basis = [
    [t.map(() => 1), length, [1, 0, ...rest]],
    [line, squared, [-first, 1, ...rest]],
  ];
  if (degree === 1) return basis;
  const second = total(line.map((v, i) => weights[i] * v * v * t[i])) / squared;
  const back = squared / length;
  const bow = line.map((v, i) => (t[i] - second) * v - back);
  const bowed = total(bow.map((v, i) => weights[i] * v * v));
  if (bowed <= least) return null;
  return [...basis, [bow, bowed, [first * second - back, -(first + second), 1]]];
}

/** A polynomial in t = z / reach as one in z. @param {number[]} part @param {number} reach */
function by_reach(part, reach) {
  let power = 1;
  return part.map((c) => {
    const found = c / power;
    power *= reach;
    return found;
  });
}

/** A polynomial in z = x - centre as one in x. @param {number[]} part @param {number} centre */
function shifted(part, centre) {
  if (part.length === 2) return [part[0] - part[1] * centre, part[1]];
  const [a, b, c] = part;
  return [(c * centre - b) * centre + a, b - 2 * c * centre, c];
}
