/**
 * Every function and operator of the formula language, one entry a line in FUNCTIONS.
 *
 * Twin of fieldkit/formula/functions.py, same names, same order; a test compares the two lists. `make` takes the parts
 * of a call, each ready to run, and gives the whole, ready to run. A part runs on what names mean and gives a value or
 * a Fault, which every function passes on as it is met; a column gives an array of numbers or a Fault. `if`, `and`,
 * `or`, `holds` choose what is evaluated, so nodes.js makes them; their entries have no `make`. No DOM, no IO.
 */

import * as elementary from "./elementary.js";
import { Fault } from "./values.js";

/** @typedef {number | boolean | string | Fault} Value */
/**
 * What names mean is, to a tree, (names, series); to a formula of the library its arguments, up to four, or all of them
 * in an array. Nothing is packed and unpacked on the way.
 * @typedef {(p: any, q: any, r: any, s: any) => any} Run
 */
/** @typedef {{least: number, most: number | null, column: boolean, make: ((...parts: Run[]) => Run) | null}} Entry */

/** @param {string} what */
export function wrong_type(what) {
  return new Fault("wrong-type", `${what} was given something that is no number.`);
}

/** What a function answers that was given `value`, which is no number. @param {any} value @param {string} name */
function refused(value, name) {
  return value instanceof Fault ? value : wrong_type(name);
}

/** A number or a Fault as an answer: v - v is 0 for every finite v. @param {number | Fault} v @param {string} name */
function answer(v, name) {
  if (typeof v !== "number" || v - v === 0) return v;
  return new Fault("overflow", `The result of ${name} is too large.`);
}

// The four operators are what formulas are made of, so each is written out.

/** @param {Run} a @param {Run} b @returns {Run} */
function add(a, b) {
  return (p, q, r, s) => {
    const x = a(p, q, r, s);
    if (typeof x !== "number") return refused(x, "add");
    const y = b(p, q, r, s);
    if (typeof y !== "number") return refused(y, "add");
    const v = x + y;
    return v - v === 0 ? v : answer(v, "add");
  };
}

/** @param {Run} a @param {Run} b @returns {Run} */
function sub(a, b) {
  return (p, q, r, s) => {
    const x = a(p, q, r, s);
    if (typeof x !== "number") return refused(x, "sub");
    const y = b(p, q, r, s);
    if (typeof y !== "number") return refused(y, "sub");
    const v = x - y;
    return v - v === 0 ? v : answer(v, "sub");
  };
}

/** @param {Run} a @param {Run} b @returns {Run} */
function mul(a, b) {
  return (p, q, r, s) => {
    const x = a(p, q, r, s);
    if (typeof x !== "number") return refused(x, "mul");
    const y = b(p, q, r, s);
    if (typeof y !== "number") return refused(y, "mul");
    const v = x * y;
    return v - v === 0 ? v : answer(v, "mul");
  };
}

/** @param {Run} a @param {Run} b @returns {Run} */
function div(a, b) {
  return (p, q, r, s) => {
    const x = a(p, q, r, s);
    if (typeof x !== "number") return refused(x, "div");
    const y = b(p, q, r, s);
    if (typeof y !== "number") return refused(y, "div");
    if (y === 0) return new Fault("divide-by-zero", "It would divide by zero.");
    const v = x / y;
    return v - v === 0 ? v : answer(v, "div");
  };
}

/** A function of one number. @param {string} name @param {(x: number) => number | Fault} apply @returns {Entry} */
function one(name, apply) {
  return entry(1, 1, (a) => (p, q, r, s) => {
    const x = a(p, q, r, s);
    return typeof x === "number" ? answer(apply(x), name) : refused(x, name);
  });
}

/** A function of two numbers. @param {string} name @param {(x: number, y: number) => any} apply @returns {Entry} */
function two(name, apply) {
  return entry(2, 2, (a, b) => (p, q, r, s) => {
    const x = a(p, q, r, s);
    if (typeof x !== "number") return refused(x, name);
    const y = b(p, q, r, s);
    if (typeof y !== "number") return refused(y, name);
    const v = apply(x, y);
    return typeof v === "boolean" ? v : answer(v, name);
  });
}

/** A function of one number or more. @param {string} name @param {(of: number[]) => number} apply @returns {Entry} */
function many(name, apply) {
  return entry(1, null, (...parts) => (p, q, r, s) => {
    const given = [];
    for (const part of parts) {
      const x = part(p, q, r, s);
      if (typeof x !== "number") return refused(x, name);
      given.push(x);
    }
    return answer(apply(given), name);
  });
}

/** For a column that has numbers in it. @param {string} name @param {(of: number[]) => number} apply @returns {Entry} */
function column(name, apply) {
  return on_column(1, (values_of) => (p, q, r, s) => {
    const values = values_of(p, q, r, s);
    if (values instanceof Fault) return values;
    return values.length === 0 ? new Fault("missing", `${name} has no values yet.`) : answer(apply(values), name);
  });
}

/** @param {Run} values_of @returns {Run} */
function length(values_of) {
  return (p, q, r, s) => {
    const values = values_of(p, q, r, s);
    return values instanceof Fault ? values : values.length;
  };
}

/** @param {Run} values_of @param {Run} index_of @returns {Run} */
function at(values_of, index_of) {
  return (p, q, r, s) => {
    const values = values_of(p, q, r, s);
    if (values instanceof Fault) return values;
    const index = index_of(p, q, r, s);
    if (typeof index !== "number") return refused(index, "at");
    if (index !== Math.floor(index) || index < 0 || index >= values.length) {
      return new Fault("out-of-range", `There is no such place among ${values.length} values.`);
    }
    return values[index];
  };
}

/** @param {number} x */
function sqrt(x) {
  return x >= 0 ? Math.sqrt(x) : new Fault("domain", "The square root needs a number that is not below zero.");
}

/** @param {number[]} values */
function least(values) {
  return values.reduce((found, v) => (v < found ? v : found));
}

/** @param {number[]} values */
function most(values) {
  return values.reduce((found, v) => (v > found ? v : found));
}

/** The plain sum from left to right. @param {number[]} values */
function total(values) {
  return values.reduce((found, v) => found + v, 0);
}

/** @param {number[]} values */
function average(values) {
  return total(values) / values.length;
}

/** @param {Run} a @param {Run} b @param {boolean} same @returns {Run} */
function equal(a, b, same) {
  return (p, q, r, s) => {
    const x = a(p, q, r, s);
    if (x instanceof Fault) return x;
    const y = b(p, q, r, s);
    if (y instanceof Fault) return y;
    if (typeof x !== typeof y) return new Fault("wrong-type", "Two values of different kinds were compared.");
    return (x === y) === same;
  };
}

/** @param {Run} a @returns {Run} */
function not(a) {
  return (p, q, r, s) => {
    const flag = a(p, q, r, s);
    if (typeof flag === "boolean") return !flag;
    return flag instanceof Fault ? flag : new Fault("wrong-type", "not was given something that is no yes or no.");
  };
}

/** @param {number} few @param {number | null} many @param {((...parts: Run[]) => Run) | null} make @returns {Entry} */
function entry(few, many, make) {
  return { least: few, most: many, column: false, make };
}

/** @param {number} count @param {(...parts: Run[]) => Run} make @returns {Entry} */
function on_column(count, make) {
  return { least: count, most: count, column: true, make };
}

/** @type {ReadonlyMap<string, Entry>} */
export const FUNCTIONS = new Map([
  ["add", entry(2, 2, add)],
  ["sub", entry(2, 2, sub)],
  ["mul", entry(2, 2, mul)],
  ["div", entry(2, 2, div)],
  ["neg", one("neg", (x) => -x)],
  ["lt", two("lt", (x, y) => x < y)],
  ["le", two("le", (x, y) => x <= y)],
  ["gt", two("gt", (x, y) => x > y)],
  ["ge", two("ge", (x, y) => x >= y)],
  ["eq", entry(2, 2, (a, b) => equal(a, b, true))],
  ["ne", entry(2, 2, (a, b) => equal(a, b, false))],
  ["and", entry(2, null, null)],
  ["or", entry(2, null, null)],
  ["not", entry(1, 1, not)],
  ["if", entry(3, 3, null)],
  ["holds", entry(3, 3, null)],
  ["min", many("min", least)],
  ["max", many("max", most)],
  ["average", many("average", average)],
  ["abs", one("abs", Math.abs)],
  ["sqrt", one("sqrt", sqrt)],
  ["pow", two("pow", elementary.pow)],
  ["exp", one("exp", elementary.exp)],
  ["log", one("log", elementary.log)],
  ["sin", one("sin", elementary.sin)],
  ["cos", one("cos", elementary.cos)],
  ["atan", one("atan", elementary.atan)],
  ["erf", one("erf", elementary.erf)],
  ["length", on_column(1, length)],
  ["at", on_column(2, at)],
  ["first", column("first", (x) => x[0])],
  ["last", column("last", (x) => x[x.length - 1])],
  ["lowest", column("lowest", least)],
  ["highest", column("highest", most)],
  ["total", column("total", total)],
  ["mean", column("mean", average)],
]);
