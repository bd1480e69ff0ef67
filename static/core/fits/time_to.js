/**
 * When a falling current reaches a limit, by both laws of falling: both shown, and the one that the readings follow.
 * Twin of fieldkit/fits/time_to.py, which says how the choice is made.
 * @module
 */

import { answer } from "./answer.js";
import * as columns from "./columns.js";
import { exponential_time_to } from "./exponential_time_to.js";
import { ln } from "./logs.js";
import { power_time_to } from "./power_time_to.js";
import * as words from "./words.js";

const { Refused } = columns;

/** @typedef {import("./answer.js").Answer} Answer */

export const CLEARLY = 4;
export const ROUNDING = 1e-13;

/** @param {unknown} times @param {unknown} currents @param {unknown} limit @param {unknown} [u] @param {words.Show} [show] */
export function time_to(times, currents, limit, u = null, show = words.plain) {
  show = words.guarded(show);
  /** @type {Record<string, Answer>} */
  const both = {
    exponential: exponential_time_to(times, currents, limit, u, show),
    power: power_time_to(times, currents, limit, u, show),
  };
  const n = columns.count(currents);
  /** @type {Answer} */
  const numbers = { n, value: null, u: null, chosen: null, clear: null, better: null, ...both };
  for (const one of [both.exponential, both.power]) {
    if (one.s === null) return answer("time-to", numbers, again(one), String);
  }
  let better = compared(both.exponential.s, both.power.s, n);
  const [closer, other] = better < 0 ? ["power", "exponential"] : ["exponential", "power"];
  better = better < 0 ? -better : better;
  const clear = better >= CLEARLY;
  Object.assign(numbers, { clear, better });
  const [chosen, refused] = clear ? /** @type {const} */ ([closer, again(both[closer])]) : later(both, closer, other);
  Object.assign(numbers, { chosen, value: both[chosen].value, u: both[chosen].u });
  return answer("time-to", numbers, refused, () => sentence(both, chosen, clear, show));
}

/** The refusal that a fit already gave. @param {Answer} one */
function again(one) {
  return one.refused === null ? null : new Refused(one.refused.code, one.refused.says, one.refused.at);
}

/** How much better the exponential is; below zero where the power is. @param {number} exponential @param {number} power @param {number} n */
function compared(exponential, power, n) {
  const one = exponential > ROUNDING ? exponential : ROUNDING;
  const other = power > ROUNDING ? power : ROUNDING;
  return 2 * n * ln(other / one);
}

/**
 * Of two laws that fit alike the one that takes longer.
 * @param {Record<string, Answer>} both @param {string} closer @param {string} other
 * @returns {[string, columns.Refused | null]}
 */
function later(both, closer, other) {
  const [first, second] = [again(both[closer]), again(both[other])];
  if (first !== null && second !== null && first.code === second.code) return [closer, first];
  for (const refused of [first, second]) {
    if (refused !== null) {
      return [
        closer,
        new Refused(
          "cannot-tell",
          "Both laws of falling fit these readings alike, and one of them gives no time to trust. Read on. " +
            `It says: ${refused.says}`,
        ),
      ];
    }
  }
  return [both[other].value > both[closer].value ? other : closer, null];
}

/** @param {Record<string, Answer>} both @param {string} chosen @param {boolean} clear @param {words.Show} show */
function sentence(both, chosen, clear, show) {
  const other = both[chosen === "exponential" ? "power" : "exponential"];
  const law = chosen === "exponential" ? "a power of time" : "an exponential";
  const beside = other.value === null ? "gives none" : `would give ${show("x", other.value, null)}`;
  const why = clear
    ? "fits these readings clearly worse"
    : "fits them about as well; the later time is given, to be on the safe side";
  return `${both[chosen].says} The other law, ${law}, ${beside}; it ${why}.`;
}
