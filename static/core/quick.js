/**
 * exp and log in a tenth of the time of pairs.js, and nothing where the last bit is in doubt.
 *
 * Twin of fieldkit/formula/quick.py, line by line; its docstring says how, and reckons the bounds. No DOM, no IO.
 */

import * as pairs from "./pairs.js";
import { INV_LN2, LN2_1, LN2_2, LN2_3 } from "./pairs.js";

/** @typedef {import("./pairs.js").Pair} Pair */

/** The greatest exponent for which exp is asked here: all results are normal doubles. */
export const MOST = 700;

const [WHOLE, FINE] = [6755399441055744, 3072];
const [PER_STEP, STEP_1, STEP_2] = [INV_LN2 * 1024, LN2_1 / 1024, (LN2_2 + LN2_3) / 1024];
const [THIRD, SIXTH, TWENTY_FOURTH, HUNDRED_TWENTIETH] = [1 / 3, 1 / 6, 1 / 24, 1 / 120];
const LN2 = LN2_1 + LN2_2 + FINE - FINE;
const LN2_REST = LN2_1 - LN2 + LN2_2 + LN2_3;

export const EXP_DOUBT = 4.336808689942018e-19;
export const LOG_DOUBT = 4.235164736271502e-22;
export const POWER_DOUBT = 2 * LOG_DOUBT;

/** 2 ** (k / 1024) for k from 0 to 1023, in pairs, one after the other. */
function powers() {
  const [root] = pairs.exp([STEP_1, STEP_2]);
  const found = new Float64Array(2048);
  /** @type {Pair} */
  let power = [1, 0];
  for (let k = 0; k < 1024; k += 1) {
    found.set(power, 2 * k);
    power = pairs.mul(power, root);
  }
  return found;
}

/** The least c is LEAST / 1024. */
const LEAST = 724;

/** For c = k / 1024 from LEAST on, one after the other: c, 1 / c, log(c) in two parts. */
function logs() {
  const found = new Float64Array(4 * (1450 - LEAST));
  for (let k = LEAST; k < 1450; k += 1) {
    const c = k / 1024;
    const [hi, lo] = pairs.log(c);
    const fine = hi + FINE - FINE;
    found.set([c, 1 / c, fine, hi - fine + lo], 4 * (k - LEAST));
  }
  return found;
}

const STEPS = powers();
const LOGS = logs();
/** 2 ** (k - 1022) */
const DOUBLINGS = Float64Array.from({ length: 2046 }, (_, k) => pairs.power_of_two(k - 1022));

/** e ** (hi + lo), or NaN. @param {number} hi @param {number} [lo] @param {number} [doubt] @returns {number} */
export function exp(hi, lo = 0, doubt = EXP_DOUBT) {
  const n = hi * PER_STEP + WHOLE - WHOLE;
  const k = n | 0;
  const at = (k & 1023) << 1;
  const h = STEPS[at];
  const r = hi - n * STEP_1 - (n * STEP_2 - lo);
  const series = r + r * r * (0.5 + r * (SIXTH + r * (TWENTY_FOURTH + r * HUNDRED_TWENTIETH)));
  let rest = STEPS[at + 1] + h * series;
  const s = h + rest;
  rest -= s - h;
  return s + (rest - doubt) === s + (rest + doubt) ? s * DOUBLINGS[(k >> 10) + 1022] : NaN;
}

/** log(x) as a double and a rest, wrong by LOG_DOUBT at most; x > 0. @param {number} x @returns {Pair} */
export function log(x) {
  let [m, e] = pairs.frexp(x);
  if (m < pairs.SQRT_HALF) {
    m *= 2;
    e -= 1;
  }
  const at = ((m * 1024 + 0.5) | 0) * 4 - 4 * LEAST;
  const inverse = LOGS[at + 1];
  const z = m - LOGS[at];
  let r = z * inverse + FINE - FINE;
  const second = (z - r * LOGS[at]) * inverse;
  const hi = e * LN2 + LOGS[at + 2] + r;
  r += second;
  const series = second - r * r * (0.5 - r * (THIRD - r * (0.25 - r * (0.2 - r * SIXTH))));
  const rest = LOGS[at + 3] + (e * LN2_REST + series);
  const s = hi + rest;
  return [s, rest - (s - hi)];
}
