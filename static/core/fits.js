/**
 * Fits and advice: what columns of readings say, how sure it is, and why nothing is said where it is not sure enough.
 *
 * Twin of fieldkit/fits/__init__.py, which says what each does and what an answer holds; equal in every bit and every
 * sentence, held by tests/vectors/fits/ and a seeded differential test. No DOM, no IO.
 * To add a fit: a module in each twin, a line in FITS of both, a vector file.
 * @module
 */

import { bounded_secant } from "./fits/bounded_secant.js";
import { bursts } from "./fits/bursts.js";
import { curve } from "./fits/curve.js";
import { exponential_time_to } from "./fits/exponential_time_to.js";
import { knee_crossing } from "./fits/knee_crossing.js";
import { line } from "./fits/line.js";
import { parabola_vertex } from "./fits/parabola_vertex.js";
import { power_time_to } from "./fits/power_time_to.js";
import { time_to } from "./fits/time_to.js";

/** @type {Record<string, (...of: any[]) => import("./fits/answer.js").Answer>} */
export const FITS = {
  line,
  parabola_vertex,
  exponential_time_to,
  power_time_to,
  time_to,
  knee_crossing,
  bursts,
  bounded_secant,
  curve,
};

export { bounded_secant, bursts, curve, exponential_time_to, knee_crossing, line, parabola_vertex, power_time_to, time_to };
