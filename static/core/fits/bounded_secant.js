/**
 * The next setting toward a target, from the last two settings and readings: a secant step that is never large.
 * Twin of fieldkit/fits/bounded_secant.py, which says what is given and refused.
 * @module
 */

import { answer, nulls } from "./answer.js";
import * as columns from "./columns.js";
import * as words from "./words.js";

const { Refused } = columns;

/** @typedef {import("./answer.js").Answer} Answer */
/** @typedef {{target: number, most: number, low: number, high: number, sign: number | null, least: number | null}} Bounds */
/** @typedef {{x1: number, y1: number, x2: number, y2: number, u: number | null}} Now */

export const FLAT = 3;

/**
 * @param {unknown} settings @param {unknown} readings @param {unknown} target @param {unknown} most
 * @param {unknown} low @param {unknown} high @param {unknown} [u] @param {unknown} [sign] @param {unknown} [inhibits]
 * @param {unknown} [resolution] @param {words.Show} [show]
 */
export function bounded_secant(
  settings, readings, target, most, low, high, u = null, sign = null, inhibits = null, resolution = null, show = words.plain,
) {
  show = words.guarded(show);
  /** @type {Answer} */
  const numbers = {
    n: columns.count(readings),
    ...nulls("value", "u", "change", "aim", "slope", "clipped", "there", "target", "present"),
  };
  const given = columns.read(["settings", "readings"], settings, readings, u, 2);
  const bounds = bounds_of(target, most, low, high, sign, resolution);
  const near = near_inhibit(inhibits);
  if (bounds instanceof Refused) return answer("bounded-secant", numbers, bounds, String);
  if (given instanceof Refused) return answer("bounded-secant", numbers, given, String);
  if (near !== null) return answer("bounded-secant", numbers, near, String);
  const n = given.x.length;
  /** @type {Now} */
  const now = { x1: given.x[n - 2], y1: given.y[n - 2], x2: given.x[n - 1], y2: given.y[n - 1], u: null };
  if (given.u !== null) now.u = given.u[n - 1] > given.u[n - 2] ? given.u[n - 1] : given.u[n - 2];
  Object.assign(numbers, { target: bounds.target, present: now.x2, there: is_there(now, bounds) });
  const refused = step(numbers, now, bounds, show);
  return answer("bounded-secant", numbers, refused, () => sentence(numbers, now, bounds, show));
}

/**
 * @param {unknown} target @param {unknown} most @param {unknown} low @param {unknown} high @param {unknown} sign
 * @param {unknown} resolution @returns {Bounds | columns.Refused}
 */
function bounds_of(target, most, low, high, sign, resolution) {
  const goal = columns.parameter("The target", target);
  const change = columns.positive("The permitted change", most, "bad-change");
  const from = columns.parameter("The lower end of the permitted range", low);
  const to = columns.parameter("The upper end of the permitted range", high);
  const least = resolution === null || resolution === undefined ? null : columns.positive("The resolution", resolution, "bad-resolution");
  if (goal instanceof Refused) return goal;
  if (change instanceof Refused) return change;
  if (from instanceof Refused) return from;
  if (to instanceof Refused) return to;
  if (least instanceof Refused) return least;
  if (!(from < to)) {
    return new Refused("bad-range", "The lower end of the permitted range is not below its upper end.");
  }
  const given = sign !== null && sign !== undefined;
  const wanted = given ? columns.number(sign) : null;
  if (given && wanted !== 1 && wanted !== -1) {
    return new Refused("bad-sign", "The expected sign of the slope is 1 or -1.");
  }
  return { target: goal, most: change, low: from, high: to, sign: wanted, least };
}

/** Refuses where a reading is near its inhibit, or what is said of it is not clear. @param {unknown} inhibits */
function near_inhibit(inhibits) {
  if (inhibits === null || inhibits === undefined) return null;
  if (!Array.isArray(inhibits)) return new Refused("bad-inhibit", "The inhibits are not a list.");
  for (const one of inhibits) {
    if (typeof one !== "object" || one === null || Array.isArray(one) || typeof one.name !== "string") {
      return new Refused("bad-inhibit", "An inhibit has no name.");
    }
    const { name } = one;
    const reading = columns.parameter(`The reading of ${name}`, one.reading);
    const level = columns.positive(`The inhibit of ${name}`, one.inhibit, "bad-inhibit");
    const part = columns.positive(`The nearness to the inhibit of ${name}`, one.near, "bad-inhibit");
    if (reading instanceof Refused) return new Refused("bad-inhibit", reading.says);
    if (level instanceof Refused) return new Refused("bad-inhibit", level.says);
    if (part instanceof Refused) return new Refused("bad-inhibit", part.says);
    if (part > 1) {
      return new Refused("bad-inhibit", `The nearness to the inhibit of ${name} is above 1, which is the inhibit itself.`);
    }
    if (Math.abs(reading) >= part * level) {
      return new Refused(
        "inhibit-near",
        `The reading of ${name} is at ${words.brief(100 * (Math.abs(reading) / level), 3)} % of its inhibit; from ` +
          `${words.brief(100 * part, 3)} % on no next setting is advised. Find out why first.`,
      );
    }
  }
  return null;
}

/** @param {Now} now @param {Bounds} bounds */
function is_there(now, bounds) {
  const left = Math.abs(bounds.target - now.y2);
  return left === 0 || (now.u !== null && left <= words.K * now.u);
}

/** Puts slope, aim and advised setting into `numbers`. @param {Answer} numbers @param {Now} now @param {Bounds} bounds @param {words.Show} show */
function step(numbers, now, bounds, show) {
  const { x1, y1, x2, y2, u } = now;
  if (x2 < bounds.low || x2 > bounds.high) {
    return new Refused("outside-range", `The present setting, ${show("x", x2, null)}, is outside the permitted range.`);
  }
  if (numbers.there) {
    Object.assign(numbers, { value: x2, change: 0 });
    return null;
  }
  if (x1 === x2) return new Refused("equal-settings", "The last two settings are equal: they tell no slope.");
  const rise = y2 - y1;
  const slope = rise / (x2 - x1);
  numbers.slope = slope;
  if (rise === 0 || (u !== null && Math.abs(rise) < FLAT * u)) {
    const size = u === null ? "" : `, less than three of its standard uncertainties, ${show("y", u, null)}`;
    return new Refused(
      "flat",
      `The reading changed by ${show("y", Math.abs(rise), null)} only between the last two settings${size}: there is ` +
        "no slope to go by.",
    );
  }
  if (bounds.sign !== null && slope * bounds.sign < 0) {
    const [did, expected] = slope > 0 ? ["rose", "fall"] : ["fell", "rise"];
    return new Refused(
      "contrary-slope",
      `The reading ${did} with the setting, where it should ${expected}: something else changed. Go back to the ` +
        "setting before, and find out what.",
    );
  }
  const share = (bounds.target - y2) / rise;
  const wanted = share * (x2 - x1);
  numbers.aim = x2 + wanted;
  if (u !== null) numbers.u = (Math.sqrt(share * share + (1 + share) * (1 + share)) * u) / Math.abs(slope);
  return bound(numbers, wanted, x2, bounds, show);
}

/** @param {Answer} numbers @param {number} wanted @param {number} x2 @param {Bounds} bounds @param {words.Show} show */
function bound(numbers, wanted, x2, bounds, show) {
  const { most, low, high } = bounds;
  /** @type {[number, string | null]} */
  let [change, clipped] = [wanted, null];
  if (Math.abs(wanted) > most) [change, clipped] = [wanted > 0 ? most : -most, "change"];
  if (x2 + change < low) [change, clipped] = [low - x2, "low"];
  else if (x2 + change > high) [change, clipped] = [high - x2, "high"];
  const value = inside(x2, whole(change, bounds.least), bounds);
  numbers.clipped = clipped;
  if (value === x2 && clipped !== "low" && clipped !== "high") {
    return new Refused("change-too-small", "The change is smaller than the setting can be given.");
  }
  if (value === x2) {
    return new Refused(
      "range-end",
      `The present setting, ${show("x", x2, null)}, is as far as is permitted, and the target lies beyond: the ` +
        `line would meet it at ${show("x", numbers.aim, null)}.`,
    );
  }
  Object.assign(numbers, { value, change: value - x2 });
  return null;
}

/** The change in whole steps of the setting, toward none. @param {number} change @param {number | null} least */
function whole(change, least) {
  if (least === null) return change;
  const size = Math.floor(Math.abs(change) / least + 1e-9) * least;
  return change > 0 ? size : -size;
}

/** x2 + change where neither the change nor the range is overstepped, not even by rounding. @param {number} x2 @param {number} change @param {Bounds} bounds */
function inside(x2, change, { most, low, high }) {
  for (const less of [0, 2.220446049250313e-16, 4.440892098500626e-16]) {
    const value = x2 + (change - less * (change + Math.abs(x2) * (change > 0 ? 1 : -1)));
    if (low <= value && value <= high && Math.abs(value - x2) <= most) return value;
  }
  return x2;
}

/** @param {Answer} numbers @param {Now} now @param {Bounds} bounds @param {words.Show} show */
function sentence(numbers, now, bounds, show) {
  if (numbers.there) {
    return (
      `The reading, ${show("y", now.y2, now.u)}, is at the target, ${show("y", bounds.target, null)}, as ` +
      "nearly as it can be read: leave the setting."
    );
  }
  let text =
    `Try ${show("setting", numbers.value, null)}. By the last two readings the slope is ` +
    `${show("slope", numbers.slope, null)}; a straight line through them meets the target, ` +
    `${show("y", bounds.target, null)}, at ${show("x", numbers.aim, numbers.u)}.`;
  if (numbers.clipped === "change") text += ` The advice stops at the permitted change, ${show("x", bounds.most, null)}.`;
  else if (numbers.clipped !== null) text += " The advice stops at the end of the permitted range.";
  const known = numbers.u !== null ? "" : " The readings came without an uncertainty.";
  return `${text}${known} It holds near these two settings only: read again after it.`;
}
