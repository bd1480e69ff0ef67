/**
 * What a fit takes in: columns of numbers, their standard uncertainty, parameters; or why they cannot be used.
 * Twin of fieldkit/fits/columns.py, which says what is taken.
 * @module
 */

export const LARGEST = 1e30;
export const SMALLEST = 1e-30;
export const MOST = 1000000;
export const NO_SPAN = 1e-12;

/** Why a fit is not given: a stable code, a sentence, and the places (from 0) of the readings that are at fault. */
export class Refused {
  /** @param {string} code @param {string} says @param {number[]} [at] */
  constructor(code, says, at = []) {
    this.code = code;
    this.says = says;
    this.at = at;
  }
}

/** @typedef {{x: number[], y: number[], u: number[] | null}} Columns settings or times, readings, their uncertainty */

/** A finite double; null for all else. @param {unknown} x @returns {number | null} */
export function number(x) {
  if (typeof x !== "number") return null;
  return x - x === 0 ? x + 0 : null;
}

/** @param {number} value */
function too_far(value) {
  const size = Math.abs(value);
  return size > LARGEST || (0 < size && size < SMALLEST);
}

/** A number that is not a column. @param {string} what first in the sentence @param {unknown} x */
export function parameter(what, x) {
  const value = number(x);
  if (value === null) return new Refused("not-a-number", `${what} is not a number.`);
  if (too_far(value)) return new Refused("out-of-range", `${what} is too large or too small to compute with.`);
  return value;
}

/** A parameter above zero. @param {string} what @param {unknown} x @param {string} code */
export function positive(what, x, code) {
  const value = parameter(what, x);
  if (value instanceof Refused || value > 0) return value;
  return new Refused(code, `${what} is not above zero.`);
}

/** A whole number from `least` to a million. @param {string} what @param {unknown} x @param {number} least */
export function whole(what, x, least) {
  const value = parameter(what, x);
  if (value instanceof Refused) return value;
  if (value !== Math.floor(value) || value < least || value > MOST) {
    return new Refused("out-of-range", `${what} is not a whole number from ${least} to ${MOST}.`);
  }
  return value;
}

/** @param {string} names @param {unknown} given @returns {number[] | Refused} */
function column(names, given) {
  if (!Array.isArray(given)) return new Refused("not-a-column", `The ${names} are not a column of numbers.`);
  /** @type {number[]} */
  const found = [];
  for (const [i, x] of given.entries()) {
    const value = parameter(`Number ${i + 1} of the ${names}`, x);
    if (value instanceof Refused) return new Refused(value.code, value.says, [i]);
    found.push(value);
  }
  return found;
}

/** @param {unknown} u @param {number} n @returns {number[] | Refused | null} */
function uncertainty(u, n) {
  if (u === null || u === undefined) return null;
  const found = column("uncertainties", Array.isArray(u) ? u : Array(n).fill(u));
  if (found instanceof Refused) return found;
  if (found.length !== n) {
    return new Refused("unequal-lengths", `There are ${found.length} uncertainties for ${n} readings.`);
  }
  for (const [i, value] of found.entries()) {
    if (value <= 0) return new Refused("bad-uncertainty", `The uncertainty of reading ${i + 1} is not above zero.`, [i]);
  }
  return found;
}

/**
 * The columns of a fit that needs `least` readings.
 * @param {[string, string]} names their plurals @param {unknown} x @param {unknown} y @param {unknown} u
 * @param {number} least @returns {Columns | Refused}
 */
export function read(names, x, y, u, least) {
  const xs = column(names[0], x);
  if (xs instanceof Refused) return xs;
  const ys = column(names[1], y);
  if (ys instanceof Refused) return ys;
  if (xs.length !== ys.length) {
    return new Refused("unequal-lengths", `There are ${xs.length} ${names[0]} for ${ys.length} ${names[1]}.`);
  }
  const us = uncertainty(u, ys.length);
  if (us instanceof Refused) return us;
  if (xs.length < least) {
    return new Refused("too-few", `Too few ${names[1]}: ${xs.length}, and this needs at least ${least}.`);
  }
  return { x: xs, y: ys, u: us };
}

/** The least and the greatest; refused where they are equal, or nearly. @param {string} names @param {number[]} x @returns {[number, number] | Refused} */
export function spread(names, x) {
  let [low, high] = [x[0], x[0]];
  for (const value of x) {
    low = value < low ? value : low;
    high = value > high ? value : high;
  }
  const size = -low > high ? -low : high;
  if (high - low <= NO_SPAN * size) return new Refused("no-spread", `The ${names} are all equal, or nearly.`);
  return [low, high];
}

/** Refuses a column that has no logarithm, with the places. @param {string} names @param {number[]} x */
export function not_positive(names, x) {
  const at = [...x.keys()].filter((i) => x[i] <= 0);
  if (!at.length) return null;
  const places = at.map((i) => String(i + 1)).join(", ");
  return new Refused(
    "not-positive",
    `These ${names} are zero or below, and have no logarithm: ${places} (counted from 1). ` +
      "Leave them out, and say so, or read again.",
    at,
  );
}

/** How many readings there are, whatever they are. @param {unknown} given */
export function count(given) {
  return Array.isArray(given) ? given.length : 0;
}
