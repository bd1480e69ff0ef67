/**
 * Uncertainty carried through a formula, to first order. Twin of fieldkit/formula/spread.py, whose docstring says what
 * contributions and sources are. Plain objects keep the order in which sources are first met; sources that look like
 * whole numbers would not, so they travel in a Map. No DOM, no IO.
 */

import { Fault } from "./values.js";

/** @typedef {Map<string, number>} Contributions */

/**
 * Contributions of a result: derivatives by name, and the contributions of each name; a name without any is exact.
 * @param {Map<string, number>} of @param {Map<string, Contributions>} worth @returns {Contributions}
 */
export function contributions(of, worth) {
  /** @type {Contributions} */
  const found = new Map();
  for (const [name, slope] of of) {
    for (const [source, part] of worth.get(name) ?? []) {
      const d = slope * part;
      const before = found.get(source);
      found.set(source, before === undefined ? d : before + d);
    }
  }
  return found;
}

/** The standard uncertainty: square root of the sum of squares, from left to right. @param {Contributions} found @returns {number | Fault} */
export function standard(found) {
  let most = 0;
  for (const part of found.values()) {
    if (part - part !== 0) return new Fault("overflow", "The uncertainty is too large.");
    most = Math.abs(part) > most ? Math.abs(part) : most;
  }
  if (most === 0) return 0;
  let total = 0;
  for (const part of found.values()) total = total + (part / most) * (part / most);
  const u = most * Math.sqrt(total);
  return u - u === 0 ? u : new Fault("overflow", "The uncertainty is too large.");
}
