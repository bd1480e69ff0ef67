/**
 * From what was typed to results, or to words that say what is missing or wrong. Pure; no element is made here.
 *
 * A sum is prepared once and asked at each key. What is typed is read as a reading is (core/values.js); the formula is
 * the kit's own tree (core/evaluate.js).
 */
import { prepare } from "../../core/evaluate.js";
import { Fault, Refusal, number, to_si, to_text, typed } from "../../core/values.js";
import { called, calledAll, titleOf } from "./book.js";
import { rangeWords, withUnit } from "./digits.js";
import { lower, minus, pretty, sentence } from "../words.js";

/** @typedef {import("./book.js").Argument} Argument */
/** @typedef {import("./book.js").Sum} Sum */
/** @typedef {import("./digits.js").Unit} Unit */
/** @typedef {{state: "empty" | "unfinished" | "wrong" | "good", says: string, si: number}} Read */

/** What the next key may still make a number of. */
const UNFINISHED = ["no-digit-after", "not-a-number"], BEGUN = /^[-−+]$|^[-−+]?[0-9]+[.,]$/;

/** What was typed for one argument. @param {Argument} argument @param {string} text @param {Unit} unit @returns {Read} */
export function read(argument, text, unit) {
  if (text === "") return { state: "empty", says: "", si: 0 };
  const value = typed(text);
  if (value instanceof Refusal) {
    const begun = UNFINISHED.includes(value.code) && BEGUN.test(text);
    return { state: begun ? "unfinished" : "wrong", says: value.sentence, si: 0 };
  }
  const si = to_si(to_text(value), unit), says = outside(argument, si, withUnit(minus(to_text(value)), unit), unit);
  return { state: says ? "wrong" : "good", says, si };
}

/** Why a value may not stand for an argument; "" where it may. @param {Argument} argument @param {number} si @param {string} shown @param {Unit} unit */
function outside(argument, si, shown, unit) {
  const low = argument.low === null ? null : number(argument.low), high = argument.high === null ? null : number(argument.high);
  const out = (typeof low === "number" && si < low) || (typeof high === "number" && si > high);
  if (out) return `${sentence(called(argument))} is ${shown}; the formula holds for ${rangeWords(argument, unit)}.`;
  return argument.whole && si !== Math.floor(si) ? `${sentence(called(argument))} is ${shown}; only whole numbers.` : "";
}

/** A Fault's sentence, for a reader who sees which sum this is. @param {Fault} fault @param {string} name */
export function faultWords(fault, name) {
  const own = `${name}: `, says = fault.says.startsWith(own) ? sentence(fault.says.slice(own.length)) : fault.says;
  return pretty(says.replace(/^([a-z][a-z0-9_]*): /, (_, other) => `${titleOf(other)}: `));
}

/** A sum that can be asked. @param {Sum} sum @param {Record<string, any>} formulas */
export function prepared(sum, formulas) {
  const ready = sum.results.map((r) => prepare({ call: r.name, of: sum.arguments.map((a) => ({ name: a.name })) }, formulas));
  /** The k-th result in SI, or a Fault. @param {number} k @param {Record<string, number>} values in SI, by argument */
  const value = (k, values) => /** @type {number | Fault} */ (ready[k].value(values));
  return { value, all: (/** @type {Record<string, number>} */ values) => ready.map((_, k) => value(k, values)) };
}

/**
 * Everything at once: each field as it was read, and the results or what stands in their way.
 * @param {Sum} sum @param {ReturnType<typeof prepared>} ready @param {Record<string, string>} texts @param {Record<string, Unit>} units
 * @returns {{fields: Record<string, Read>, values: Record<string, number>, results: number[] | null, says: string}}
 */
export function reckon(sum, ready, texts, units) {
  const fields = Object.fromEntries(sum.arguments.map((a) => [a.name, read(a, (texts[a.name] ?? "").trim(), units[a.name])]));
  const values = Object.fromEntries(sum.arguments.map((a) => [a.name, fields[a.name].si]));
  const not = (/** @type {string} */ state) => sum.arguments.filter((a) => fields[a.name].state === state);
  const refused = (/** @type {string} */ says) => ({ fields, values, results: null, says });
  if (not("wrong").length) return refused(not("wrong").map((a) => wrongWords(a, fields[a.name].says)).join(" "));
  const missing = [...not("unfinished"), ...not("empty")];
  if (missing.length) return refused(`Still to type: ${calledAll(missing)}.`);
  const results = ready.all(values), fault = results.findIndex((r) => typeof r !== "number");
  if (fault >= 0) return refused(results[fault] instanceof Fault ? faultWords(/** @type {Fault} */ (results[fault]), sum.results[fault].name) : "The formula gives no number.");
  return { fields, values, results: /** @type {number[]} */ (results), says: "" };
}

/** A refusal that names its argument. @param {Argument} argument @param {string} says */
function wrongWords(argument, says) {
  const name = sentence(called(argument));
  return says.startsWith(name) ? says : `${name}: ${lower(says)}`;
}
