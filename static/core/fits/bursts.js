/**
 * Bursts of a current above its slow trend, as of an ion pump during conditioning: how many, and do they get rarer?
 * Twin of fieldkit/fits/bursts.py, which says what is given and refused.
 * @module
 */

import { answer, nulls } from "./answer.js";
import * as columns from "./columns.js";
import { e_to, ln } from "./logs.js";
import * as robust from "./robust.js";
import { ROUNDING, max_size } from "./squares.js";
import * as words from "./words.js";

const { Refused } = columns;

/** @typedef {import("./answer.js").Answer} Answer */
/** @typedef {import("./columns.js").Columns} Columns */
/** @typedef {{law: string, slope: number, intercept: number, left: number[]}} Trend */

export const FEWEST = 20;
export const MOST = 500;
export const HIGH = 5;
export const ENOUGH = 4;
export const CLEAR = 2;
const NONE_SEEN = 2.995732273553991;
const HOUR = 3600;

/**
 * @param {unknown} times @param {unknown} currents @param {unknown} [inhibit] @param {unknown} [u]
 * @param {words.Show} [show]
 */
export function bursts(times, currents, inhibit = null, u = null, show = words.plain) {
  show = words.guarded(show);
  /** @type {Answer} */
  const numbers = {
    n: columns.count(currents),
    ...nulls("value", "u", "at_most", "hours", "inhibit", "above", "left_out", "trend", "scale", "z", "bursts"),
    ...nulls("frequency", "frequency_z", "height", "height_z"),
  };
  const level = inhibit === null || inhibit === undefined ? null : columns.positive("The inhibit", inhibit, "bad-inhibit");
  const given = columns.read(["times", "currents"], times, currents, u, 1);
  if (level instanceof Refused) return answer("bursts", numbers, level, String);
  if (given instanceof Refused) return answer("bursts", numbers, given, String);
  const places = [...given.y.keys()];
  const above = places.filter((i) => level !== null && given.y[i] >= level);
  const left_out = places.filter((i) => given.y[i] <= 0);
  Object.assign(numbers, { inhibit: level, above, left_out });
  const refused = unusable(given, left_out) ?? scaled(numbers, given);
  if (refused === null) counted(numbers, given);
  return answer("bursts", numbers, refused, () => sentence(numbers, given, show));
}

/** @param {Columns} given @param {number[]} left_out */
function unusable(given, left_out) {
  const back = [...given.x.keys()].filter((i) => i > 0 && !(given.x[i] > given.x[i - 1]));
  if (back.length) return new Refused("not-rising", `Time ${back[0] + 1} is not later than the one before it.`, back);
  const kept = given.y.length - left_out.length;
  if (left_out.length > kept) {
    return new Refused(
      "mostly-zero",
      `${left_out.length} of ${given.y.length} readings are zero or below: there is no trend.`,
      left_out,
    );
  }
  if (kept < FEWEST) {
    return new Refused("too-few", `Too few readings above zero: ${kept}, and this needs at least ${FEWEST}.`);
  }
  if (kept > MOST) {
    return new Refused("too-many", `Too many readings: ${kept}, and this takes ${MOST} at most. Give the last ${MOST}.`);
  }
  const spread = columns.spread("times", given.x);
  return spread instanceof Refused ? spread : null;
}

/** Puts trend, scale and z into `numbers`. @param {Answer} numbers @param {Columns} given */
function scaled(numbers, given) {
  const { u } = given;
  const kept = [...given.y.keys()].filter((i) => given.y[i] > 0);
  const y = kept.map((i) => ln(given.y[i]));
  const t = kept.map((i) => given.x[i]);
  let found = trend("exponential", t, y);
  let scale = robust.deviation(found.left);
  if (t[0] > 0) {
    const other = trend("power", t.map(ln), y);
    if (robust.deviation(other.left) < scale) {
      found = other;
      scale = robust.deviation(found.left);
    }
  }
  if (u !== null) {
    const meter = robust.median(kept.map((i) => u[i] / given.y[i]));
    scale = meter > scale ? meter : scale;
  }
  const { left, ...line } = found;
  Object.assign(numbers, { trend: line, scale });
  const floor = ROUNDING * max_size(y);
  if (scale <= floor && max_size(left) > floor) {
    return new Refused(
      "no-scatter",
      "More than half of the readings lie exactly on the trend, so nothing tells how much a reading " +
        "scatters. Give the standard uncertainty of the readings.",
    );
  }
  /** @type {(number | null)[]} */
  const z = Array(given.y.length).fill(null);
  for (const [k, i] of kept.entries()) z[i] = scale > floor ? left[k] / scale : 0;
  numbers.z = z;
  return null;
}

/** @param {string} law @param {number[]} x @param {number[]} y @returns {Trend} */
function trend(law, x, y) {
  const [slope, intercept] = robust.trend(x, y);
  return { law, slope, intercept, left: y.map((b, i) => b - (intercept + slope * x[i])) };
}

/** Puts the bursts, their rate and its change into `numbers`. @param {Answer} numbers @param {Columns} given */
function counted(numbers, given) {
  const { z, above } = numbers;
  /** @type {{first: number, last: number, peak: number, current: number, z: number | null}[]} */
  const found = [];
  let before = false;
  for (const [i, current] of given.y.entries()) {
    const high = above.includes(i) || (z[i] !== null && z[i] > HIGH);
    if (high && !before) found.push({ first: i, last: i, peak: i, current, z: z[i] });
    else if (high) {
      const one = found[found.length - 1];
      one.last = i;
      if (current > one.current) Object.assign(one, { peak: i, current, z: z[i] });
    }
    before = high;
  }
  const start = given.x[0];
  const span = given.x[given.x.length - 1] - start;
  const hours = span / HOUR;
  const count = found.length;
  Object.assign(numbers, { bursts: found, hours, value: count / hours });
  if (count === 0) numbers.at_most = NONE_SEEN / hours;
  else numbers.u = Math.sqrt(count) / hours;
  Object.assign(numbers, { frequency: "too few", height: "too few" });
  if (count < ENOUGH) return;
  let middle = 0;
  for (const one of found) middle += (given.x[one.peak] - start) / span;
  numbers.frequency_z = (middle / count - 0.5) * Math.sqrt(12 * count);
  numbers.height_z = kendall(found.map((one) => one.current));
  numbers.frequency = word(numbers.frequency_z, "rarer", "more often");
  numbers.height = word(numbers.height_z, "smaller", "larger");
}

/** Rising pairs less falling ones, in their standard deviations if the order were by chance. @param {number[]} x */
function kendall(x) {
  let score = 0;
  for (let j = 1; j < x.length; j += 1) {
    for (let i = 0; i < j; i += 1) score += Number(x[j] > x[i]) - Number(x[j] < x[i]);
  }
  const n = x.length;
  return score / Math.sqrt((n * (n - 1) * (2 * n + 5)) / 18);
}

/** @param {number} z @param {string} less @param {string} more */
function word(z, less, more) {
  if (z < -CLEAR) return less;
  return z > CLEAR ? more : "not clear";
}

/** @type {Record<string, string>} */
const FREQUENCY = {
  "rarer": "They get rarer.",
  "more often": "They come more often.",
  "not clear": "Whether they get rarer is not clear yet.",
  "too few": "",
};
/** @type {Record<string, string>} */
const HEIGHT = {
  "smaller": " They get smaller.",
  "larger": " They get larger.",
  "not clear": " Whether they get smaller is not clear yet.",
  "too few": "",
};

/** @param {Answer} numbers @param {Columns} given @param {words.Show} show */
function sentence(numbers, given, show) {
  const count = numbers.bursts.length;
  const hours = words.brief(numbers.hours, 3);
  const high = words.brief(100 * (e_to(HIGH * numbers.scale) - 1), 2);
  let rule = `readings more than ${high} % above the trend (${HIGH} robust standard deviations)`;
  if (numbers.inhibit !== null) rule += `, or at the inhibit of ${show("y", numbers.inhibit, null)}`;
  let text;
  if (count === 0) {
    text =
      `No burst in ${hours} h, by ${given.y.length} readings: with 95 % confidence fewer than ` +
      `${words.brief(numbers.at_most, 2)} per hour.`;
  } else {
    const noun = count === 1 ? "burst" : "bursts";
    text = `${count} ${noun} in ${hours} h; per hour: ${words.plain("rate", numbers.value, numbers.u)}.`;
    text += ` ${FREQUENCY[numbers.frequency]}`.trimEnd() + HEIGHT[numbers.height];
  }
  text += ` Counted are ${rule}. What happens between two readings is not seen.`;
  if (numbers.left_out.length) {
    text += ` ${numbers.left_out.length} readings at zero or below are left out of the trend.`;
  }
  return text;
}
