/**
 * What a formula tree gives: a number, a flag, a text or a Fault. Total: never throws, never NaN or infinity.
 *
 * Twin of fieldkit/formula/evaluate.py, arm by arm; its docstring says how Faults travel. Trees come in the JSON form
 * that sheets carry; whatever is not a tree is a Fault "bad-tree". No DOM, no IO.
 */

import { FUNCTIONS } from "./functions.js";
import { Fault, number, round12, to_shown } from "./values.js";

/** @typedef {import("./functions.js").Value} Value */
/** @typedef {{name: string, unit: string, low: string | null, high: string | null, factor: string, offset: string, whole?: boolean}} Argument */
/** @typedef {{arguments: Argument[], tree: any}} FormulaUsed */

export const DEEPEST = 120;
export const MOST_WORK = 20000;

/**
 * The value of `tree`, in SI.
 * @param {any} tree
 * @param {Record<string, any>} [names] numbers, flags, texts and Faults (DEVELOPERS.md, "Names")
 * @param {Record<string, number[]>} [series] columns of numbers
 * @param {Record<string, any>} [formulas] the library formulas aboard the sheet
 * @returns {Value}
 */
export function evaluate(tree, names = {}, series = {}, formulas = {}) {
  return new Work(names, series, formulas).value(tree, 0);
}

/** @param {any} thing @param {string} key */
function has(thing, key) {
  return Object.prototype.hasOwnProperty.call(thing, key);
}

/** @param {any} thing */
function is_block(thing) {
  return typeof thing === "object" && thing !== null && !Array.isArray(thing);
}

/** One evaluation: what names mean, and how much work is left. */
class Work {
  /** @param {Record<string, any>} names @param {Record<string, number[]>} series @param {Record<string, any>} formulas */
  constructor(names, series, formulas) {
    this.names = names;
    this.series = series;
    this.formulas = formulas;
    this.left = MOST_WORK;
  }

  /** @param {any} tree @param {number} depth @returns {Value} */
  value(tree, depth) {
    this.left -= 1;
    if (depth > DEEPEST || this.left < 0) {
      return new Fault("too-deep", "The formula is nested too deeply, or is too long.");
    }
    if (!is_block(tree)) return bad_tree();
    if (has(tree, "number")) return typeof tree.number === "string" ? number(tree.number) : bad_tree();
    if (has(tree, "text")) return typeof tree.text === "string" ? tree.text : bad_tree();
    if (has(tree, "flag")) return typeof tree.flag === "boolean" ? tree.flag : bad_tree();
    if (has(tree, "name")) return this.name(tree.name);
    if (has(tree, "table")) return this.table(tree.table, depth);
    if (has(tree, "call") && Array.isArray(tree.of)) return this.call(tree.call, tree.of, depth);
    if (has(tree, "series")) return new Fault("wrong-type", "A column of numbers stands where one number belongs.");
    return bad_tree();
  }

  /** @param {any} name @returns {Value} */
  name(name) {
    if (typeof name !== "string") return bad_tree();
    if (!has(this.names, name)) return new Fault("unknown-name", `There is no value named ${name}.`);
    const found = this.names[name];
    if (typeof found === "boolean" || typeof found === "string" || found instanceof Fault) return found;
    if (typeof found === "number" && Number.isFinite(found)) return found;
    return new Fault("wrong-type", `${name} is no number, text or flag.`);
  }

  /** @param {any} name @param {any[]} of @param {number} depth @returns {Value} */
  call(name, of, depth) {
    const entry = typeof name === "string" ? FUNCTIONS.get(name) : undefined;
    if (!entry) return this.library(name, of, depth);
    if (of.length < entry.least || (entry.most !== null && of.length > entry.most)) {
      return new Fault("bad-tree", `${name} was given ${of.length} values.`);
    }
    if (entry.apply === null) return this.choose(name, of, depth);
    if (entry.column) return this.on_column(entry.apply, of, depth);
    const given = this.all(of, depth);
    return given instanceof Fault ? given : entry.apply(...given);
  }

  /** Every value, or the first Fault. @param {any[]} of @param {number} depth @returns {Value[] | Fault} */
  all(of, depth) {
    const given = [];
    for (const part of of) {
      const value = this.value(part, depth + 1);
      if (value instanceof Fault) return value;
      given.push(value);
    }
    return given;
  }

  /** if, holds, and, or. @param {string} name @param {any[]} of @param {number} depth @returns {Value} */
  choose(name, of, depth) {
    const parts = name === "if" || name === "holds" ? of.slice(0, 1) : of;
    for (const part of parts) {
      const flag = this.value(part, depth + 1);
      if (flag instanceof Fault) return flag;
      if (typeof flag !== "boolean") {
        return new Fault("wrong-type", `${name} was given something that is no yes or no.`);
      }
      if (name === "if") return this.value(flag ? of[1] : of[2], depth + 1);
      if (name === "holds") return flag ? this.value(of[2], depth + 1) : not_held(this.value(of[1], depth + 1));
      if (flag === (name === "or")) return flag;
    }
    return name === "and";
  }

  /** @param {(...of: any[]) => Value} apply @param {any[]} of @param {number} depth @returns {Value} */
  on_column(apply, of, depth) {
    const name = is_block(of[0]) && has(of[0], "series") ? of[0].series : null;
    if (typeof name !== "string") {
      return new Fault("wrong-type", "One number stands where a column of numbers belongs.");
    }
    if (!has(this.series, name)) return new Fault("unknown-name", `There is no column of numbers named ${name}.`);
    const column = this.series[name];
    if (!Array.isArray(column) || !column.every((v) => Number.isFinite(v))) {
      return new Fault("wrong-type", `${name} holds something that is no number.`);
    }
    const given = this.all(of.slice(1), depth);
    return given instanceof Fault ? given : apply(column, ...given);
  }

  /** @param {any} name @param {any[]} of @param {number} depth @returns {Value} */
  library(name, of, depth) {
    if (typeof name !== "string" || !has(this.formulas, name)) {
      return new Fault("unknown-function", `There is no formula named ${name}.`);
    }
    const formula = this.formulas[name];
    const wanted = formula.arguments;
    if (!Array.isArray(wanted) || wanted.length !== of.length) {
      return new Fault("bad-tree", `${name} was given ${of.length} values.`);
    }
    /** @type {Record<string, any>} */
    const given = Object.create(null);
    for (let k = 0; k < of.length; k += 1) {
      const value = this.value(of[k], depth + 1);
      if (value instanceof Fault) return value;
      const outside = out_of_range(name, wanted[k], value);
      if (outside !== null) return outside;
      given[wanted[k].name] = value;
    }
    const [caller, columns] = [this.names, this.series];
    this.names = given;
    this.series = {};
    const value = this.value(formula.tree, depth + 1);
    this.names = caller;
    this.series = columns;
    return value;
  }

  /** @param {any} table @param {number} depth @returns {Value} */
  table(table, depth) {
    if (!is_block(table) || !Array.isArray(table.x) || !Array.isArray(table.y)) return bad_tree();
    const at = this.value(table.of, depth + 1);
    if (at instanceof Fault) return at;
    if (typeof at !== "number") {
      return new Fault("wrong-type", "A table was asked with something that is no number.");
    }
    const xs = numbers(table.x);
    const ys = numbers(table.y);
    if (xs === null || ys === null || xs.length !== ys.length || xs.length < 2) return bad_tree();
    return interpolate(String(table.name), at, xs, ys);
  }
}

/** The answer of `holds` where its condition does not hold. @param {Value} says which one @returns {Fault} */
function not_held(says) {
  if (says instanceof Fault) return says;
  return typeof says === "string" ? new Fault("out-of-range", says) : new Fault("wrong-type", "holds has no sentence.");
}

/** Linear between neighbours. @param {string} name @param {number} at @param {number[]} xs @param {number[]} ys @returns {Value} */
function interpolate(name, at, xs, ys) {
  if (at < xs[0] || at > xs[xs.length - 1]) {
    return new Fault("out-of-range", `${name}: ${round12(at)} is outside the table, in SI units.`);
  }
  let k = 0;
  while (k < xs.length - 2 && at >= xs[k + 1]) k += 1;
  if (xs[k + 1] <= xs[k]) return bad_tree();
  if (at === xs[k + 1]) return ys[k + 1];
  const value = ys[k] + (ys[k + 1] - ys[k]) * ((at - xs[k]) / (xs[k + 1] - xs[k]));
  return Number.isFinite(value) ? value : new Fault("overflow", `The result of ${name} is too large.`);
}

/** @param {string} name @param {Argument} argument @param {Value} value @returns {Fault | null} */
function out_of_range(name, argument, value) {
  if (typeof value !== "number") return new Fault("wrong-type", `${name}: ${argument.name} is no number.`);
  const [least, most] = [end_of(argument.low), end_of(argument.high)];
  const [factor, offset] = [end_of(argument.factor), end_of(argument.offset)];
  if (least instanceof Fault || most instanceof Fault) return bad_tree();
  if (typeof factor !== "number" || typeof offset !== "number" || factor <= 0) return bad_tree();
  const whole = argument.whole ?? null;
  if (whole !== null && typeof whole !== "boolean") return bad_tree();
  const shown = to_shown(value, argument);
  const after = argument.unit === "" || argument.unit === "1" ? "" : ` ${argument.unit}`;
  if ((least !== null && value < least) || (most !== null && value > most)) {
    /** @type {[string, number | null][]} */
    const ends = [["from", least], ["to", most]];
    const span = ends.flatMap(([word, end]) => (end === null ? [] : [`${word} ${to_shown(end, argument)}`])).join(" ");
    return new Fault("out-of-range", `${name}: ${argument.name} is ${shown}${after}; the formula holds ${span}${after}.`);
  }
  if (whole === true && value !== Math.floor(value)) {
    return new Fault("out-of-range", `${name}: ${argument.name} is ${shown}${after}; only whole numbers.`);
  }
  return null;
}

/** A decimal text as a number, null as none; a Fault for anything else. @param {any} text @returns {number | null | Fault} */
function end_of(text) {
  if (text === null) return null;
  return typeof text === "string" ? number(text) : bad_tree();
}

/** @param {any[]} texts @returns {number[] | null} */
function numbers(texts) {
  const found = texts.map((t) => (typeof t === "string" ? number(t) : null));
  return found.every((v) => typeof v === "number") ? /** @type {number[]} */ (found) : null;
}

function bad_tree() {
  return new Fault("bad-tree", "The formula in the sheet is damaged.");
}
