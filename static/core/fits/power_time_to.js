/**
 * When a falling current reaches a limit, if it falls as a power of the time since pumping began: I = A t ** b.
 * Twin of fieldkit/fits/power_time_to.py.
 * @module
 */

import { FALLS, reach } from "./reach.js";
import * as words from "./words.js";

/** @param {unknown} times @param {unknown} currents @param {unknown} limit @param {unknown} [u] @param {words.Show} [show] */
export function power_time_to(times, currents, limit, u = null, show = words.plain) {
  return reach(FALLS.power, times, currents, limit, u, show);
}
