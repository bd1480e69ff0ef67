/**
 * When a falling current reaches a limit, if it falls by the same part in equal times: I = A exp(b t).
 * Twin of fieldkit/fits/exponential_time_to.py.
 * @module
 */

import { FALLS, reach } from "./reach.js";
import * as words from "./words.js";

/** @param {unknown} times @param {unknown} currents @param {unknown} limit @param {unknown} [u] @param {words.Show} [show] */
export function exponential_time_to(times, currents, limit, u = null, show = words.plain) {
  return reach(FALLS.exponential, times, currents, limit, u, show);
}
