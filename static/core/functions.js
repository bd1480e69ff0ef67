/**
 * Every function and operator of the formula language, one entry a line in FUNCTIONS.
 *
 * Twin of fieldkit/formula/functions.py, same names, same order; a test compares the two lists. `apply` gets values
 * that are no Faults (a column as an array of numbers) and answers with a value or a Fault. `if`, `and`, `or`, `holds`
 * choose what is evaluated, so evaluate.js does them; their entries have no `apply`. No DOM, no IO.
 */

import * as elementary from "./elementary.js";
import { Fault } from "./values.js";

/** @typedef {number | boolean | string | Fault} Value */
/** @typedef {{least: number, most: number | null, column: boolean, apply: ((...of: any[]) => Value) | null}} Entry */

/** @param {string} what */
export function wrong_type(what) {
  return new Fault("wrong-type", `${what} was given something that is no number.`);
}

/** @param {string} name @param {(...of: number[]) => Value} apply @returns {(...of: any[]) => Value} */
function numbers(name, apply) {
  return (...of) => {
    if (!of.every((v) => typeof v === "number")) return wrong_type(name);
    const value = apply(...of);
    if (value === Infinity || value === -Infinity) return new Fault("overflow", `The result of ${name} is too large.`);
    return value;
  };
}

/** @param {number} a @param {number} b */
function div(a, b) {
  return b !== 0 ? a / b : new Fault("divide-by-zero", "It would divide by zero.");
}

/** @param {number} a */
function sqrt(a) {
  return a >= 0 ? Math.sqrt(a) : new Fault("domain", "The square root needs a number that is not below zero.");
}

/** @param {number[]} of */
function least(...of) {
  return of.reduce((found, v) => (v < found ? v : found));
}

/** @param {number[]} of */
function most(...of) {
  return of.reduce((found, v) => (v > found ? v : found));
}

/** The plain sum from left to right. @param {number[]} of */
function total(...of) {
  return of.reduce((found, v) => found + v, 0);
}

/** @param {number[]} of */
function average(...of) {
  return total(...of) / of.length;
}

/** @param {Value} a @param {Value} b @returns {Value} */
function equal(a, b) {
  if (typeof a !== typeof b) return new Fault("wrong-type", "Two values of different kinds were compared.");
  return a === b;
}

/** @param {Value} a @param {Value} b @returns {Value} */
function unequal(a, b) {
  const same = equal(a, b);
  return same instanceof Fault ? same : !same;
}

/** @param {Value} a @returns {Value} */
function not(a) {
  return typeof a === "boolean" ? !a : new Fault("wrong-type", "not was given something that is no yes or no.");
}

/** @param {string} name @param {(...of: number[]) => Value} apply @returns {(column: number[]) => Value} */
function column(name, apply) {
  return (values) => {
    if (values.length === 0) return new Fault("missing", `${name} has no values yet.`);
    return numbers(name, apply)(...values);
  };
}

/** @param {number[]} values @param {Value} index @returns {Value} */
function at(values, index) {
  if (typeof index !== "number") return wrong_type("at");
  if (index !== Math.floor(index) || index < 0 || index >= values.length) {
    return new Fault("out-of-range", `There is no such place among ${values.length} values.`);
  }
  return values[index];
}

/** @param {string} name @param {number} few @param {number | null} many @param {(...of: number[]) => Value} apply @returns {Entry} */
function numeric(name, few, many, apply) {
  return { least: few, most: many, column: false, apply: numbers(name, apply) };
}

/** @param {number} few @param {number | null} many @param {((...of: any[]) => Value) | null} apply @returns {Entry} */
function general(few, many, apply) {
  return { least: few, most: many, column: false, apply };
}

/** @param {number} count @param {(...of: any[]) => Value} apply @returns {Entry} */
function on_column(count, apply) {
  return { least: count, most: count, column: true, apply };
}

/** @type {ReadonlyMap<string, Entry>} */
export const FUNCTIONS = new Map([
  ["add", numeric("add", 2, 2, (a, b) => a + b)],
  ["sub", numeric("sub", 2, 2, (a, b) => a - b)],
  ["mul", numeric("mul", 2, 2, (a, b) => a * b)],
  ["div", numeric("div", 2, 2, div)],
  ["neg", numeric("neg", 1, 1, (a) => -a)],
  ["lt", numeric("lt", 2, 2, (a, b) => a < b)],
  ["le", numeric("le", 2, 2, (a, b) => a <= b)],
  ["gt", numeric("gt", 2, 2, (a, b) => a > b)],
  ["ge", numeric("ge", 2, 2, (a, b) => a >= b)],
  ["eq", general(2, 2, equal)],
  ["ne", general(2, 2, unequal)],
  ["and", general(2, null, null)],
  ["or", general(2, null, null)],
  ["not", general(1, 1, not)],
  ["if", general(3, 3, null)],
  ["holds", general(3, 3, null)],
  ["min", numeric("min", 1, null, least)],
  ["max", numeric("max", 1, null, most)],
  ["average", numeric("average", 1, null, average)],
  ["abs", numeric("abs", 1, 1, Math.abs)],
  ["sqrt", numeric("sqrt", 1, 1, sqrt)],
  ["pow", numeric("pow", 2, 2, elementary.pow)],
  ["exp", numeric("exp", 1, 1, elementary.exp)],
  ["log", numeric("log", 1, 1, elementary.log)],
  ["sin", numeric("sin", 1, 1, elementary.sin)],
  ["cos", numeric("cos", 1, 1, elementary.cos)],
  ["atan", numeric("atan", 1, 1, elementary.atan)],
  ["erf", numeric("erf", 1, 1, elementary.erf)],
  ["length", on_column(1, (x) => x.length)],
  ["at", on_column(2, at)],
  ["first", on_column(1, column("first", (...x) => x[0]))],
  ["last", on_column(1, column("last", (...x) => x[x.length - 1]))],
  ["lowest", on_column(1, column("lowest", least))],
  ["highest", on_column(1, column("highest", most))],
  ["total", on_column(1, column("total", total))],
  ["mean", on_column(1, column("mean", average))],
]);
