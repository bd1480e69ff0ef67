// Which stretch of the axis a scale shows, as exact integers. Twin of fieldkit/drawing/spread.py.

import { decimals, floor, scaled } from "./number.js";

/**
 * @typedef {object} Model a scale's model: fieldkit/drawing/scale.py lists the fields
 * @property {string | null} [value] @property {string | null} [u] @property {string} [unit]
 * @property {string | null} [low] @property {string | null} [high]
 * @property {string | null} [low_name] @property {string | null} [high_name]
 * @property {string | null} [caution_low] @property {string | null} [caution_high]
 * @property {string | null} [accept_low] @property {string | null} [accept_high]
 * @property {string | null} [plate] @property {string | null} [plate_name]
 * @property {{value: string, name: string}[] | null} [olds]
 * @property {string | null} [verdict] @property {string | null} [why] @property {string | null} [says]
 * @property {number | null} [width] @property {number | null} [height] @property {string} [ink]
 */

/**
 * @typedef {object} Spread all numbers times 10^places
 * @property {number} places @property {number} keep @property {bigint} a @property {bigint} b
 * @property {bigint | null} low @property {bigint | null} high
 * @property {bigint | null} caution_low @property {bigint | null} caution_high
 * @property {bigint | null} accept_low @property {bigint | null} accept_high
 * @property {bigint | null} value @property {bigint} u @property {bigint | null} plate
 * @property {bigint[]} olds @property {"" | "low" | "high"} far
 */

const EXTRA = 3;

/** @param {bigint} n */
const size = (n) => (n < 0n ? -n : n);
/** @param {bigint[]} of */
export const most = (of) => of.reduce((x, y) => (y > x ? y : x));
/** @param {bigint[]} of */
export const least = (of) => of.reduce((x, y) => (y < x ? y : x));
/** @param {(bigint | null)[]} of @returns {bigint[]} */
export const known = (of) => of.filter((x) => x !== null);

/** how many of a model's fields are limits */
const BOUNDS = 6;

/** @param {Model} model @param {boolean} stretch @returns {Spread} */
export function spread(model, stretch) {
  const olds = (model.olds || []).map((o) => o.value);
  const fields = [model.low, model.high, model.caution_low, model.caution_high, model.accept_low, model.accept_high,
    model.value, model.u, model.plate];
  const places = decimals(...fields, ...olds) + EXTRA;
  const keep = decimals(model.value, model.low, model.high);
  const found = fields.map((f) => scaled(f, places));
  // limits that rounding to a coarse meter's steps has crossed bound nothing, and are not drawn
  if (found[0] !== null && found[1] !== null && found[0] > found[1]) found.fill(null, 0, BOUNDS);
  const [low, high, caution_low, caution_high, accept_low, accept_high, value, given, plate] = found;
  const u = given ?? 0n;
  const old = known(olds.map((o) => scaled(o, places)));
  let [a, b] = plain(low, high, value, u, plate, old, 10n ** BigInt(places));
  /** @type {Spread["far"]} */
  let far = "";
  if (value !== null) {
    const room = stretch ? floor((b - a) * 2n, 3n) : 0n;
    if (value - u < a) {
      if (a - (value - u) <= room) a = value - u - floor(b - a, 20n);
      else far = "low";
    } else if (value + u > b) {
      if (value + u - b <= room) b = value + u + floor(b - a, 20n);
      else far = "high";
    }
    if (far && a <= value && value <= b) far = "";
  }
  return { places, keep, a, b, low, high, caution_low, caution_high, accept_low, accept_high, value, u, plate, olds: old, far };
}

/**
 * The axis before any stretching.
 * @param {bigint | null} low @param {bigint | null} high @param {bigint | null} value @param {bigint} u
 * @param {bigint | null} plate @param {bigint[]} olds @param {bigint} one @returns {[bigint, bigint]}
 */
function plain(low, high, value, u, plate, olds, one) {
  const around = most([size(value ?? 0n), 4n * u, one]);
  if (low !== null && high !== null) {
    const distance = size(high - low) || around;
    return [least([low, high]) - floor(distance, 4n), most([low, high]) + floor(distance, 4n)];
  }
  if (high !== null) {
    const length = size(high) || around;
    return [high - length, high + floor(length, 5n)];
  }
  if (low !== null) {
    const length = low > 0n ? floor(low * 3n, 5n) : -low || around;
    return [low - floor(length, 5n), low + length];
  }
  const marks = known([value, plate, ...olds]);
  if (!marks.length) return [0n, one];
  const reach = most([floor(most(marks.map(size)), 4n), 4n * u, floor(one, 10n)]);
  return [least(marks) - reach, most(marks) + reach];
}
