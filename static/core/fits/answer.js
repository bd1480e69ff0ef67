/**
 * The object that every fit gives: all its keys always, numbers finite, and the sentence.
 * Twin of fieldkit/fits/answer.py.
 * @module
 */

import { Refused } from "./columns.js";

/** @typedef {Record<string, any>} Answer */

/** Nulls for `keys`. @param {string[]} keys @returns {Answer} */
export function nulls(...keys) {
  return Object.fromEntries(keys.map((key) => [key, null]));
}

/**
 * `numbers` with fit, refused and says. Any number that is not finite becomes null and refuses the fit.
 * @param {string} fit @param {Answer} numbers @param {Refused | null} refused @param {() => string} says
 * @returns {Answer}
 */
export function answer(fit, numbers, refused, says) {
  const held = [true];
  const clean = finite(numbers, held);
  if (refused === null && !held[0]) {
    refused = new Refused("overflow", "A number in this fit is too large to compute with.");
  }
  return {
    fit,
    ...clean,
    refused: refused === null ? null : { code: refused.code, says: refused.says, at: refused.at },
    says: refused === null ? says() : refused.says,
  };
}

/** @param {any} value @param {boolean[]} held @returns {any} */
function finite(value, held) {
  if (typeof value === "number") {
    if (value - value === 0) return value + 0;
    held[0] = false;
    return null;
  }
  if (Array.isArray(value)) return value.map((v) => finite(v, held));
  if (typeof value === "object" && value !== null) {
    return Object.fromEntries(Object.entries(value).map(([key, v]) => [key, finite(v, held)]));
  }
  return value;
}
