/**
 * What a formula tree gives: a number, a flag, a text or a Fault. Total: never throws, never NaN or infinity.
 *
 * Twin of fieldkit/formula/evaluate.py, arm by arm; its docstring says how Faults travel and what making ready is. Here
 * a Fault travels as a value. Trees come in the JSON form that sheets carry; whatever is not a tree is a Fault
 * "bad-tree" where it is reached. No DOM, no IO.
 */

import { FUNCTIONS } from "./functions.js";
import * as nodes from "./nodes.js";
import { Fault, number } from "./values.js";

/** @typedef {import("./functions.js").Value} Value */
/** @typedef {import("./functions.js").Run} Run */
/** @typedef {import("./nodes.js").Part} Part */
/** @typedef {{value: (names?: Record<string, any>, series?: Record<string, number[]>) => Value}} Prepared */

export const DEEPEST = 120;
export const MOST_WORK = 20000;

const NOTHING = Object.freeze({});

/** Trees made ready, by the tree and the formulas. @type {WeakMap<object, WeakMap<object, Prepared>>} */
const KEPT = new WeakMap();

/**
 * The value of `tree`, in SI. What is made ready is kept for the next time, so tree and formulas must never be changed;
 * use `prepare` for those that are.
 * @param {any} tree
 * @param {Record<string, any>} [names] numbers, flags, texts and Faults (DEVELOPERS.md, "Names")
 * @param {Record<string, number[]>} [series] columns of numbers
 * @param {Record<string, any>} [formulas] the library formulas aboard the sheet
 * @returns {Value}
 */
export function evaluate(tree, names = NOTHING, series = NOTHING, formulas = NOTHING) {
  if (!nodes.is_block(tree)) return nodes.bad_tree();
  const aboard = nodes.is_block(formulas) ? formulas : NOTHING;
  let kept = KEPT.get(tree);
  if (kept === undefined) KEPT.set(tree, (kept = new WeakMap()));
  let prepared = kept.get(aboard);
  if (prepared === undefined) kept.set(aboard, (prepared = prepare(tree, aboard)));
  return prepared.value(names, series);
}

/**
 * `tree` made ready, with the formulas that it calls. Never throws, whatever the tree is.
 * @param {any} tree @param {Record<string, any>} [formulas] @returns {Prepared}
 */
export function prepare(tree, formulas = NOTHING) {
  const found = new Making(formulas).part(tree, 0);
  const run = (found ?? nodes.stops(too_deep())).run;
  return { value: (names = NOTHING, series = NOTHING) => run(names, series, null, null) };
}

/** Makes one tree ready, and once each the formulas that it calls. A part that is null: the whole is too deep. */
export class Making {
  /** @param {Record<string, any>} formulas */
  constructor(formulas) {
    this.formulas = formulas;
    /** nodes so far, of the tree or of the formula that is being made ready */
    this.size = 0;
    /** inside a formula: its arguments in order @type {string[] | null} */
    this.arguments = null;
    /** formulas made ready, with their sizes; null while one is being made @type {Map<string, {part: Part, size: number} | null>} */
    this.bodies = new Map();
  }

  /** Whether it is too much. @param {number} depth @param {number} size */
  count(depth, size) {
    this.size += size;
    return depth > DEEPEST || this.size > MOST_WORK;
  }

  /** @param {any} tree @param {number} depth @returns {Part | null} */
  part(tree, depth) {
    if (this.count(depth, 1)) return null;
    if (!nodes.is_block(tree)) return nodes.stops(nodes.bad_tree());
    if (nodes.has(tree, "number")) {
      return nodes.constant(typeof tree.number === "string" ? number(tree.number) : nodes.bad_tree());
    }
    if (nodes.has(tree, "text")) return nodes.constant(typeof tree.text === "string" ? tree.text : nodes.bad_tree());
    if (nodes.has(tree, "flag")) return nodes.constant(typeof tree.flag === "boolean" ? tree.flag : nodes.bad_tree());
    if (nodes.has(tree, "name")) return this.named(tree.name);
    if (nodes.has(tree, "table")) return this.table(tree.table, depth);
    if (nodes.has(tree, "call") && Array.isArray(tree.of)) return this.call(tree.call, tree.of, depth);
    if (nodes.has(tree, "series")) {
      return nodes.stops(new Fault("wrong-type", "A column of numbers stands where one number belongs."));
    }
    return nodes.stops(nodes.bad_tree());
  }

  /** All of them, or null. @param {any[]} of @param {number} depth @returns {Part[] | null} */
  parts(of, depth) {
    const found = [];
    for (const tree of of) {
      const part = this.part(tree, depth);
      if (part === null) return null;
      found.push(part);
    }
    return found;
  }

  /** @param {any} name @returns {Part} */
  named(name) {
    if (typeof name !== "string") return nodes.stops(nodes.bad_tree());
    if (this.arguments === null) return nodes.named(name);
    const place = this.arguments.lastIndexOf(name);
    return place === -1 ? nodes.stops(nodes.unknown(name)) : nodes.argument(place, this.arguments.length);
  }

  /** @param {any} name @param {any[]} of @param {number} depth @returns {Part | null} */
  call(name, of, depth) {
    const entry = typeof name === "string" ? FUNCTIONS.get(name) : undefined;
    if (!entry) return this.library(name, of, depth);
    if (of.length < entry.least || (entry.most !== null && of.length > entry.most)) {
      return nodes.stops(miscounted(name, of));
    }
    if (entry.column) return this.on_column(entry, of, depth);
    const parts = this.parts(of, depth + 1);
    if (parts === null) return null;
    const runs = parts.map((p) => p.run);
    return whole(entry.make === null ? nodes.choice(name, runs) : entry.make(...runs), parts, fixed(parts));
  }

  /** @param {import("./functions.js").Entry} entry @param {any[]} of @param {number} depth @returns {Part | null} */
  on_column(entry, of, depth) {
    const name = nodes.is_block(of[0]) && nodes.has(of[0], "series") ? of[0].series : null;
    if (typeof name !== "string") {
      return nodes.stops(new Fault("wrong-type", "One number stands where a column of numbers belongs."));
    }
    if (this.arguments !== null) return nodes.stops(nodes.no_column(name));
    const parts = this.parts(of.slice(1), depth + 1);
    if (parts === null || entry.make === null) return null;
    return whole(entry.make(nodes.column(name), ...parts.map((p) => p.run)), parts, false);
  }

  /** @param {any} name @param {any[]} of @param {number} depth @returns {Part | null} */
  library(name, of, depth) {
    if (typeof name !== "string") {
      return nodes.stops(new Fault("unknown-function", "The name of a formula is no text."));
    }
    if (!nodes.has(this.formulas, name)) {
      return nodes.stops(new Fault("unknown-function", `There is no formula named ${name}.`));
    }
    const formula = this.formulas[name];
    const wanted = nodes.aspect(formula, "arguments");
    if (!Array.isArray(wanted) || wanted.length !== of.length) return nodes.stops(miscounted(name, of));
    const names = wanted.map((argument) => nodes.aspect(argument, "name"));
    if (!names.every((n) => typeof n === "string")) return nodes.stops(nodes.bad_tree());
    const parts = this.parts(of, depth + 1);
    const body = parts && this.body(name, formula, names, depth + 1);
    if (!parts || !body) return null;
    const given = parts.map((part, k) => nodes.ranged(name, wanted[k], part));
    return whole(nodes.called(body.run, given), [...parts, body], fixed(parts));
  }

  /**
   * The tree of a formula, made ready the first time that it is called.
   * @param {string} name @param {any} formula @param {string[]} names @param {number} depth @returns {Part | null}
   */
  body(name, formula, names, depth) {
    if (!this.bodies.has(name)) {
      this.bodies.set(name, null);
      const [outer, size] = [this.arguments, this.size];
      [this.arguments, this.size] = [names, 0];
      const part = this.part(nodes.aspect(formula, "tree"), depth);
      if (part === null) return null;
      this.bodies.set(name, { part, size: this.size });
      [this.arguments, this.size] = [outer, size];
    }
    const found = this.bodies.get(name);
    // without one it calls itself
    return !found || this.count(depth + found.part.height, found.size) ? null : found.part;
  }

  /** @param {any} table @param {number} depth @returns {Part | null} */
  table(table, depth) {
    if (!nodes.is_block(table) || !Array.isArray(table.x) || !Array.isArray(table.y)) {
      return nodes.stops(nodes.bad_tree());
    }
    const at = this.part(table.of, depth + 1);
    return at && whole(nodes.table(table, at.run), [at], at.fixed);
  }
}

/** @param {Part[]} parts */
function fixed(parts) {
  return parts.every((p) => p.fixed);
}

/** A node over its parts; asked at once where nothing can change its answer. @param {Run} run @param {Part[]} parts @param {boolean} once @returns {Part} */
function whole(run, parts, once) {
  const height = 1 + parts.reduce((found, p) => Math.max(found, p.height), -1);
  return once ? nodes.constant(run(null, null, null, null), height) : { run, fixed: false, height, name: null };
}

/** @param {string} name @param {any[]} of */
function miscounted(name, of) {
  return new Fault("bad-tree", `${name} was given ${of.length} values.`);
}

function too_deep() {
  return new Fault("too-deep", "The formula is nested too deeply, or is too long.");
}
