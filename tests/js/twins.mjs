/**
 * Answers for the Python tests out of the JavaScript twins: one JSON request a line on stdin, one JSON answer a line.
 *
 * A request is {"do": NAME, "args": [...]}. Doubles travel as {"bits": "3ff0000000000000"}, so that nothing is lost;
 * a Fault as {"fault": code, "says": sentence}, a Refusal as {"refused": code, "sentence": sentence}, an exact decimal
 * as {"digits": "1250", "scale": 2}. Whatever throws is answered as {"threw": name}.
 */

import { createInterface } from "node:readline";

import * as elementary from "../../static/core/elementary.js";
import { evaluate } from "../../static/core/evaluate.js";
import { FUNCTIONS } from "../../static/core/functions.js";
import { prepare } from "../../static/core/slopes.js";
import * as spread from "../../static/core/spread.js";
import * as values from "../../static/core/values.js";

const BITS = new DataView(new ArrayBuffer(8));

/** @param {any} x @returns {any} */
function read(x) {
  if (Array.isArray(x)) return x.map(read);
  if (typeof x !== "object" || x === null) return x;
  const keys = Object.keys(x);
  if (keys.length === 1 && keys[0] === "bits") {
    BITS.setBigUint64(0, BigInt(`0x${x.bits}`));
    return BITS.getFloat64(0);
  }
  if ("fault" in x) return new values.Fault(x.fault, x.says);
  if ("digits" in x && "scale" in x) return new values.Dec(BigInt(x.digits), x.scale);
  return Object.fromEntries(keys.map((k) => [k, read(x[k])]));
}

/** @param {any} x @returns {any} */
function write(x) {
  if (typeof x === "number") {
    BITS.setFloat64(0, x);
    return { bits: BITS.getBigUint64(0).toString(16).padStart(16, "0") };
  }
  if (x instanceof values.Fault) return { fault: x.code, says: x.says };
  if (x instanceof values.Refusal) return { refused: x.code, sentence: x.sentence };
  if (x instanceof values.Dec) return { digits: x.digits.toString(), scale: x.scale };
  return x;
}

/** Pairs of name and number, in their order. @param {any} x */
function pairs(x) {
  return x instanceof Map ? [...x].map(([name, d]) => [name, write(d)]) : write(x);
}

/** The value and the derivatives of a tree. @param {any} tree @param {any} names @param {any} series @param {any} formulas */
function gradient(tree, names, series, formulas) {
  const { value, of } = prepare(tree, formulas).gradient(names, series);
  return { value: write(value), of: pairs(of) };
}

/** Contributions and their sum. @param {[string, number][]} of @param {[string, [string, number][]][]} worth */
function worked(of, worth) {
  const found = spread.contributions(new Map(of), new Map(worth.map(([name, own]) => [name, new Map(own)])));
  return { contributions: pairs(found), u: write(spread.standard(found)) };
}

/** Integers that are counts come as plain JSON numbers, and go back so. @type {Record<string, (...of: any[]) => any>} */
const CALLS = {
  ...Object.fromEntries(Object.entries(values).filter(([, f]) => typeof f === "function")),
  ...elementary,
  evaluate,
  gradient,
  spread: worked,
  functions: () => [...FUNCTIONS].map(([name, f]) => [name, String(f.least), String(f.most), f.column]),
  faults: () => [...values.FAULTS],
};

for await (const line of createInterface({ input: process.stdin })) {
  const request = JSON.parse(line);
  let answer;
  try {
    answer = { value: write(CALLS[request.do](...request.args.map(read))) };
  } catch (error) {
    answer = { threw: error instanceof Error ? error.name : "Error" };
  }
  console.log(JSON.stringify(answer));
}
