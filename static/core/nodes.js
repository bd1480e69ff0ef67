/**
 * What each node of a formula tree does once it is made ready; the functions of the language are in functions.js.
 *
 * Twin of fieldkit/formula/nodes.py, maker by maker: a constant, a name, an argument of a formula, a choice, a column,
 * the call of a formula with the ranges of its arguments, a table. No DOM, no IO.
 */

import { Fault, number, round12, to_shown } from "./values.js";

/** @typedef {import("./functions.js").Value} Value */
/** @typedef {import("./functions.js").Run} Run */
/**
 * A node made ready. fixed: it always gives the same. height: nodes below it. name: the name that it is, where the caller
 * tells what names mean.
 * @typedef {{run: Run, fixed: boolean, height: number, name: string | null}} Part
 */

/** @param {any} thing @param {string} key */
export function has(thing, key) {
  return Object.prototype.hasOwnProperty.call(thing, key);
}

/** @param {any} thing */
export function is_block(thing) {
  return typeof thing === "object" && thing !== null && !Array.isArray(thing);
}

/** A part of a formula or argument; null where it has none. @param {any} thing @param {string} key */
export function aspect(thing, key) {
  return is_block(thing) && has(thing, key) ? thing[key] : null;
}

/** A part that gives nothing but a Fault. @param {Fault} fault @returns {Part} */
export function stops(fault) {
  return constant(fault);
}

/** @param {Value} value @param {number} [height] @returns {Part} */
export function constant(value, height = 0) {
  return { run: () => value, fixed: true, height, name: null };
}

/** What the caller's name means. @param {string} name @returns {Part} */
export function named(name) {
  /** @type {Run} */
  const run = (names) => {
    const found = names[name];
    // what every object has by itself is neither number, text nor flag
    if (typeof found === "number" && found - found === 0) return found;
    if (typeof found === "string" || typeof found === "boolean") return found;
    if (!has(names, name)) return unknown(name);
    return found instanceof Fault ? found : new Fault("wrong-type", `${name} is no number, text or flag.`);
  };
  return { run, fixed: false, height: 0, name };
}

/**
 * An argument inside the formula, one of `count`: checked when it was called, so a number.
 * @param {number} place @param {number} count @returns {Part}
 */
export function argument(place, count) {
  return { run: count <= 4 ? PLACES[place] : (given) => given[place], fixed: false, height: 0, name: null };
}

/** @type {Run[]} */
const PLACES = [(p) => p, (p, q) => q, (p, q, r) => r, (p, q, r, s) => s];

/** if, holds, and, or: only what is needed for the answer is asked. @param {string} name @param {Run[]} runs @returns {Run} */
export function choice(name, runs) {
  const wrong = new Fault("wrong-type", `${name} was given something that is no yes or no.`);
  if (name === "if") return when(runs[0], runs[1], runs[2], wrong);
  if (name === "holds") return when(runs[0], runs[2], not_held(runs[1]), wrong);
  return every(runs, name === "and", wrong);
}

/** @param {Run} condition @param {Run} held @param {Run} other @param {Fault} wrong @returns {Run} */
function when(condition, held, other, wrong) {
  return (p, q, r, s) => {
    const flag = condition(p, q, r, s);
    if (flag === true) return held(p, q, r, s);
    if (flag === false) return other(p, q, r, s);
    return flag instanceof Fault ? flag : wrong;
  };
}

/** What `holds` answers where its condition does not hold. @param {Run} says which one @returns {Run} */
function not_held(says) {
  return (p, q, r, s) => {
    const text = says(p, q, r, s);
    if (text instanceof Fault) return text;
    return typeof text === "string" ? new Fault("out-of-range", text) : new Fault("wrong-type", "holds has no sentence.");
  };
}

/** `until` where every flag is `until`, else the other. @param {Run[]} runs @param {boolean} until @param {Fault} wrong @returns {Run} */
function every(runs, until, wrong) {
  return (p, q, r, s) => {
    for (const one of runs) {
      const flag = one(p, q, r, s);
      if (flag !== until) return flag === !until || flag instanceof Fault ? flag : wrong;
    }
    return until;
  };
}

/** A column of the caller, as numbers. @param {string} name @returns {Run} */
export function column(name) {
  return (names, series) => {
    if (!has(series, name)) return no_column(name);
    const found = series[name];
    if (!Array.isArray(found) || !found.every((v) => Number.isFinite(v))) {
      return new Fault("wrong-type", `${name} holds something that is no number.`);
    }
    return found;
  };
}

/** A formula of the library, asked with its arguments. @param {Run} body @param {Run[]} given @returns {Run} */
export function called(body, given) {
  const [a, b, c, d] = given;
  if (given.length > 4) return called_with_many(body, given);
  return (p, q, r, s) => {
    let [w, x, y, z] = [0, 0, 0, 0];
    if (a !== undefined && typeof (w = a(p, q, r, s)) !== "number") return w;
    if (b !== undefined && typeof (x = b(p, q, r, s)) !== "number") return x;
    if (c !== undefined && typeof (y = c(p, q, r, s)) !== "number") return y;
    if (d !== undefined && typeof (z = d(p, q, r, s)) !== "number") return z;
    return body(w, x, y, z);
  };
}

/** @param {Run} body @param {Run[]} given @returns {Run} */
function called_with_many(body, given) {
  return (p, q, r, s) => {
    const found = [];
    for (const one of given) {
      const x = one(p, q, r, s);
      if (typeof x !== "number") return x;
      found.push(x);
    }
    return body(found, null, null, null);
  };
}

/** One argument of a formula, held to its range. @param {string} name @param {any} argument @param {Part} part @returns {Run} */
export function ranged(name, argument, part) {
  const { low, high, whole } = range(argument) ?? { low: 1, high: 0, whole: false };
  const [inner, key] = [part.run, part.name];
  /** @type {Run} */
  const run = (p, q, r, s) => {
    const x = inner(p, q, r, s);
    if (typeof x === "number" && x >= low && x <= high && (!whole || x === Math.floor(x))) return x;
    return x instanceof Fault ? x : outside(name, argument, x);
  };
  if (key === null || whole) return run;
  return (p, q, r, s) => {
    const x = p[key];
    return typeof x === "number" && x >= low && x <= high ? x : run(p, q, r, s);
  };
}

/** Least, greatest, whole numbers only; null where the argument is damaged. @param {any} argument */
function range(argument) {
  const [low, high] = [decimal(argument, "low", -Number.MAX_VALUE), decimal(argument, "high", Number.MAX_VALUE)];
  const [factor, offset] = [decimal(argument, "factor", null), decimal(argument, "offset", null)];
  const whole = aspect(argument, "whole");
  if (low === null || high === null || factor === null || offset === null || factor <= 0) return null;
  return whole === null || typeof whole === "boolean" ? { low, high, whole: whole === true } : null;
}

/** A decimal text of an argument as a number; null where it is damaged. @param {any} argument @param {string} key @param {number | null} absent */
function decimal(argument, key, absent) {
  const text = aspect(argument, key);
  if (text === null) return absent;
  const found = typeof text === "string" ? number(text) : null;
  return typeof found === "number" ? found : null;
}

/** Why a value will not do for an argument. @param {string} name @param {any} argument @param {Value} value @returns {Fault} */
function outside(name, argument, value) {
  const limits = range(argument);
  if (typeof value !== "number") return new Fault("wrong-type", `${name}: ${argument.name} is no number.`);
  if (limits === null) return bad_tree();
  const { low, high } = limits;
  const after = ["", "1"].includes(argument.unit ?? "") || typeof argument.unit !== "string" ? "" : ` ${argument.unit}`;
  const says = `${name}: ${argument.name} is ${to_shown(value, argument)}${after}`;
  if (value >= low && value <= high) return new Fault("out-of-range", `${says}; only whole numbers.`);
  const ends = [];
  if (low !== -Number.MAX_VALUE) ends.push(`from ${to_shown(low, argument)}`);
  if (high !== Number.MAX_VALUE) ends.push(`to ${to_shown(high, argument)}`);
  return new Fault("out-of-range", `${says}; the formula holds ${ends.join(" ")}${after}.`);
}

/** Linear between neighbours; at a node exactly the node's value. @param {any} table @param {Run} run @returns {Run} */
export function table(table, run) {
  const name = has(table, "name") && typeof table.name === "string" ? table.name : "the table";
  const [xs, ys] = [numbers(table.x), numbers(table.y)];
  const sound = xs !== null && ys !== null && xs.length === ys.length && xs.length >= 2 && rises(xs);
  return (p, q, r, s) => {
    const at = run(p, q, r, s);
    if (at instanceof Fault) return at;
    if (typeof at !== "number") return new Fault("wrong-type", "A table was asked with something that is no number.");
    return sound ? between(name, at, xs, ys) : bad_tree();
  };
}

/** @param {string} name @param {number} at @param {number[]} xs @param {number[]} ys @returns {Value} */
function between(name, at, xs, ys) {
  let [k, end] = [0, xs.length - 1];
  if (!(at >= xs[0] && at <= xs[end])) {
    return new Fault("out-of-range", `${name}: ${round12(at)} is outside the table, in SI units.`);
  }
  if (at === xs[end]) return ys[end];
  while (end - k > 1) {
    const middle = (k + end) >> 1;
    if (at < xs[middle]) end = middle;
    else k = middle;
  }
  const value = ys[k] + (ys[end] - ys[k]) * ((at - xs[k]) / (xs[end] - xs[k]));
  return value - value === 0 ? value : new Fault("overflow", `The result of ${name} is too large.`);
}

/** @param {number[]} xs */
function rises(xs) {
  return xs.every((x, k) => k === 0 || xs[k - 1] < x);
}

/** @param {any[]} texts @returns {number[] | null} */
function numbers(texts) {
  const found = texts.map((t) => (typeof t === "string" ? number(t) : null));
  return found.every((v) => typeof v === "number") ? /** @type {number[]} */ (found) : null;
}

/** @param {string} name */
export function unknown(name) {
  return new Fault("unknown-name", `There is no value named ${name}.`);
}

/** @param {string} name */
export function no_column(name) {
  return new Fault("unknown-name", `There is no column of numbers named ${name}.`);
}

export function bad_tree() {
  return new Fault("bad-tree", "The formula in the sheet is damaged.");
}
