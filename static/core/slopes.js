/**
 * How a formula's answer changes with each thing that it is made of: the same tree, differentiated as it is evaluated.
 *
 * Twin of fieldkit/formula/slopes.py, rule by rule; its docstring says what is taken where two branches meet. A gradient
 * is {value, of}: `of` gives derivatives in SI by name ("x") and by place in a column ("x[3]"), or is a Fault "domain"
 * where the value changes without bound. No DOM, no IO.
 */

import * as elementary from "./elementary.js";
import { DEEPEST, Making, prepare as prepare_plain } from "./evaluate.js";
import { FUNCTIONS } from "./functions.js";
import * as nodes from "./nodes.js";
import { Fault, number } from "./values.js";

/** @typedef {Map<string, number>} Slopes */
/** @typedef {{v: any, slopes: Slopes}} Found */
/** A node: value and derivatives, from what names mean and (in a formula) how its arguments change. @typedef {(e: any[], g: Slopes[] | null) => Found} Node */
/** @typedef {{value: any, of: Slopes | Fault}} Gradient */

const NOTHING = Object.freeze({});
/** @type {Slopes} */
const NONE = new Map();
const ERF = 1.1283791670955126;
const STEEP = new Fault("domain", "The result changes without bound at this value, so it has no uncertainty.");

/** Ends a differentiation; caught in the same call. */
class Steep extends Error {}

/** Trees made ready, by the tree and the formulas. @type {WeakMap<object, WeakMap<object, {gradient: (names?: any, series?: any) => Gradient}>>} */
const KEPT = new WeakMap();

/**
 * The gradient of `tree`; what is made ready is kept, so tree and formulas must never be changed.
 * @param {any} tree @param {Record<string, any>} [names] @param {Record<string, number[]>} [series] @param {Record<string, any>} [formulas]
 * @returns {Gradient}
 */
export function gradient(tree, names = NOTHING, series = NOTHING, formulas = NOTHING) {
  if (!nodes.is_block(tree)) return { value: nodes.bad_tree(), of: nodes.bad_tree() };
  const aboard = nodes.is_block(formulas) ? formulas : NOTHING;
  let kept = KEPT.get(tree);
  if (kept === undefined) KEPT.set(tree, (kept = new WeakMap()));
  let ready = kept.get(aboard);
  if (ready === undefined) kept.set(aboard, (ready = prepare(tree, aboard)));
  return ready.gradient(names, series);
}

/**
 * `tree` made ready to be differentiated, with the formulas that it calls. Never throws, whatever the tree is.
 * @param {any} tree @param {Record<string, any>} [formulas] @returns {{gradient: (names?: any, series?: any) => Gradient}}
 */
export function prepare(tree, formulas = NOTHING) {
  const plain = prepare_plain(tree, formulas);
  const node = caught(() => new Slope(formulas).node(tree)) ?? stops();
  return {
    gradient(names = NOTHING, series = NOTHING) {
      const value = plain.value(names, series);
      if (typeof value !== "number") return { value, of: value instanceof Fault ? value : NONE };
      return { value, of: caught(() => node([names, series], null).slopes) ?? STEEP };
    },
  };
}

/** @template T @param {() => T} work @returns {T | null} */
function caught(work) {
  try {
    return work();
  } catch (error) {
    if (error instanceof Steep) return null;
    throw error;
  }
}

/** What a plain part gives here. @param {import("./functions.js").Run} run @param {any[]} e @param {boolean} packed */
function asked(run, e, packed) {
  return packed ? run(e, null, null, null) : run(e[0], e[1], e[2], e[3]);
}

/** Makes one tree ready, and once each the formulas that it calls; `plain` makes what is not differentiated. */
class Slope {
  /** @param {Record<string, any>} formulas */
  constructor(formulas) {
    this.formulas = formulas;
    this.plain = new Making(formulas);
    /** @type {Map<string, Node>} */
    this.bodies = new Map();
    this.depth = 0;
  }

  /** @param {any} tree @returns {Node} */
  node(tree) {
    this.depth += 1;
    if (this.depth > DEEPEST) throw new Steep();
    const made = this.made(tree);
    this.depth -= 1;
    return made;
  }

  /** @param {any} tree @returns {Node} */
  made(tree) {
    if (!nodes.is_block(tree)) return stops();
    if (["number", "text", "flag"].some((key) => nodes.has(tree, key))) return this.flat(tree);
    if (nodes.has(tree, "name")) return this.named(tree.name);
    if (nodes.has(tree, "table")) return this.table(tree.table);
    if (nodes.has(tree, "call") && Array.isArray(tree.of)) return this.call(tree.call, tree.of, tree);
    return this.flat(tree);
  }

  /** A plain part, ready to ask. @param {any} tree @returns {(e: any[]) => any} */
  ask(tree) {
    const part = this.plain.part(tree, 0);
    if (part === null) throw new Steep();
    const packed = this.plain.arguments !== null && this.plain.arguments.length > 4;
    return (e) => asked(part.run, e, packed);
  }

  /** A part that nothing is differentiated in: a constant, a condition. @param {any} tree @returns {Node} */
  flat(tree) {
    const ask = this.ask(tree);
    return (e) => ({ v: ask(e), slopes: NONE });
  }

  /** @param {any} name @returns {Node} */
  named(name) {
    if (typeof name !== "string") return stops();
    if (this.plain.arguments !== null) {
      const place = this.plain.arguments.lastIndexOf(name);
      return place === -1 ? stops() : (e, g) => ({ v: e[place], slopes: g === null ? NONE : g[place] });
    }
    const run = nodes.named(name).run;
    return (e) => {
      const v = run(e[0], e[1], null, null);
      return { v, slopes: typeof v === "number" ? new Map([[name, 1]]) : NONE };
    };
  }

  /** @param {any} name @param {any[]} of @param {any} tree @returns {Node} */
  call(name, of, tree) {
    const entry = typeof name === "string" ? FUNCTIONS.get(name) : undefined;
    if (!entry) return this.library(name, of);
    if (of.length < entry.least || (entry.most !== null && of.length > entry.most)) return stops();
    if (name === "if" || name === "holds") {
      const condition = this.ask(of[0]);
      const held = this.node(name === "if" ? of[1] : of[2]);
      const other = name === "if" ? this.node(of[2]) : stops();
      return (e, g) => (condition(e) === true ? held(e, g) : other(e, g));
    }
    if (entry.column) return this.on_column(name, entry, of);
    const rule = RULES.get(name);
    if (rule === undefined || entry.make === null) return this.flat(tree);
    const parts = of.map((part) => this.node(part));
    return applied(entry.make(...of.map((_, k) => (/** @type {any} */ p) => p[k])), rule, parts);
  }

  /** A function of a column: its index is not differentiated. @param {string} name @param {import("./functions.js").Entry} entry @param {any[]} of @returns {Node} */
  on_column(name, entry, of) {
    const series = nodes.is_block(of[0]) && nodes.has(of[0], "series") ? of[0].series : null;
    const rule = COLUMNS.get(name);
    if (typeof series !== "string" || this.plain.arguments !== null || entry.make === null || !rule) return stops();
    const indexes = of.slice(1).map((part) => this.ask(part));
    const column = nodes.column(series);
    const run = entry.make(...of.map((_, k) => (/** @type {any} */ p) => p[k]));
    return (e) => {
      const given = [column(e[0], e[1], null, null), ...indexes.map((index) => index(e))];
      const v = run(given, null, null, null);
      if (typeof v !== "number") throw new Steep();
      return { v, slopes: new Map(rule(given[0], v, given.slice(1)).map(([k, d]) => [`${series}[${k}]`, d])) };
    };
  }

  /** @param {any} name @param {any[]} of @returns {Node} */
  library(name, of) {
    const formula = typeof name === "string" && nodes.has(this.formulas, name) ? this.formulas[name] : null;
    const wanted = nodes.aspect(formula, "arguments");
    if (!Array.isArray(wanted) || wanted.length !== of.length) return stops();
    const parts = of.map((part) => this.node(part));
    const body = this.body(name, formula, wanted.map((argument) => nodes.aspect(argument, "name")));
    const checks = wanted.map((argument, k) =>
      nodes.ranged(name, argument, { run: (/** @type {any} */ p) => p[k], fixed: false, height: 0, name: null }));
    return (e, g) => {
      const found = parts.map((part) => part(e, g));
      const given = found.map((one) => one.v);
      const checked = checks.map((check) => check(given, null, null, null));
      if (!checked.every((v) => typeof v === "number")) throw new Steep();
      return body(checked, found.map((one) => one.slopes));
    };
  }

  /** @param {string} name @param {any} formula @param {string[]} names @returns {Node} */
  body(name, formula, names) {
    const kept = this.bodies.get(name);
    if (kept !== undefined) return kept;
    const outer = this.plain.arguments;
    this.plain.arguments = names;
    const made = this.node(nodes.aspect(formula, "tree"));
    this.plain.arguments = outer;
    this.bodies.set(name, made);
    return made;
  }

  /** @param {any} table @returns {Node} */
  table(table) {
    if (!nodes.is_block(table) || !Array.isArray(table.x) || !Array.isArray(table.y)) return stops();
    const at = this.node(table.of);
    const run = nodes.table(table, (/** @type {any} */ p) => p[0]);
    const steps = segments(table);
    return (e, g) => {
      const { v: x, slopes } = at(e, g);
      const v = run([x], null, null, null);
      if (typeof v !== "number") throw new Steep();
      return { v, slopes: slopes.size ? chained([[steepest(steps, x), slopes]]) : NONE };
    };
  }
}

/** @returns {Node} */
function stops() {
  return () => {
    throw new Steep();
  };
}

/** A function over its parts: derivatives only where something below changes. @param {import("./functions.js").Run} run @param {Rule} rule @param {Node[]} parts @returns {Node} */
function applied(run, rule, parts) {
  return (e, g) => {
    const found = parts.map((part) => part(e, g));
    const given = found.map((one) => one.v);
    const v = run(given, null, null, null);
    if (typeof v !== "number") throw new Steep();
    /** @type {[number, Slopes][]} */
    const outer = [];
    for (let k = 0; k < found.length; k++) {
      if (found[k].slopes.size) outer.push([rule(k, given, v), found[k].slopes]);
    }
    return { v, slopes: outer.length ? chained(outer) : NONE };
  };
}

/** The chain rule: the sum over the parts, left to right. @param {[number, Slopes][]} outer @returns {Slopes} */
function chained(outer) {
  /** @type {Slopes} */
  const found = new Map();
  for (const [factor, slopes] of outer) {
    for (const [name, slope] of slopes) {
      const d = factor * slope;
      const before = found.get(name);
      const total = before === undefined ? d : before + d;
      if (total - total !== 0) throw new Steep();
      found.set(name, total);
    }
  }
  return found;
}

/** The segments of a table: from, to, slope; none where it is damaged. @param {any} table @returns {[number, number, number][]} */
function segments(table) {
  const [x, y] = [table.x, table.y].map((column) =>
    column.map((/** @type {any} */ t) => (typeof t === "string" ? number(t) : null)).filter((/** @type {any} */ v) => typeof v === "number"));
  if (x.length !== y.length || x.length !== table.x.length) return [];
  /** @type {[number, number, number][]} */
  const found = [];
  for (let k = 0; k + 1 < x.length; k++) {
    if (x[k + 1] <= x[k]) return [];
    found.push([x[k], x[k + 1], (y[k + 1] - y[k]) / (x[k + 1] - x[k])]);
  }
  return found;
}

/** @param {[number, number, number][]} steps @param {number} at */
function steepest(steps, at) {
  let found = 0;
  for (const [low, high, slope] of steps) {
    if (low <= at && at <= high && Math.abs(slope) > Math.abs(found)) found = slope;
  }
  return found;
}

/** @param {number | Fault} value @returns {number} */
function some(value) {
  if (typeof value !== "number") throw new Steep();
  return value;
}

/** @param {number} k @param {number[]} of @param {number} v */
function power(k, of, v) {
  const [base, exponent] = of;
  if (k === 0) return exponent !== 0 ? exponent * some(elementary.pow(base, exponent - 1)) : 0;
  return base === 0 ? 0 : v * some(elementary.log(base));
}

/** @param {number} k @param {number[]} of @param {number} v */
function root(k, of, v) {
  if (v === 0) throw new Steep();
  return 0.5 / v;
}

/** The derivative of a function by its argument number k. @typedef {(k: number, of: number[], v: number) => number} Rule */
/** @type {Map<string, Rule>} */
const RULES = new Map(Object.entries({
  add: () => 1,
  sub: (/** @type {number} */ k) => (k === 0 ? 1 : -1),
  mul: (/** @type {number} */ k, /** @type {number[]} */ of) => of[1 - k],
  div: (/** @type {number} */ k, /** @type {number[]} */ of, /** @type {number} */ v) => (k === 0 ? 1 / of[1] : -(v / of[1])),
  neg: () => -1,
  min: (/** @type {number} */ k, /** @type {number[]} */ of, /** @type {number} */ v) => (of.indexOf(v) === k ? 1 : 0),
  max: (/** @type {number} */ k, /** @type {number[]} */ of, /** @type {number} */ v) => (of.indexOf(v) === k ? 1 : 0),
  average: (/** @type {number} */ k, /** @type {number[]} */ of) => 1 / of.length,
  abs: (/** @type {number} */ k, /** @type {number[]} */ of) => (of[0] < 0 ? -1 : 1),
  sqrt: root,
  pow: power,
  exp: (/** @type {number} */ k, /** @type {number[]} */ of, /** @type {number} */ v) => v,
  log: (/** @type {number} */ k, /** @type {number[]} */ of) => 1 / of[0],
  sin: (/** @type {number} */ k, /** @type {number[]} */ of) => some(elementary.cos(of[0])),
  cos: (/** @type {number} */ k, /** @type {number[]} */ of) => -some(elementary.sin(of[0])),
  atan: (/** @type {number} */ k, /** @type {number[]} */ of) => 1 / (1 + of[0] * of[0]),
  erf: (/** @type {number} */ k, /** @type {number[]} */ of) => ERF * some(elementary.exp(-(of[0] * of[0]))),
}));

/** The derivatives of a function of a column by its places. @type {Map<string, (x: number[], v: number, at: number[]) => [number, number][]>} */
const COLUMNS = new Map(Object.entries({
  length: () => [],
  at: (/** @type {number[]} */ x, /** @type {number} */ v, /** @type {number[]} */ at) => one(at[0]),
  first: () => one(0),
  last: (/** @type {number[]} */ x) => one(x.length - 1),
  lowest: (/** @type {number[]} */ x, /** @type {number} */ v) => one(x.indexOf(v)),
  highest: (/** @type {number[]} */ x, /** @type {number} */ v) => one(x.indexOf(v)),
  total: (/** @type {number[]} */ x) => x.map((_, k) => [k, 1]),
  mean: (/** @type {number[]} */ x) => x.map((_, k) => [k, 1 / x.length]),
}));

/** @param {number} k @returns {[number, number][]} */
function one(k) {
  return [[k, 1]];
}
