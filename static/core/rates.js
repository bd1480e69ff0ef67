/**
 * How the answer of each function of the language changes with what it is given: the rules behind slopes.js.
 *
 * Twin of fieldkit/formula/rates.py, maker by maker; its docstring says how parts are put together and which slope counts
 * where two meet. Here a part that has no value throws LOST, and a slope without bound STEEP. No DOM, no IO.
 */

import * as elementary from "./elementary.js";
import { FUNCTIONS } from "./functions.js";

/** Derivatives by name; never changed once given. @typedef {Map<string, number>} Slopes */
/** @typedef {{v: any, slopes: Slopes}} Found */
/** A node: value and derivatives, from what names mean and (in a formula) how its arguments change. @typedef {(e: any[], g: Slopes[] | null) => Found} Look */

/** @type {Slopes} */
export const NONE = new Map();
const ERF = 1.1283791670955126;

/** A slope without bound ends a differentiation; caught in the same call. */
export const STEEP = new Error("steep");
/** There is no value; which Fault it is, the evaluation itself tells. */
export const LOST = new Error("lost");

/** A part that is already worked out. @param {any} p */
export function given(p) {
  return p;
}

/** One of many parts that are already worked out. @param {number} k */
export function place(k) {
  return (/** @type {any[]} */ p) => p[k];
}

/** What a plain part gives, as a number. @param {any} value @returns {number} */
export function sure(value) {
  if (typeof value !== "number") throw LOST;
  return value;
}

/** The chain rule for one part. @param {number} factor @param {Slopes} slopes @returns {Slopes} */
export function scaled(factor, slopes) {
  /** @type {Slopes} */
  const found = new Map();
  for (const [name, slope] of slopes) {
    const d = factor * slope;
    if (d - d !== 0) throw STEEP;
    found.set(name, d);
  }
  return found;
}

/** Adds a further part to `found`, which is changed. @param {Slopes} found @param {number} factor @param {Slopes} slopes */
export function summed(found, factor, slopes) {
  for (const [name, slope] of slopes) {
    const d = factor * slope;
    const before = found.get(name);
    const total = before === undefined ? d : before + d;
    if (total - total !== 0) throw STEEP;
    found.set(name, total);
  }
  return found;
}

/** Of each name the steeper slope. @param {Slopes} one @param {Slopes} other @returns {Slopes} */
export function steeper(one, other) {
  const found = new Map(one);
  for (const [name, slope] of other) {
    const before = found.get(name);
    if (before === undefined || Math.abs(slope) > Math.abs(before)) found.set(name, slope);
  }
  return found;
}

/** @param {any} value @returns {number} */
function bounded(value) {
  if (typeof value !== "number") throw STEEP;
  return value;
}

/** @param {number} v */
function finite(v) {
  if (v - v !== 0) throw LOST;
  return v;
}

/** @param {Look} a @param {Look} b @returns {Look} */
function add(a, b) {
  return (e, g) => {
    const [x, y] = [a(e, g), b(e, g)];
    const v = finite(x.v + y.v);
    return { v, slopes: summed(new Map(x.slopes), 1, y.slopes) };
  };
}

/** @param {Look} a @param {Look} b @returns {Look} */
function sub(a, b) {
  return (e, g) => {
    const [x, y] = [a(e, g), b(e, g)];
    const v = finite(x.v - y.v);
    return { v, slopes: summed(new Map(x.slopes), -1, y.slopes) };
  };
}

/** @param {Look} a @param {Look} b @returns {Look} */
function mul(a, b) {
  return (e, g) => {
    const [x, y] = [a(e, g), b(e, g)];
    const v = finite(x.v * y.v);
    return { v, slopes: summed(scaled(y.v, x.slopes), x.v, y.slopes) };
  };
}

/** @param {Look} a @param {Look} b @returns {Look} */
function div(a, b) {
  return (e, g) => {
    const [x, y] = [a(e, g), b(e, g)];
    if (y.v === 0) throw LOST;
    const v = finite(x.v / y.v);
    return { v, slopes: summed(scaled(1 / y.v, x.slopes), -(v / y.v), y.slopes) };
  };
}

const POWER = plain("pow", [place(0), place(1)]);

/** @param {Look} a @param {Look} b @returns {Look} */
function pow(a, b) {
  return (e, g) => {
    const [x, y] = [a(e, g), b(e, g)];
    const v = POWER([x.v, y.v]);
    const found = x.slopes.size ? scaled(by_base(x.v, y.v), x.slopes) : NONE;
    return { v, slopes: y.slopes.size ? summed(new Map(found), by_exponent(x.v, y.v, v), y.slopes) : found };
  };
}

/** @param {number} x @param {number} y */
function by_base(x, y) {
  if (y === 2) return 2 * x;
  return y !== 0 ? y * bounded(elementary.pow(x, y - 1)) : 0;
}

/** @param {number} x @param {number} y @param {number} v */
function by_exponent(x, y, v) {
  return x === 0 && y > 0 ? 0 : v * bounded(elementary.log(x));
}

/** @param {...Look} parts @returns {Look} */
function average(...parts) {
  const [run, share] = [plain("average", parts.map((_, k) => place(k))), 1 / parts.length];
  return (e, g) => {
    const found = parts.map((part) => part(e, g));
    const v = run(found.map((one) => one.v));
    /** @type {Slopes} */
    const total = new Map();
    for (const one of found) summed(total, share, one.slopes);
    return { v, slopes: total };
  };
}

/** The least or the greatest; of equal ones the steeper. @param {string} name @returns {(...parts: Look[]) => Look} */
function end(name) {
  return (...parts) => {
    const run = plain(name, parts.map((_, k) => place(k)));
    return (e, g) => {
      const found = parts.map((part) => part(e, g));
      const v = run(found.map((one) => one.v));
      return { v, slopes: found.reduce((best, one) => (one.v === v ? steeper(best, one.slopes) : best), NONE) };
    };
  };
}

/** A function of the language over parts that are already worked out. @param {string} name @param {((p: any) => any)[]} parts @returns {(p: any) => number} */
function plain(name, parts) {
  const make = FUNCTIONS.get(name)?.make;
  if (!make) throw new Error(`${name} is no function`);
  const run = make(...parts);
  return (p) => sure(run(p, null, null, null));
}

/** A function of one number, from its rate of change at x, where it is v. @param {string} name @param {(x: number, v: number) => number} rate @returns {(a: Look) => Look} */
function one(name, rate) {
  const run = plain(name, [given]);
  return (a) => (e, g) => {
    const { v: x, slopes } = a(e, g);
    const v = run(x);
    return { v, slopes: slopes.size ? scaled(rate(x, v), slopes) : NONE };
  };
}

/** @param {number} x @param {number} v */
function root(x, v) {
  if (v === 0) throw STEEP;
  return 0.5 / v;
}

/** @type {ReadonlyMap<string, (...parts: Look[]) => Look>} */
export const MAKERS = new Map(
  Object.entries({
    add,
    sub,
    mul,
    div,
    neg: one("neg", () => -1),
    min: end("min"),
    max: end("max"),
    average,
    abs: one("abs", (x) => (x < 0 ? -1 : 1)),
    sqrt: one("sqrt", root),
    pow,
    exp: one("exp", (x, v) => v),
    log: one("log", (x) => 1 / x),
    sin: one("sin", (x) => bounded(elementary.cos(x))),
    cos: one("cos", (x) => -bounded(elementary.sin(x))),
    atan: one("atan", (x) => 1 / (1 + x * x)),
    erf: one("erf", (x) => ERF * bounded(elementary.exp(-(x * x)))),
  }),
);

/** Derivatives of a function of a column by its places. @typedef {(x: number[], v: number, at: number[]) => [number, number][]} Rule */
/** @type {ReadonlyMap<string, Rule>} */
export const COLUMNS = new Map(
  Object.entries(
    /** @type {Record<string, Rule>} */ ({
      at: (x, v, at) => [[at[0], 1]],
      first: () => [[0, 1]],
      last: (x) => [[x.length - 1, 1]],
      lowest: (x, v) => [[x.indexOf(v), 1]],
      highest: (x, v) => [[x.indexOf(v), 1]],
      total: (x) => x.map((_, k) => [k, 1]),
      mean: (x) => x.map((_, k) => [k, 1 / x.length]),
    }),
  ),
);
